"""[gas] of a stack in a job: sampling train, psychrometers, fuel, mixture; what is found, and what is refused."""

from __future__ import annotations

import csv
import math
import re
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

import traverse
from tests.support import jobs
from traverse import tables
from traverse.errors import DomainError, JobError, TraverseError
from traverse.physics import combustion, mixture
from traverse.physics import gas as physics
from traverse.planning.expected import expected

STATES = {row["state"]: row for row in csv.DictReader((Path(__file__).parents[1] / "data" / "flue_states.csv").open())}
ANALYSIS = {"kind": "flue-gas", "oxygen": "7.2 %", "carbon_dioxide": "11.8 %", "density": None}
TRAIN = {"condensed": "85.3 ml", "silica_gel": "6.2 g", "meter_volume": "1.102 m3", "meter_temperature": "24 degC", "meter_factor": 0.998,
         "orifice_pressure": "45 mmH2O"}
BY_TRAIN = ANALYSIS | {"moisture_train": TRAIN}
BURNT = {"kind": "flue-gas", "density": None}
HOT = {"temperature": "150 degC"}
COAL = {"carbon": "64 %", "hydrogen": "4.5 %", "oxygen": "7.5 %", "nitrogen": "1.3 %", "sulfur": "1.7 %", "water": "9 %", "ash": "12 %"}
GAS = {"methane": "94.9 %", "ethane": "2.5 %", "propane": "0.2 %", "butane": "0.06 %", "nitrogen": "1.64 %", "carbon_dioxide": "0.70 %"}
MIXED = {"kind": "mixture", "density": None}


def found(result, topic):
    return [finding for finding in result["findings"] if finding["topic"] == topic]


def reduced(tmp_path, gas, conditions=HOT, **more):
    return jobs.reduced(tmp_path, {"gas": gas, "conditions": conditions, **more})


def refused(tmp_path, gas, kind, *words, conditions=HOT, **more):
    with pytest.raises(kind) as problem:
        reduced(tmp_path, gas, conditions, **more)
    for word in words:
        assert word in str(problem.value), str(problem.value)


# --- the sampling train

def by_hand():
    """Moles by the gas law; 998.2 kg/m3."""
    water = (85.3e-6 * 998.2 + 6.2e-3) / 18.01528e-3
    return water, 0.998 * 1.102 * (101325 + 45 * 9.80665) / (8.314462618 * 297.15)


def test_a_train_by_modern_constants(tmp_path):
    result = reduced(tmp_path, BY_TRAIN)
    water, dry = by_hand()
    assert jobs.value(result, "moisture") == pytest.approx(water / (water + dry), rel=1e-12)
    assert "modern constants" in found(result, "moisture")[0]["message"]


@pytest.mark.parametrize(("system", "constants"), [("us", (17.64, 0.04706, 0.04715, 460)), ("si", (0.3855, 0.001333, 0.001335, 273))])
def test_a_train_by_the_printed_constants(tmp_path, system, constants):
    """Method 4, equations 4-1 to 4-4 as printed, in each unit system; the modern value is stated beside it."""
    k, per_ml, per_gram, offset = constants
    result = reduced(tmp_path, BY_TRAIN, job={"method": "epa-2", "units": system})
    if system == "us":
        volume, pressure, temperature = 1.102 / 0.3048**3, 101325 / 3386.3886 + 45 / 25.4 / 13.6, 24 * 1.8 + 32 + offset
    else:
        volume, pressure, temperature = 1.102, 101325 / 133.322387 + 45 / 13.6, 24 + offset
    water, dry = per_ml * 85.3 + per_gram * 6.2, k * 0.998 * volume * pressure / temperature
    assert jobs.value(result, "moisture") == pytest.approx(water / (water + dry), rel=1e-6)
    assert "as printed" in found(result, "moisture")[0]["message"] and "modern constants would give" in found(result, "moisture")[0]["message"]


def test_the_approximation_method_is_by_name(tmp_path):
    plain = jobs.value(reduced(tmp_path, BY_TRAIN, job={"method": "epa-2"}), "moisture")
    result = reduced(tmp_path, BY_TRAIN | {"moisture_train": TRAIN | {"approximation": True}}, job={"method": "epa-2"})
    assert jobs.value(result, "moisture") == pytest.approx(plain + 0.025, abs=1e-14)
    assert [finding["level"] for finding in found(result, "moisture")] == ["note", "attention"]


