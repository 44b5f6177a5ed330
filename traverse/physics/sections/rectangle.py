"""A rectangle."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, about_centre, box, ring


def _area(size: Size) -> Array:
    width, height = box(size)
    return np.asarray(width * height)


def _perimeter(size: Size) -> Array:
    width, height = box(size)
    return np.asarray(2.0 * (width + height))


def _wall_distance(size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    width, height = box(size)
    across, up = np.abs(x) - width / 2.0, np.abs(y) - height / 2.0
    # Outside a corner the nearest wall is the corner itself.
    return np.asarray(-np.where((across > 0.0) & (up > 0.0), np.hypot(across, up), np.maximum(across, up)))


def _chord(size: Size, offset: npt.ArrayLike, along: str) -> tuple[Array, Array]:
    width, height = box(size)
    across, half = (width, height / 2.0) if along == "height" else (height, width / 2.0)
    half = np.where(np.abs(offset) <= across / 2.0, half, np.nan)
    return -half, half


def _outline(size: Size, _points: int) -> tuple[Array, ...]:
    width, height = box(size)
    return (ring(np.array([-1, 1, 1, -1, -1]) * width / 2.0, np.array([-1, -1, 1, 1, -1]) * height / 2.0),)


SHAPE = Shape(
    dimensions=(("width", "height"),),
    area=_area,
    perimeter=_perimeter,
    bounds=lambda size: about_centre(*box(size)),
    wall_distance=_wall_distance,
    outline=_outline,
    chord=_chord,
)
