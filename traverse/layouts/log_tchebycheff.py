"""Log-Tchebycheff: a logarithmic wall law in the outermost part, equal-weight Tchebycheff points inside it."""

from __future__ import annotations

import math
from functools import lru_cache

import numpy as np

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import EVEN, Array, Rule, Term
from traverse.layouts._wall import log_mean_distance


@lru_cache(maxsize=32)
def nodes(count: int) -> tuple[float, ...]:
    """Return the equal-weight Tchebycheff nodes on [-1, 1].

    The power sums of the nodes equal those of the interval, n/(k+1) for even k and 0 for odd k up to n; Newton's
    identities give the polynomial whose roots they are. For 8 and for 10 or more some roots are complex.

    Raises
    ------
    LayoutError
        Where the nodes do not exist.
    """
    sums = [count / (k + 1) if k % 2 == 0 else 0.0 for k in range(1, count + 1)]
    elementary = [1.0]
    for k in range(1, count + 1):
        elementary.append(sum((-1) ** (i - 1) * elementary[k - i] * sums[i - 1] for i in range(1, k + 1)) / k)
    coefficients = [(-1) ** k * value for k, value in enumerate(elementary)]
    roots = np.roots(coefficients)
    if np.any(np.abs(roots.imag) > 1e-6):
        raise LayoutError(
            f"no {count} equal-weight Tchebycheff points exist (they are complex)", where="[layout] points",
            expected="another number of points on the line",
        )
    real = np.sort(roots.real)
    symmetric = (real - real[::-1]) / 2.0
    return tuple(float(value) for value in _polish(symmetric, coefficients))


def _polish(roots: Array, coefficients: list[float]) -> Array:
    """Sharpen roots by Newton's method to the last digit."""
    slope = np.polyder(coefficients)
    for _ in range(3):
        roots = roots - np.polyval(coefficients, roots) / np.polyval(slope, roots)
    return np.asarray((roots - roots[::-1]) / 2.0)


def on_diameter(points: int) -> tuple[Array, Array]:
    """Return the fractions of the diameter for 3 to 8 points per radius; equal weights.

    The outermost n-th of the area has one point by the log law, the inner part the n - 1 nodes in the squared radius.
    """
    if points % 2 or not 6 <= points <= 16:
        raise LayoutError(
            f"{points} log-Tchebycheff points on a diameter", where="[layout] points", expected=f"from 6 to 16, {EVEN}"
        )
    n = points // 2
    squared = (n - 1) / (2.0 * n) * (1.0 + np.array(nodes(n - 1)))
    wall = np.append(1.0 - np.sqrt(squared), log_mean_distance((n - 1) / n, 1.0))
    half = np.sort(wall) / 2.0
    return np.concatenate([half, 1.0 - half[::-1]]), np.full(points, 1.0 / points)


def on_side(points: int) -> tuple[Array, Array]:
    """Return the fractions of a side for 3 to 9 points; equal weights.

    Outermost points at 1/(n e) from the walls, the n - 2 nodes on the rest.
    """
    if not 3 <= points <= 9:
        raise LayoutError(
            f"{points} log-Tchebycheff points on a side", where="[layout] points",
            expected="3 to 9 (10, and 12 or more, do not exist: their inner nodes are complex)",
        )
    wall = 1.0 / (points * math.e)
    inner = 0.5 + np.array(nodes(points - 2)) * (0.5 - 1.0 / points)
    return np.concatenate([[wall], inner, [1.0 - wall]]), np.full(points, 1.0 / points)


def exact(shape: str, points: int) -> tuple[Term, ...]:
    """Return 1 and the logarithm of the wall distance outside, the powers up to the number of nodes inside."""
    if shape == "round":
        n = points // 2
        inside, outside = (0.0, (n - 1) / n), ((n - 1) / n, 1.0)
        near = [Term(words="ln y", zone=outside, value=lambda r: np.log(1.0 - r))]
        ends, count, power = [outside], n - 1, 2
    else:
        ends = [(0.0, 1.0 / points), (1.0 - 1.0 / points, 1.0)]
        inside, count, power = (1.0 / points, 1.0 - 1.0 / points), points - 2, 1
        near = [
            Term(words="ln of the wall distance", zone=ends[0], value=np.log),
            Term(words="ln of the wall distance", zone=ends[1], value=lambda x: np.log(1.0 - x)),
        ]
    flat = [Term(words="1", zone=zone, value=np.ones_like) for zone in ends]
    return (*flat, *near, *(_power(inside, power * k) for k in range(count + 1)))


def _power(zone: tuple[float, float], power: int) -> Term:
    return Term(words=f"power {power}", zone=zone, value=lambda u: u**power)


_TABLE = tables.load("layout_log_tchebycheff")
RULE = Rule(
    name="log-tchebycheff",
    title="Log-Tchebycheff",
    source="ISO 3966 clause 11; positions from the rule's definition",
    round=on_diameter,
    rectangle=on_side,
    printed={
        (shape, int(points)): tuple(row)
        for shape, columns in (("round", _TABLE["fraction_of_diameter"]), ("rectangle", _TABLE["fraction_of_side"]))
        for points, row in columns.items()
    },
    printed_source=_TABLE["source"],
    exact_for="logarithmic in the outermost part, polynomial (round: in the squared radius) of the order of the nodes inside",
    exact=exact,
    round_points=range(6, 17, 2),
    side_points=range(3, 10),
)
