"""Shares of a section nearest to each point: areas worked out by hand, symmetry, scan lines, and counted random places."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from traverse import layouts
from traverse.physics import sections
from traverse.physics.voronoi import clip, disk_area, polygon_area, shares


def polygon(*corners, shift=0.0):
    return {f"{axis}{k}": value + shift for k, corner in enumerate(corners, 1) for axis, value in zip("xy", corner, strict=True)}


ELL_CORNERS = ((0.0, 0.0), (3.0, 0.0), (3.0, 1.0), (1.0, 1.0), (1.0, 2.0), (0.0, 2.0))
ELL = polygon(*ELL_CORNERS)
DISK = {"diameter": 2.0}
OVAL = {"width": 2.0, "height": 0.8}
SHAPES = {
    "round": DISK, "ellipse": {"width": 3.0, "height": 1.4}, "rectangle": {"width": 2.0, "height": 0.7},
    "flat-oval": OVAL, "annulus": {"diameter": 2.0, "core": 0.9}, "polygon": ELL,
}


def segment(radius, height):
    """Area of a disk beyond a chord at a distance from its centre."""
    return radius**2 * math.acos(height / radius) - height * math.sqrt(radius**2 - height**2)


def inside(shape, random, count):
    left, right, bottom, top = (float(v) for v in sections.bounds(shape, SHAPES[shape]))
    x, y = random.uniform(left, right, 3 * count + 60), random.uniform(bottom, top, 3 * count + 60)
    kept = np.flatnonzero(sections.contains(shape, SHAPES[shape], x, y))[:count]
    return x[kept], y[kept]


# --- areas worked out by hand

@pytest.mark.parametrize("shape", SHAPES)
def test_one_point_has_everything(shape):
    x, y = (0.5, 0.5) if shape == "polygon" else (0.7, 0.1)
    assert shares(shape, SHAPES[shape], [x], [y]) == pytest.approx([1.0], rel=1e-12)


def test_two_points_in_a_disk_are_parted_by_a_chord():
    assert shares("round", DISK, [0.3, -0.3], [0.0, 0.0]) == pytest.approx([0.5, 0.5], rel=1e-12)
    assert shares("round", DISK, [0.5, 0.0], [0.0, 0.0])[0] == pytest.approx(segment(1.0, 0.25) / math.pi, rel=1e-12)
    # An ellipse is a disk drawn out: x = 0.3 of 1.5 is 0.2 of the radius.
    assert shares("ellipse", SHAPES["ellipse"], [0.8, -0.2], [0.0, 0.0])[0] == pytest.approx(segment(1.0, 0.2) / math.pi, rel=1e-12)


@pytest.mark.parametrize("turn", np.linspace(0.0, np.pi / 2, 13))
def test_two_diameters_whose_cells_meet_on_the_axis(turn):
    """Six points on each of two diameters at right angles: half-way lines cut each quarter |y| < x at 0.5444 and 0.8330."""
    radius = np.array([0.3586, 0.7302, 0.9358])
    angle = turn + np.arange(4) * np.pi / 2
    found = shares("round", DISK, np.outer(np.cos(angle), radius).ravel(), np.outer(np.sin(angle), radius).ravel())
    # The innermost cell is a triangle, apex on the axis: the ends of its base are at 0.77. The outermost is a whole segment.
    innermost, outermost = ((0.3586 + 0.7302) / 2) ** 2, segment(1.0, (0.7302 + 0.9358) / 2)
    exact = np.array([innermost, math.pi / 4 - innermost - outermost, outermost]) / math.pi
    np.testing.assert_allclose(found.reshape(4, 3), np.tile(exact, (4, 1)), rtol=1e-11)


@pytest.mark.parametrize("lines", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("shape", ["round", "annulus"])
def test_rays_at_equal_angles_are_alike(shape, lines):
    radius = np.array([0.55, 0.75, 0.9])
    for turn in np.linspace(0.0, 1.0, 12):
        angle = turn + np.arange(2 * lines) * np.pi / lines
        found = shares(shape, SHAPES[shape], np.outer(np.cos(angle), radius).ravel(), np.outer(np.sin(angle), radius).ravel())
        np.testing.assert_allclose(found.reshape(2 * lines, 3).sum(axis=1), 1 / (2 * lines), rtol=1e-11)
        np.testing.assert_allclose(found.reshape(2 * lines, 3), np.tile(found[:3], (2 * lines, 1)), rtol=1e-10)


def test_a_regular_ring_and_its_centre():
    """Six points at 0.8 and the centre: the centre's cell is the hexagon of inradius 0.4, area 2 sqrt(3) 0.16."""
    angle = np.arange(6) * np.pi / 3
    found = shares("round", DISK, np.append(0.8 * np.cos(angle), 0.0), np.append(0.8 * np.sin(angle), 0.0))
    assert found[-1] == pytest.approx(2 * math.sqrt(3) * 0.16 / math.pi, rel=1e-12)
    np.testing.assert_allclose(found[:-1], (1 - found[-1]) / 6, rtol=1e-12)


