"""The record of a shape, and what the shapes share."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
Size = Mapping[str, npt.ArrayLike]
# Dimensions that are taken off every shape which says so: what lies on the wall, all round.
DEDUCTIONS = ("lining", "deposit")


@dataclass(frozen=True, slots=True, kw_only=True)
class Shape:
    """A shape of cross-section as a set of functions of its size. [m], [m2]

    Parameters
    ----------
    dimensions : tuple of tuple of str
        The sets of dimensions that give the size, each complete in itself; the first is the usual one.
    area, perimeter : callable (size) -> array
        Open area and wetted perimeter; they broadcast over the size.
    bounds : callable (size) -> (x low, x high, y low, y high)
        The box around the section.
    wall_distance : callable (size, x, y) -> array
        Distance to the nearest wall, negative outside.
    outline : callable (size, points) -> rings of shape (k, 2)
        Closed rings to draw: the outer wall first, then holes.
    chord : callable (size, offset, along) -> (first, last)
        Where a straight line across the section, ``offset`` from the centre, meets the wall: along the height the line is
        vertical and the offset is x, along the width it is horizontal and the offset is y. NaN where it misses.
    deductions : tuple of str
        The dimensions that may be taken off.
    """

    dimensions: tuple[tuple[str, ...], ...]
    area: Callable[[Size], Array]
    perimeter: Callable[[Size], Array]
    bounds: Callable[[Size], tuple[Array, Array, Array, Array]]
    wall_distance: Callable[[Size, npt.ArrayLike, npt.ArrayLike], Array]
    outline: Callable[[Size, int], tuple[Array, ...]]
    chord: Callable[[Size, npt.ArrayLike, str], tuple[Array, Array]]
    deductions: tuple[str, ...] = DEDUCTIONS


def positive(length: npt.ArrayLike) -> Array:
    """Return a length, NaN where it is not positive: two negative sides would multiply to an area that looks right."""
    value = np.asarray(length, dtype=np.float64)
    return np.asarray(np.where(value > 0.0, value, np.nan))


def deducted(size: Size) -> Array:
    """Return what lies on each wall: lining and deposit together. [m]"""
    return np.asarray(sum((np.asarray(size[name], dtype=np.float64) for name in DEDUCTIONS if name in size), start=np.float64(0.0)))


def box(size: Size) -> tuple[Array, Array]:
    """Return the open width and height, with what lies on either wall taken off. [m]"""
    off = 2.0 * deducted(size)
    width = positive(np.asarray(size["width"], dtype=np.float64) - off)
    return width, positive(np.asarray(size["height"], dtype=np.float64) - off)


def about_centre(width: Array, height: Array) -> tuple[Array, Array, Array, Array]:
    """Return the bounds of a section whose centre is the origin."""
    return -width / 2.0, width / 2.0, -height / 2.0, height / 2.0


def ring(x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return a ring as an array of shape (k, 2)."""
    return np.column_stack([np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)])


def half_chord(radius: npt.ArrayLike, offset: npt.ArrayLike) -> Array:
    """Return half the chord of a circle at a distance from its centre; NaN outside. [m]"""
    inside = np.square(np.asarray(radius, dtype=np.float64)) - np.square(np.asarray(offset, dtype=np.float64))
    return np.asarray(np.sqrt(np.where(inside >= 0.0, inside, np.nan)))
