"""Log-linear: positions that integrate a logarithmic wall law plus a linear term."""

from __future__ import annotations

import math

import numpy as np

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import EVEN, Array, Rule, Term
from traverse.layouts._wall import log_mean_distance, mean_distance

MOST = 20


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


def on_diameter(points: int) -> tuple[Array, Array]:
    """Return the fractions of the diameter of an even number of points, 4 to 20; equal weights."""
    if points % 2 or not 4 <= points <= MOST:
        raise LayoutError(
            f"{points} log-linear points on a diameter", where="[layout] points", expected=f"from 4 to {MOST}, {EVEN}"
        )
    half = np.array(wall_distances(points // 2)) / 2.0
    return np.concatenate([half, 1.0 - half[::-1]]), np.full(points, 1.0 / points)


def exact(_shape: str, points: int) -> tuple[Term, ...]:
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
_TABLE = tables.load("layout_log_linear")
RULE = Rule(
    name="log-linear",
    title="Log-linear",
    source="ISO 3966 clause 11 and BS 1042 practice (Winternitz and Fischl); positions from the rule's definition",
    round=on_diameter,
    printed={("round", int(points)): tuple(row) for points, row in _TABLE["fraction_of_diameter"].items()},
    printed_source=_TABLE["source"],
    exact_for="velocity = a + b ln y + c y in every zone (odd numbers per radius: no linear term in the outermost zone)",
    exact=exact,
    round_points=range(4, MOST + 1, 2),
)
