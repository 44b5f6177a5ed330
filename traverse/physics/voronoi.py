"""The part of a section that lies nearest to each point: Voronoi cells clipped by the wall, their areas exact."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from traverse.physics import sections

Array = npt.NDArray[np.float64]
Size = sections.Size
# Points nearer to each other than this part of the section's extent are one place and share its cell.
SAME_PLACE = 1e-9


def shares(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the share of the section's area that is nearer to each point than to any other, shape (points,).

    Nearest is meant in a straight line, also across a core or a corner that points inwards.

    Parameters
    ----------
    shape, size
        The section.
    x, y : array_like, shape (points,)
        Places in the section's coordinates. [m]

    Returns
    -------
    array
        Shares that sum to 1 within rounding; points in one place have equal parts of it. NaN for all where a point lies
        outside or a figure is missing.
    """
    px, py = np.atleast_1d(np.asarray(x, dtype=np.float64)), np.atleast_1d(np.asarray(y, dtype=np.float64))
    left, right, bottom, top = (float(side) for side in sections.bounds(shape, size))
    near = SAME_PLACE * max(right - left, top - bottom)
    if not np.all(sections.wall_distance(shape, size, px, py) > -near):
        return np.full(px.shape, np.nan)
    places, owner = _places(px, py, near)
    area = _AREA[shape](size)
    room = np.array([[left, bottom], [right, bottom], [right, top], [left, top]])
    # Over the whole section, not over the sum of the cells: a cell that is wrong then shows in the sum.
    found = np.array([area(cell(places, number, room)) for number in range(len(places))]) / area(room)
    return np.asarray((found / np.bincount(owner))[owner])


def _places(x: Array, y: Array, near: float) -> tuple[Array, npt.NDArray[np.intp]]:
    """Return the different places, and which of them each point is at."""
    places: list[tuple[float, float]] = []
    owner = np.empty(len(x), dtype=np.intp)
    for i, (a, b) in enumerate(zip(x.tolist(), y.tolist(), strict=True)):
        same = [k for k, (c, d) in enumerate(places) if np.hypot(a - c, b - d) <= near]
        owner[i] = same[0] if same else len(places)
        if not same:
            places.append((a, b))
    return np.array(places), owner


def cell(places: Array, number: int, room: Array) -> Array:
    """Return the corners of a point's cell inside a convex room, shape (corners, 2)."""
    own = places[number]
    normal = np.delete(places, number, axis=0) - own
    square = np.sum(np.square(normal), axis=1)
    # The nearest neighbours first: most of the others then cut nothing off.
    order = np.argsort(square)
    normal, level = normal[order], square[order] / 2.0
    found = room - own
    done = 0
    while done < len(level):
        cutting = np.any(normal[done:] @ found.T > level[done:, None], axis=1)
        if not cutting.any():
            break
        done += int(np.argmax(cutting)) + 1
        found = clip(found, normal[done - 1], float(level[done - 1]))
    return np.asarray(found + own)


def clip(ring: Array, normal: Array, level: float) -> Array:
    """Return the part of a polygon where ``normal . p <= level``; a polygon that is not convex may keep double edges."""
    height = (ring @ normal - level).tolist()
    if not height or max(height) <= 0.0:
        return ring
    points = ring.tolist()
    corners: list[tuple[float, float]] = []
    for i, (h, g) in enumerate(zip(height, height[1:] + height[:1], strict=True)):
        (px, py), (qx, qy) = points[i], points[(i + 1) % len(points)]
        if h <= 0.0:
            corners.append((px, py))
        if (h < 0.0 < g) or (g < 0.0 < h):
            part = h / (h - g)
            corners.append((px + part * (qx - px), py + part * (qy - py)))
    return np.array(corners) if corners else np.empty((0, 2))


def polygon_area(ring: Array) -> float:
    """Return the area of a polygon, positive counter-clockwise."""
    if len(ring) < 3:
        return 0.0
    # From one of its corners: far from the origin the products would lose the digits of a small polygon.
    near = ring - ring[0]
    after = np.roll(near, -1, axis=0)
    return float(np.sum(near[:, 0] * after[:, 1] - after[:, 0] * near[:, 1])) / 2.0