def test_four_points_around_a_core():
    angle = np.arange(4) * np.pi / 2 + 0.3
    np.testing.assert_allclose(shares("annulus", SHAPES["annulus"], 0.7 * np.cos(angle), 0.7 * np.sin(angle)), 0.25, rtol=1e-12)
    # Two points parted by a chord at 0.2 that cuts the core as well.
    exact = (segment(1.0, 0.2) - segment(0.45, 0.2)) / (math.pi * (1 - 0.45**2))
    assert shares("annulus", SHAPES["annulus"], [0.9, -0.5], [0.0, 0.0])[0] == pytest.approx(exact, rel=1e-12)


def test_centres_of_equal_rectangles_have_equal_shares():
    placed = layouts.place("equal-area", shape="rectangle", width=2.0, height=0.7, lines=5, points=4)
    np.testing.assert_allclose(shares("rectangle", SHAPES["rectangle"], placed.x, placed.y), 1 / 20, rtol=1e-12)


@pytest.mark.parametrize(("places", "cut"), [((0.0, 0.9), 0.45), ((0.5, 0.9), 0.7)])
@pytest.mark.parametrize("standing", [False, True])
def test_a_flat_oval_by_hand(places, cut, standing):
    """2.0 m by 0.8 m: 1.2 m by 0.8 m between two half disks of 0.4 m, cut in the straight part and in the round end."""
    beyond = (0.6 - cut) * 0.8 + math.pi * 0.08 if cut < 0.6 else segment(0.4, cut - 0.6)
    total = 1.2 * 0.8 + math.pi * 0.16
    along, beside = np.array(places), np.array([0.1, 0.1])
    size, x, y = ({"width": 0.8, "height": 2.0}, beside, along) if standing else (OVAL, along, beside)
    found = shares("flat-oval", size, x, y)
    np.testing.assert_allclose(found, [1 - beyond / total, beyond / total], rtol=1e-12)


@pytest.mark.parametrize("shift", [0.0, 12345.678])
def test_a_corner_by_hand(shift):
    """An L: a foot of 3 m by 1 m, and 1 m by 1 m standing on its left end; 4 m2. Far off, coordinates round at 1e-12 m."""
    x, y = np.array([0.5, 2.0, 0.5]) + shift, np.array([0.5, 0.5, 1.5]) + shift
    # Nearest to (2, 0.5): x > 1.25, 1.75 m2. Nearest to (0.5, 1.5): y > 1, 1 m2. The rest, 1.25 m2, to (0.5, 0.5).
    for corners in (ELL_CORNERS, ELL_CORNERS[::-1]):
        found = shares("polygon", polygon(*corners, shift=shift), x, y)
        np.testing.assert_allclose(found, np.array([1.25, 1.75, 1.0]) / 4.0, rtol=5e-11)