def test_the_lower_of_train_and_saturation_is_used(tmp_path):
    """Method 4: a stack with droplets; saturation at 38 degC is below what the train caught."""
    result = reduced(tmp_path, BY_TRAIN, {"temperature": "38 degC"})
    assert jobs.value(result, "moisture") == pytest.approx(PropsSI("P", "T", 311.15, "Q", 0, "Water") / 101325, rel=3e-4)
    assert any("droplets" in finding["message"] and finding["level"] == "attention" for finding in found(result, "moisture"))


def test_the_meter_pressure_may_be_absolute_or_at_another_barometer(tmp_path):
    base = jobs.value(reduced(tmp_path, BY_TRAIN), "moisture")
    absolute = {key: value for key, value in TRAIN.items() if key != "orifice_pressure"} | {"meter_pressure": f"{101325 + 45 * 9.80665} Pa"}
    assert jobs.value(reduced(tmp_path, BY_TRAIN | {"moisture_train": absolute}), "moisture") == pytest.approx(base, rel=1e-12)
    own = TRAIN | {"barometric": "101325 Pa"}
    state = HOT | {"barometric": "95 kPa"}
    assert jobs.value(reduced(tmp_path, BY_TRAIN | {"moisture_train": own}, state), "moisture") == pytest.approx(base, rel=1e-12)
    assert jobs.value(reduced(tmp_path, BY_TRAIN, state), "moisture") > base * 1.05


def test_condensate_by_mass_or_by_volume(tmp_path):
    one = reduced(tmp_path, BY_TRAIN | {"moisture_train": TRAIN | {"condensed": "85.3 g"}})
    assert jobs.value(one, "moisture") / jobs.value(reduced(tmp_path, BY_TRAIN), "moisture") == pytest.approx(1.0015, abs=2e-4)


def test_a_run_may_have_its_own_train(tmp_path):
    """Only what differs is stated again; the rest is the default's."""
    readings = "run,line,point,differential_pressure [Pa]\n" + "".join(
        f"{run},{line},{point},50\n" for run in (1, 2) for line in "AB" for point in range(1, 5))
    change = {"gas": BY_TRAIN, "conditions": HOT, "run": [{"name": "2", "moisture_train": {"condensed": "100 ml"}}]}
    result = jobs.reduced(tmp_path, change, readings)
    first, second = (jobs.value(result, "moisture", run) for run in (0, 1))
    water, dry = by_hand()
    more = water + 14.7e-6 * 998.2 / 18.01528e-3
    assert first == pytest.approx(water / (water + dry), rel=1e-12)
    assert second == pytest.approx(more / (more + dry), rel=1e-12)


def test_the_uncertainty_of_a_train(tmp_path):
    """x = w/(w + g): du = x (1 - x) times the relative uncertainties; the barometer acts on the meter as well."""
    x = jobs.value(reduced(tmp_path, BY_TRAIN), "moisture")
    condensed = 85.3e-6 * 998.2 / (85.3e-6 * 998.2 + 6.2e-3)
    share = 101325 / (101325 + 45 * 9.80665)
    for stated, relative in (({"condensed": "2 %"}, 0.02 * condensed), ({"condensed": "1 ml"}, condensed / 85.3), ({"meter_volume": "1 %"}, 0.01),
                             ({"meter_factor": "0.005"}, 0.005 / 0.998), ({"meter_temperature": "2 K"}, 2 / 297.15),
                             ({"barometric": "1 %"}, 0.01 * share), ({"silica_gel": "0.5 g"}, 0.5e-3 / (85.3e-6 * 998.2 + 6.2e-3))):
        result = reduced(tmp_path, BY_TRAIN, uncertainty=stated)
        assert result["runs"][0]["quantities"]["moisture"]["standard_uncertainty"] == pytest.approx(x * (1 - x) * relative, rel=1e-5), stated
    moved = reduced(tmp_path, BY_TRAIN, uncertainty={"moisture": "0.3 %"})
    assert moved["runs"][0]["quantities"]["moisture"]["standard_uncertainty"] == pytest.approx(0.003, rel=1e-9)


