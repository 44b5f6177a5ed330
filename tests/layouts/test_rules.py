"""The further rules and shapes against printed figures, exact mathematics and their own definitions."""

import numpy as np
import pytest

from traverse import layouts
from traverse.errors import LayoutError
from traverse.physics import sections


def place(name, **change):
    return layouts.place(name, **({"shape": "round", "width": 1.0, "height": 1.0, "lines": 2} | change))


# --- the general method (ISO 10780, EN 13284-1, EN 15259 annex D): positions from its definition, computed apart from this program


@pytest.mark.parametrize(("lines", "points", "expected", "total"), [
    (2, 3, "0.1127", 5), (2, 5, "0.0590 0.2113", 9), (2, 7, "0.0401 0.1331 0.2598", 13), (2, 9, "0.0303 0.0978 0.1792 0.2900", 17),
    (3, 3, "0.1220", 7), (3, 5, "0.0615 0.2226", 13), (3, 7, "0.0412 0.1373 0.2706", 19),
    (4, 3, "0.1273", 9), (4, 5, "0.0628 0.2288", 17), (4, 7, "0.0417 0.1394 0.2764", 25),
])
def test_general_positions(lines, points, expected, total):
    placed = place("general", lines=lines, points=points)
    depth = placed.depth[:points]
    half = (points - 1) // 2
    assert np.abs(depth[:half] - [float(word) for word in expected.split()]).max() < 0.5001e-4
    assert depth[half] == 0.5
    np.testing.assert_allclose(depth + depth[::-1], 1.0, atol=1e-15)
    centre = np.hypot(placed.x, placed.y) < 1e-12
    assert centre.sum() == lines and placed.weight[centre].sum() == pytest.approx(1 / total, rel=1e-12)
    np.testing.assert_allclose(placed.weight[~centre], 1 / total, rtol=1e-12)


GENERAL = {  # errors in percent on profiles of known mean, two diameters, the centre weighted once; computed apart from this program
    "1/5": ("+4.79 +2.32 +1.47", lambda y: y**0.2, 0.757576), "1/7": ("+3.67 +1.83 +1.19", lambda y: y ** (1 / 7), 0.816667),
    "1/10": ("+2.71 +1.39 +0.91", lambda y: y**0.1, 0.865801), "parabola": ("+4.00 +1.23 +0.59", lambda y: 1 - (1 - y) ** 2, 0.5),
    "log": ("+4.51 +2.45 +1.68", lambda y: 1 + 0.12 * np.log(y), 0.82),
    "log+y": ("+4.39 +2.22 +1.47", lambda y: 1 + 0.10 * np.log(y) + 0.20 * y, 0.916667),
}


@pytest.mark.parametrize("name", GENERAL)
def test_general_layout_errors(name):
    errors, profile, mean = GENERAL[name]
    for points, error in zip((3, 5, 7), errors.split(), strict=True):
        placed = place("general", points=points)
        found = float(placed.weight @ profile(1 - 2 * np.hypot(placed.x, placed.y))) / mean - 1
        assert 100 * found == pytest.approx(float(error), abs=0.0101)


def test_a_centre_read_on_every_diameter_counts_once():
    """Averaging each diameter's own list with its own centre would give the centre as much as a ring point."""
    placed = place("general", points=5)
    peak = np.where(np.hypot(placed.x, placed.y) < 1e-9, 1.0, 0.0)
    assert float(placed.weight @ peak) == pytest.approx(1 / 9)


def test_a_centre_that_is_read_once():
    each, once = place("general", points=5), place("general", points=5, centre="once")
    assert len(once.x) == 9 and once.line.count("B") == 4 and once.point[-4:] == (1, 2, 3, 4)
    np.testing.assert_allclose(once.weight, 1 / 9)
    velocity = lambda p: 1 + 0.3 * p.x - 0.2 * p.y + p.x**2  # noqa: E731
    assert float(once.weight @ velocity(once)) == pytest.approx(float(each.weight @ velocity(each)))
    with pytest.raises(LayoutError, match="centre point"):
        place("log-linear", points=6, centre="once")


# --- the 26-point scheme (ISO 3966, from memory)


def test_the_scheme_of_26_points():
    placed = place("log-linear-26", shape="rectangle", width=2.0, height=1.0, lines=0)
    assert len(placed.x) == 26 and placed.weight.sum() == pytest.approx(1.0, abs=1e-14)
    per_line = [sum(w for w, line in zip(placed.weight, placed.line, strict=True) if line == name) for name in "ABCD"]
    np.testing.assert_allclose(per_line, 0.25, rtol=1e-12)  # each line totals 24 of 96
    assert sorted({round(96 * w) for w in placed.weight}) == [2, 3, 5, 6]
    np.testing.assert_allclose(sorted(set(np.round(placed.x, 9))), np.array([0.092, 0.3675, 0.6325, 0.908]) * 2 - 1, atol=1e-9)
    assert float(placed.weight @ placed.x) == pytest.approx(0, abs=1e-14) and float(placed.weight @ placed.y) == pytest.approx(0, abs=1e-14)
    turned = place("log-linear-26", shape="rectangle", width=1.0, height=2.0, lines=4, along="width")
    assert set(zip(np.round(turned.x, 9), np.round(turned.y, 9), np.round(96 * turned.weight), strict=True)) == set(
        zip(np.round(-placed.y, 9), np.round(-placed.x, 9), np.round(96 * placed.weight), strict=True))


