"""Area means of the logarithmic and the linear wall law on a circle, in closed form."""

from __future__ import annotations

import math


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
