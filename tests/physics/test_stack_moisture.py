"""Moisture of stack gas: the train by two routes, wet and dry bulb against a reference library and published forms."""

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI
from CoolProp.HumidAirProp import HAPropsSI
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import gas, mixture, stack_moisture
from traverse.physics.stack_moisture import PRINTED
from traverse.physics.water import saturation_pressure

AIR = {name: np.float64(share) for name, share in gas.DRY_AIR.items()}
COLLECTED = {"condensed": 85.3e-6, "silica_gel": 6.2e-3, "meter_volume": 1.102, "meter_factor": 0.998, "meter_temperature": 297.15,
             "meter_barometric": 99_800.0, "orifice_pressure": 441.3}


def collected(**change):
    return {name: np.array([value]) for name, value in (COLLECTED | change).items()}


def bulb(relation, dry, wet, pressure, heat=math.nan):
    return float(stack_moisture.wet_bulb_fraction(relation, wet + 273.15, dry + 273.15, pressure, heat))


def test_the_train_by_the_gas_law():
    """Moles of water (CoolProp's density at 20 degC) over all moles."""
    water = (85.3e-6 * PropsSI("D", "T", 293.15, "P", 101325, "Water") + 6.2e-3) / 18.01528e-3
    dry = 0.998 * 1.102 * (99_800.0 + 441.3) / (8.314462618 * 297.15)
    found = stack_moisture.train(collected(), "modern", by_volume=True)
    assert float(found["moisture"][0]) == pytest.approx(water / (water + dry), rel=1e-4)
    assert float(found["gas"][0]) == pytest.approx(dry, rel=1e-12)


@pytest.mark.parametrize("system", ["us", "si"])
@pytest.mark.parametrize("by_volume", [True, False])
def test_printed_constants_are_the_gas_law(system, by_volume):
    """17.64, 0.3855, 0.04706, 0.04715, 0.001333, 0.001335 and 460, 273, 13.6 against modern constants: 0.1 % of the moisture."""
    values = collected() if by_volume else collected(condensed=85.3e-3)
    printed, modern = (float(stack_moisture.train(values, which, by_volume=by_volume)["moisture"][0]) for which in (system, "modern"))
    assert printed == pytest.approx(modern, rel=1e-3)
    assert printed != modern


def test_method_4_by_hand_in_us_units():
    """85.3 ml, 6.2 g, 38.9 ft3, Y 0.998, 75 degF, 29.5 in. Hg, 1.8 in. H2O through equations 4-1 to 4-4 as printed."""
    water = 0.04706 * 85.3 + 0.04715 * 6.2
    dry = 17.64 * 0.998 * 38.9 * (29.5 + 1.8 / 13.6) / (75 + 460)
    found = stack_moisture.train(collected(
        meter_volume=38.9 * 0.3048**3, meter_temperature=(75 + 459.67) / 1.8, meter_barometric=29.5 * 3386.389, orifice_pressure=1.8 * 249.08891,
    ), "us", by_volume=True)
    assert float(found["water"][0]) == pytest.approx(water, rel=1e-12)
    assert float(found["gas"][0]) == pytest.approx(dry, rel=1e-6)
    assert float(found["moisture"][0]) == pytest.approx(water / (water + dry), rel=1e-6)


def test_constants_follow_from_standard_conditions():
    """528/29.92 and 293/760; vapour of a gram of water by the gas law at 20 degC and 760 mmHg, of a millilitre of 0.9982 g: 0.05 %."""
    assert PRINTED["us"]["dry_gas"] == pytest.approx(528 / 29.92, rel=5e-4)
    assert PRINTED["si"]["dry_gas"] == pytest.approx(293 / 760, rel=5e-4)
    gram = 8.314462618 * 293.15 / (101325 * 18.01528)
    for system, unit in (("si", 1.0), ("us", 0.3048**3)):
        assert PRINTED[system]["water_by_mass"] * unit == pytest.approx(gram, rel=5e-4)
        assert PRINTED[system]["water_by_volume"] * unit == pytest.approx(0.9982 * gram, rel=5e-4)


def test_the_approximation_adds_its_residual():
    plain, more = (float(stack_moisture.train(collected(), "us", by_volume=True, approximation=flag)["moisture"][0]) for flag in (False, True))
    assert more - plain == pytest.approx(0.025, abs=1e-15)


def test_a_train_that_cannot_be_is_no_number():
    for change in ({"condensed": -1e-6}, {"silica_gel": -1e-3}, {"meter_volume": 0.0}, {"meter_temperature": -10.0}):
        assert math.isnan(float(stack_moisture.train(collected(**change), "modern", by_volume=True)["moisture"][0]))


