"""The velocity of a pitot tube against exact mathematics and printed tables."""

import math

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import pitot

# Isentropic factor, gamma 1.4; computed to six digits from the energy equation and tabulated (dp/p, factor).
PRINTED = [("0.001", "0.999822"), ("0.005", "0.999109"), ("0.010", "0.998223"), ("0.020", "0.996463"), ("0.0309", "0.994563"),
           ("0.0445", "0.992219"), ("0.100", "0.982954")]


@pytest.mark.parametrize(("x", "factor"), PRINTED)
def test_compressibility_against_the_table(x, factor):
    assert float(pitot.compressibility_factor(float(x), 1.0, 1.4)) == pytest.approx(float(factor), abs=5.5e-7)


# The same factor beside absolute pressure 101325 Pa: ratio, dp in Pa, factor to eight digits, computed.
BY_PRESSURE = [
    (1.4, 100, 0.99982385), (1.4, 500, 0.99912091), (1.4, 1000, 0.99824597), (1.4, 2500, 0.99564571), (1.4, 5000, 0.99139158),
    (1.33, 100, 0.99981458), (1.33, 500, 0.99907468), (1.33, 1000, 0.99815380), (1.33, 2500, 0.99541741), (1.33, 5000, 0.99094192),
    (1.3, 100, 0.99981030), (1.3, 500, 0.99905334), (1.3, 1000, 0.99811126), (1.3, 2500, 0.99531207), (1.3, 5000, 0.99073450),
]


@pytest.mark.parametrize(("gamma", "pascal", "factor"), BY_PRESSURE)
def test_compressibility_by_pressure(gamma, pascal, factor):
    assert float(pitot.compressibility_factor(pascal, 101325.0, gamma)) == pytest.approx(factor, abs=5.5e-9)


def test_printed_exercise():
    """Air 1.1 kg/m3, static 97 kPa, stagnation 100 kPa: printed 73.854 m/s (common practice, no source; sqrt(2 3000/1.1) is 73.8549).

    With compressibility and the density taken as the static one: 73.453, computed.
    """
    assert float(pitot.velocity(3000.0, 1.1, 1.0)) == pytest.approx(73.854, abs=1e-3)
    assert float(pitot.velocity(3000.0, 1.1, 1.0, static_pressure=97e3)) == pytest.approx(73.453, abs=5e-4)


@given(low=st.floats(0.0, 5e4), high=st.floats(0.0, 5e4), gamma=st.floats(1.1, 1.67))
def test_more_pressure_is_more_velocity_and_more_correction(low, high, gamma):
    if high - low < 1e-3:
        return
    slow, fast = (float(pitot.velocity(p, 1.1, 0.84, static_pressure=1e5, ratio_of_specific_heats=gamma)) for p in (low, high))
    assert slow < fast
    less, more = (float(pitot.compressibility_factor(p, 1e5, gamma)) for p in (low, high))
    assert 0 < more < less <= 1 or more == pytest.approx(less, abs=1e-15)


@given(x=st.floats(1e-9, 0.05), gamma=st.floats(1.1, 1.67))
def test_series_of_the_factor(x, gamma):
    """k^2 = 1 - x/(2 gamma) + (gamma + 1)/(6 gamma^2) x^2 - ...: exact to the third power of x."""
    square = 1 - x / (2 * gamma) + (gamma + 1) / (6 * gamma**2) * x**2
    assert float(pitot.compressibility_factor(x, 1.0, gamma)) ** 2 == pytest.approx(square, abs=0.25 * x**3 + 1e-15)


def test_impact_pressure_of_an_s_type_tube_is_smaller():
    """The factor belongs to C^2 dp, the impact pressure, not to what an S-type tube reads."""
    speed = float(pitot.velocity(2000.0, 1.1, 0.84, static_pressure=1e5, ratio_of_specific_heats=1.35))
    factor = float(pitot.compressibility_factor(0.84**2 * 2000.0, 1e5, 1.35))
    assert speed == pytest.approx(0.84 * math.sqrt(2 * 2000.0 / 1.1) * factor, rel=1e-14)


