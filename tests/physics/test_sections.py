"""Cross-sections against exact geometry."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import sections


def test_round():
    size = {"diameter": 2.0}
    assert sections.area("round", size) == pytest.approx(math.pi)
    assert sections.perimeter("round", size) == pytest.approx(2 * math.pi)
    assert sections.hydraulic_diameter("round", size) == pytest.approx(2.0)
    assert sections.equal_area_diameter("round", size) == pytest.approx(2.0)
    assert sections.extent("round", {"circumference": 2 * math.pi})[1] == pytest.approx(2.0)
    assert sections.diameter({"circumference": 2 * math.pi, "wall_thickness": 0.1}) == pytest.approx(1.8)
    assert sections.diameter({"circumference": 2 * math.pi}) == pytest.approx(2.0)


def test_rectangle():
    """The two equivalent diameters of a 48 x 30 in duct: 36.923 in (Method 1, equation 1-1) and 42.819 in, computed."""
    size = {"width": 48.0, "height": 30.0}
    assert sections.area("rectangle", size) == 1440.0
    assert sections.perimeter("rectangle", size) == 156.0
    assert sections.hydraulic_diameter("rectangle", size) == pytest.approx(36.923, abs=5e-4)
    assert sections.equal_area_diameter("rectangle", size) == pytest.approx(42.819, abs=5e-4)
    assert tuple(float(v) for v in sections.extent("rectangle", size)) == (48.0, 30.0)


@pytest.mark.parametrize(("shape", "size", "x", "y", "distance"), [
    ("round", {"diameter": 2.0}, 0.3, 0.4, 0.5), ("round", {"diameter": 2.0}, -0.6, -0.8, 0.0), ("round", {"diameter": 2.0}, 3.0, 4.0, -4.0),
    ("rectangle", {"width": 4.0, "height": 2.0}, -1.5, 0.2, 0.5), ("rectangle", {"width": 4.0, "height": 2.0}, 0.0, -0.9, 0.1),
    ("rectangle", {"width": 4.0, "height": 2.0}, 2.5, 0.0, -0.5),
])
def test_wall_distance(shape, size, x, y, distance):
    assert float(sections.wall_distance(shape, size, x, y)) == pytest.approx(distance, abs=1e-15)
    assert bool(sections.contains(shape, size, x, y)) == (distance > 1e-12)


@given(st.floats(0.05, 5.0), st.floats(0.05, 5.0))
def test_hydraulic_is_never_above_equal_area(width, height):
    size = {"width": width, "height": height}
    assert float(sections.hydraulic_diameter("rectangle", size)) <= float(sections.equal_area_diameter("rectangle", size)) * (1 + 1e-12)


def test_arrays_broadcast():
    size = {"diameter": np.array([[1.0], [2.0]])}
    assert sections.area("round", size).shape == (2, 1)
