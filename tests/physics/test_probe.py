"""Calibrated probes and the head in a gradient, against root finding and exact mathematics."""

import numpy as np
import pytest
from scipy.interpolate import interp1d
from scipy.optimize import brentq

from traverse.physics import displacement, pitot, probe

VELOCITY = np.array([4.0, 8.0, 15.0, 30.0, 45.0])
COEFFICIENT = np.array([0.80, 0.825, 0.84, 0.846, 0.845])
CURVE = interp1d(VELOCITY, COEFFICIENT, bounds_error=False, fill_value=(COEFFICIENT[0], COEFFICIENT[-1]))


@pytest.mark.parametrize("reach", [5.2, 7.0, 11.3, 17.9, 26.0, 35.5, 50.0])
@pytest.mark.parametrize("shift", [0.0, 0.01, -0.02])
def test_the_coefficient_is_the_one_of_its_own_velocity(reach, shift):
    """v = C(v) reach, solved by bisection on the interpolated curve."""
    speed = brentq(lambda v: v - (CURVE(v) + shift) * reach, 1e-3, 100.0, xtol=1e-14, rtol=1e-15)
    found = probe.coefficient_at(np.array([reach]), VELOCITY, COEFFICIENT, np.array([shift]))
    assert found[0] * reach == pytest.approx(speed, rel=1e-13)


def test_a_curve_is_held_beyond_its_ends_and_meets_its_nodes():
    assert probe.coefficient_at([0.0, 1.0, 200.0], VELOCITY, COEFFICIENT).tolist() == [0.80, 0.80, 0.845]
    assert probe.coefficient_at(VELOCITY / COEFFICIENT, VELOCITY, COEFFICIENT) == pytest.approx(COEFFICIENT, rel=1e-14)
    assert probe.coefficient_at(np.ones((2, 3, 5)), VELOCITY, COEFFICIENT, np.zeros(1)).shape == (2, 3, 5)


@pytest.mark.parametrize("dp", [20.0, 300.0, 1800.0, 6000.0])
def test_sweeps_with_compressibility(dp):
    """The isentropic velocity depends on the coefficient as well: bisection on the whole equation."""
    density, pressure, ratio = 1.2, 80e3, 1.4
    nodes = np.array([4.0, 60.0, 120.0])
    curve = interp1d(nodes, [0.7, 0.84, 1.1], bounds_error=False, fill_value=(0.7, 1.1))

    def speed(coefficient):
        return pitot.velocity(dp, density, coefficient, static_pressure=pressure, ratio_of_specific_heats=ratio)

    root = brentq(lambda v: v - speed(curve(v)), 1e-3, 400.0, xtol=1e-13, rtol=1e-15)
    reach = np.array([np.sqrt(2 * dp / density)])
    found = probe.sweeps(reach, nodes, [0.7, 0.84, 1.1], 0.0, lambda c: speed(c) / (c * reach))
    assert len(found) < probe.SWEEPS
    assert speed(found[-1])[0] == pytest.approx(root, rel=1e-12)
    assert abs(found[0] - found[-1])[0] > (1e-9 if dp > 100 else 0), "one sweep would not do"


@pytest.mark.parametrize("falls", [1.0, -1.0])
def test_pitch_from_f1(falls):
    angle = np.radians([-20, -10, 0, 10, 20])
    ratio = falls * np.array([-0.7, -0.3, 0.02, 0.33, 0.75])
    dp = np.array([100.0, 200.0, 50.0, 80.0, 0.0, -3.0])
    wanted = np.radians([-20.0, -15.0, 3.0, 14.0, 0.0, 0.0])
    pitch_pressure = np.interp(wanted, angle, ratio) * dp
    assert probe.pitch_angle(dp, pitch_pressure, angle, ratio) == pytest.approx(wanted, abs=1e-14)


def test_pairs_of_an_s_type_tube():
    """Cp(s) = Cp(std) sqrt(dp_std/dp_s); deviations 0.02, 0.01, 0.01 from a mean of 0.84 have a mean of 4/300."""
    assert probe.s_type_coefficient(0.99, [49.0, 0.5], [64.0, 0.72]) == pytest.approx([0.99 * 7 / 8, 0.99 * 5 / 6], rel=1e-15)
    assert np.isnan(probe.s_type_coefficient(0.99, [1.0, 0.0, 1.0], [0.0, 1.0, -1.0])).all()
    assert probe.mean_deviation([0.86, 0.83, 0.83]) == pytest.approx(0.04 / 3, rel=1e-12)


def test_a_shift_in_a_linear_profile_is_undone_exactly():
    """A head that shows the streamline 0.15 d nearer to the fast side reads k (y + 0.15 d); the correction gives k y back."""
    d, k = 2e-3, 7.0
    y = np.array([0.01, 0.014, 0.022, 0.031, 0.05])
    read = k * (y + 0.15 * d)
    slope, ways = displacement.relative_slopes(y, np.full(5, 0.1), read)
    assert {way.kind for way in ways} == {"parabola"}
    assert read * displacement.gradient_factor(d, slope) == pytest.approx(k * y, rel=1e-13)


def test_slopes():
    """Exact for a parabola inside the line and for a power law at the wall."""
    y = np.array([0.05, 0.2, 0.5, 0.8, 0.95])
    wall = np.minimum(y, 1 - y)
    speed = 3.0 + 2.0 * y - y**2
    slope, ways = displacement.relative_slopes(y, wall, speed)
    assert slope[1:4] == pytest.approx(np.abs(2.0 - 2.0 * y[1:4]) / speed[1:4], rel=1e-12)
    power = wall ** (1 / 7)
    slope, ways = displacement.relative_slopes(y, wall, power)
    assert [way.kind for way in ways] == ["wall", "parabola", "parabola", "parabola", "wall"]
    assert slope[[0, 4]] == pytest.approx(1 / (7 * 0.05), rel=1e-12)
    assert displacement.relative_slopes(y, wall, np.zeros(5))[0].tolist() == [0.0] * 5
    assert displacement.relative_slopes(y[:1], wall[:1], power[:1])[1][0].kind == "none"
    two, _ = displacement.relative_slopes(np.array([0.4, 0.5]), np.array([0.5, 0.4]), np.array([2.0, 3.0]))
    assert two == pytest.approx([10 / 2.0, np.log(1.5) / np.log(1.25) / 0.4], rel=1e-12), "secant; power law"


def test_the_forms_of_the_shift():
    """McKeon's shift is 0.15 d tanh(4 sqrt(a)): MacMillan's where the gradient is steep, nothing without one (from memory)."""
    d = 5e-3
    assert displacement.shift(d, [0.0, 30.0], "macmillan") == pytest.approx([0.75e-3] * 2, rel=1e-15)
    assert displacement.shift(d, 0.0, "mckeon") == 0.0
    assert displacement.shift(d, 1e4, "mckeon") == pytest.approx(0.75e-3, rel=1e-12)
    assert displacement.shift(d, 0.01 / (d / 2), "mckeon") == pytest.approx(0.75e-3 * np.tanh(0.4), rel=1e-14)


def test_nearness_of_the_wall():
    """1.5 % on the wall, e^-3.5 of it a diameter farther, nothing two diameters from it (MacMillan, from memory)."""
    assert displacement.wall_factor(1.0, 0.5) == pytest.approx(1.015, rel=1e-15)
    assert displacement.wall_factor(1.0, 1.5) - 1 == pytest.approx(0.015 * np.exp(-3.5), rel=1e-12)
    assert displacement.wall_factor(1.0, 2.0) < 1.0001