@pytest.mark.parametrize(("change", "words"), [
    ({"condensed": None}, ("no condensed", '"85.3 ml" or "85.3 g"')), ({"condensed": "85.3"}, ("volume",)), ({"condensed": "85 mmHg"}, ("mmHg",)),
    ({"silica_gel": None}, ("no silica_gel", '"0 g"', "approximation = true")), ({"meter_factor": None}, ("no meter_factor",)),
    ({"meter_factor": 99.8}, ("99.8", "near 1")), ({"orifice_pressure": None}, ("no pressure at the gas meter", '"0 mmH2O"')),
    ({"meter_pressure": "100 kPa"}, ("both meter_pressure and orifice_pressure",)),
    ({"orifice_pressure": None, "meter_pressure": "45 mmH2O"}, ("absolute", "orifice_pressure")), ({"meter_volume": "0 m3"}, ("above zero",)),
    ({"condensed": "-3 ml"}, ("zero or more",)), ({"silicagel": "1 g"}, ("perhaps silica_gel",)), ({"meter_volume": 1.1}, ("no unit",)),
    ({"orifice_pressure": None, "meter_pressure": "100 kPa", "barometric": "100 kPa"}, ("barometric beside meter_pressure",)),
])
def test_a_train_that_is_not_understood(tmp_path, change, words):
    train = {key: value for key, value in (TRAIN | change).items() if value is not None}
    refused(tmp_path, ANALYSIS | {"moisture_train": train}, TraverseError, "moisture_train", *words)


def test_a_train_beside_another_humidity_is_refused(tmp_path):
    refused(tmp_path, BY_TRAIN | {"moisture": "9 %"}, JobError, "moisture and moisture_train", "exactly one")


# --- wet and dry bulb

def test_the_psychrometer_by_name(tmp_path):
    """150/60 degC at 85 kPa: 0.186 by the relation of air, 0.18727 by Carrier, 0.17109 by Ferrel; the heat of this gas (12 % CO2) lies between."""
    state = {"temperature": "150 degC", "barometric": "85 kPa"}
    wet = ANALYSIS | {"wet_bulb": "60 degC"}
    values = {name: jobs.value(reduced(tmp_path, wet | ({"psychrometer": name} if name else {}), state), "moisture")
              for name in ("", "energy-balance", "carrier", "ferrel")}
    assert values[""] == pytest.approx(0.18613, abs=3e-5)
    assert values["carrier"] == pytest.approx(0.18727, abs=1e-5)
    assert values["ferrel"] == pytest.approx(0.17109, abs=1e-5)
    assert 0.18406 - 1e-4 < values["energy-balance"] < values[""]


def test_ferrels_bias_is_stated_with_its_size(tmp_path):
    result = reduced(tmp_path, ANALYSIS | {"wet_bulb": "60 degC", "psychrometer": "ferrel"}, {"temperature": "150 degC", "barometric": "85 kPa"})
    finding = found(result, "moisture")[0]
    balance = jobs.value(reduced(tmp_path, ANALYSIS | {"wet_bulb": "60 degC", "psychrometer": "energy-balance"}, {"temperature": "150 degC", "barometric": "85 kPa"}), "moisture")
    assert finding["level"] == "attention" and f"{100 * (jobs.value(result, 'moisture') - balance):+.3f} points off" in finding["message"]


@pytest.mark.parametrize("psychrometer", [None, "energy-balance", "carrier", "ferrel"])
@pytest.mark.parametrize(("wet", "words"), [
    ("151 degC", ("at or below the dry bulb, 150.0 degC",)), ("101 degC", ("below the boiling point",)), ("20 degC", ("no less than none",)),
])
def test_a_wet_bulb_that_cannot_be(tmp_path, psychrometer, wet, words):
    gas = ANALYSIS | {"wet_bulb": wet} | ({"psychrometer": psychrometer} if psychrometer else {})
    refused(tmp_path, gas, DomainError, "wet bulb", *words)