@given(x=st.floats(1e-12, 0.5), gamma=st.floats(1.05, 1.67))
def test_compressibility_to_the_last_digits(x, gamma):
    """Exact mathematics with 40 digits."""
    with mpmath.workdps(40):
        a = (mpmath.mpf(gamma) - 1) / mpmath.mpf(gamma)
        exact = mpmath.sqrt(((1 + mpmath.mpf(x)) ** a - 1) / (a * mpmath.mpf(x)))
    assert float(pitot.compressibility_factor(x, 1.0, gamma)) == pytest.approx(float(exact), rel=2e-14)


@given(mach=st.floats(1e-4, 0.9), gamma=st.floats(1.1, 1.67))
def test_stagnation_relation_is_inverted(mach, gamma):
    """Isentropic stagnation pressure of a stream at a known Mach number gives its velocity back."""
    static, density = 90e3, 0.9
    impact = static * math.expm1(gamma / (gamma - 1) * math.log1p((gamma - 1) / 2 * mach**2))
    speed = float(pitot.velocity(impact, density, 1.0, static_pressure=static, ratio_of_specific_heats=gamma))
    assert speed == pytest.approx(mach * math.sqrt(gamma * static / density), rel=1e-11)


def test_limits_and_impossible_input():
    assert float(pitot.velocity(0.0, 1.2, 1.0, static_pressure=1e5)) == 0.0
    assert float(pitot.compressibility_factor(0.0, 1e5, 1.4)) == 1.0


@pytest.mark.parametrize(("pressure", "density"), [(-1.0, 1.2), (10.0, -1.2), (-10.0, -1.2), (10.0, 0.0), (0.0, 0.0), (0.0, -1.2), (math.nan, 1.2)])
def test_impossible_velocity_is_no_number(pressure, density):
    """Two wrong signs must not make a velocity that looks right. No warning either: the suite turns those into errors."""
    assert math.isnan(float(pitot.velocity(pressure, density, 1.0)))
    assert math.isnan(float(pitot.velocity(pressure, density, 1.0, static_pressure=1e5)))


@pytest.mark.parametrize(("impact", "static", "gamma"), [
    (-1.0, 1e5, 1.4), (10.0, 0.0, 1.4), (0.0, 0.0, 1.4), (10.0, -1e5, 1.4), (-10.0, -1e5, 1.4), (0.0, -1e5, 1.4), (10.0, 1e5, 1.0), (10.0, 1e5, 0.9),
    (0.0, 1e5, math.nan), (math.nan, 1e5, 1.4), (10.0, 1e5, -2.0),
])
def test_impossible_flow_has_no_factor(impact, static, gamma):
    assert math.isnan(float(pitot.compressibility_factor(impact, static, gamma)))


def test_broadcasts_over_leading_axes():
    pressure = np.arange(1.0, 25.0).reshape(2, 3, 4)
    speed = pitot.velocity(pressure, np.array([1.0, 1.1, 1.2, 1.3]), 0.84, static_pressure=1e5)
    assert speed.shape == (2, 3, 4)
    assert speed[1, 2, 3] == pitot.velocity(24.0, 1.3, 0.84, static_pressure=1e5)


def test_si_velocity_constant():
    """v = 1.29099 sqrt(dp) at 1.2 kg/m3: from the definition, five decimals."""
    assert float(pitot.velocity(1.0, 1.2, 1.0)) == pytest.approx(1.29099, abs=5e-6)


@pytest.mark.parametrize("kind", [np.float32, np.int64])
def test_numbers_of_other_kinds(kind):
    """Whole numbers and single precision are calculated with in double precision."""
    plain = pitot.velocity(kind(100), kind(3), kind(1))
    assert plain.dtype == np.float64
    assert plain == pitot.velocity(100.0, 3.0, 1.0)
    exact = pitot.velocity(kind(100), kind(3), kind(1), static_pressure=kind(90001), ratio_of_specific_heats=kind(3))
    assert exact.dtype == np.float64
    assert exact == pitot.velocity(100.0, 3.0, 1.0, static_pressure=90001.0, ratio_of_specific_heats=3.0)
    assert pitot.compressibility_factor(kind(0), kind(90001), kind(3)) == 1.0
