"""Water vapour: every form of humidity against a psychrometric library and against each other."""

import csv
import math
from pathlib import Path

import numpy as np
import psychrolib
import pytest
from CoolProp.CoolProp import PropsSI
from hypothesis import assume, given
from hypothesis import strategies as st

from traverse.physics import moist_air, water

AIR = list(csv.DictReader((Path(__file__).parents[1] / "data" / "air_states.csv").open()))
psychrolib.SetUnitSystem(psychrolib.SI)
FORMS = {"RH": "relative_humidity", "W": "humidity_ratio", "WB": "wet_bulb", "DP": "dew_point"}
celsius = st.floats(-40.0, 90.0)
pressures = st.floats(60e3, 110e3)


def fraction(form, value, temperature, pressure):
    """Return the mole fraction; temperature and pressure in degC and Pa."""
    return float(moist_air.mole_fraction(form, value, temperature + 273.15, pressure))


@pytest.fixture
def printed_ratio(monkeypatch):
    """Use the molar mass ratio as the handbook rounds it, which is the only thing that keeps the library 2e-5 away."""
    monkeypatch.setattr(moist_air, "RATIO", 0.621945)


def test_mass_ratio_rounds_to_the_handbook():
    """ASHRAE Fundamentals 2017 ch. 1 prints 0.621945; ours is 18.01528/28.96546."""
    assert pytest.approx(18.01528 / 28.96546, rel=1e-15) == moist_air.RATIO
    assert pytest.approx(0.621945, rel=2.5e-5) == moist_air.RATIO


@pytest.mark.parametrize("row", [row for row in AIR if float(row["val"]) != 0 or row["kind"] == "WB"], ids=lambda row: row["n"])
@pytest.mark.usefixtures("printed_ratio")
def test_states_against_psychrolib(row):
    """Same equations, same constants: 1e-6."""
    value = float(row["val"]) + (273.15 if row["kind"] in {"WB", "DP"} else 0.0)
    ours = fraction(FORMS[row["kind"]], value, float(row["t"]), float(row["p"]))
    assert ours == pytest.approx(float(row["xw_psychrolib"]), rel=1e-6)


@pytest.mark.parametrize(("dry", "wet", "pressure"), [
    (30.0, 25.0, 95461.0), (40.0, 20.0, 101325.0), (60.0, 40.0, 101325.0), (150.0, 60.0, 85000.0), (5.0, 0.5, 95000.0), (4.0, 0.005, 95000.0),
    (5.0, 0.0, 95000.0), (2.0, -1.0, 95000.0), (-3.0, -4.0, 90000.0), (-20.0, -20.5, 101325.0),
])
@pytest.mark.usefixtures("printed_ratio")
def test_wet_bulb_over_water_and_ice(dry, wet, pressure):
    """Equations 33 and 35; between 0 and 0.01 degC the wick is wet while the saturation pressure is still that of ice."""
    ratio = psychrolib.GetHumRatioFromTWetBulb(dry, wet, pressure)
    assert ratio > 1e-6
    assert fraction("wet_bulb", wet + 273.15, dry, pressure) == pytest.approx(ratio / (ratio + 0.621945), rel=1e-9)


def test_hand_checked_wet_bulb():
    """W = 0.0192281274 at 30 degC, 25 degC wet bulb, 95461 Pa: the hand-checked value in PsychroLib's tests; equation 33 gives 150 ppm less."""
    x = fraction("wet_bulb", 298.15, 30.0, 95461.0)
    assert moist_air.RATIO * x / (1 - x) == pytest.approx(0.0192281274, rel=3e-4)


@pytest.mark.parametrize(("celsius", "printed"), [
    (-20, "0.0006373"), (-5, "0.0024863"), (5, "0.005425"), (25, "0.020173"), (50, "0.086863"), (85, "0.838105"),
])
def test_saturated_humidity_ratio_against_the_handbook(celsius, printed):
    """ASHRAE Fundamentals 2017 ch. 1 table 2 (values read in PsychroLib's tests).

    The table has the enhancement factor in it, which the equations leave out: they lie lower, by up to 0.6 % of the vapour
    pressure, and that grows by p/(p - pw) in the ratio.
    """
    x = fraction("saturated", 0.0, celsius, 101325.0)
    deviation = moist_air.RATIO * x / (1 - x) / float(printed) - 1
    assert -0.007 / (1 - x) < deviation < 0.0