@pytest.mark.parametrize(("k", "error"), [(0.05, -0.05), (0.10, -0.12)])
def test_the_scheme_of_26_points_on_a_logarithmic_wall_law(k, error):
    """v = 1 + k (ln of the relative wall distance in both directions): mean 1 - 2 k; errors computed apart from this program."""
    placed = place("log-linear-26", shape="rectangle", width=1.0, height=1.0, lines=0)
    velocity = 1 + k * (np.log(1 - 2 * np.abs(placed.x)) + np.log(1 - 2 * np.abs(placed.y)))
    assert 100 * (float(placed.weight @ velocity) / (1 - 2 * k) - 1) == pytest.approx(error, abs=0.0051)


# --- rules that are equal areas under another name


@pytest.mark.parametrize("name", ["tangential", "en-15259", "jis-z-8808", "alternative-site", "small-duct"])
def test_the_same_rings_under_another_name(name):
    points = 20 if name == "alternative-site" else 10 if name == "jis-z-8808" else 8
    own, equal = layouts.fractions(name, "round", points), layouts.fractions("equal-area", "round", points)
    np.testing.assert_array_equal(own, equal)


@pytest.mark.parametrize(("rings", "radii"), [
    # JIS Z 8808 as it is taught, from memory; five rings also JIS B 8330, second-hand
    (1, "0.707"), (2, "0.500 0.866"), (3, "0.408 0.707 0.913"), (4, "0.354 0.612 0.791 0.935"), (5, "0.316 0.548 0.707 0.837 0.949"),
])
def test_rings_of_flue_gas(rings, radii):
    fraction, _ = layouts.fractions("jis-z-8808", "round", 2 * rings)
    assert np.abs(np.sort(1 - 2 * fraction[:rings]) - [float(r) for r in radii.split()]).max() <= 0.0005001


def test_the_fan_test_fixes_lines_and_points():
    placed = place("fan-test", lines=0, points=8)
    assert len(placed.x) == 24 and placed.line[0] == "A" and placed.line[-1] == "C"
    np.testing.assert_allclose(placed.depth[:4], [0.021, 0.117, 0.184, 0.345], atol=0.5001e-3)  # AMCA 210 / ISO 5801, from memory
    np.testing.assert_allclose(np.degrees(np.arctan2(placed.y[8], placed.x[8])), 60.0)


@pytest.mark.parametrize(("arguments", "message"), [
    ({"name": "alternative-site", "points": 18}, "at least 40"), ({"name": "small-duct", "points": 2}, "at least 8"),
    ({"name": "small-duct", "points": 6, "lines": 3}, "multiple of 4"), ({"name": "fan-test", "points": 6}, "3 lines"),
    ({"name": "fan-test", "points": 6, "lines": 3}, "8, the points"), ({"name": "jis-z-8808", "points": 12}, "one to five rings"),
    ({"name": "jis-z-8808", "points": 4, "lines": 3}, "2 lines"), ({"name": "general", "points": 4}, "odd number"),
    ({"name": "log-linear-26", "points": 26}, "rectangle"), ({"name": "log-linear-26", "shape": "rectangle", "lines": 5}, "4, the lines"),
    ({"name": "log-linear-26", "shape": "rectangle", "lines": 4, "points": 7}, "26 in all"),
    ({"name": "log-tchebycheff", "shape": "annulus", "core": 0.5, "points": 6}, "no rule for a annulus"),
    ({"name": "equal-area", "shape": "polygon", "points": 6}, "no rule for a polygon"), ({"name": "equal-area", "shape": "annulus", "points": 2}, "core"),
    ({"name": "equal-area", "shape": "annulus", "points": 2, "core": 1.0}, "core"), ({"name": "equal-area", "shape": "rectangle", "points": 2, "radii": True}, "radii"),
    ({"name": "equal-area", "shape": "flat-oval", "width": 1.2, "lines": 3, "points": 4}, "on its two axes"),
    ({"name": "equal-area", "shape": "flat-oval", "width": 1.2, "points": 5}, "even"),
    ({"name": "general", "points": 5, "lines": 3, "digits": "printed"}, "3 diameters"),
])
def test_layouts_that_a_rule_does_not_have(arguments, message):
    with pytest.raises(LayoutError, match=message):
        place(arguments.pop("name"), **arguments)


# --- shapes


