"""Every shape against exact geometry, and against itself: area by counting, wall distance by the outline, chords by the wall."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.integrate import quad

from traverse.physics import sections

ELL = {"x1": 0.0, "y1": 0.0, "x2": 3.0, "y2": 0.0, "x3": 3.0, "y3": 1.0, "x4": 1.0, "y4": 1.0, "x5": 1.0, "y5": 2.0, "x6": 0.0, "y6": 2.0}
EXAMPLES = (
    ("round", {"diameter": 2.0}), ("round", {"diameter": 2.4, "lining": 0.15, "deposit": 0.05}),
    ("ellipse", {"width": 3.0, "height": 2.0}), ("ellipse", {"width": 1.0, "height": 2.5}), ("ellipse", {"width": 2.0, "height": 2.0}),
    ("rectangle", {"width": 3.0, "height": 2.0}), ("rectangle", {"width": 3.2, "height": 2.2, "lining": 0.1}),
    ("flat-oval", {"width": 3.0, "height": 1.0}), ("flat-oval", {"width": 1.0, "height": 1.7}), ("flat-oval", {"width": 1.0, "height": 1.0}),
    ("annulus", {"diameter": 2.0, "core": 0.8}), ("annulus", {"gap": 0.6, "core_circumference": 0.8 * math.pi}),
    ("polygon", ELL),
)


@pytest.mark.parametrize(("shape", "size", "area", "perimeter"), [
    ("ellipse", {"width": 4.0, "height": 2.0}, 2.0 * math.pi, 9.688448220547675),  # perimeter: 4 a E(e), Abramowitz & Stegun 17.3
    ("flat-oval", {"width": 3.0, "height": 1.0}, math.pi / 4 + 2.0, math.pi + 4.0),
    ("flat-oval", {"width": 1.0, "height": 3.0}, math.pi / 4 + 2.0, math.pi + 4.0),
    ("annulus", {"diameter": 3.0, "core": 1.0}, 2.0 * math.pi, 4.0 * math.pi),
    ("annulus", {"diameter": 3.2, "core": 0.8, "lining": 0.0, "deposit": 0.1}, 2.0 * math.pi, 4.0 * math.pi),
    ("polygon", ELL, 4.0, 10.0),
    ("rectangle", {"width": 22.0, "height": 15.0, "lining": 1.0}, 260.0, 66.0),  # 22 x 15 in with 1 in lining: 20 x 13 in, common practice
])
def test_exact_sizes(shape, size, area, perimeter):
    assert float(sections.area(shape, size)) == pytest.approx(area, rel=1e-14)
    assert float(sections.perimeter(shape, size)) == pytest.approx(perimeter, rel=1e-12)
    assert float(sections.hydraulic_diameter(shape, size)) == pytest.approx(4 * area / perimeter, rel=1e-12)


def test_ring_area_by_its_thickness():
    """ISO 5802 writes the area of an annulus as pi (D_a + e) e, D_a the diameter of the core, e the gap."""
    area = float(sections.area("annulus", {"gap": 0.3, "core": 0.7}))
    assert area == pytest.approx(math.pi * (0.7 + 0.3) * 0.3, rel=1e-14)


@given(st.floats(0.2, 5.0), st.floats(0.2, 5.0))
def test_ellipse_perimeter_is_the_arc_length(width, height):
    a, b = width / 2, height / 2
    arc, _ = quad(lambda t: math.hypot(a * math.sin(t), b * math.cos(t)), 0, math.pi / 2, epsabs=1e-13, epsrel=1e-13)
    assert float(sections.perimeter("ellipse", {"width": width, "height": height})) == pytest.approx(4 * arc, rel=1e-10)


@pytest.mark.parametrize(("shape", "size"), EXAMPLES)
def test_area_is_what_lies_inside(shape, size):
    """The share of a fine grid that lies inside; its error is below half a cell along the wall."""
    left, right, bottom, top = (float(v) for v in sections.bounds(shape, size))
    count = 800
    x = left + (np.arange(count) + 0.5) / count * (right - left)
    y = bottom + (np.arange(count) + 0.5) / count * (top - bottom)
    inside = sections.contains(shape, size, *np.meshgrid(x, y))
    cell = max(right - left, top - bottom) / count
    found = inside.mean() * (right - left) * (top - bottom)
    assert found == pytest.approx(float(sections.area(shape, size)), abs=float(sections.perimeter(shape, size)) * cell / 8)


@pytest.mark.parametrize(("shape", "size"), EXAMPLES)
def test_wall_distance_is_the_distance_to_the_outline(shape, size):
    rings = sections.outline(shape, size, 4001)
    left, right, bottom, top = (float(v) for v in sections.bounds(shape, size))
    random = np.random.default_rng(5)
    x, y = random.uniform(left * 1.1 - 0.1, right * 1.1 + 0.1, 200), random.uniform(bottom * 1.1 - 0.1, top * 1.1 + 0.1, 200)
    found = sections.wall_distance(shape, size, x, y)
    nearest = np.full(200, np.inf)
    for ring in rings:
        a, u = ring[:-1], np.diff(ring, axis=0)
        off = np.stack([x[:, None] - a[:, 0], y[:, None] - a[:, 1]], axis=-1)
        length = np.maximum((u**2).sum(axis=-1), 1e-30)
        share = np.clip((off * u).sum(axis=-1) / length, 0, 1)
        nearest = np.minimum(nearest, np.hypot(*np.moveaxis(off - share[..., None] * u, -1, 0)).min(axis=1))
    np.testing.assert_allclose(np.abs(found), nearest, atol=2e-6 * (right - left))


@pytest.mark.parametrize(("shape", "size"), EXAMPLES)
@pytest.mark.parametrize("along", ["height", "width"])
def test_chords_end_at_the_wall(shape, size, along):
    low, high = (float(v) for v in sections.bounds(shape, size)[slice(0, 2) if along == "height" else slice(2, 4)])
    offset = low + (high - low) * np.array([0.11, 0.37, 0.5, 0.93])
    for end in sections.chord(shape, size, offset, along):
        place = (offset, end) if along == "height" else (end, offset)
        assert np.abs(sections.wall_distance(shape, size, *place)) == pytest.approx(0.0, abs=1e-12)
    assert np.isnan(sections.chord(shape, size, high + 0.1, along)).all()


@settings(max_examples=40)
@given(st.floats(0.3, 4.0), st.floats(0.3, 4.0), st.floats(0.0, 2 * math.pi), st.floats(0.001, 0.99))
def test_a_point_moved_in_from_an_ellipse_along_its_normal(width, height, angle, share):
    """A point nearer to the wall than the smallest radius of curvature has its foot where it came from."""
    a, b = width / 2, height / 2
    depth = share * min(a, b) ** 2 / max(a, b)
    foot = np.array([a * math.cos(angle), b * math.sin(angle)])
    normal = np.array([math.cos(angle) / a, math.sin(angle) / b])
    x, y = foot - depth * normal / np.hypot(*normal)
    found = float(sections.wall_distance("ellipse", {"width": width, "height": height}, x, y))
    assert found == pytest.approx(depth, rel=1e-7, abs=1e-9)


def test_impossible_sizes_give_no_number():
    assert math.isnan(float(sections.area("round", {"diameter": 0.2, "lining": 0.1})))
    assert math.isnan(float(sections.area("annulus", {"diameter": 1.0, "core": 1.0})))
    assert math.isnan(float(sections.area("rectangle", {"width": 1.0, "height": 0.2, "deposit": 0.11})))


@pytest.mark.parametrize(("x", "y", "pair"), [
    ([0, 2, 2, 0], [0, 0, 1, 1], None), ([0, 2, 0, 2], [0, 1, 1, 0], (1, 3)), (list(ELL.values())[::2], list(ELL.values())[1::2], None),
    ([0, 2, 1, 2], [0, 0, 0, 1], (1, 2)), ([0, 4, 4, 2, 0], [0, 0, 2, 0, 2], (1, 3)),
])
def test_sides_that_cross_are_found(x, y, pair):
    assert sections.crossing(np.array(x, dtype=float), np.array(y, dtype=float)) == pair
