"""Nodes and weights for means over a section of fields that fall steeply at the wall."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics import sections
from traverse.physics.sections import Size, annulus

Array = npt.NDArray[np.float64]

# Wall distance = t^GRADE: any y^(1/m) or ln y becomes smooth enough in t for a few Gauss nodes.
GRADE = 4
RADIAL, ANGULAR, SIDE, CELLS = 20, 48, 20, 100
# A cell at the wall is represented where a power law of this exponent has its mean over the cell.
STEEPNESS = 7.0


def nodes(shape: str, size: Size) -> tuple[Array, Array, Array]:
    """Return x, y and weights, shape (nodes,); the weights sum to 1. [m]

    Round, ellipse and annulus: Gauss along the radius, graded to the walls, and equal steps around. Rectangle: Gauss in
    each half of either side, graded to the walls. Other shapes: a fine grid, cells cut by the wall counted in part.
    """
    if shape in {"round", "ellipse"}:
        distance, share = _graded(RADIAL)
        return _around(shape, size, 1.0 - distance, share * 2.0 * (1.0 - distance))
    if shape == "annulus":
        wall, core = annulus.diameters(size)
        inner = float(core / wall)
        distance, share = _graded(RADIAL)
        half = (1.0 - inner) / 2.0
        radius = np.concatenate([1.0 - half * distance, inner + half * distance])
        return _around(shape, size, radius, np.tile(share, 2) * radius)
    if shape == "rectangle":
        return _product(size)
    return _grid(shape, size)


def centre(shape: str, size: Size) -> tuple[float, float]:
    """Return the middle of the box around the section. [m]"""
    left, right, bottom, top = sections.bounds(shape, size)
    return float(left + right) / 2.0, float(bottom + top) / 2.0


def _graded(count: int) -> tuple[Array, Array]:
    """Return distances from the wall from 0 to 1, and weights that sum to 1."""
    place, weight = np.polynomial.legendre.leggauss(count)
    t = (place + 1.0) / 2.0
    return t**GRADE, weight / 2.0 * GRADE * t ** (GRADE - 1)


def _around(shape: str, size: Size, radius: Array, share: Array) -> tuple[Array, Array, Array]:
    width, height = sections.extent(shape, size)
    angle = (np.arange(ANGULAR) + 0.5) * 2.0 * np.pi / ANGULAR
    x = float(width) / 2.0 * np.outer(radius, np.cos(angle))
    y = float(height) / 2.0 * np.outer(radius, np.sin(angle))
    weight = np.repeat(share / share.sum() / ANGULAR, ANGULAR)
    return x.ravel(), y.ravel(), weight


def _product(size: Size) -> tuple[Array, Array, Array]:
    distance, share = _graded(SIDE)
    place = np.concatenate([distance - 1.0, 1.0 - distance]) / 2.0
    width, height = sections.extent("rectangle", size)
    x, y = np.meshgrid(place * float(width), place * float(height))
    both = np.tile(share / 2.0, 2)
    return x.ravel(), y.ravel(), np.outer(both, both).ravel()


def _grid(shape: str, size: Size) -> tuple[Array, Array, Array]:
    width, height = (float(side) for side in sections.extent(shape, size))
    middle_x, middle_y = centre(shape, size)
    # Cells as square as can be: what part of one the wall cuts off is taken from the distance of its middle alone.
    across, up = (max(2, round(CELLS * ratio)) for ratio in (np.sqrt(width / height), np.sqrt(height / width)))
    x, y = (side.ravel() for side in np.meshgrid(
        middle_x + ((np.arange(across) + 0.5) / across - 0.5) * width, middle_y + ((np.arange(up) + 0.5) / up - 0.5) * height
    ))
    cell = float(np.sqrt(width / across * height / up))
    distance = sections.wall_distance(shape, size, x, y)
    weight = np.clip(0.5 + distance / cell, 0.0, 1.0)
    inside = weight > 0.0
    x, y, weight, distance = x[inside], y[inside], weight[inside], distance[inside]
    near = distance < 2.0 * cell
    step_x, step_y = _slope(shape, size, x[near], y[near], 0.25 * cell)
    move = _representative(distance[near], cell) - distance[near]
    x[near], y[near] = x[near] + move * step_x, y[near] + move * step_y
    return x, y, weight / weight.sum()


def _representative(distance: Array, cell: float) -> Array:
    """Return the distance from the wall at which y^(1/7) has its mean over the depth of a cell."""
    low, high = np.maximum(distance - cell / 2.0, 0.0), distance + cell / 2.0
    power = 1.0 + 1.0 / STEEPNESS
    return np.asarray(((high**power - low**power) / (power * (high - low))) ** STEEPNESS)


def _slope(shape: str, size: Size, x: Array, y: Array, step: float) -> tuple[Array, Array]:
    """Return the gradient of the distance to the wall: the way inwards."""
    across = sections.wall_distance(shape, size, x + step, y) - sections.wall_distance(shape, size, x - step, y)
    up = sections.wall_distance(shape, size, x, y + step) - sections.wall_distance(shape, size, x, y - step)
    return np.asarray(across / (2.0 * step)), np.asarray(up / (2.0 * step))
