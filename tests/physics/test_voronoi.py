"""Shares of a section nearest to each point: exact figures, symmetry, and counting a fine grid."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from traverse import layouts
from traverse.physics import sections
from traverse.physics.voronoi import clip, disk_area, polygon_area, shares

ELL = {"x1": 0.0, "y1": 0.0, "x2": 3.0, "y2": 0.0, "x3": 3.0, "y3": 1.0, "x4": 1.0, "y4": 1.0, "x5": 1.0, "y5": 2.0, "x6": 0.0, "y6": 2.0}
SHAPES = {
    "round": {"diameter": 2.0}, "ellipse": {"width": 3.0, "height": 1.4}, "rectangle": {"width": 2.0, "height": 0.7},
    "flat-oval": {"width": 2.0, "height": 0.8}, "annulus": {"diameter": 2.0, "core": 0.9}, "polygon": ELL,
}


def test_one_point_has_everything_and_two_share():
    for shape, size in SHAPES.items():
        x, y = (0.7, 0.1) if shape != "polygon" else (0.5, 0.5)
        assert shares(shape, size, [x], [y]) == pytest.approx([1.0])
    assert shares("round", {"diameter": 2.0}, [0.3, -0.3], [0.0, 0.0]) == pytest.approx([0.5, 0.5])
    # A chord at 0.25 of the radius: the segment has (acos h - h sqrt(1 - h^2))/pi of the disk.
    h = 0.25
    assert shares("round", {"diameter": 2.0}, [0.5, 0.0], [0.0, 0.0])[0] == pytest.approx((math.acos(h) - h * math.sqrt(1 - h * h)) / math.pi)


def test_centres_of_equal_rectangles_have_equal_shares():
    placed = layouts.place("equal-area", shape="rectangle", width=2.0, height=0.7, lines=5, points=4)
    np.testing.assert_allclose(shares("rectangle", SHAPES["rectangle"], placed.x, placed.y), 1 / 20, rtol=1e-12)


def test_a_regular_ring_and_its_centre():
    """Six points at 0.8 and the centre: the centre's cell is the hexagon of inradius 0.4, area 2 sqrt(3) 0.16."""
    angle = np.arange(6) * np.pi / 3
    found = shares("round", {"diameter": 2.0}, np.append(0.8 * np.cos(angle), 0.0), np.append(0.8 * np.sin(angle), 0.0))
    assert found[-1] == pytest.approx(2 * math.sqrt(3) * 0.16 / math.pi, rel=1e-12)
    np.testing.assert_allclose(found[:-1], (1 - found[-1]) / 6, rtol=1e-12)


def test_a_corner_by_hand():
    """An L of 2 x 1 on 1 x 1 m ... cut at x = 1 and y = 1: the three unit-square-based parts are 1, 2 and 1 m2 of 4."""
    found = shares("polygon", ELL, [0.5, 2.0, 0.5], [0.5, 0.5, 1.5])
    # Nearest to (2, 0.5): x > 1.25, 1.75 m2. Nearest to (0.5, 1.5): y > 1, 1 m2. The rest, 1.25 m2, to (0.5, 0.5).
    np.testing.assert_allclose(found, np.array([1.25, 1.75, 1.0]) / 4.0, rtol=1e-12)
    clockwise = {key: ELL[f"{key[0]}{7 - int(key[1])}"] for key in ELL}
    np.testing.assert_allclose(shares("polygon", clockwise, [0.5, 2.0, 0.5], [0.5, 0.5, 1.5]), found, rtol=1e-12)


def test_four_points_around_a_core():
    angle = np.arange(4) * np.pi / 2 + 0.3
    np.testing.assert_allclose(shares("annulus", SHAPES["annulus"], 0.7 * np.cos(angle), 0.7 * np.sin(angle)), 0.25, rtol=1e-12)


def test_points_in_one_place_share_its_cell():
    found = shares("round", {"diameter": 2.0}, [0.3, -0.3, -0.3], [0.0, 0.0, 0.0])
    np.testing.assert_allclose(found, [0.5, 0.25, 0.25], rtol=1e-12)


def test_a_point_outside_gives_no_shares():
    assert np.isnan(shares("round", {"diameter": 2.0}, [0.3, 1.2], [0.0, 0.0])).all()


@settings(max_examples=25, deadline=None)
@given(st.sampled_from(sorted(SHAPES)), st.integers(1, 12), st.integers(0, 10_000))
def test_shares_are_what_a_grid_counts(shape, count, number):
    """A grid of 300 x 300 places, each given to its nearest point; a cell's border of length b moves at most b times half a step."""
    size = SHAPES[shape]
    left, right, bottom, top = (float(v) for v in sections.bounds(shape, size))
    random = np.random.default_rng(number)
    x, y = random.uniform(left, right, 400), random.uniform(bottom, top, 400)
    inside = np.flatnonzero(sections.contains(shape, size, x, y))[:count]
    x, y = x[inside], y[inside]
    found = shares(shape, size, x, y)
    assert found.sum() == pytest.approx(1.0, abs=1e-12) and np.all(found > 0)
    gx, gy = (v.ravel() for v in np.meshgrid(left + (np.arange(300) + 0.5) / 300 * (right - left), bottom + (np.arange(300) + 0.5) / 300 * (top - bottom)))
    kept = sections.contains(shape, size, gx, gy)
    nearest = np.argmin(np.hypot(gx[kept, None] - x, gy[kept, None] - y), axis=1)
    counted = np.bincount(nearest, minlength=len(x)) / kept.sum()
    np.testing.assert_allclose(found, counted, atol=0.006)


@settings(max_examples=30, deadline=None)
@given(st.integers(2, 9), st.integers(0, 10_000), st.floats(0, 6.2))
def test_turning_and_mirroring_change_nothing(count, number, turn):
    random = np.random.default_rng(number)
    r, t = np.sqrt(random.uniform(0, 0.98, count)), random.uniform(0, 6.283, count)
    first = shares("round", {"diameter": 2.0}, r * np.cos(t), r * np.sin(t))
    np.testing.assert_allclose(shares("round", {"diameter": 2.0}, r * np.cos(t + turn), r * np.sin(t + turn)), first, atol=1e-9)
    np.testing.assert_allclose(shares("round", {"diameter": 2.0}, -r * np.cos(t), r * np.sin(t)), first, atol=1e-12)


def test_disk_and_polygon_areas():
    square = np.array([[-1.0, -1.0], [1.0, -1.0], [1.0, 1.0], [-1.0, 1.0]])
    assert disk_area(square, 0.5) == pytest.approx(math.pi / 4) and disk_area(square, 3.0) == pytest.approx(4.0)
    assert disk_area(square[::-1], 0.5) == pytest.approx(-math.pi / 4)
    assert disk_area(square + 1.0, 1.0) == pytest.approx(math.pi / 4)
    assert polygon_area(clip(square, np.array([1.0, 0.0]), 0.5)) == pytest.approx(3.0)
    assert len(clip(square, np.array([1.0, 0.0]), -2.0)) == 0 and polygon_area(square[:2]) == 0.0