def test_an_ellipse_is_a_stretched_circle():
    """Points are set on each diameter by itself (EPA Method 1, 11.3.1.3), so that the weights stay those of the circle."""
    circle = place("equal-area", points=6)
    oval = place("equal-area", shape="ellipse", width=3.0, height=2.0, points=6)
    np.testing.assert_allclose(oval.x, 3.0 * circle.x, atol=1e-14)
    np.testing.assert_allclose(oval.y, 2.0 * circle.y, atol=1e-14)
    np.testing.assert_array_equal(oval.weight, circle.weight)
    assert oval.depth[5] == pytest.approx(circle.depth[5] * 3.0) and oval.depth[11] == pytest.approx(circle.depth[11] * 2.0)
    slant = place("equal-area", shape="ellipse", width=3.0, height=2.0, points=6, angles=[0.6, 2.0])
    angle = np.array([0.6, 2.0])
    foot = np.column_stack([np.cos(angle), np.sin(angle)]) / np.hypot(np.cos(angle) / 1.5, np.sin(angle) / 1.0)[:, None]
    np.testing.assert_allclose(np.hypot(slant.x[[0, 6]] - foot[:, 0], slant.y[[0, 6]] - foot[:, 1]), slant.depth[[0, 6]], rtol=1e-12)
    np.testing.assert_allclose(slant.depth[[5, 11]] + slant.depth[[0, 6]], 2 * np.hypot(*foot.T), rtol=1e-12)


@pytest.mark.parametrize("core", [0.1, 0.5, 0.9])
def test_rings_of_equal_area_around_a_core(core):
    """Exact for velocities linear in the square of the radius: the mean of r^2 over the ring is (R^2 + r_0^2)/2."""
    placed = place("equal-area", shape="annulus", core=core, lines=4, points=3)
    radius = np.hypot(placed.x, placed.y)
    assert float(placed.weight @ radius**2) == pytest.approx((0.25 + core**2 / 4) / 2, rel=1e-12)
    assert np.all((radius > core / 2) & (radius < 0.5)) and np.allclose(0.5 - radius, placed.depth)
    assert sorted(np.round(np.degrees(np.arctan2(placed.y[::3], placed.x[::3])) % 360)) == [0, 90, 180, 270]


@pytest.mark.parametrize(("width", "height"), [(2.0, 0.7), (0.7, 2.0), (1.0, 0.9), (0.9, 1.0), (1.5, 0.75)])
def test_flat_oval(width, height):
    narrow = abs(width - height) < min(width, height)
    placed = place("equal-area", shape="flat-oval", width=width, height=height, lines=2 if narrow else 4, points=4)
    size = {"width": width, "height": height}
    assert sections.contains("flat-oval", size, placed.x, placed.y).all()
    assert placed.weight.sum() == pytest.approx(1.0, abs=1e-14)
    assert float(placed.weight @ placed.x) == pytest.approx(0, abs=1e-14) and float(placed.weight @ placed.y) == pytest.approx(0, abs=1e-14)
    assert len(placed.x) == (8 if narrow else 4 * 4 + 3 * 4)
    if not narrow:
        straight, short = abs(width - height), min(width, height)
        part = straight * short / float(sections.area("flat-oval", size))
        assert placed.weight[:16].sum() == pytest.approx(part, rel=1e-12)
        # The half circles together are one round duct: linear in the square of the radius about its own centre is exact.
        ends = slice(16, None)
        along = (placed.y if height > width else placed.x)[ends]
        beside = (placed.x if height > width else placed.y)[ends]
        squared = (np.maximum(np.abs(along) - straight / 2, 0)) ** 2 + beside**2
        assert float(placed.weight[ends] @ squared) / (1 - part) == pytest.approx(short**2 / 8, rel=1e-12)


def test_radii_from_one_side_are_half_the_diameters():
    whole, half = place("log-linear", points=6), place("log-linear", points=3, lines=4, radii=True)
    assert {(round(a, 12), round(b, 12)) for a, b in zip(whole.x, whole.y, strict=True)} == {
        (round(a, 12), round(b, 12)) for a, b in zip(half.x, half.y, strict=True)}
    np.testing.assert_allclose(half.weight, 1 / 12)
    assert np.all(half.depth < 0.5)


def test_radii_of_the_general_method_share_the_centre():
    half = place("general", points=3, lines=4, radii=True)
    whole = place("general", points=5)
    centre = np.hypot(half.x, half.y) < 1e-12
    assert centre.sum() == 4 and half.weight[centre].sum() == pytest.approx(whole.weight[np.hypot(whole.x, whole.y) < 1e-12].sum())
    np.testing.assert_allclose(half.depth[:2], whole.depth[:2], rtol=1e-14)


def test_one_radius_alone_and_four_diameters():
    assert place("equal-area", lines=1, points=3, radii=True, angles=[1.0]).weight == pytest.approx(1 / 3)
    assert len(place("equal-area", lines=4, points=6).x) == 24


@pytest.mark.parametrize("name", layouts.rules())
def test_a_rule_names_the_shapes_it_has(name):
    rule = layouts.rules()[name]
    assert set(rule.shapes()) <= set(sections.SHAPES)
    for shape in set(sections.SHAPES) - set(rule.shapes()):
        with pytest.raises(LayoutError, match="no rule for"):
            rule.refuse_shape(shape)

