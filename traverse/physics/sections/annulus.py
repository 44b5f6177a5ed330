"""The space between a round wall and a round core on the same axis."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, about_centre, deducted, half_chord, positive, ring


def diameters(size: Size) -> tuple[Array, Array]:
    """Return the inside diameter of the wall and the outside diameter of the core. [m]

    The core from ``core`` or ``core_circumference``; the wall from ``diameter``, or from the ``gap`` measured between the two.
    Lining lies on the outer wall, a deposit on both. NaN where no space is left.
    """
    core = np.asarray(size["core"] if "core" in size else np.asarray(size["core_circumference"], dtype=np.float64) / np.pi)
    if "gap" in size:
        return positive(core) + 2.0 * positive(size["gap"]), positive(core)
    outer = np.asarray(size["diameter"], dtype=np.float64) - 2.0 * deducted(size)
    inner = positive(core) + 2.0 * np.asarray(size.get("deposit", 0.0), dtype=np.float64)
    return positive(np.where(outer > inner, outer, np.nan)), inner


def _area(size: Size) -> Array:
    outer, inner = diameters(size)
    return np.asarray(np.pi / 4.0 * (outer - inner) * (outer + inner))


def _perimeter(size: Size) -> Array:
    outer, inner = diameters(size)
    return np.asarray(np.pi * (outer + inner))


def _wall_distance(size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    outer, inner = diameters(size)
    radius = np.hypot(x, y)
    return np.asarray(np.minimum(outer / 2.0 - radius, radius - inner / 2.0))


def _chord(size: Size, offset: npt.ArrayLike, _along: str) -> tuple[Array, Array]:
    half = half_chord(diameters(size)[0] / 2.0, offset)
    return -half, half


def _outline(size: Size, points: int) -> tuple[Array, ...]:
    angle = np.linspace(0.0, 2.0 * np.pi, points)
    return tuple(ring(float(d) / 2.0 * np.cos(angle), float(d) / 2.0 * np.sin(angle)) for d in diameters(size))


def _bounds(size: Size) -> tuple[Array, Array, Array, Array]:
    outer, _ = diameters(size)
    return about_centre(outer, outer)


SHAPE = Shape(
    dimensions=(("diameter", "core"), ("diameter", "core_circumference"), ("gap", "core"), ("gap", "core_circumference")),
    area=_area,
    perimeter=_perimeter,
    bounds=_bounds,
    wall_distance=_wall_distance,
    outline=_outline,
    chord=_chord,
)
