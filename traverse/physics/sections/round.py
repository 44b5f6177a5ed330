"""A circle."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, about_centre, deducted, half_chord, positive, ring


def diameter(size: Size) -> Array:
    """Return the inside diameter. [m]

    From ``diameter``, or from ``circumference``: inside, or outside when ``wall_thickness`` is given; less twice what lies
    on the wall. NaN where nothing is left.
    """
    off = 2.0 * deducted(size)
    if "diameter" in size:
        return positive(np.asarray(size["diameter"], dtype=np.float64) - off)
    around = np.asarray(size["circumference"], dtype=np.float64)
    return positive(around / np.pi - 2.0 * np.asarray(size.get("wall_thickness", 0.0), dtype=np.float64) - off)


def _chord(size: Size, offset: npt.ArrayLike, _along: str) -> tuple[Array, Array]:
    half = half_chord(diameter(size) / 2.0, offset)
    return -half, half


def _outline(size: Size, points: int) -> tuple[Array, ...]:
    angle = np.linspace(0.0, 2.0 * np.pi, points)
    radius = float(diameter(size)) / 2.0
    return (ring(radius * np.cos(angle), radius * np.sin(angle)),)


SHAPE = Shape(
    dimensions=(("diameter",), ("circumference",), ("circumference", "wall_thickness")),
    area=lambda size: np.asarray(np.pi / 4.0 * np.square(diameter(size))),
    perimeter=lambda size: np.asarray(np.pi * diameter(size)),
    bounds=lambda size: about_centre(diameter(size), diameter(size)),
    wall_distance=lambda size, x, y: np.asarray(diameter(size) / 2.0 - np.hypot(x, y)),
    outline=_outline,
    chord=_chord,
)
