"""Cross-sections: area, extent, perimeter, the two equivalent diameters, and where the walls are. One file per shape."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections import annulus, ellipse, flat_oval, polygon, rectangle
from traverse.physics.sections import round as circle
from traverse.physics.sections._base import DEDUCTIONS, Array, Shape, Size
from traverse.physics.sections.annulus import diameters as ring_diameters
from traverse.physics.sections.polygon import corners, crossing
from traverse.physics.sections.round import diameter

__all__ = [
    "DEDUCTIONS", "SHAPES", "Array", "Shape", "Size", "area", "bounds", "chord", "contains", "corners", "crossing", "diameter",
    "equal_area_diameter", "extent", "hydraulic_diameter", "outline", "perimeter", "ring_diameters",
    "wall_distance",
]

SHAPES: dict[str, Shape] = {
    "round": circle.SHAPE, "ellipse": ellipse.SHAPE, "rectangle": rectangle.SHAPE, "flat-oval": flat_oval.SHAPE,
    "annulus": annulus.SHAPE, "polygon": polygon.SHAPE,
}


def bounds(shape: str, size: Size) -> tuple[Array, Array, Array, Array]:
    """Return the box around the section: low and high x, low and high y. [m]  NaN where the size is impossible."""
    return SHAPES[shape].bounds(size)


def extent(shape: str, size: Size) -> tuple[Array, Array]:
    """Return the width and the height. [m]  NaN where not positive."""
    left, right, bottom, top = bounds(shape, size)
    return np.asarray(right - left), np.asarray(top - bottom)


def area(shape: str, size: Size) -> Array:
    """Return the open area, lining and deposit taken off. [m2]"""
    return SHAPES[shape].area(size)


def perimeter(shape: str, size: Size) -> Array:
    """Return the wetted perimeter. [m]"""
    return SHAPES[shape].perimeter(size)


def hydraulic_diameter(shape: str, size: Size) -> Array:
    """Return four times the area over the perimeter. [m]  For siting and Reynolds number, never for an area."""
    return np.asarray(4.0 * area(shape, size) / perimeter(shape, size))


def equal_area_diameter(shape: str, size: Size) -> Array:
    """Return the diameter of the circle of the same area. [m]  Not the hydraulic diameter: 20 % more on a 2:1 duct."""
    return np.asarray(np.sqrt(4.0 / np.pi * area(shape, size)))


def wall_distance(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the distance to the nearest wall, negative outside. [m]  ``x``, ``y`` in the section's coordinates, any shape."""
    return SHAPES[shape].wall_distance(size, x, y)


def contains(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> npt.NDArray[np.bool_]:
    """Return whether points lie inside the section; the wall itself does not."""
    return np.asarray(wall_distance(shape, size, x, y) > 0.0)


def outline(shape: str, size: Size, points: int = 181) -> tuple[Array, ...]:
    """Return closed rings of shape (k, 2) to draw: the outer wall first, then holes. [m]"""
    return SHAPES[shape].outline(size, points)


def chord(shape: str, size: Size, offset: npt.ArrayLike, along: str) -> tuple[Array, Array]:
    """Return where straight lines across the section meet the wall. [m]

    Along the height a line is vertical at x = ``offset``, along the width horizontal at y = ``offset``. NaN where it misses.
    """
    return SHAPES[shape].chord(size, offset, along)
