"""Cross-sections against exact geometry and printed areas."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import sections

lengths = st.floats(0.05, 20.0)
INCH = 0.0254


@pytest.mark.parametrize(("shape", "size", "square_feet"), [
    ("round", {"diameter": 10 * INCH}, "0.545"),
    ("rectangle", {"width": 20 * INCH, "height": 13 * INCH}, "1.8"),
])
def test_area_against_printed_examples(shape, size, square_feet):
    """Two exercises (common practice, no source), half a unit of the last digit."""
    half = 0.5 * 10.0 ** -len(square_feet.partition(".")[2])
    assert float(sections.area(shape, size)) / 0.3048**2 == pytest.approx(float(square_feet), abs=half)


@given(diameter=lengths)
def test_round_section(diameter):
    size = {"diameter": diameter}
    assert float(sections.area("round", size)) == pytest.approx(math.pi * (diameter / 2) ** 2, rel=1e-15)
    assert float(sections.perimeter("round", size)) == pytest.approx(math.pi * diameter, rel=1e-15)
    assert float(sections.hydraulic_diameter("round", size)) == pytest.approx(diameter, rel=1e-15)
    assert float(sections.equal_area_diameter("round", size)) == pytest.approx(diameter, rel=1e-15)
    assert [float(side) for side in sections.extent("round", size)] == [diameter, diameter]


@given(width=lengths, height=lengths)
def test_rectangle(width, height):
    size = {"width": width, "height": height}
    assert [float(side) for side in sections.extent("rectangle", size)] == [width, height]
    assert float(sections.area("rectangle", size)) == pytest.approx(width * height, rel=1e-15)
    assert float(sections.perimeter("rectangle", size)) == pytest.approx(2 * width + 2 * height, rel=1e-15)
    assert float(sections.hydraulic_diameter("rectangle", size)) == pytest.approx(2 * width * height / (width + height), rel=1e-14)
    across = float(sections.equal_area_diameter("rectangle", size))
    assert math.pi / 4 * across**2 == pytest.approx(width * height, rel=1e-14)
    # No rectangle has more area for its perimeter than the circle.
    assert float(sections.hydraulic_diameter("rectangle", size)) < across


@given(diameter=lengths, wall=st.floats(0.0, 0.02))
def test_circumference(diameter, wall):
    """A tape around the outside measures pi (D + 2 t); around the inside pi D."""
    assert float(sections.diameter({"circumference": math.pi * diameter})) == pytest.approx(diameter, rel=1e-14)
    outside = {"circumference": math.pi * (diameter + 2 * wall), "wall_thickness": wall}
    assert float(sections.diameter(outside)) == pytest.approx(diameter, rel=1e-12)


@pytest.mark.parametrize(("shape", "x", "y", "distance"), [
    ("round", 0.0, 0.0, 1.0), ("round", 0.6, 0.0, 0.4), ("round", 0.3, -0.4, 0.5), ("round", 0.8, 0.8, 1.0 - 0.8 * math.sqrt(2)),
    ("rectangle", 0.0, 0.0, 1.0), ("rectangle", 1.7, 0.0, 0.3), ("rectangle", -1.7, 0.1, 0.3), ("rectangle", 0.5, -0.9, 0.1),
    ("rectangle", 1.95, 0.9, 0.05), ("rectangle", 2.25, 0.0, -0.25),
])
def test_wall_distance(shape, x, y, distance):
    """A circle of 2 m, a rectangle of 4 m by 2 m."""
    size = {"diameter": 2.0} if shape == "round" else {"width": 4.0, "height": 2.0}
    assert float(sections.wall_distance(shape, size, x, y)) == pytest.approx(distance, abs=1e-15)
    assert bool(sections.contains(shape, size, x, y)) is (distance > 0)


@pytest.mark.parametrize(("shape", "size", "x"), [("round", {"diameter": 2.0}, 1.0), ("rectangle", {"width": 2.0, "height": 9.0}, -1.0)])
def test_the_wall_is_not_inside(shape, size, x):
    assert not sections.contains(shape, size, x, 0.0)
    assert sections.contains(shape, size, 0.999 * x, 0.0)


@pytest.mark.parametrize(("shape", "size"), [
    ("round", {"diameter": 0.0}), ("round", {"diameter": -1.0}), ("round", {"circumference": 1.0, "wall_thickness": 0.2}),
    ("rectangle", {"width": -1.0, "height": -2.0}), ("rectangle", {"width": 1.0, "height": 0.0}),
])
def test_impossible_size_is_no_number(shape, size):
    """Two wrong signs must not make an area that looks right."""
    for quantity in (sections.area, sections.perimeter, sections.hydraulic_diameter, sections.equal_area_diameter):
        assert math.isnan(float(quantity(shape, size)))


def test_broadcasts_over_draws_and_points():
    size = {"width": np.array([[1.0], [2.0]]), "height": np.array([[1.0], [1.0]])}
    assert sections.area("rectangle", size).shape == (2, 1)
    distance = sections.wall_distance("rectangle", size, np.array([0.0, 0.4]), np.zeros(2))
    np.testing.assert_allclose(distance, [[0.5, 0.1], [0.5, 0.5]], rtol=1e-14)


@pytest.mark.parametrize("kind", [np.float32, np.int64])
def test_numbers_of_other_kinds(kind):
    """Whole numbers and single precision are calculated with in double precision."""
    assert sections.area("round", {"diameter": kind(3)}) == sections.area("round", {"diameter": 3.0})
    around = sections.diameter({"circumference": kind(7), "wall_thickness": kind(1)})
    assert around.dtype == np.float64
    assert around == sections.diameter({"circumference": 7.0, "wall_thickness": 1.0})
    assert sections.area("rectangle", {"width": kind(3), "height": kind(2)}).dtype == np.float64
