"""Equal areas: the positions and the claims that several rules share."""

from __future__ import annotations

import numpy as np

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import EVEN, Array, Term


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


def on_gap(points: int, core: float) -> tuple[Array, Array]:
    """Return the fractions of the gap of a ring from its outer wall: rings of equal area, each at the radius that halves it.

    ``core`` is the diameter of the core over that of the wall.
    """
    if points < 1:
        raise LayoutError(f"{points} points on a radius", where="[layout] points", expected="at least 1")
    k = np.arange(1, points + 1)
    radius = np.sqrt(1.0 - (2 * k - 1) / (2.0 * points) * (1.0 - core * core))
    return (1.0 - radius) / (1.0 - core), np.full(points, 1.0 / points)


def exact(shape: str, _points: int) -> tuple[Term, ...]:
    """Return 1 and the square of the radius on a circle, 1 and the place on a side."""
    power = 2 if shape == "round" else 1
    return (
        Term(words="1", zone=(0.0, 1.0), value=np.ones_like),
        Term(words="(r/R)^2" if shape == "round" else "x/L", zone=(0.0, 1.0), value=lambda u: u**power),
    )


EXACT_FOR = "round: velocity linear in the square of the radius; rectangle: velocity linear in each direction"


def printed() -> dict[tuple[str, int], tuple[str, ...]]:
    """Return the digits of Method 1, table 1-2, as fractions of the diameter."""
    columns = tables.load("layout_equal_area")["percent_of_diameter"]
    return {
        ("round", int(points)): tuple(f"{float(text) / 100:.3f}" for text in row) for points, row in columns.items()
    }
