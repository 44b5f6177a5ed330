"""The general method: rings of equal area about a centre point that counts once."""

from __future__ import annotations

import numpy as np

from traverse.errors import LayoutError
from traverse.layouts import _areas
from traverse.layouts._base import Array, Term

MOST = 21


def on_diameters(points: int, diameters: float) -> tuple[Array, Array]:
    """Return the fractions and weights of an odd number of points on each of several diameters.

    With N = diameters (points - 1) + 1 equal areas, x_i/D = (1 - sqrt((diameters (points - 2i) + 1)/N))/2 to the centre. The
    centre stands for one of the areas however many diameters pass through it: each reading of it has its share.
    """
    if points % 2 == 0 or not 3 <= points <= MOST:
        raise LayoutError(
            f"{points} points on a diameter", where="[layout] points", expected=f"an odd number from 3 to {MOST}, the centre among them"
        )
    total = diameters * (points - 1) + 1
    i = np.arange(1, (points - 1) // 2 + 1)
    half = 0.5 * (1.0 - np.sqrt((diameters * (points - 2 * i) + 1) / total))
    ring = np.full(len(half), diameters / total)
    return np.concatenate([half, [0.5], 1.0 - half[::-1]]), np.concatenate([ring, [1.0 / total], ring])


def _circle(_shape: str, points: int) -> tuple[Term, ...]:
    """Return 1 everywhere, and the square of the radius outside the circle that the centre stands for."""
    centre = 1.0 / (2 * (points - 1) + 1)
    return (
        Term(words="1", zone=(0.0, centre), value=np.ones_like), Term(words="1", zone=(centre, 1.0), value=np.ones_like),
        Term(words="(r/R)^2", zone=(centre, 1.0), value=np.square),
    )


def terms(shape: str, points: int) -> tuple[Term, ...]:
    """Return what the general method integrates exactly on two diameters; on sides, what equal areas do."""
    return _circle(shape, points) if shape == "round" else _areas.exact(shape, points)


EXACT_FOR = "round: constant everywhere, linear in the square of the radius outside the centre circle; rectangle: linear"
