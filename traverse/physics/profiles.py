"""Velocity profiles given by a formula: power law, logarithmic wall law, parabola. For studies of layouts, not of ducts."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics import quadrature, sections
from traverse.physics.sections import Size, annulus

Array = npt.NDArray[np.float64]

# What the number of each kind means; the parabola has none.
KINDS = {"power": "the n of y^(1/n)", "log": "the k of 1 + k ln y", "parabola": ""}


def velocity(kind: str, number: float, shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the velocity over that in the middle; NaN outside.

    y^(1/n), 1 + k ln y (which is negative in a thin layer at the wall) or y (2 - y) of the relative wall distance y. That is
    1 - r in a round section, in an ellipse along each radius; the wall distance over its largest value elsewhere. A
    rectangle has the product of the two directions.
    """
    across, up = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
    left, right, bottom, top = (float(side) for side in sections.bounds(shape, size))
    first = (across - (left + right) / 2.0) / ((right - left) / 2.0)
    second = (up - (bottom + top) / 2.0) / ((top - bottom) / 2.0)
    if shape == "rectangle":
        found = _law(kind, number, 1.0 - np.abs(first)) * _law(kind, number, 1.0 - np.abs(second))
    elif shape in {"round", "ellipse"}:
        found = _law(kind, number, 1.0 - np.hypot(first, second))
    else:
        found = _law(kind, number, sections.wall_distance(shape, size, across, up) / _deepest(shape, size))
    return np.asarray(found)


def mean(kind: str, number: float, shape: str, size: Size) -> float:
    """Return the mean over the section."""
    x, y, weight = quadrature.nodes(shape, size)
    return float(np.sum(weight * velocity(kind, number, shape, size, x, y)))


def _law(kind: str, number: float, wall: Array) -> Array:
    inside = np.where(wall > 0.0, wall, np.nan)
    if kind == "power":
        return np.asarray(inside ** (1.0 / number))
    if kind == "log":
        return np.asarray(1.0 + number * np.log(inside))
    return np.asarray(inside * (2.0 - inside))


def _deepest(shape: str, size: Size) -> float:
    """Return the largest wall distance. [m]"""
    if shape == "annulus":
        wall, core = annulus.diameters(size)
        return float(wall - core) / 4.0
    x, y, _ = quadrature.nodes(shape, size)
    return float(np.max(sections.wall_distance(shape, size, x, y)))
