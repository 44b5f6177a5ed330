"""Velocity-area integration against closed forms: the check cases of the method, polynomials, power laws."""

import warnings

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.integrate import quad
from scipy.interpolate import CubicHermiteSpline

from traverse import layouts
from traverse.errors import LayoutError
from traverse.physics.velocity_area import radius_weights, side_weights, wall_exponent

LL5 = "0 .2776 .5658 .6950 .8470 .9622"
EIGHT = "0 .2 .4 .6 .8 .9 .95 .98"


def wall_part(r, m, velocity):
    """Take what the power law carries out of the weights: with m without bound it would be the last velocity times the area."""
    flat = radius_weights(r, 1e13) @ velocity - velocity[-1] * (1 - r[-1] ** 2)
    return float(radius_weights(r, m) @ velocity - flat)


# Mean of (1 - r)^(1/n) with slopes of three-point parabolas and a wall law with m = 7, six digits: reference notes of the project,
# computed from that definition and apart from this program. ISO 3966 prints no example that was found.
@pytest.mark.parametrize(("radii", "n", "peripheral", "cubic"), [
    (LL5, 7, 0.040595, 0.815215), (LL5, 5, 0.033665, 0.757451), (EIGHT, 7, 0.019802, 0.816649),
])
def test_check_cases(radii, n, peripheral, cubic):
    r = np.array([float(word) for word in radii.split()])
    velocity = (1 - r) ** (1 / n)
    assert float(radius_weights(r, 7.0) @ velocity) == pytest.approx(cubic, abs=0.6e-6)
    assert wall_part(r, 7.0, velocity) == pytest.approx(peripheral, abs=0.6e-6)


@given(st.floats(0.05, 0.99), st.floats(4.0, 14.0))
def test_the_wall_law_carries_its_integral(outermost, m):
    """The mean over the disk of (y/y_n)^(1/m) beyond the outermost point, by quadrature in t with y = y_n t^m."""
    y = 1 - outermost
    exact, _ = quad(lambda t: t * 2 * (1 - y * t**m) * y * m * t ** (m - 1), 0.0, 1.0, epsabs=1e-12, epsrel=1e-12)
    assert wall_part(np.array([0.0, 0.02, outermost]), m, np.array([0.0, 0.0, 1.0])) == pytest.approx(exact, rel=1e-6)


@settings(max_examples=40, deadline=None)
@given(st.lists(st.floats(0.02, 0.98), min_size=3, max_size=9), st.integers(0, 10_000))
def test_arcs_are_the_cubics_of_scipy(places, number):
    """Slopes by fitting parabolas, arcs by CubicHermiteSpline, over the line and, with a point on the axis, over (r/R)^2."""
    x = np.sort(np.array(places))
    assume(np.min(np.diff(x, prepend=0.0)) > 0.02)
    velocity = np.random.default_rng(number).uniform(1.0, 2.0, len(x))
    strips = 7 / 8 * (x[0] * velocity[0] + (1 - x[-1]) * velocity[-1])
    assert float(side_weights(x, 7.0) @ velocity) == pytest.approx(hermite(x, velocity) + strips, rel=1e-9)
    x[0] = 0.0
    y = 1 - x[-1]
    outer = 2 * velocity[-1] * y * (7 / 8 - y * 7 / 15)
    assert float(radius_weights(x, 7.0) @ velocity) == pytest.approx(hermite(x**2, velocity) + outer, rel=1e-9)


def hermite(s, velocity):
    slope = []
    for i in range(len(s)):
        three = slice(min(max(i - 1, 0), len(s) - 3), min(max(i - 1, 0), len(s) - 3) + 3)
        slope.append(np.polyval(np.polyder(np.polyfit(s[three] - s[i], velocity[three], 2)), 0.0))
    return float(CubicHermiteSpline(s, velocity, slope).integrate(s[0], s[-1]))


@pytest.mark.parametrize("n", [4, 6, 7, 10])
def test_power_laws_converge_to_their_mean(n):
    """2 n^2/((n + 1)(2n + 1)) for (1 - r)^(1/n): the error falls with the number of points."""
    mean = 2 * n * n / ((n + 1) * (2 * n + 1))
    errors = []
    for count in (8, 20, 60):
        r = 1 - np.geomspace(1.0, 0.01, count)
        errors.append(abs(float(radius_weights(r, n) @ (1 - r) ** (1 / n)) / mean - 1))
    assert errors[0] < 5e-3 and errors[2] < 2e-5 and errors[0] > errors[1] > errors[2]


@given(st.lists(st.floats(0.0, 0.97), min_size=1, max_size=9, unique=True))
def test_parabolas_in_the_square_of_the_radius_are_exact_inside(radii):
    """Within the outermost point the arcs integrate 1, s and s^2 exactly, with or without a point on the axis; two points 1 and s."""
    r = np.sort(np.array(radii))
    assume(np.min(np.diff(r), initial=1.0) > 1e-2)
    s, y = r**2, 1 - r[-1]
    weight = radius_weights(r, 7.0)
    weight[-1] -= 2 * y * (7 / 8 - y * 7 / 15)
    for power in range(min(len(r), 3)):
        assert float(weight @ s**power) == pytest.approx(s[-1] ** (power + 1) / (power + 1), abs=1e-12 * (1 + np.abs(weight).sum()))