def test_hot_stack_wet_bulb_against_the_rigorous_value():
    """Thermodynamic wet bulb of CoolProp HumidAir at 150/55, 180/62 and 300/80 degC, 101325 Pa: the equation is within 0.001."""
    for dry, wet, rigorous in ((150.0, 55.0, 0.10037), (180.0, 62.0, 0.15124), (300.0, 80.0, 0.38130)):
        assert fraction("wet_bulb", wet + 273.15, dry, 101325.0) == pytest.approx(rigorous, abs=1e-3)


@given(humidity=st.floats(0.0, 1.0), temperature=celsius, pressure=pressures)
def test_relative_humidity_round_trip(humidity, temperature, pressure):
    """RH -> mole fraction -> W -> mole fraction -> RH."""
    x = fraction("relative_humidity", humidity, temperature, pressure)
    assume(not math.isnan(x))
    again = fraction("humidity_ratio", moist_air.RATIO * x / (1 - x), temperature, pressure)
    saturation = float(water.saturation_pressure(temperature + 273.15))
    assert again * pressure / saturation == pytest.approx(humidity, rel=1e-12, abs=1e-15)
    library = psychrolib.GetVapPresFromRelHum(temperature, humidity) / pressure
    assert x == pytest.approx(library, rel=1e-9, abs=1e-12)


@given(dew=st.floats(-40.0, 90.0), above=st.floats(0.0, 200.0), pressure=pressures)
def test_dew_point_is_saturation_at_the_dew_point(dew, above, pressure):
    """More heat does not change the water: the fraction is that of saturated gas at the dew point."""
    saturated = fraction("saturated", 0.0, dew, pressure)
    assume(dew + above < 200.0 and not math.isnan(saturated))
    assert fraction("dew_point", dew + 273.15, dew + above, pressure) == pytest.approx(saturated, rel=1e-12)


@given(temperature=st.floats(-40.0, 80.0), pressure=pressures)
def test_saturated_gas_has_one_temperature(temperature, pressure):
    """Wet bulb, dew point and dry bulb coincide at saturation, over ice and over water."""
    assume(not 0.0 <= temperature < 0.01)
    saturated = fraction("saturated", 0.0, temperature, pressure)
    assume(not math.isnan(saturated))
    assert fraction("wet_bulb", temperature + 273.15, temperature, pressure) == pytest.approx(saturated, rel=1e-9)
    assert fraction("dew_point", temperature + 273.15, temperature, pressure) == pytest.approx(saturated, rel=1e-12)


@given(temperature=st.floats(10.0, 80.0), pressure=pressures, a=st.floats(0.5, 1.0), b=st.floats(0.5, 1.0))
def test_wetter_reads_wetter(temperature, pressure, a, b):
    """A higher relative humidity, and a higher wet bulb, mean more water."""
    assume(b - a > 1e-6)
    low, high = (fraction("relative_humidity", value, temperature, pressure) for value in (a, b))
    assert low < high or math.isnan(high)
    low, high = (fraction("wet_bulb", 273.15 + value * temperature, temperature, pressure) for value in (a, b))
    assert low < high or math.isnan(low) or math.isnan(high)


@given(a=st.floats(173.15, 473.15), b=st.floats(173.15, 473.15))
def test_saturation_pressure_rises(a, b):
    assume(b - a > 1e-6)
    assert water.saturation_pressure(a) < water.saturation_pressure(b)


def test_ice_and_water_meet_at_the_triple_point():
    """IAPWS: 611.657 Pa at 273.16 K. The branches meet there within 6e-9; at 0 degC there would be a step of 1e-4."""
    below, at = (float(water.saturation_pressure(t)) for t in (np.nextafter(273.16, 0), 273.16))
    assert at == pytest.approx(611.657, rel=1e-5)
    assert below == pytest.approx(at, rel=1e-8)
    # Half a kelvin under it the two branches are 0.5 % apart: ice is meant.
    assert float(water.saturation_pressure(272.66)) == pytest.approx(psychrolib.GetSatVapPres(-0.49), rel=1e-9)


