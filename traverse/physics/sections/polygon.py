"""A polygon of stated corners, in the coordinates they are stated in. Its size is x1, y1, x2, y2, ..."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics.sections._base import Array, Shape, Size, ring


def corners(size: Size) -> tuple[Array, Array]:
    """Return x and y of the corners, each of shape (..., corners). [m]"""
    count = sum(name.startswith("x") for name in size)
    x = np.stack(np.broadcast_arrays(*(np.asarray(size[f"x{k}"], dtype=np.float64) for k in range(1, count + 1))), axis=-1)
    y = np.stack(np.broadcast_arrays(*(np.asarray(size[f"y{k}"], dtype=np.float64) for k in range(1, count + 1))), axis=-1)
    return x, y


def crossing(x: Array, y: Array) -> tuple[int, int] | None:
    """Return the numbers (from 1) of the first two sides that meet where they should not; None for a simple polygon."""
    count = len(x)
    for i in range(count):
        for j in range(i + 1, count):
            neighbours = j == i + 1 or (i == 0 and j == count - 1)
            if _meet(x, y, i, j, neighbours=neighbours):
                return i + 1, j + 1
    return None


def _meet(x: Array, y: Array, i: int, j: int, *, neighbours: bool) -> bool:
    count = len(x)
    a, b = np.array([x[i], y[i]]), np.array([x[(i + 1) % count], y[(i + 1) % count]])
    c, d = np.array([x[j], y[j]]), np.array([x[(j + 1) % count], y[(j + 1) % count]])
    if neighbours:
        # They share a corner; they overlap only if one folds back on the other.
        tip, one, other = (b, a, d) if (i + 1) % count == j else (a, b, c)
        u, v = one - tip, other - tip
        return bool(abs(u[0] * v[1] - u[1] * v[0]) <= 1e-12 * np.hypot(*u) * np.hypot(*v) and u @ v > 0.0)
    first, second = _side(a, b, c) * _side(a, b, d), _side(c, d, a) * _side(c, d, b)
    if first < 0.0 and second < 0.0:
        return True
    return any(_on(p, q, r) for p, q, r in ((a, b, c), (a, b, d), (c, d, a), (c, d, b)))


def _side(a: Array, b: Array, c: Array) -> float:
    return float(np.sign((b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])))


def _on(a: Array, b: Array, c: Array) -> bool:
    return _side(a, b, c) == 0.0 and bool(np.all(c >= np.minimum(a, b)) and np.all(c <= np.maximum(a, b)))


def _area(size: Size) -> Array:
    x, y = corners(size)
    twice = np.sum(x * np.roll(y, -1, axis=-1) - np.roll(x, -1, axis=-1) * y, axis=-1)
    return np.asarray(np.abs(twice) / 2.0)


def _perimeter(size: Size) -> Array:
    x, y = corners(size)
    return np.asarray(np.sum(np.hypot(np.roll(x, -1, axis=-1) - x, np.roll(y, -1, axis=-1) - y), axis=-1))


def _bounds(size: Size) -> tuple[Array, Array, Array, Array]:
    x, y = corners(size)
    return x.min(axis=-1), x.max(axis=-1), y.min(axis=-1), y.max(axis=-1)


def _wall_distance(size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    cx, cy = corners(size)
    px, py = np.broadcast_arrays(np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64))
    nearest = np.full(px.shape, np.inf)
    inside = np.zeros(px.shape, dtype=bool)
    for i in range(cx.shape[-1]):
        ax, ay, bx, by = cx[i], cy[i], cx[i - 1], cy[i - 1]
        ux, uy = bx - ax, by - ay
        share = np.clip(((px - ax) * ux + (py - ay) * uy) / (ux * ux + uy * uy), 0.0, 1.0)
        nearest = np.minimum(nearest, np.hypot(px - ax - share * ux, py - ay - share * uy))
        if ay != by:
            inside ^= ((ay > py) != (by > py)) & (px < ux * (py - ay) / uy + ax)
    return np.asarray(np.where(inside, nearest, -nearest))


def _chord(size: Size, offset: npt.ArrayLike, along: str) -> tuple[Array, Array]:
    """Return the outermost crossings of the line; a re-entrant corner between them is not seen."""
    cx, cy = corners(size)
    across, travel = (cx, cy) if along == "height" else (cy, cx)
    place = np.asarray(offset, dtype=np.float64)
    low, high = np.full(place.shape, np.inf), np.full(place.shape, -np.inf)
    for i in range(len(across)):
        a, b, s, t = across[i], across[i - 1], travel[i], travel[i - 1]
        hit = (np.minimum(a, b) <= place) & (place <= np.maximum(a, b))
        values = (s + (place - a) / (b - a) * (t - s),) if a != b else (s + 0.0 * place, t + 0.0 * place)
        for value in values:
            low, high = np.where(hit, np.minimum(low, value), low), np.where(hit, np.maximum(high, value), high)
    return np.where(np.isfinite(low), low, np.nan), np.where(np.isfinite(high), high, np.nan)


def _outline(size: Size, _points: int) -> tuple[Array, ...]:
    x, y = corners(size)
    return (ring(np.append(x, x[0]), np.append(y, y[0])),)


SHAPE = Shape(
    dimensions=(),
    area=_area,
    perimeter=_perimeter,
    bounds=_bounds,
    wall_distance=_wall_distance,
    outline=_outline,
    chord=_chord,
    deductions=(),
)