def test_a_psychrometer_without_wet_bulb(tmp_path):
    refused(tmp_path, ANALYSIS | {"moisture": "9 %", "psychrometer": "ferrel"}, JobError, "without wet_bulb")


def test_moisture_above_saturation_is_an_error(tmp_path):
    refused(tmp_path, ANALYSIS | {"moisture": "12 %"}, DomainError, "moisture of 12 %", "at most saturation", "saturated = true", conditions={"temperature": "45 degC"})


# --- fuel

@pytest.mark.parametrize(("state", "fuel", "excess", "humidity"), [
    ("F3", {"methane": "100 %"}, "0 %", None), ("F4", {"methane": "100 %"}, "15 %", None), ("F6", GAS, "240 %", "8 g/kg"),
    ("F7", "propane", "25 %", None), ("F9", COAL, "30 %", "8 g/kg"),
])
def test_fuel_states(tmp_path, state, fuel, excess, humidity):
    """Composition and density of independently computed states: 1e-5 (the fuel's nitrogen counts as that of air); real gas 0.15 %."""
    row = STATES[state]
    gas = BURNT | {"fuel": fuel, "excess_air": excess} | ({"air_humidity_ratio": humidity} if humidity else {})
    result = reduced(tmp_path, gas, {"temperature": f"{row['t_C']} degC", "barometric": f"{row['p_Pa']} Pa"})
    assert jobs.value(result, "moisture") == pytest.approx(float(row["Bws"]), rel=2e-5)
    assert jobs.value(result, "molar_mass_dry") == pytest.approx(float(row["Md_exact"]), rel=1e-5)
    assert jobs.value(result, "density") == pytest.approx(float(row["rho_exact_ideal"]), rel=1e-5)
    assert jobs.value(result, "density") == pytest.approx(float(row["rho_heos"]), rel=1.5e-3)
    # From the oxygen of that gas, and by the method's own constants.
    measured = BURNT | {"fuel": fuel, "oxygen": f"{row['O2_dry_pct']} %"} | ({"air_humidity_ratio": humidity} if humidity else {})
    again = reduced(tmp_path, measured, {"temperature": f"{row['t_C']} degC", "barometric": f"{row['p_Pa']} Pa"}, job={"method": "epa-2"})
    assert jobs.value(again, "molar_mass_dry") == pytest.approx(float(row["Md_epa"]), rel=2e-6)
    assert jobs.value(again, "density") == pytest.approx(float(row["rho_epa"]), rel=5e-6)


def test_a_fuel_says_what_it_gave(tmp_path):
    result = reduced(tmp_path, BURNT | {"fuel": "natural-gas", "oxygen": "4 %"})
    typical, dry_air, balance = (next(f for f in found(result, "fuel") if word in f["message"]) for word in ("was taken", "each 1 g/kg", "balance"))
    assert typical["level"] == dry_air["level"] == "attention" and balance["level"] == "note"
    assert "carbon dioxide 9.6" in balance["message"] and "excess air 21." in balance["message"]


def test_what_follows_from_fuel_and_train_stands_in_the_json_form(tmp_path):
    result = reduced(tmp_path, BURNT | {"fuel": COAL, "excess_air": "30 %", "air_humidity_ratio": "8 g/kg"})["runs"][0]["gas"]
    row = STATES["F9"]
    assert result["carbon_dioxide_of_fuel"] == pytest.approx(float(row["CO2_dry_pct"]) / 100, rel=1e-6)
    assert result["oxygen_of_fuel"] == pytest.approx(float(row["O2_dry_pct"]) / 100, rel=1e-6)
    assert result["sulfur_dioxide_of_fuel"] == pytest.approx(float(row["x_SO2"]) / (1 - float(row["Bws"])), rel=1e-5)
    assert (result["excess_air"], result["carbon_monoxide_of_fuel"]) == (pytest.approx(0.3, rel=1e-12), 0.0)
    capped = reduced(tmp_path, BY_TRAIN, {"temperature": "38 degC"})
    water, dry = by_hand()
    assert capped["runs"][0]["gas"] == {"moisture_of_train": pytest.approx(water / (water + dry), rel=1e-12)}
    assert "gas" not in jobs.reduced(tmp_path)["runs"][0]


