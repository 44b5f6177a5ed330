"""Flue gas of a fuel: the elements balance, an independent table, published fuel factors."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from traverse import tables
from traverse.physics import combustion
from traverse.physics.gas import DRY_AIR, MOLAR_MASS

FLUE = {row["state"]: row for row in csv.DictReader((Path(__file__).parents[1] / "data" / "flue_states.csv").open())}
METHANE = combustion.by_volume({"methane": 1.0})
COAL = combustion.by_mass({"carbon": 0.64, "hydrogen": 0.045, "oxygen": 0.075, "nitrogen": 0.013, "sulfur": 0.017, "water": 0.09, "ash": 0.12})
NATURAL_GAS = {"methane": 0.949, "ethane": 0.025, "propane": 0.002, "butane": 0.0006, "nitrogen": 0.0164, "carbon_dioxide": 0.007}
TYPICAL = tables.load("fuels")["fuel"]


def typical(name):
    entry = TYPICAL[name]
    parts = {part: float(text) / 100 for part, text in entry["parts"].items()}
    return combustion.by_mass(parts) if entry["basis"] == "mass" else combustion.by_volume(parts)


@pytest.mark.parametrize(("excess", "carbon_dioxide", "oxygen", "moisture"), [
    (0.0, "11.7385", "0", "0.189546"), (0.10, "10.5631", "2.1038", "0.173812"), (0.15, "10.0597", "3.0047", "0.166885"),
    (0.20, "9.6023", "3.8234", "0.160490"), (0.25, "9.1849", "4.5706", "0.154566"), (0.50, "7.5464", "7.5034", "0.130486"),
    (1.00, "5.5661", "11.0478", "0.099487"), (2.00, "3.6575", "14.4641", "0.067443"), (2.40, "3.2184", "15.2501", "0.059746"),
])
def test_methane_in_dry_air(excess, carbon_dioxide, oxygen, moisture):
    """Computed independently from the same element balance; half a unit of the last digit."""
    for burnt in (combustion.from_excess_air(METHANE, excess), combustion.from_oxygen(METHANE, combustion.from_excess_air(METHANE, excess)["oxygen"])):
        assert 100 * float(burnt["carbon_dioxide"]) == pytest.approx(float(carbon_dioxide), abs=0.51e-4)
        assert 100 * float(burnt["oxygen"]) == pytest.approx(float(oxygen), abs=0.51e-4)
        assert float(burnt["moisture"]) == pytest.approx(float(moisture), abs=0.6e-6)
        assert float(burnt["excess_air"]) == pytest.approx(excess, abs=1e-12)


@pytest.mark.parametrize(("state", "fuel", "excess", "humidity"), [
    ("F3", METHANE, 0.0, 0.0), ("F4", METHANE, 0.15, 0.0), ("F6", combustion.by_volume(NATURAL_GAS), 2.4, 0.008),
    ("F7", combustion.by_volume({"propane": 1.0}), 0.25, 0.0), ("F9", COAL, 0.30, 0.008),
])
def test_check_states(state, fuel, excess, humidity):
    """Full wet compositions of tests/data/flue_states.csv, computed independently: 2e-6."""
    row, burnt = FLUE[state], combustion.from_excess_air(fuel, excess, 0.0, humidity)
    dry = 1.0 - float(burnt["moisture"])
    for name, column in (("oxygen", "x_O2"), ("carbon_dioxide", "x_CO2"), ("sulfur_dioxide", "x_SO2")):
        assert float(burnt[name]) * dry == pytest.approx(float(row[column]), abs=2e-6)
    assert float(burnt["moisture"]) == pytest.approx(float(row["Bws"]), abs=2e-6)


@given(
    parts=st.tuples(*(st.floats(0.0, 1.0) for _ in combustion.MOLECULES)), oxygen=st.floats(0.0, 0.20),
    monoxide=st.floats(0.0, 0.01), humidity=st.floats(0.0, 0.05),
)
def test_the_elements_balance(parts, oxygen, monoxide, humidity):
    """Atoms in with fuel and air are the atoms out: carbon, hydrogen, oxygen, nitrogen, argon, sulfur."""
    fuel = combustion.by_volume(dict(zip(combustion.MOLECULES, parts, strict=True)))
    assume(fuel.oxygen_need > 0.01)
    burnt = {name: float(value) for name, value in combustion.from_oxygen(fuel, oxygen, monoxide, humidity).items()}
    assume(math.isfinite(burnt["moisture"]))
    air, gas = burnt["dry_air"], burnt["dry_gas"]
    water = burnt["moisture"] / (1 - burnt["moisture"]) * gas
    from_air = air * humidity * MOLAR_MASS["air"] / MOLAR_MASS["H2O"]
    out = {name: burnt[name] * gas for name in ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide")}
    rest = gas - sum(out.values())
    near = pytest.approx
    assert out["carbon_dioxide"] + out["carbon_monoxide"] == near(fuel.carbon + DRY_AIR["CO2"] * air, rel=1e-9)
    assert 2 * water == near(fuel.hydrogen + 2 * fuel.water + 2 * from_air, rel=1e-9, abs=1e-12)
    assert 2 * out["oxygen"] + 2 * out["carbon_dioxide"] + out["carbon_monoxide"] + 2 * out["sulfur_dioxide"] + water == near(
        fuel.oxygen + fuel.water + from_air + 2 * air * (DRY_AIR["O2"] + DRY_AIR["CO2"]), rel=1e-9)
    assert rest == near(fuel.nitrogen / 2 + air * (DRY_AIR["N2"] + DRY_AIR["Ar"]), rel=1e-9)
    assert out["sulfur_dioxide"] == near(fuel.sulfur, rel=1e-9, abs=1e-15)


@given(oxygen=st.floats(0.0, 0.19), monoxide=st.floats(0.0, 0.005))
def test_oxygen_and_excess_air_are_one_statement(oxygen, monoxide):
    one = combustion.from_oxygen(COAL, oxygen, monoxide, 0.01)
    assume(math.isfinite(float(one["moisture"])))
    other = combustion.from_excess_air(COAL, one["excess_air"], monoxide, 0.01)
    for name, value in one.items():
        assert float(other[name]) == pytest.approx(float(value), rel=1e-10, abs=1e-12)


@pytest.mark.parametrize("excess", [0.1, 0.25, 0.5, 1.0, 2.0])
def test_excess_air_by_method_3b(excess):
    """EPA Method 3B: EA = O2/(0.264 N2 - O2), within 1.3 % for methane (its nitrogen includes argon); from memory."""
    burnt = {name: float(value) for name, value in combustion.from_excess_air(METHANE, excess).items()}
    nitrogen = 1.0 - burnt["oxygen"] - burnt["carbon_dioxide"]
    assert burnt["oxygen"] / (0.264 * nitrogen - burnt["oxygen"]) == pytest.approx(excess, rel=0.013)


@pytest.mark.parametrize(("name", "dry", "carbon"), [
    ("natural-gas", 8710, 1040), ("propane", 8710, 1190), ("oil", 9190, 1420), ("coal", 9780, 1800), ("wood", 9240, 1830),
])
def test_fuel_factors_of_typical_fuels(name, dry, carbon):
    """Fo = 0.209 Fd/Fc with the F factors of EPA Method 19, table 19-2, dscf and scf of CO2 a million Btu (from memory): 3 %."""
    burnt = combustion.from_excess_air(typical(name), 0.2)
    factor = combustion.fuel_factor(float(burnt["oxygen"]), float(burnt["carbon_dioxide"]))
    assert factor == pytest.approx(0.209 * dry / carbon, rel=0.03)
    low, high = (float(text) for text in tables.load("fuels")["fuel_factor"][name])
    assert low <= factor <= high


@pytest.mark.parametrize("name", TYPICAL)
def test_typical_fuels_are_whole(name):
    assert sum(float(text) for text in TYPICAL[name]["parts"].values()) == pytest.approx(100.0, abs=0.01)
    assert TYPICAL[name]["source"] and TYPICAL[name]["varies"]


def test_greatest_carbon_dioxide():
    """Carbon takes the oxygen of the air mole for mole; methane 11.7 %, propane 13.7 % (textbooks of combustion, from memory)."""
    assert combustion.greatest_carbon_dioxide(combustion.by_mass({"carbon": 1.0})) == pytest.approx(0.20939 + 0.0004, rel=1e-12)
    assert combustion.greatest_carbon_dioxide(METHANE) == pytest.approx(0.117, abs=1e-3)
    assert combustion.greatest_carbon_dioxide(typical("propane")) == pytest.approx(0.137, abs=1e-3)


def test_the_fuel_factor_counts_carbon_monoxide_as_burnt():
    """(20.9 - (6 - 0.5))/(10 + 1), Method 3B."""
    assert combustion.fuel_factor(0.06, 0.10, 0.01) == pytest.approx((20.9 - 5.5) / 11.0, rel=1e-12)
    assert math.isnan(combustion.fuel_factor(0.06, 0.0))


def test_hydrogen_by_mass_and_by_volume_is_one_fuel():
    one = combustion.from_oxygen(combustion.by_mass({"hydrogen": 1.0}), 0.05)
    other = combustion.from_oxygen(combustion.by_volume({"hydrogen": 1.0}), 0.05)
    assert float(one["moisture"]) == pytest.approx(float(other["moisture"]), rel=1e-12)


def test_what_cannot_burn_so_is_no_number():
    """Oxygen of air or more, negative fractions, more carbon monoxide than carbon."""
    for burnt in (combustion.from_oxygen(METHANE, 0.2095), combustion.from_oxygen(METHANE, -0.01), combustion.from_oxygen(METHANE, 0.05, -0.001),
                  combustion.from_oxygen(METHANE, 0.05, 0.3), combustion.from_excess_air(METHANE, -0.1)):
        assert all(math.isnan(float(value)) for value in burnt.values())
    found = combustion.from_oxygen(METHANE, np.array([0.03, 0.25]))["moisture"]
    assert np.isnan(found).tolist() == [False, True]
