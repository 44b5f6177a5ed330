"""The wall-effect adjustment factor of a round stack from velocities measured near the wall (EPA Method 2H).

The outermost Method 1 area of each of four radii is cut into rings a step (an inch, 2.5 cm) wide and a remainder; the
velocity falls to zero at the wall. Equation numbers are those of Method 2H; they are from memory, the areas close exactly.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Sector:
    """One exterior sector: the velocity at its Method 1 point, at whole steps from the wall, and at ``remainder``, where measured."""

    exterior: float
    steps: Mapping[int, float]
    remainder: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Worked:
    """A sector as it was worked out. ``filled`` are the steps that took the value of the next point farther from the wall."""

    velocity: float
    last: int
    remainder_distance: float
    remainder: float
    filled: tuple[int, ...]


def edge(radius: float, points: int) -> float:
    """Return how far the outermost Method 1 area reaches from the wall, eq. 2H-3: r (1 - sqrt(1 - 2/p)).

    ``points`` is the number on a diameter.
    """
    return radius * (1.0 - math.sqrt(1.0 - 2.0 / points))


def remainder_distance(radius: float, points: int, last: float) -> float:
    """Return where the rest of the area behind the last step is measured, eq. 2H-1: the radius that halves it."""
    return radius - math.sqrt(radius * radius - radius * last + last * last / 2.0 - radius * radius / points)


def ring_area(radius: float, distance: float, step: float) -> float:
    """Return a quarter of the ring between a distance from the wall and one step less, eq. 2H-8."""
    return math.pi / 4.0 * ((radius - distance + step) ** 2 - (radius - distance) ** 2)


def remainder_area(radius: float, points: int, last: float) -> float:
    """Return a quarter of what is left of the outermost area behind the last step, eq. 2H-11."""
    return math.pi / 4.0 * (radius - last) ** 2 - (points - 2) / (4.0 * points) * math.pi * radius * radius


def last_step(radius: float, points: int, step: float, farthest: float) -> int:
    """Return the number of the last whole step inside the outermost area, none farther than ``farthest``."""
    return int(min(edge(radius, points), farthest) / step + 1e-9)


def sector(measured: Sector, radius: float, points: int, step: float, last: int, near: float) -> Worked:
    """Return the mean velocity of one exterior sector, eqs. 2H-7 to 2H-15.

    Parameters
    ----------
    measured : Sector
        Velocities; at least one step, or the remainder.
    radius, step : float
        [m]
    points : int
        Method 1 points on a diameter.
    last : int
        The last step that belongs to the traverse.
    near : float
        Where the remainder lies no farther than this behind the last step and was not measured, the last step serves for it. [m]

    Returns
    -------
    Worked
        NaN velocity where a value that is needed was not measured.
    """
    place = remainder_distance(radius, points, last * step)
    rest = measured.remainder
    if rest is None:
        rest = measured.steps.get(last, math.nan) if place - last * step <= near * (1 + 1e-9) else math.nan
    filled, values = [], [0.0] * (last + 1)
    farther = rest
    for number in range(last, 0, -1):
        if number in measured.steps:
            farther = measured.steps[number]
        else:
            filled.append(number)
        values[number] = farther
    flow = sum((values[d - 1] + values[d]) / 2.0 * ring_area(radius, d * step, step) for d in range(1, last + 1))
    flow += rest * remainder_area(radius, points, last * step)
    return Worked(
        velocity=flow / (math.pi * radius * radius / (2.0 * points)), last=last, remainder_distance=place, remainder=rest,
        filled=tuple(sorted(filled)),
    )


def factor(exterior: Sequence[float], replaced: Sequence[float], velocities: Sequence[float]) -> float:
    """Return the factor: the mean with the four exterior velocities replaced over the mean as measured, eqs. 2H-5, 2H-17, 2H-19.

    ``velocities`` are all Method 1 points, the exterior ones among them. Not rounded.
    """
    total = math.fsum(velocities)
    return (total - math.fsum(exterior) + math.fsum(replaced)) / total