def test_a_gram_in_the_combustion_air_adds_what_is_said(tmp_path):
    gas = BURNT | {"fuel": "natural-gas", "oxygen": "4 %"}
    dry = reduced(tmp_path, gas)
    wet = jobs.value(reduced(tmp_path, gas | {"air_humidity_ratio": "1 g/kg"}), "moisture")
    told = f"adds {100 * (wet - jobs.value(dry, 'moisture')):.2f} points"
    assert any(told in finding["message"] for finding in found(dry, "fuel"))


def test_the_water_of_wood_may_be_stated(tmp_path):
    gas = BURNT | {"oxygen": "8 %", "air_humidity_ratio": "8 g/kg"}
    values = [jobs.value(reduced(tmp_path, gas | {"fuel": fuel}), "moisture") for fuel in (
        {"type": "wood", "water": "8 %"}, "wood", {"type": "wood", "water": "35 %"}, {"type": "wood", "water": "55 %"})]
    assert values[0] < values[1] == pytest.approx(values[2], rel=1e-12) and values[2] < values[3]


def test_measured_moisture_counts_beside_a_fuel(tmp_path):
    gas = BURNT | {"fuel": "propane", "oxygen": "5 %", "moisture": "11 %"}
    assert jobs.value(reduced(tmp_path, gas), "moisture") == 0.11


def test_a_measured_analysis_counts_beside_a_fuel(tmp_path):
    gas = ANALYSIS | {"oxygen": "4 %", "carbon_dioxide": "9.5 %", "fuel": "natural-gas", "air_humidity_ratio": "8 g/kg"}
    result = reduced(tmp_path, gas)
    assert jobs.value(result, "molar_mass_dry") == pytest.approx(float(physics.dry_molar_mass(0.04, 0.095)), rel=1e-14)
    derived = reduced(tmp_path, {key: value for key, value in gas.items() if key != "carbon_dioxide"})
    assert jobs.value(result, "moisture") == jobs.value(derived, "moisture")


def test_the_uncertainty_of_a_measured_oxygen_moves_all_that_follows(tmp_path):
    """Against a difference of two jobs."""
    gas = BURNT | {"fuel": "natural-gas", "air_humidity_ratio": "8 g/kg"}
    result = reduced(tmp_path, gas | {"oxygen": "4 %"}, uncertainty={"oxygen": "0.2 %"})
    low, high = (reduced(tmp_path, gas | {"oxygen": text}) for text in ("3.9 %", "4.1 %"))
    for name in ("moisture", "molar_mass", "mean_velocity"):
        slope = (jobs.value(high, name) - jobs.value(low, name)) / 0.002
        assert result["runs"][0]["quantities"][name]["standard_uncertainty"] == pytest.approx(abs(slope) * 0.002, rel=1e-3), name


@pytest.mark.parametrize(("change", "words"), [
    ({"fuel": "natural gass"}, ("unknown fuel", 'perhaps "natural-gas"')), ({"fuel": COAL | {"carbon": "60 %"}}, ("= 96 %", "100 % within 0.5 %")),
    ({"fuel": COAL | {"methane": "1 %"}}, ("mixes",)), ({"fuel": {"carbn": "100 %"}}, ("perhaps carbon",)), ({"fuel": {}}, ("no analysis",)),
    ({"fuel": {"hydrogen": "40 %", "nitrogen": "60 %"}}, ("by mass or by volume", 'basis = "mass"')),
    ({"fuel": {"basis": "moles", "hydrogen": "100 %"}}, ('"mass"', '"volume"')), ({"fuel": {"type": "wood", "carbon": "50 %"}}, ("type and water",)),
    ({"fuel": {"type": "propane", "water": "5 %"}}, ("type alone",)), ({"fuel": {"carbon_dioxide": "50 %", "nitrogen": "50 %"}}, ("needs no air",)),
    ({"fuel": 5}, ("a table",)), ({"oxygen": "21 %"}, ("cannot be the flue gas", "20.9 %")), ({"excess_air": "20 %"}, ("both oxygen and excess_air",)),
    ({"oxygen": None}, ("neither oxygen nor excess_air",)), ({"sulfur_dioxide": "100 ppm"}, ("sulfur_dioxide beside a fuel",)),
    ({"oxygen": None, "excess_air": "20 %", "carbon_dioxide": "10 %"}, ("carbon_dioxide beside excess_air",)),
    ({"air_humidity_ratio": "300 g/kg"}, ("200 g/kg",)), ({"oxygen": None, "excess_air": "-5 %"}, ("zero or more",)),
    ({"fuel": {"type": "wood", "water": "100 %"}}, ("below 100 %",)), ({"fuel": COAL | {"carbon": 64}}, ("percentage",)),
])
def test_a_fuel_that_is_not_understood(tmp_path, change, words):
    gas = {key: value for key, value in (BURNT | {"fuel": "natural-gas", "oxygen": "4 %"} | change).items() if value is not None or key == "density"}
    refused(tmp_path, gas, TraverseError, *words)


