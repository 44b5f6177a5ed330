"""Cross-sections: area, extent, perimeter, the two equivalent diameters, and where the walls are."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Size = Mapping[str, npt.ArrayLike]


def diameter(size: Size) -> Array:
    """Return the inside diameter of a round section. [m]

    From ``diameter``, or from ``circumference``: inside, or outside when ``wall_thickness`` is given.
    """
    if "diameter" in size:
        return np.asarray(size["diameter"], dtype=np.float64)
    return np.asarray(np.asarray(size["circumference"], dtype=np.float64) / np.pi - 2.0 * np.asarray(size.get("wall_thickness", 0.0)))


def extent(shape: str, size: Size) -> tuple[Array, Array]:
    """Return the width and the height. [m]"""
    if shape == "round":
        return diameter(size), diameter(size)
    return np.asarray(size["width"], dtype=np.float64), np.asarray(size["height"], dtype=np.float64)


def area(shape: str, size: Size) -> Array:
    """Return the open area. [m2]"""
    width, height = extent(shape, size)
    return np.asarray(np.pi / 4.0 * width * height if shape == "round" else width * height)


def perimeter(shape: str, size: Size) -> Array:
    """Return the wetted perimeter. [m]"""
    width, height = extent(shape, size)
    return np.asarray(np.pi * width if shape == "round" else 2.0 * (width + height))


def hydraulic_diameter(shape: str, size: Size) -> Array:
    """Return four times the area over the perimeter. [m]  For siting and Reynolds number, never for an area."""
    return np.asarray(4.0 * area(shape, size) / perimeter(shape, size))


def equal_area_diameter(shape: str, size: Size) -> Array:
    """Return the diameter of the circle of the same area. [m]  Not the hydraulic diameter: 20 % more on a 2:1 duct."""
    return np.asarray(np.sqrt(4.0 / np.pi * area(shape, size)))


def wall_distance(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the distance to the nearest wall, negative outside. [m]  ``x``, ``y`` from the centre, any shape."""
    width, height = extent(shape, size)
    if shape == "round":
        return np.asarray(width / 2.0 - np.hypot(x, y))
    return np.asarray(np.minimum(width / 2.0 - np.abs(x), height / 2.0 - np.abs(y)))


def contains(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> npt.NDArray[np.bool_]:
    """Return whether points lie inside the section; the wall itself does not."""
    return np.asarray(wall_distance(shape, size, x, y) > 0.0)
