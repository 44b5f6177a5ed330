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
    with np.errstate(invalid="ignore"):
        for call in (
            lambda: pitot.velocity(-1.0, 1.2, 1.0), lambda: pitot.compressibility_factor(-1.0, 1e5, 1.4),
            lambda: pitot.compressibility_factor(10.0, 0.0, 1.4), lambda: pitot.velocity(10.0, -1.2, 1.0),
        ):
            assert math.isnan(float(call()))


def test_broadcasts_over_leading_axes():
    pressure = np.arange(1.0, 25.0).reshape(2, 3, 4)
    speed = pitot.velocity(pressure, np.array([1.0, 1.1, 1.2, 1.3]), 0.84, static_pressure=1e5)
    assert speed.shape == (2, 3, 4)
    assert speed[1, 2, 3] == pitot.velocity(24.0, 1.3, 0.84, static_pressure=1e5)


def test_si_velocity_constant():
    """v = 1.29099 sqrt(dp) at 1.2 kg/m3: from the definition, five decimals."""
    assert float(pitot.velocity(1.0, 1.2, 1.0)) == pytest.approx(1.29099, abs=5e-6)