def test_air_without_a_fuel_is_refused(tmp_path):
    refused(tmp_path, ANALYSIS | {"moisture": "9 %", "excess_air": "20 %"}, JobError, "excess_air without a fuel")


def test_a_condensing_flue_is_an_error(tmp_path):
    """The water of natural gas cannot all be vapour at 40 degC."""
    refused(tmp_path, BURNT | {"fuel": "natural-gas", "oxygen": "4 %"}, DomainError, "the water that the fuel gives", "saturated = true", conditions={"temperature": "40 degC"})


# --- the check

def outcome(result):
    return next(check for check in result["runs"][0]["checks"] if check["id"] == "flue-gas-analysis")


@pytest.mark.parametrize(("oxygen", "carbon_dioxide", "fuel", "status"), [
    ("4 %", "9.5 %", "natural-gas", "pass"), ("4 %", "9.0 %", "natural-gas", "fail"), ("4 %", "10.2 %", "natural-gas", "fail"),
    ("7.2 %", "11.8 %", COAL, "pass"), ("7.2 %", "11.8 %", "natural-gas", "fail"), ("4 %", "11.1 %", "propane", "pass"),
])
def test_the_analysis_against_the_fuel(tmp_path, oxygen, carbon_dioxide, fuel, status):
    """Natural gas gives 9.58 % at 4 % oxygen; half a point and the range of Fo decide."""
    result = reduced(tmp_path, ANALYSIS | {"oxygen": oxygen, "carbon_dioxide": carbon_dioxide, "fuel": fuel, "moisture": "9 %"})
    assert outcome(result)["status"] == status
    assert "points" in outcome(result)["observed"] and ("Method 3B" in outcome(result)["source"]) == isinstance(fuel, str)


def test_the_analysis_without_a_fuel_is_not_evaluated(tmp_path):
    assert outcome(reduced(tmp_path, ANALYSIS | {"moisture": "9 %"}))["status"] == "not evaluated"
    assert "Fo = 1.161" in outcome(reduced(tmp_path, ANALYSIS | {"moisture": "9 %"}))["observed"]
    assert outcome(reduced(tmp_path, BURNT | {"fuel": "oil", "oxygen": "4 %"}))["status"] == "not evaluated"
    assert outcome(jobs.reduced(tmp_path))["status"] == "not applicable"


def test_the_effect_of_a_wrong_analysis_has_the_right_sign(tmp_path):
    """More carbon dioxide makes a heavier gas, and a slower one: against two jobs."""
    gas = {"oxygen": "4 %", "fuel": "natural-gas", "moisture": "9 %"}
    wrong, right = (reduced(tmp_path, ANALYSIS | gas | {"carbon_dioxide": text}) for text in ("11.58 %", "9.58 %"))
    told = float(outcome(wrong)["effect"].split("about ")[1].split(" %")[0])
    assert told == pytest.approx(100 * (jobs.value(wrong, "mean_velocity") / jobs.value(right, "mean_velocity") - 1), rel=0.05)


# --- mixtures