def test_a_cell_in_two_pieces():
    """A U of 3 m by 2 m with a gap of 1 m by 1 m from above, 5 m2."""
    size = polygon((0, 0), (3, 0), (3, 2), (2, 2), (2, 1), (1, 1), (1, 2), (0, 2))
    # Nearest to (0.5, 1.5): x < 1.5 and y > x, so 1/2 m2 of the foot and an arm of 1 m2; the same on the right.
    np.testing.assert_allclose(shares("polygon", size, [0.5, 1.5, 2.5], [1.5, 0.5, 1.5]), [0.3, 0.4, 0.3], rtol=1e-12)
    # Above y = 1.1 there is a piece of 0.9 m2 in either arm.
    np.testing.assert_allclose(shares("polygon", size, [0.5, 0.5], [1.5, 0.7]), [0.36, 0.64], rtol=1e-12)


@pytest.mark.parametrize("apart", [0.0, 1e-12])
def test_points_in_one_place_share_its_cell(apart):
    np.testing.assert_allclose(shares("round", DISK, [0.3, -0.3, -0.3 - apart], [0.0, 0.0, 0.0]), [0.5, 0.25, 0.25], rtol=1e-9)


@pytest.mark.parametrize(("size", "x"), [(DISK, [0.3, 1.2]), (DISK, [0.3, np.nan]), ({"diameter": -2.0}, [0.3, 0.1])])
def test_impossible_points_give_no_shares(size, x):
    assert np.isnan(shares("round", size, x, [0.0, 0.0])).all()


@pytest.mark.parametrize("shape", ["round", "ellipse", "rectangle", "flat-oval", "annulus"])
@pytest.mark.parametrize("what", ["lining", "deposit"])
def test_what_lies_on_the_walls_is_off_the_section(shape, what):
    """0.05 m on every wall leaves the section that is stated smaller by 0.1 m; a core has no lining, but it has a deposit."""
    change = {"width": -0.1, "height": -0.1, "diameter": -0.1, "core": 0.1 if what == "deposit" else 0.0}
    smaller = {name: value + change[name] for name, value in SHAPES[shape].items()}
    x, y = [0.6, -0.55, 0.52], [0.1, 0.05, -0.2]
    np.testing.assert_allclose(shares(shape, {**SHAPES[shape], what: 0.05}, x, y), shares(shape, smaller, x, y), rtol=1e-12)


# --- any points

def spans(shape, y):
    """Return the stretches of horizontal lines inside a section, as pairs of arrays."""
    with np.errstate(invalid="ignore"):
        def circle(radius):
            return np.sqrt(np.maximum(radius**2 - y**2, 0.0))
        if shape == "annulus":
            return [(-circle(1.0), -circle(0.45)), (circle(0.45), circle(1.0))]
        half = {
            "round": circle(1.0), "ellipse": 1.5 / 0.7 * circle(0.7), "rectangle": np.full_like(y, 1.0), "flat-oval": 0.6 + circle(0.4),
        }
    if shape == "polygon":
        return [(0.0 * y, np.where(y < 1.0, 3.0, 1.0))]
    return [(-half[shape], half[shape])]


def scanned(shape, x, y, rows=4000):
    """Sum the stretches of many horizontal lines that are nearer to a point than to the others; each stretch is exact."""
    _, _, bottom, top = (float(v) for v in sections.bounds(shape, SHAPES[shape]))
    row = bottom + (np.arange(rows) + 0.5) / rows * (top - bottom)
    length = np.empty(len(x))
    for i in range(len(x)):
        low, high = np.full(rows, -np.inf), np.full(rows, np.inf)
        for j in set(range(len(x))) - {i}:
            place = ((x[j]**2 + y[j]**2 - x[i]**2 - y[i]**2) / 2 - (y[j] - y[i]) * row) / (x[j] - x[i])
            low, high = (low, np.minimum(high, place)) if x[j] > x[i] else (np.maximum(low, place), high)
        length[i] = sum(np.maximum(np.minimum(high, b) - np.maximum(low, a), 0.0).sum() for a, b in spans(shape, row))
    return length * (top - bottom) / rows


