"""Equal areas: ring centroids on diameters, centres of equal rectangles."""

from __future__ import annotations

import sys

import numpy as np

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import EVEN, Array, Rule, Term


def on_diameter(points: int) -> tuple[Array, Array]:
    """Return the fractions of the diameter: (1 - sqrt(1 - (2k - 1)/N))/2 for k up to N/2, mirrored; equal weights.

    Each ring of equal area is sampled at the radius that halves its area.
    """
    if points < 2 or points % 2:
        raise LayoutError(
            f"{points} points on a diameter", where="[layout] points", expected=EVEN
        )
    k = np.arange(1, points // 2 + 1)
    half = 0.5 * (1.0 - np.sqrt(1.0 - (2 * k - 1) / points))
    return np.concatenate([half, 1.0 - half[::-1]]), np.full(points, 1.0 / points)


def on_side(points: int) -> tuple[Array, Array]:
    """Return the centres of equal parts of a side, (2k - 1)/(2n); equal weights."""
    if points < 1:
        raise LayoutError(f"{points} points on a side", where="[layout] points", expected="at least 1")
    k = np.arange(1, points + 1)
    return (2 * k - 1) / (2.0 * points), np.full(points, 1.0 / points)


def exact(shape: str, _points: int) -> tuple[Term, ...]:
    """Return 1 and the square of the radius on a circle, 1 and the place on a side."""
    power = 2 if shape == "round" else 1
    return (
        Term(words="1", zone=(0.0, 1.0), value=np.ones_like),
        Term(words="(r/R)^2" if shape == "round" else "x/L", zone=(0.0, 1.0), value=lambda u: u**power),
    )


def _printed() -> dict[tuple[str, int], tuple[str, ...]]:
    columns = tables.load("layout_equal_area")["percent_of_diameter"]
    return {
        ("round", int(points)): tuple(f"{float(text) / 100:.3f}" for text in row) for points, row in columns.items()
    }


RULE = Rule(
    name="equal-area",
    title="Equal areas",
    source="EPA Method 1 sections 11.3.1 (round, table 1-2) and 11.3.4 (rectangular); ring centroids and centres of equal parts",
    round=on_diameter,
    rectangle=on_side,
    printed=_printed(),
    printed_source=tables.load("layout_equal_area")["source"],
    exact_for="round: velocity linear in the square of the radius; rectangle: velocity linear in each direction",
    exact=exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
)
