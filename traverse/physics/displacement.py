"""What a head of finite size does to the reading: the streamline it shows lies nearer to the fast side, and the wall slows it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Form = Literal["macmillan", "mckeon"]
# Shift over head diameter: MacMillan 1957, and McKeon et al. 2003 who let it fade with the gradient. From memory.
SHIFT = 0.15
# Wall proximity, MacMillan 1957: part of the velocity that is missing with the head on the wall, and how fast it fades. From memory.
WALL, FADE = 0.015, 3.5


def shift(diameter: npt.ArrayLike, relative_slope: npt.ArrayLike, form: Form = "macmillan") -> Array:
    """Return how far the streamline that the head shows lies on the fast side of its axis. [m]

    Parameters
    ----------
    diameter : array_like, shape (..., n)
        Outside diameter d of the head. [m]
    relative_slope : array_like, shape (..., n)
        Gradient of the velocity over the velocity, without its sign. [1/m]
    form : {'macmillan', 'mckeon'}
        0.15 d, or 0.15 d tanh(4 sqrt(a)) with a = (d/2) times the relative slope.

    Returns
    -------
    array, shape (..., n)
    """
    size, slope = np.asarray(diameter, dtype=np.float64), np.abs(np.asarray(relative_slope, dtype=np.float64))
    if form == "macmillan":
        return np.asarray(SHIFT * size + 0.0 * slope)
    return np.asarray(SHIFT * size * np.tanh(4.0 * np.sqrt(size / 2.0 * slope)))


def gradient_factor(diameter: npt.ArrayLike, relative_slope: npt.ArrayLike, form: Form = "macmillan") -> Array:
    """Return the factor on the velocity for the transverse gradient: v(y) = u(y) - shift |du/dy|, u as read. At least 0."""
    slope = np.abs(np.asarray(relative_slope, dtype=np.float64))
    return np.asarray(np.maximum(1.0 - shift(diameter, slope, form) * slope, 0.0))


def wall_factor(diameter: npt.ArrayLike, wall_distance: npt.ArrayLike) -> Array:
    """Return the factor on the velocity for the nearness of a wall: 1 + 0.015 exp(-3.5 (y/d - 0.5)).

    Parameters
    ----------
    diameter, wall_distance : array_like, shape (..., n)
        Outside diameter of the head and distance y of its axis from the wall. [m]
    """
    near = np.asarray(wall_distance, dtype=np.float64) / np.asarray(diameter, dtype=np.float64)
    return np.asarray(1.0 + WALL * np.exp(-FADE * (near - 0.5)))


@dataclass(frozen=True, slots=True)
class Way:
    """How a slope was found, and the points on the line that it was found from, in order along it."""

    kind: Literal["parabola", "wall", "none"]
    points: tuple[int, ...] = ()


def relative_slopes(depth: Array, wall_distance: Array, speed: Array) -> tuple[Array, tuple[Way, ...]]:
    """Return the gradient of the velocity along one line over the velocity, without its sign, and how each was found.

    Parameters
    ----------
    depth : array, shape (k,)
        Places along the line, increasing. [m]
    wall_distance : array, shape (k,)
        Distance of each from the nearest wall. [m]
    speed : array, shape (k,)
        Velocities in any unit.

    Returns
    -------
    array, shape (k,)
        [1/m]; 0 where the speed is not positive, and on a line of one point.
    tuple of Way
        'wall' for an outermost point: a power law from the wall through it and its neighbour; 'parabola' through the point and its
        neighbours, one-sided where the line ends away from the wall (the secant on a line of two points).
    """
    count = depth.size
    slope, ways = np.zeros(count), [Way("none")] * count
    for place in range(count):
        if count < 2 or not speed[place] > 0.0:
            continue
        beside = 1 if place == 0 else count - 2 if place == count - 1 else -1
        if beside >= 0 and wall_distance[place] < wall_distance[beside] and speed[beside] > 0.0:
            exponent = np.log(speed[beside] / speed[place]) / np.log(wall_distance[beside] / wall_distance[place])
            slope[place], ways[place] = abs(exponent) / wall_distance[place], Way("wall", (place, beside))
            continue
        first = min(max(place - 1, 0), max(count - 3, 0))
        chosen = tuple(range(first, min(first + 3, count)))
        slope[place] = abs(_derivative(depth[place], depth[list(chosen)], speed[list(chosen)])) / speed[place]
        ways[place] = Way("parabola", chosen)
    return slope, tuple(ways)


def _derivative(at: float, x: Array, y: Array) -> float:
    """Return the derivative of the parabola through three points, or of the secant through two."""
    first = (y[1] - y[0]) / (x[1] - x[0])
    if x.size < 3:
        return float(first)
    second = ((y[2] - y[1]) / (x[2] - x[1]) - first) / (x[2] - x[0])
    return float(first + second * (2.0 * at - x[0] - x[1]))