@pytest.mark.parametrize("n", [5, 7, 10])
def test_a_line_between_two_walls(n):
    """(distance to the nearer wall)^(1/n), mean n/(n + 1) of its greatest value; the corner on the axis costs below 0.1 %."""
    half = np.geomspace(0.002, 0.5, 30)
    x = np.concatenate([half, 1 - half[:-1][::-1]])
    velocity = (2 * np.minimum(x, 1 - x)) ** (1 / n)
    assert float(side_weights(x, n) @ velocity) == pytest.approx(n / (n + 1), rel=1e-3)
    np.testing.assert_allclose(side_weights(x, n), side_weights(x, n)[::-1], atol=1e-14)


@given(st.lists(st.floats(0.01, 0.99), min_size=1, max_size=9, unique=True), st.floats(4.0, 14.0))
def test_parabolas_along_a_line_and_its_mirror_image(places, m):
    x = np.sort(np.array(places))
    assume(np.min(np.diff(x), initial=1.0) > 1e-2)
    weight = side_weights(x, m)
    size = 1 + np.abs(weight).sum()
    np.testing.assert_allclose(side_weights(1 - x, m), weight, atol=1e-11 * size)
    weight[[0, -1]] -= m / (m + 1) * np.array([x[0], 1 - x[-1]]) if len(x) > 1 else weight[0]
    for power in range(min(len(x), 3)):
        exact = (x[-1] ** (power + 1) - x[0] ** (power + 1)) / (power + 1)
        assert float(weight @ x**power) == pytest.approx(exact, abs=1e-12 * size)


@pytest.mark.parametrize("apart", [0.0, 1e-16, 1e-12])
@pytest.mark.parametrize("weights", [radius_weights, side_weights])
def test_two_readings_in_one_place_share_its_weight(weights, apart):
    """Also where rounding has moved one: a slope between the two would be weighted without bound."""
    once, twice = weights([0.2, 0.6, 0.9], 7.0), weights([0.2, 0.6, 0.6 + apart, 0.9], 7.0)
    np.testing.assert_allclose(twice, [once[0], once[1] / 2, once[1] / 2, once[2]], rtol=1e-10)
    np.testing.assert_allclose(weights([0.9, 0.2, 0.6], 7.0), once[[2, 0, 1]], rtol=1e-14)


def test_the_exponent_of_the_wall_law():
    assert float(wall_exponent(0.1, 0.3, 0.1 ** (1 / 6), 0.3 ** (1 / 6))) == pytest.approx(6.0)
    assert np.isinf(wall_exponent(0.1, 0.3, 5.0, 5.0))
    found = wall_exponent(np.array([0.1, 0.1]), 0.3, np.array([0.1 ** (1 / 3), 5.0]), np.array([0.3 ** (1 / 3), 4.0]))
    np.testing.assert_allclose(found, [3.0, np.nan])


@pytest.mark.parametrize("figures", [
    (0.1, 0.3, 5.0, 4.0), (0.1, 0.3, 0.0, 4.0), (0.1, 0.3, -4.0, 4.0), (0.3, 0.1, 4.0, 5.0), (0.1, 0.1, 4.0, 5.0), (0.0, 0.1, 4.0, 5.0),
    (-0.2, -0.1, 4.0, 5.0), (0.1, np.inf, 4.0, 5.0), (0.1, 0.3, 4.0, np.inf), (0.1, 0.3, np.nan, 5.0),
])
def test_impossible_figures_give_no_exponent(figures):
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        assert np.isnan(wall_exponent(*figures))


@pytest.mark.parametrize(("places", "m"), [
    ([0.5, 1.2], 7.0), ([-0.3, 0.5], 7.0), ([0.5, 1.0], 7.0), ([0.5, np.nan], 7.0), ([0.2, 0.5], -1.0), ([0.2, 0.5], 0.0),
    ([0.2, 0.5], np.nan), ([0.2, 0.5], np.inf),
])
def test_impossible_places_give_no_weights(places, m):
    assert np.isnan(radius_weights(places, m)).all() and np.isnan(side_weights(places, m)).all()


def test_the_axis_is_a_place_and_the_wall_of_a_line_is_not():
    assert np.isfinite(radius_weights([0.0, 0.5], 7.0)).all() and np.isnan(side_weights([0.0, 0.5], 7.0)).all()
    assert radius_weights([], 7.0).shape == side_weights([], 7.0).shape == (0,)


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
    """At 0, 30 and 90 degrees, with gaps of 30, 60 and 90: a diameter stands for half of the gaps beside it, of 180 degrees."""
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