@pytest.mark.parametrize("state", STATES)
def test_flue_states_as_mixtures(tmp_path, state):
    """Wet compositions as they stand in tests/data/flue_states.csv; Cantera's viscosity in the Reynolds number 1 %."""
    row = STATES[state]
    names = {"N2": "nitrogen", "O2": "oxygen", "Ar": "argon", "CO2": "carbon_dioxide", "SO2": "sulfur_dioxide", "H2O": "water"}
    gas = MIXED | {"components": {name: f"{100 * float(row[f'x_{symbol}']):.9f} %" for symbol, name in names.items()}}
    result = reduced(tmp_path, gas, {"temperature": f"{row['t_C']} degC", "barometric": f"{row['p_Pa']} Pa"})
    assert jobs.value(result, "density") == pytest.approx(float(row["rho_exact_ideal"]), rel=2e-6)
    assert jobs.value(result, "density") == pytest.approx(float(row["rho_heos"]), rel=1.5e-3)
    assert jobs.value(result, "moisture") == pytest.approx(float(row["Bws"]), abs=1e-10)
    reynolds = jobs.value(result, "density") * jobs.value(result, "mean_velocity") / (float(row["mu_cantera_uPas"]) * 1e-6)
    assert jobs.value(result, "reynolds_number") == pytest.approx(reynolds, rel=0.01)


def test_a_mixture_has_a_dry_flow_and_its_own_ratio(tmp_path):
    reference = {"temperature": "0 degC", "pressure": "101325 Pa"}
    gas = MIXED | {"components": {"methane": "40 %", "water": "10 %", "rest": "carbon_dioxide"}}
    result = reduced(tmp_path, gas, reference=reference)
    assert jobs.value(result, "dry_standard_flow") == pytest.approx(0.9 * jobs.value(result, "standard_flow"), rel=1e-12)
    assert jobs.value(result, "molar_mass") == pytest.approx(0.4 * 16.043 + 0.5 * 44.0095 + 0.1 * 18.01528, rel=1e-12)
    heat = sum(share * PropsSI("CP0MOLAR", "T", 423.15, "P", 1.0, name) for share, name in ((0.4, "Methane"), (0.5, "CarbonDioxide"), (0.1, "Water")))
    ratio = heat / (heat - 8.314462618)
    stated = reduced(tmp_path, gas | {"ratio_of_specific_heats": round(ratio, 5)}, reference=reference)
    assert jobs.value(result, "mean_velocity") == pytest.approx(jobs.value(stated, "mean_velocity"), rel=1e-6)


def test_the_rest_in_either_place(tmp_path):
    one = reduced(tmp_path, MIXED | {"components": {"oxygen": "5 %", "rest": "nitrogen"}})
    other = reduced(tmp_path, MIXED | {"components": {"oxygen": "5 %"}, "rest": "nitrogen"})
    assert jobs.value(one, "molar_mass") == jobs.value(other, "molar_mass") == pytest.approx(0.05 * 31.9988 + 0.95 * 28.0134, rel=1e-13)


def test_air_is_a_species(tmp_path):
    mixed = reduced(tmp_path, MIXED | {"components": {"water": "2 %", "rest": "air"}})
    plain = reduced(tmp_path, {"kind": "air", "moisture": "2 %", "density": None})
    assert jobs.value(mixed, "density") == pytest.approx(jobs.value(plain, "density"), rel=1e-12)
    assert jobs.value(mixed, "molar_mass_dry") == 28.96546


def test_the_uncertainty_of_a_mixture(tmp_path):
    """A component moves the rest; without a rest the others shrink. Molar mass of the dry gas by hand."""
    gas = MIXED | {"components": {"carbon_dioxide": "20 %", "rest": "nitrogen"}}
    result = reduced(tmp_path, gas, uncertainty={"carbon_dioxide": "1 %"})
    assert result["runs"][0]["quantities"]["molar_mass"]["standard_uncertainty"] == pytest.approx(0.01 * (44.0095 - 28.0134), rel=1e-6)
    whole = MIXED | {"components": {"methane": "20 %", "nitrogen": "80 %"}}
    result = reduced(tmp_path, whole, uncertainty={"methane": "1 %"})
    shrunk = 0.01 * 0.8 * (28.0134 - 16.043)
    assert result["runs"][0]["quantities"]["molar_mass"]["standard_uncertainty"] == pytest.approx(shrunk, rel=1e-5)
    refused(tmp_path, whole, JobError, "states no helium", uncertainty={"helium": "1 %"})


