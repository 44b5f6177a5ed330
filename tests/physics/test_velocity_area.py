"""Velocity-area integration against closed forms: the check cases of the method, polynomials, power laws."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse import layouts
from traverse.errors import LayoutError
from traverse.physics.velocity_area import radius_weights, side_weights, wall_exponent

LL5 = "0 .2776 .5658 .6950 .8470 .9622"
EIGHT = "0 .2 .4 .6 .8 .9 .95 .98"


@pytest.mark.parametrize(("radii", "n", "peripheral", "cubic"), [
    # Three-point parabolas, wall law with m = 7, mean of (1 - r)^(1/n); computed apart from this program to six digits.
    (LL5, 7, 0.040595, 0.815215), (LL5, 5, 0.033665, 0.757451), (EIGHT, 7, 0.019802, 0.816649),
])
def test_check_cases(radii, n, peripheral, cubic):
    r = np.array([float(word) for word in radii.split()])
    velocity = (1 - r) ** (1 / n)
    assert float(radius_weights(r, 7.0) @ velocity) == pytest.approx(cubic, abs=0.6e-6)
    y = 1 - r[-1]
    assert 2 * velocity[-1] * y * (7 / 8 - y * 7 / 15) == pytest.approx(peripheral, abs=0.6e-6)


@pytest.mark.parametrize("n", [4, 6, 7, 10])
def test_power_laws_converge_to_their_mean(n):
    """2 n^2/((n + 1)(2n + 1)) for (1 - r)^(1/n): the error falls with the number of points."""
    mean = 2 * n * n / ((n + 1) * (2 * n + 1))
    errors = []
    for count in (8, 20, 60):
        r = 1 - np.geomspace(1.0, 0.01, count)
        errors.append(abs(float(radius_weights(r, n) @ (1 - r) ** (1 / n)) / mean - 1))
    assert errors[0] < 5e-3 and errors[2] < 2e-5 and errors[0] > errors[1] > errors[2]


@given(st.lists(st.floats(0.0, 0.97), min_size=4, max_size=9, unique=True), st.floats(-2, 2), st.floats(-2, 2))
def test_parabolas_in_the_square_of_the_radius_are_exact_inside(radii, b, c):
    """Within the outermost point the arcs integrate 1, s and s^2 exactly, with or without a point on the axis."""
    r = np.sort(np.array(radii))
    if np.min(np.diff(r)) < 1e-3:
        return
    s = r**2
    y = 1 - r[-1]
    weight = radius_weights(r, 7.0)
    weight[-1] -= 2 * y * (7 / 8 - y * 7 / 15)
    for value, integral in ((np.ones_like(s), s[-1]), (b * s, b * s[-1] ** 2 / 2), (c * s**2, c * s[-1] ** 3 / 3)):
        scale = 1 + np.abs(weight).sum()
        assert float(weight @ value) == pytest.approx(integral, abs=1e-9 * scale)


@pytest.mark.parametrize("n", [5, 7, 10])
def test_a_line_between_two_walls(n):
    """(distance to the nearer wall)^(1/n), mean n/(n + 1) of its greatest value; the corner on the axis costs below 0.1 %."""
    half = np.geomspace(0.002, 0.5, 30)
    x = np.concatenate([half, 1 - half[:-1][::-1]])
    velocity = (2 * np.minimum(x, 1 - x)) ** (1 / n)
    assert float(side_weights(x, n) @ velocity) == pytest.approx(n / (n + 1), rel=1e-3)
    np.testing.assert_allclose(side_weights(x, n), side_weights(x, n)[::-1], atol=1e-14)


def test_two_readings_in_one_place_share_its_weight():
    once, twice = radius_weights([0.2, 0.6, 0.9], 7.0), radius_weights([0.2, 0.6, 0.6, 0.9], 7.0)
    np.testing.assert_allclose(twice, [once[0], once[1] / 2, once[1] / 2, once[2]], rtol=1e-12)
    np.testing.assert_allclose(radius_weights([0.9, 0.2, 0.6], 7.0), once[[2, 0, 1]], rtol=1e-14)


def test_the_exponent_of_the_wall_law():
    assert float(wall_exponent(0.1, 0.3, 0.1 ** (1 / 6), 0.3 ** (1 / 6))) == pytest.approx(6.0)
    assert np.isinf(wall_exponent(0.1, 0.3, 5.0, 5.0))
    assert np.isnan(wall_exponent(0.1, 0.3, 5.0, 4.0)) and np.isnan(wall_exponent(0.1, 0.3, 0.0, 4.0)) and np.isnan(wall_exponent(0.3, 0.1, 4.0, 5.0))


# --- over whole sections

ROUND = {"diameter": 1.0}


def points(lines, per_line, angles=None, **change):
    return layouts.place("log-linear", shape="round", width=1.0, height=1.0, lines=lines, points=per_line, angles=angles, **change)


@pytest.mark.parametrize(("lines", "angles"), [(1, None), (2, None), (3, None), (2, [0.0, 0.5])])
def test_an_axisymmetric_profile_over_diameters(lines, angles):
    placed = points(lines, 10, angles)
    weight = layouts.velocity_area("round", ROUND, placed.line, placed.x, placed.y, 7.0)
    r = 2 * np.hypot(placed.x, placed.y)
    assert float(weight @ (1 - r) ** (1 / 7)) == pytest.approx(0.816667, rel=2.5e-3)
    assert 0.95 < weight.sum() < 1.0
    assert layouts.fitted_exponent("round", ROUND, placed.line, placed.x, placed.y, (1 - r) ** (1 / 7))[0] == pytest.approx(7.0)


def test_unevenly_spaced_diameters_are_weighted_by_their_sector():
    """Angles 0 and 30 degrees: each radius stands for half the angle to its neighbours, 90 of 360 degrees in both cases."""
    placed = points(3, 6, [0.0, np.radians(30), np.radians(90)])
    weight = layouts.velocity_area("round", ROUND, placed.line, placed.x, placed.y, 7.0)
    per_line = weight.reshape(3, 6).sum(axis=1) / weight.sum()
    np.testing.assert_allclose(per_line, np.array([60, 45, 75]) / 180, rtol=1e-9)


@pytest.mark.parametrize("along", ["height", "width"])
def test_a_rectangle(along):
    placed = layouts.place("log-tchebycheff", shape="rectangle", width=2.0, height=1.0, lines=7, points=7, along=along)
    size = {"width": 2.0, "height": 1.0}
    weight = layouts.velocity_area("rectangle", size, placed.line, placed.x, placed.y, 7.0)
    profile = ((1 - np.abs(placed.x)) * (1 - 2 * np.abs(placed.y))) ** (1 / 7)
    assert float(weight @ profile) == pytest.approx((7 / 8) ** 2, rel=6e-3)
    assert layouts.fitted_exponent("rectangle", size, placed.line, placed.x, placed.y, profile)[0] == pytest.approx(7.0)


@pytest.mark.parametrize(("shape", "size", "line", "x", "y", "message"), [
    ("ellipse", {"width": 2.0, "height": 1.0}, ["A"], [0.0], [0.0], "round or rectangular"),
    ("round", ROUND, ["A", "A"], [0.1, -0.1], [0.0, 0.0], "single point"),
    ("round", ROUND, ["A", "A", "A"], [0.1, 0.3, 0.4], [0.0, 0.1, 0.0], "no diameter"),
    ("rectangle", {"width": 1.0, "height": 1.0}, ["A", "A"], [0.1, 0.2], [0.1, 0.2], "not parallel"),
    ("rectangle", {"width": 1.0, "height": 1.0}, ["A", "A", "B", "B"], [0.1, 0.1, 0.2, 0.3], [0.1, 0.2, 0.3, 0.3], "both ways"),
])
def test_points_that_cannot_be_integrated(shape, size, line, x, y, message):
    with pytest.raises(LayoutError, match=message):
        layouts.integrable(shape, size, line, np.array(x), np.array(y))


def test_no_end_gives_an_exponent():
    placed = points(1, 4)
    assert layouts.fitted_exponent("round", ROUND, placed.line, placed.x, placed.y, np.array([5.0, 4.0, 4.0, 5.0])) == (7.0, 0)
