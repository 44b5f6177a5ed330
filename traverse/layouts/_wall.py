"""The logarithmic wall law on a circle: area means in closed form, and the log-linear positions that follow from it."""

from __future__ import annotations

import math

import numpy as np

from traverse.errors import LayoutError
from traverse.layouts._base import EVEN, Array, Term

MOST = 20


def mean_log(inner: float, outer: float) -> float:
    """Return the area mean of ln(1 - r) between two area fractions.

    The integral of ln(1 - sqrt(s)) ds; with y = 1 - sqrt(s) the antiderivative of 2 (1 - y) ln y is
    2 (y ln y - y) - (y^2 ln y - y^2/2), which vanishes at y = 0.
    """

    def antiderivative(y: float) -> float:
        if y == 0.0:
            return 0.0
        return 2.0 * (y * math.log(y) - y) - (y * y * math.log(y) - y * y / 2.0)

    return (antiderivative(1.0 - math.sqrt(inner)) - antiderivative(1.0 - math.sqrt(outer))) / (outer - inner)


def log_mean_distance(inner: float, outer: float) -> float:
    """Return the wall distance (of the radius) whose logarithm is the area mean of the logarithm."""
    return math.exp(mean_log(inner, outer))


def mean_distance(inner: float, outer: float) -> float:
    """Return the area mean of the wall distance 1 - r between two area fractions."""
    return 1.0 - 2.0 / 3.0 * (math.pow(outer, 1.5) - math.pow(inner, 1.5)) / (outer - inner)


def wall_distances(per_radius: int) -> list[float]:
    """Return the wall distances (of the radius) of the points on one radius, from the wall inwards.

    Even number: the area is cut into n/2 equal zones with two points each, whose product is the square of the mean
    logarithm's exponential and whose sum is twice the mean distance. Odd: the outermost n-th of the area has one point
    at the exponential of its mean logarithm, the rest is cut as before.
    """
    found: list[float] = []
    odd = per_radius % 2
    if odd:
        found.append(log_mean_distance((per_radius - 1) / per_radius, 1.0))
    for zone in range((per_radius - odd) // 2):
        inner, outer = 2 * zone / per_radius, (2 * zone + 2) / per_radius
        mean = mean_distance(inner, outer)
        apart = math.sqrt(mean * mean - log_mean_distance(inner, outer) ** 2)
        found += [mean - apart, mean + apart]
    return sorted(found)


def log_linear_diameter(points: int) -> tuple[Array, Array]:
    """Return the fractions of the diameter of an even number of points, 4 to 20; equal weights."""
    if points % 2 or not 4 <= points <= MOST:
        raise LayoutError(
            f"{points} log-linear points on a diameter", where="[layout] points", expected=f"from 4 to {MOST}, {EVEN}"
        )
    half = np.array(wall_distances(points // 2)) / 2.0
    return np.concatenate([half, 1.0 - half[::-1]]), np.full(points, 1.0 / points)


def log_linear_terms(_shape: str, points: int) -> tuple[Term, ...]:
    """Return 1, ln y and y in every zone of two points, 1 and ln y in the outermost zone of one point; y = 1 - r/R."""
    per_radius = points // 2
    odd = per_radius % 2
    found = [
        Term(words=words, zone=(2 * zone / per_radius, (2 * zone + 2) / per_radius), value=value)
        for zone in range((per_radius - odd) // 2) for words, value in (*_LOGARITHMIC, ("y", lambda r: 1.0 - r))
    ]
    outermost = ((per_radius - 1) / per_radius, 1.0)
    return (*found, *(Term(words=words, zone=outermost, value=value) for words, value in _LOGARITHMIC if odd))


_LOGARITHMIC = (("1", np.ones_like), ("ln y", lambda r: np.log(1.0 - r)))