@pytest.mark.parametrize(("components", "words"), [
    ({"nitrogen": "80 %", "oxygen": "21 %"}, ("= 101 %", "100 % within 0.01 %")), ({"nitrogen": "80 %"}, ("= 80 %", 'rest = "nitrogen"')),
    ({"nitrogen": "80 %", "oxygen": "20.02 %"}, ("100.02 %",)), ({"nitrogn": "100 %"}, ("perhaps nitrogen",)), ({"nitrogen": "-5 %", "rest": "air"}, ("0 to 100 %",)),
    ({"nitrogen": "50 %", "rest": "nitrogen"}, ("not stated beside it",)), ({"nitrogen": "50 %", "rest": "water"}, ("not water",)),
    ({"water": "100 %"}, ("steam",)), ({"nitrogen": 50}, ("percentage",)), ({"oxygen": "60 %", "helium": "60 %", "rest": "air"}, ("= 120 %",)),
    ({"oxygen": "60 %", "rest": "phlogiston"}, ("unknown species",)),
])
def test_a_mixture_that_is_not_understood(tmp_path, components, words):
    refused(tmp_path, MIXED | {"components": components}, TraverseError, "[gas.components]", *words)


def test_a_mixture_above_saturation_is_an_error(tmp_path):
    refused(tmp_path, MIXED | {"components": {"water": "20 %", "rest": "nitrogen"}}, DomainError, "at most saturation", conditions={"temperature": "40 degC"})


def test_a_mixture_needs_its_components_and_no_other_humidity(tmp_path):
    refused(tmp_path, MIXED, JobError, "no components")
    refused(tmp_path, MIXED | {"components": {"rest": "air"}, "moisture": "2 %"}, JobError, "moisture has no meaning")


def test_within_a_hundredth_of_a_percent_is_whole(tmp_path):
    result = reduced(tmp_path, MIXED | {"components": {"nitrogen": "79.995 %", "oxygen": "20 %"}})
    assert jobs.value(result, "molar_mass") == pytest.approx((0.79995 * 28.0134 + 0.2 * 31.9988) / 0.99995, rel=1e-12)


# --- what a plan expects

@pytest.mark.parametrize("gas", [BY_TRAIN, BURNT | {"fuel": "oil", "oxygen": "5 %"}, ANALYSIS | {"wet_bulb": "58 degC", "psychrometer": "energy-balance"},
                                 MIXED | {"components": {"methane": "10 %", "rest": "air"}}], ids=["train", "fuel", "wet bulb", "mixture"])
def test_a_plan_knows_the_density_of_such_a_gas(tmp_path, gas):
    path = jobs.write(tmp_path, {"gas": gas, "conditions": HOT, "design": {"velocity": "10 m/s"}})
    told = expected(traverse.load_setup(path))
    result = traverse.reduce(traverse.load(path))
    assert told.density == pytest.approx(result.runs[0].value("density"), rel=1e-12)
    assert math.isfinite(float(np.sum(told.pressure)))


# --- the documentation

PAGE = Path(__file__).parents[2] / "docs" / "stack-gas.md"
BLOCKS = re.findall(r"^```toml\n(.*?)^```", PAGE.read_text(encoding="utf-8"), re.M | re.S)


@pytest.mark.parametrize("block", BLOCKS, ids=range(len(BLOCKS)))
def test_the_documented_gases_can_be_reduced(tmp_path, block):
    path = jobs.write(tmp_path, {"gas": None, "conditions": HOT})
    gas = block if block.startswith("[gas]") else '[gas]\nkind = "flue-gas"\noxygen = "4 %"\n' + block
    path.write_text(path.read_text(encoding="utf-8") + gas, encoding="utf-8")
    assert jobs.value(traverse.reduce(traverse.load(path)).to_dict(), "moisture") > 0.03


def test_every_fuel_and_species_is_documented():
    text = PAGE.read_text(encoding="utf-8")
    assert [name for name in (*mixture.SPECIES, *tables.load("fuels")["fuel"], *combustion.BY_MASS, *combustion.MOLECULES) if name not in text] == []