@settings(max_examples=40, deadline=None)
@given(st.sampled_from(sorted(SHAPES)), st.integers(1, 12), st.integers(0, 10_000))
def test_shares_are_what_scan_lines_find(shape, count, number):
    """4000 lines: the round walls cost the middle rule about (1/4000)^1.5, 4e-6 of the area."""
    x, y = inside(shape, np.random.default_rng(number), count)
    found = shares(shape, SHAPES[shape], x, y)
    # The shares are parts of the whole section: nothing but cells that fit makes them sum to 1.
    assert found.sum() == pytest.approx(1.0, abs=1e-12) and np.all(found > 0)
    length = scanned(shape, x, y)
    np.testing.assert_allclose(found, length / float(sections.area(shape, SHAPES[shape])), atol=2e-5)


@pytest.mark.parametrize("shape", SHAPES)
def test_shares_are_what_random_places_count(shape):
    """Of N random places a share p gets N p +- sqrt(N p (1 - p)); five times that is passed by chance once in 40 000 runs of all."""
    random = np.random.default_rng(20_240_501)
    x, y = inside(shape, random, 7)
    px, py = inside(shape, random, 60_000)
    counted = np.bincount(np.argmin(np.hypot(px[:, None] - x, py[:, None] - y), axis=1), minlength=7)
    found = shares(shape, SHAPES[shape], x, y)
    assert np.all(np.abs(counted - len(px) * found) < 5 * np.sqrt(len(px) * found * (1 - found)))


@settings(max_examples=30, deadline=None)
@given(st.integers(2, 9), st.integers(0, 10_000), st.floats(0, 6.2))
def test_turning_a_disk_changes_nothing(count, number, turn):
    x, y = inside("round", np.random.default_rng(number), count)
    turned = np.cos(turn) * x - np.sin(turn) * y, np.sin(turn) * x + np.cos(turn) * y
    np.testing.assert_allclose(shares("round", DISK, *turned), shares("round", DISK, x, y), atol=1e-11)


@settings(max_examples=30, deadline=None)
@given(st.sampled_from(["round", "ellipse", "rectangle", "flat-oval", "annulus"]), st.integers(2, 9), st.integers(0, 10_000))
def test_mirroring_and_another_order_change_nothing(shape, count, number):
    x, y = inside(shape, np.random.default_rng(number), count)
    first = shares(shape, SHAPES[shape], x, y)
    np.testing.assert_allclose(shares(shape, SHAPES[shape], -x, y), first, atol=1e-12)
    np.testing.assert_allclose(shares(shape, SHAPES[shape], x, -y), first, atol=1e-12)
    np.testing.assert_allclose(shares(shape, SHAPES[shape], x[::-1], y[::-1])[::-1], first, atol=1e-12)


def test_disk_and_polygon_areas():
    square = np.array([[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]])
    assert disk_area(square, 0.5) == pytest.approx(math.pi / 4) and disk_area(square, 3.0) == pytest.approx(4.0)
    assert disk_area(square[::-1], 0.5) == pytest.approx(-math.pi / 4)
    assert disk_area(square + 1.0, 1.0) == pytest.approx(math.pi / 4)
    # A corner a rounding error from the centre, and sides that only touch the circle.
    for near in (1e-17, -1e-17, 3e-16):
        assert disk_area(square + 1.0 + near, 1.0) == pytest.approx(math.pi / 4, rel=1e-12)
    assert disk_area(square, 1.0) == pytest.approx(math.pi, rel=1e-12)
    assert polygon_area(clip(square, np.array([1.0, 0.0]), 0.5)) == pytest.approx(3.0)
    assert len(clip(square, np.array([1.0, 0.0]), -2.0)) == 0 and polygon_area(square[:2]) == 0.0
