"""An ellipse of two diameters, its axes along x and y."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, about_centre, box, ring

_BISECTIONS = 80


def _area(size: Size) -> Array:
    width, height = box(size)
    return np.asarray(np.pi / 4.0 * width * height)


def _perimeter(size: Size) -> Array:
    """Return 4 a E(1 - b^2/a^2) with the complete elliptic integral of the second kind, a the longer half-axis."""
    from scipy.special import ellipe  # costs as much to import as all the rest of a plan

    width, height = box(size)
    long, short = np.maximum(width, height) / 2.0, np.minimum(width, height) / 2.0
    return np.asarray(4.0 * long * ellipe(1.0 - np.square(short / long)))


def _wall_distance(size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the distance to the nearest point of the ellipse, which is where the normal through (x, y) meets it.

    With s as unknown, (r z0/(s + r))^2 + (z1/(s + 1))^2 = 1 has one root above z1 - 1; it is found by bisection.
    """
    width, height = box(size)
    a, b = np.maximum(width, height) / 2.0, np.minimum(width, height) / 2.0
    upright = height > width
    p = np.abs(np.where(upright, y, x)).astype(np.float64)
    q = np.abs(np.where(upright, x, y)).astype(np.float64)
    z0, z1, ratio = p / a, q / b, np.square(a / b)
    level = np.square(z0) + np.square(z1) - 1.0
    low, high = z1 - 1.0, np.maximum(np.hypot(ratio * z0, z1) - 1.0, 0.0)
    for _ in range(_BISECTIONS):
        s = (low + high) / 2.0
        with np.errstate(divide="ignore", invalid="ignore"):
            above = np.square(ratio * z0 / (s + ratio)) + np.square(np.where(z1 > 0.0, z1 / (s + 1.0), 0.0)) > 1.0
        low, high = np.where(above, s, low), np.where(above, high, s)
    s = (low + high) / 2.0
    near0 = ratio * p / (s + ratio)
    # On the long axis, between the centres of curvature, two feet of equal distance lie beside the axis.
    near1 = b * np.sqrt(np.maximum(1.0 - np.square(near0 / a), 0.0))
    return np.asarray(np.where(level <= 0.0, 1.0, -1.0) * np.hypot(near0 - p, near1 - q))


def _chord(size: Size, offset: npt.ArrayLike, along: str) -> tuple[Array, Array]:
    width, height = box(size)
    across, travel = (width, height) if along == "height" else (height, width)
    inside = 1.0 - np.square(2.0 * np.asarray(offset, dtype=np.float64) / across)
    half = travel / 2.0 * np.sqrt(np.where(inside >= 0.0, inside, np.nan))
    return -half, half


def _outline(size: Size, points: int) -> tuple[Array, ...]:
    width, height = box(size)
    angle = np.linspace(0.0, 2.0 * np.pi, points)
    return (ring(width / 2.0 * np.cos(angle), height / 2.0 * np.sin(angle)),)


SHAPE = Shape(
    dimensions=(("width", "height"),),
    area=_area,
    perimeter=_perimeter,
    bounds=lambda size: about_centre(*box(size)),
    wall_distance=_wall_distance,
    outline=_outline,
    chord=_chord,
)