@pytest.mark.parametrize("kelvin", [273.17, 300.0, 330.0, 373.15, 420.0])
def test_saturation_pressure_against_a_reference_equation(kelvin):
    """IAPWS-95 in CoolProp: 250 ppm."""
    assert float(water.saturation_pressure(kelvin)) == pytest.approx(PropsSI("P", "T", kelvin, "Q", 0, "Water"), rel=2.5e-4)


def test_saturation_outside_its_range():
    """Below -100 degC no number; hot gas cannot be saturated at any pressure of a duct."""
    kelvin = np.array([173.0, 173.15, 473.15, 473.2, 1500.0, 2000.0, -5.0, np.nan])
    found = water.saturation_pressure(kelvin)
    assert np.isnan(found[[0, 5, 6, 7]]).all()
    assert np.isfinite(found[1:3]).all()
    assert (found[3:5] == np.inf).all()


@pytest.mark.parametrize(("form", "value", "temperature", "pressure"), [
    ("relative_humidity", 1.01, 20.0, 101325.0), ("relative_humidity", -0.1, 20.0, 101325.0), ("relative_humidity", 0.9, 120.0, 101325.0),
    ("relative_humidity", 0.5, 250.0, 101325.0), ("wet_bulb", 293.16, 20.0, 101325.0), ("wet_bulb", 288.15, 200.0, 101325.0),
    ("dew_point", 293.16, 20.0, 101325.0), ("humidity_ratio", 0.0149, 20.0, 101325.0), ("humidity_ratio", -0.01, 20.0, 101325.0),
    ("humidity_ratio", -1.0, 20.0, 101325.0), ("moisture", 0.0232, 20.0, 101325.0), ("moisture", -0.001, 20.0, 101325.0),
    ("moisture", 1.0, 400.0, 101325.0), ("saturated", 0.0, 100.5, 101325.0), ("moisture", 0.01, 20.0, -101325.0),
    ("relative_humidity", math.nan, 20.0, 101325.0), ("moisture", 0.01, math.nan, 101325.0), ("dry", 0.0, 20.0, math.nan),
])
def test_impossible_water_is_no_number(form, value, temperature, pressure):
    """Saturation at 20 degC, 101325 Pa is a fraction of 0.02308 and a ratio of 0.0147."""
    assert math.isnan(fraction(form, value, temperature, pressure))


@pytest.mark.parametrize(("form", "value"), [("humidity_ratio", 0.0146), ("moisture", 0.0230), ("dew_point", 293.15), ("wet_bulb", 293.15)])
def test_almost_saturated_is_possible(form, value):
    assert fraction(form, value, 20.0, 101325.0) == pytest.approx(0.0230, abs=1e-4)


def test_forms_broadcast():
    temperature = np.array([[293.15], [303.15]])
    pressure = np.array([90e3, 95e3, 101325.0])
    for form, value in (("relative_humidity", 0.5), ("wet_bulb", 288.15), ("dew_point", 283.15), ("humidity_ratio", 0.005),
                        ("moisture", 0.01), ("saturated", 0.0), ("dry", 0.0)):
        found = moist_air.mole_fraction(form, value, temperature, pressure)
        assert found.shape == (2, 3)
        assert found[1, 2] == fraction(form, value, 303.15 - 273.15, 101325.0)


def test_dry_has_no_water():
    assert fraction("dry", 0.7, 20.0, 101325.0) == 0.0


def test_no_humidity_is_none_at_any_temperature():
    """Zero per cent is zero also where saturation pressure has ended."""
    assert fraction("relative_humidity", 0.0, 250.0, 101325.0) == 0.0
    assert fraction("humidity_ratio", 0.0, 250.0, 101325.0) == 0.0


@pytest.mark.parametrize("kind", [np.float32, np.int64])
def test_numbers_of_other_kinds(kind):
    """Whole numbers and single precision are calculated with in double precision."""
    temperature, pressure = kind(330), kind(100000)
    found = water.saturation_pressure(temperature)
    assert found.dtype == np.float64
    assert found == water.saturation_pressure(330.0)
    for form, value in (("relative_humidity", 1), ("wet_bulb", 320), ("dew_point", 310), ("humidity_ratio", 0), ("moisture", 0), ("saturated", 0)):
        found = moist_air.mole_fraction(form, kind(value), temperature, pressure)
        assert found.dtype == np.float64
        assert found == moist_air.mole_fraction(form, float(value), 330.0, 1e5)
