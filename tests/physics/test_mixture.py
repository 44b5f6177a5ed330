"""Mixtures of any gases: species against a reference library, whole mixtures against another and against real gas."""

import csv
import math
from pathlib import Path

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import gas, mixture

FLUE = list(csv.DictReader((Path(__file__).parents[1] / "data" / "flue_states.csv").open()))
FLUID = {"CH4": "Methane", "C2H6": "Ethane", "C3H8": "Propane", "H2": "Hydrogen", "He": "Helium", "NH3": "Ammonia", "N2O": "NitrousOxide", "H2S": "HydrogenSulfide"}
NAMES = {"N2": "nitrogen", "O2": "oxygen", "Ar": "argon", "CO2": "carbon_dioxide", "SO2": "sulfur_dioxide"}


@pytest.mark.parametrize("name", FLUID)
@pytest.mark.parametrize("temperature", [250.0, 300.0, 400.0, 600.0, 800.0, 1000.0])
def test_heat_capacities_of_the_further_gases(name, temperature):
    """CoolProp's ideal-gas heat capacity: 0.5 %, what the table promises."""
    ours = float(mixture.heat_capacity({name: np.float64(1.0)}, temperature))
    assert ours == pytest.approx(PropsSI("CP0MOLAR", "T", temperature, "P", 1.0, FLUID[name]), rel=5e-3)


@pytest.mark.parametrize("name", [name for name in FLUID if name != "N2O"])
@pytest.mark.parametrize("temperature", [273.15, 350.0, 473.15, 600.0, 725.0])
def test_viscosities_of_the_further_gases(name, temperature):
    """CoolProp at low pressure: 2.1 %, what the table promises; it has no viscosity of the two oxides of nitrogen."""
    assert float(gas.viscosity({name: np.float64(1.0)}, temperature)) == pytest.approx(PropsSI("V", "T", temperature, "P", 500.0, FLUID[name]), rel=0.021)


def test_oxides_of_nitrogen_at_room_temperature():
    """NO: 29.85 J/(mol K) (JANAF), 19.2 uPa s at 300 K; N2O 15.0 uPa s at 300 K (handbook tables); all from memory: 0.5 % and 2 %."""
    assert float(mixture.heat_capacity({"NO": np.float64(1.0)}, 298.15)) == pytest.approx(29.85, rel=5e-3)
    assert float(gas.viscosity({"NO": np.float64(1.0)}, 300.0)) == pytest.approx(19.2e-6, rel=0.02)
    assert float(gas.viscosity({"N2O": np.float64(1.0)}, 300.0)) == pytest.approx(15.0e-6, rel=0.02)


@pytest.mark.parametrize("name", FLUID)
def test_molar_masses_of_the_further_gases(name):
    """CoolProp: 1e-4."""
    assert gas.MOLAR_MASS[name] == pytest.approx(1000 * PropsSI("M", FLUID[name]), rel=1e-4)


def test_every_species_has_all_its_constants():
    for symbol in mixture.SPECIES.values():
        assert symbol in gas.MOLAR_MASS and symbol in gas.HEAT_CAPACITY and symbol in gas.VISCOSITY


def test_dry_air_as_one_gas_is_its_parts():
    parts = {name: np.float64(share) for name, share in gas.DRY_AIR.items()}
    one = {"air": np.float64(1.0)}
    assert float(mixture.heat_capacity(one, 400.0)) == pytest.approx(float(mixture.heat_capacity(parts, 400.0)), rel=1e-14)
    assert float(mixture.dry_molar_mass(one)) == pytest.approx(float(mixture.dry_molar_mass(parts)), rel=1e-5)
    assert float(gas.viscosity(one, 400.0)) == pytest.approx(float(gas.air_viscosity(400.0)), rel=1e-14)


@pytest.mark.parametrize("row", FLUE, ids=[row["state"] for row in FLUE])
def test_flue_states_as_mixtures(row):
    """Cantera: density 1e-5 (sulfurous F9 too, ideal gas against ideal gas), ratio 1e-3, viscosity 1 %; real gas 0.15 %."""
    parts = {NAMES[symbol]: float(row[f"x_{symbol}"]) for symbol in NAMES}
    water, temperature = float(row["Bws"]), float(row["t_C"]) + 273.15
    dry = mixture.dry_fractions(parts, tuple(parts), "", water)
    wet = mixture.wet(dry, water)
    assert float(sum(wet.values())) == pytest.approx(1.0, abs=1e-12)
    density = float(gas.density(float(row["p_Pa"]), gas.wet_molar_mass(mixture.dry_molar_mass(dry), water), temperature))
    assert density == pytest.approx(float(row["rho_exact_ideal"]), rel=2e-6)
    assert density == pytest.approx(float(row["rho_heos"]), rel=1.5e-3)
    if float(row["x_SO2"]) == 0:
        assert density == pytest.approx(float(row["rho_cantera_ideal"]), rel=2e-5)
    assert float(gas.ratio_of_specific_heats(wet, temperature)) == pytest.approx(float(row["gamma_cantera"]), abs=1e-3)
    assert 1e6 * float(gas.viscosity(wet, temperature)) == pytest.approx(float(row["mu_cantera_uPas"]), rel=0.01)


def test_a_mixture_with_methane_against_the_real_gas():
    """CoolProp's multi-fluid mixture of 60 % methane and 40 % carbon dioxide at 40 degC, 102 kPa: 0.5 % (Z is 0.996)."""
    dry = mixture.dry_fractions({"methane": 0.6, "carbon_dioxide": 0.4}, ("methane", "carbon_dioxide"), "", 0.0)
    ours = float(gas.density(102e3, mixture.dry_molar_mass(dry), 313.15))
    assert ours == pytest.approx(PropsSI("D", "T", 313.15, "P", 102e3, "Methane[0.6]&CarbonDioxide[0.4]"), rel=5e-3)


@given(parts=st.lists(st.floats(0.0, 0.2), min_size=3, max_size=3), water=st.floats(0.0, 0.3))
def test_the_rest_fills_up(parts, water):
    values = dict(zip(("oxygen", "methane", "helium"), parts, strict=True))
    dry = mixture.dry_fractions(values, tuple(values), "nitrogen", water)
    assert float(sum(dry.values())) == pytest.approx(1.0, abs=1e-14)
    assert float(dry["N2"]) * (1 - water) == pytest.approx(1 - water - sum(parts), abs=1e-14)


def test_impossible_mixtures_are_no_number():
    for parts, rest, water in (({"oxygen": 0.8}, "nitrogen", 0.3), ({"oxygen": -0.1, "nitrogen": 1.1}, "", 0.0), ({"oxygen": 0.0}, "", 0.0)):
        found = mixture.dry_fractions(parts, tuple(parts), rest, water)
        assert all(math.isnan(float(value)) for value in found.values()) or math.isnan(float(found["N2"]))
    assert math.isnan(float(mixture.heat_capacity({"N2": np.float64(1.0)}, 1700.0)))