def disk_area(ring: Array, radius: float) -> float:
    """Return the area that a polygon and a disk about the origin have in common, exact, positive counter-clockwise.

    Each side with the origin makes a triangle; what the disk leaves of it is a triangle or a sector.
    """
    points = [(float(px), float(py)) for px, py in ring.tolist()]
    return math.fsum(_wedge(p, q, radius) for p, q in zip(points, points[1:] + points[:1], strict=True))


Point = tuple[float, float]


def _wedge(p: Point, q: Point, radius: float) -> float:
    """Return the part of the triangle (origin, p, q) that lies in the disk."""
    along = (q[0] - p[0], q[1] - p[1])
    a, b, c = along[0] ** 2 + along[1] ** 2, p[0] * along[0] + p[1] * along[1], p[0] ** 2 + p[1] ** 2 - radius * radius
    if a == 0.0:
        return 0.0
    under = b * b - a * c
    root = math.sqrt(under) if under > 0.0 else 0.0
    first, last = max((-b - root) / a, 0.0), min((-b + root) / a, 1.0)
    if under <= 0.0 or first >= last:
        return radius * radius * _angle(p, q) / 2.0
    s = (p[0] + first * along[0], p[1] + first * along[1])
    # An end inside the disk is taken as it is: next to the origin p + (q - p) may differ from q enough to turn its angle by anything.
    t = q if last == 1.0 else (p[0] + last * along[0], p[1] + last * along[1])
    inside = (s[0] * t[1] - s[1] * t[0]) / 2.0
    return radius * radius * (_angle(p, s) + _angle(t, q)) / 2.0 + inside


def _angle(p: Point, q: Point) -> float:
    return math.atan2(p[0] * q[1] - p[1] * q[0], p[0] * q[0] + p[1] * q[1])


Measure = Callable[[Array], float]


def _ellipse(size: Size) -> Measure:
    half = np.array([float(v) for v in sections.extent("ellipse", size)]) / 2.0
    return lambda ring: disk_area(ring / half, 1.0) * float(half.prod())


def _rectangle(size: Size) -> Measure:
    left, right, bottom, top = (float(side) for side in sections.bounds("rectangle", size))
    return lambda ring: polygon_area(_boxed(ring, left, right, bottom, top))


def _boxed(ring: Array, left: float, right: float, bottom: float, top: float) -> Array:
    for normal, level in (((1, 0), right), ((-1, 0), -left), ((0, 1), top), ((0, -1), -bottom)):
        ring = clip(ring, np.array(normal, dtype=np.float64), level)
    return ring


def _flat_oval(size: Size) -> Measure:
    width, height = (float(v) for v in sections.extent("flat-oval", size))
    radius, straight = min(width, height) / 2.0, abs(width - height) / 2.0
    # A section standing up is turned by a quarter.
    turn = np.array([[0.0, -1.0], [1.0, 0.0]]) if height > width else np.eye(2)
    right = np.array([1.0, 0.0])

    def measure(ring: Array) -> float:
        own = ring @ turn
        middle = polygon_area(_boxed(own, -straight, straight, -radius, radius))
        ends = disk_area(clip(own - straight * right, -right, 0.0), radius) + disk_area(clip(own + straight * right, right, 0.0), radius)
        return middle + ends

    return measure


def _annulus(size: Size) -> Measure:
    outer, inner = (float(d) / 2.0 for d in sections.ring_diameters(size))
    return lambda ring: disk_area(ring, outer) - disk_area(ring, inner)


def _polygon(size: Size) -> Measure:
    corners = np.column_stack(sections.corners(size))
    if polygon_area(corners) < 0.0:
        corners = corners[::-1]

    def measure(ring: Array) -> float:
        part = corners
        for p, q in zip(ring, np.roll(ring, -1, axis=0), strict=True):
            outward = np.array([q[1] - p[1], p[0] - q[0]])
            part = clip(part, outward, float(outward @ p))
        return polygon_area(part)

    return measure


_AREA: dict[str, Callable[[Size], Measure]] = {
    "round": lambda size: lambda ring: disk_area(ring, float(sections.diameter(size)) / 2.0),
    "ellipse": _ellipse, "rectangle": _rectangle, "flat-oval": _flat_oval, "annulus": _annulus, "polygon": _polygon,
}
