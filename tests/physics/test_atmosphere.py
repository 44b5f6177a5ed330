"""Pressures of the atmosphere: against a psychrometric library, the standard atmosphere, hydrostatics, and at the ends of the ranges."""

import math

import numpy as np
import psychrolib
import pytest

from traverse.physics import atmosphere


@pytest.mark.parametrize(("pressure", "altitude", "celsius"), [(101325.0, 0.0, 15.0), (102484.0, 105.0, 17.19), (98000.0, 1600.0, -10.0), (104000.0, -400.0, 30.0), (101325.0, 5000.0, 5.0)])
def test_station_pressure(pressure, altitude, celsius):
    psychrolib.SetUnitSystem(psychrolib.SI)
    expected = psychrolib.GetStationPressure(pressure, altitude, celsius)
    assert float(atmosphere.station_pressure(pressure, altitude, celsius + 273.15)) == pytest.approx(expected, rel=1e-7)


@pytest.mark.parametrize("altitude", [-500.0, 0.0, 500.0, 1609.34, 3000.0])
def test_altimeter_setting_of_the_standard_atmosphere(altitude):
    """At 1013.25 hPa the formula is the standard atmosphere to 2e-6 up to 3000 m."""
    expected = float(atmosphere.pressure_at_altitude(altitude))
    assert float(atmosphere.altimeter_pressure(101325.0, altitude)) == pytest.approx(expected, rel=3e-6)


def test_altimeter_setting_at_sea_level_is_the_pressure():
    np.testing.assert_allclose(atmosphere.altimeter_pressure([98000.0, 104000.0], 0.0), [98000.0, 104000.0], rtol=1e-12)


def test_the_weight_of_a_column():
    """dp/dh = -rho g: 100 m of air at 288.15 K and 101325 Pa, density 1.22499."""
    small = 101325.0 - float(atmosphere.raised_pressure(101325.0, 0.1, 288.15))
    assert small == pytest.approx(1.22499 * 9.80665 * 0.1, rel=2e-5)
    up = float(atmosphere.raised_pressure(101325.0, 100.0, 288.15))
    assert float(atmosphere.raised_pressure(up, -100.0, 288.15)) == pytest.approx(101325.0, rel=1e-13) and up < 101325.0


@pytest.mark.parametrize(("function", "low", "high"), [
    (lambda h: atmosphere.pressure_at_altitude(h), -500.0, 11000.0), (lambda h: atmosphere.station_pressure(101325.0, h, 288.15), -500.0, 5000.0),
    (lambda h: atmosphere.altimeter_pressure(101325.0, h), -500.0, 5000.0),
])
def test_the_ends_of_the_ranges(function, low, high):
    found = function(np.array([low - 1e-6, low, high, high + 1e-6]))
    assert [math.isnan(value) for value in found] == [True, False, False, True]
