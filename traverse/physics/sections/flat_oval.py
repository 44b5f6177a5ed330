"""A flat oval: two half circles joined by straight walls along the longer side."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, about_centre, box, half_chord, ring


def halves(size: Size) -> tuple[Array, Array]:
    """Return half the straight part and the radius of the ends. [m]"""
    width, height = box(size)
    radius = np.minimum(width, height) / 2.0
    return np.maximum(width, height) / 2.0 - radius, radius


def _area(size: Size) -> Array:
    straight, radius = halves(size)
    return np.asarray(np.pi * np.square(radius) + 4.0 * radius * straight)


def _perimeter(size: Size) -> Array:
    straight, radius = halves(size)
    return np.asarray(2.0 * np.pi * radius + 4.0 * straight)


def _wall_distance(size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    width, height = box(size)
    straight, radius = halves(size)
    along, beside = np.where(height > width, y, x), np.where(height > width, x, y)
    return np.asarray(radius - np.hypot(np.maximum(np.abs(along) - straight, 0.0), beside))


def _chord(size: Size, offset: npt.ArrayLike, along: str) -> tuple[Array, Array]:
    width, height = box(size)
    straight, radius = halves(size)
    place = np.abs(np.asarray(offset, dtype=np.float64))
    if (along == "height") == bool(np.all(width >= height)):
        half = half_chord(radius, np.maximum(place - straight, 0.0))
    else:
        half = straight + half_chord(radius, place)
    return -half, half


def _outline(size: Size, points: int) -> tuple[Array, ...]:
    width, height = box(size)
    straight, radius = halves(size)
    angle = np.linspace(-np.pi / 2.0, np.pi / 2.0, (points + 1) // 2)
    x = np.concatenate([straight + radius * np.cos(angle), -straight - radius * np.cos(angle)])
    y = np.concatenate([radius * np.sin(angle), -radius * np.sin(angle)])
    x, y = np.append(x, x[0]), np.append(y, y[0])
    return (ring(-y, x) if height > width else ring(x, y),)


SHAPE = Shape(
    dimensions=(("width", "height"),),
    area=_area,
    perimeter=_perimeter,
    bounds=lambda size: about_centre(*box(size)),
    wall_distance=_wall_distance,
    outline=_outline,
    chord=_chord,
)