def test_the_lower_of_train_and_saturation():
    limit = float(saturation_pressure(328.15)) / 101325.0
    assert float(stack_moisture.capped(0.25, 328.15, 101325.0)) == pytest.approx(limit, rel=1e-15)
    assert float(stack_moisture.capped(0.10, 328.15, 101325.0)) == 0.10
    assert float(stack_moisture.capped(0.30, 500.0, 101325.0)) == 0.30
    assert math.isnan(float(stack_moisture.capped(-0.1, 328.15, 101325.0))) and math.isnan(float(stack_moisture.capped(1.0, 500.0, 101325.0)))


@pytest.mark.parametrize(("dry", "wet", "pressure"), [
    (40, 20, 101325), (60, 40, 101325), (100, 50, 101325), (150, 55, 101325), (150, 60, 85000), (200, 70, 101325), (300, 80, 101325),
])
def test_the_energy_balance_of_air_against_a_reference_library(dry, wet, pressure):
    """Thermodynamic wet bulb of CoolProp HumidAir, air's own heat capacity: 0.0015 of the fraction."""
    heat = float(mixture.heat_capacity(AIR, (dry + wet) / 2 + 273.15))
    ratio = HAPropsSI("W", "T", dry + 273.15, "B", wet + 273.15, "P", pressure)
    assert bulb("energy-balance", dry, wet, pressure, heat) == pytest.approx(ratio / (ratio + 0.621945), abs=1.5e-3)


@pytest.mark.parametrize(("dry", "wet", "pressure", "ferrel", "carrier", "air", "flue"), [
    (40, 20, 101325, "0.00957", "0.01011", "0.01016", "0.00950"), (60, 40, 101325, "0.05905", "0.06034", "0.06027", "0.05967"),
    (100, 50, 101325, "0.08696", "0.09196", "0.09163", "0.09024"), (150, 55, 101325, "0.08882", "0.10062", "0.09992", "0.09740"),
    (150, 60, 85000, "0.17109", "0.18727", "0.18603", "0.18406"), (180, 62, 101325, "0.13229", "0.15205", "0.15070", "0.14794"),
    (200, 70, 101325, "0.21513", "0.24548", "0.24325", "0.24084"), (250, 75, 101325, "0.25534", "0.30537", "0.30197", "0.29928"),
    (300, 80, 101325, "0.30926", "0.38597", "0.38126", "0.37868"),
])
def test_relations_against_an_independent_calculation(dry, wet, pressure, ferrel, carrier, air, flue):
    """Ferrel and Carrier in degF, energy balance with 29.2 and 30.7 J/(mol K); computed independently. 1e-5, balance 1e-4."""
    assert bulb("ferrel", dry, wet, pressure) == pytest.approx(float(ferrel), abs=1e-5)
    assert bulb("carrier", dry, wet, pressure) == pytest.approx(float(carrier), abs=1e-5)
    assert bulb("energy-balance", dry, wet, pressure, 29.2) == pytest.approx(float(air), abs=1e-4)
    assert bulb("energy-balance", dry, wet, pressure, 30.7) == pytest.approx(float(flue), abs=1e-4)


@pytest.mark.parametrize("relation", ["energy-balance", "carrier", "ferrel"])
def test_at_saturation_all_relations_agree(relation):
    assert bulb(relation, 55.0, 55.0, 101325.0, 30.0) == pytest.approx(float(saturation_pressure(328.15)) / 101325.0, rel=1e-12)


@pytest.mark.parametrize("relation", ["energy-balance", "carrier", "ferrel"])
@pytest.mark.parametrize(("dry", "wet", "pressure"), [(150.0, 151.0, 101325.0), (150.0, 100.5, 101325.0), (150.0, 97.0, 85000.0), (200.0, 20.0, 101325.0)])
def test_a_wet_bulb_that_cannot_be_is_no_number(relation, dry, wet, pressure):
    """Above the dry bulb, at boiling, and so low that the water would be less than none."""
    assert math.isnan(bulb(relation, dry, wet, pressure, 30.0))


@given(dry=st.floats(50.0, 300.0), depression=st.floats(0.0, 200.0), heat=st.floats(29.0, 34.0))
def test_a_gas_of_more_heat_reads_drier(dry, depression, heat):
    """The heat that evaporates the water comes from the dry gas."""
    wet = max(20.0, dry - depression)
    one, more = (bulb("energy-balance", dry, wet, 101325.0, value) for value in (heat, heat + 1.0))
    assert more <= one + 1e-15 or math.isnan(one) or math.isnan(more)
