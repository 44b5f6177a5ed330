"""Velocity-area integration over lines of points: cubic arcs between them, a power law to the wall."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.physics import sections
from traverse.physics.velocity_area import MILDEST, STEEPEST, radius_weights, side_weights, wall_exponent

Array = npt.NDArray[np.float64]
Index = npt.NDArray[np.intp]
_WHERE = "[layout] weights"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Radius:
    """The points on one radius: their places among all points, r/R, and the angle of the radius."""

    index: Index
    fraction: Array
    angle: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Line:
    """The points of one line of a rectangle: their places among all, their fractions along it, and its own across."""

    index: Index
    fraction: Array
    across: float
    along: str


def integrable(shape: str, size: sections.Size, line: Sequence[str], x: Array, y: Array) -> None:
    """Raise where velocities over these points cannot be integrated line by line.

    Raises
    ------
    LayoutError
        For a section that is neither round nor rectangular, a line that is no diameter or not parallel to a side, a radius or
        line with fewer than two points.
    """
    if shape == "round":
        lines: list[_Radius] | list[_Line] = list(_radii(size, line, x, y))
    elif shape == "rectangle":
        lines = list(_lines(size, line, x, y))
        if len({one.along for one in lines}) > 1:
            raise LayoutError("lines both ways", where=_WHERE, expected="lines parallel to one side")
    else:
        raise LayoutError(
            f'weights = "velocity-area" in a {shape}', where=_WHERE, expected='a round or rectangular section; "area" works in any'
        )
    for one in lines:
        if len(np.unique(np.round(one.fraction, 9))) < 2:
            raise LayoutError(
                f"line {line[int(one.index[0])]} has a single point to integrate over", where=_WHERE,
                expected="at least two different points on every radius (round) or line (rectangle)",
            )


def velocity_area(
    shape: str, size: sections.Size, line: Sequence[str], x: Array, y: Array, exponent: float
) -> Array:
    """Return the weights that integrate velocities over the section, shape (points,); they sum to less than 1.

    Parameters
    ----------
    shape, size
        ``round`` or ``rectangle``.
    line, x, y : shape (points,)
        The points; :func:`integrable` must have accepted them.
    exponent : float
        m of the power law to the wall.
    """
    weight = np.zeros(len(line))
    if shape == "round":
        radii = list(_radii(size, line, x, y))
        for radius, share in zip(radii, _sectors(np.array([radius.angle for radius in radii])), strict=True):
            np.add.at(weight, radius.index, share * radius_weights(radius.fraction, exponent))
        return weight
    lines = sorted(_lines(size, line, x, y), key=lambda one: one.across)
    across = side_weights([one.across for one in lines], exponent)
    for one, share in zip(lines, across.tolist(), strict=True):
        weight[one.index] += share * side_weights(one.fraction, exponent)
    return weight


def fitted_exponent(
    shape: str, size: sections.Size, line: Sequence[str], x: Array, y: Array, velocity: Array
) -> tuple[float, int]:
    """Return the exponent of the wall law from the two outermost points of every line end, and how many ends gave one.

    The median of those between 4 and 14 after each is held to these limits; 7 where no end gives any.
    """
    found = []
    for near, far, y1, y2 in _ends(shape, size, line, x, y):
        exponent = float(wall_exponent(y1, y2, velocity[near], velocity[far]))
        if not np.isnan(exponent):
            found.append(min(max(exponent, MILDEST), STEEPEST))
    return (float(np.median(found)), len(found)) if found else (7.0, 0)


def _ends(shape: str, size: sections.Size, line: Sequence[str], x: Array, y: Array) -> Iterator[tuple[int, int, float, float]]:
    """Yield the outermost point and its neighbour at every end of every line, with their wall distances."""
    if shape == "round":
        for radius in _radii(size, line, x, y):
            yield from _end(radius.index, 1.0 - radius.fraction)
        return
    for one in _lines(size, line, x, y):
        yield from _end(one.index, one.fraction)
        yield from _end(one.index, 1.0 - one.fraction)


def _end(index: Index, distance: Array) -> Iterator[tuple[int, int, float, float]]:
    order = np.argsort(distance, kind="stable")
    beyond = [k for k in order.tolist() if distance[k] > distance[order[0]] * (1 + 1e-9)]
    if beyond:
        yield int(index[order[0]]), int(index[beyond[0]]), float(distance[order[0]]), float(distance[beyond[0]])


def _radii(size: sections.Size, line: Sequence[str], x: Array, y: Array) -> Iterator[_Radius]:
    """Yield every radius: a diameter gives two, and a point on the axis belongs to both."""
    radius = float(sections.diameter(size)) / 2.0
    for name in dict.fromkeys(line):
        index = np.flatnonzero([other == name for other in line])
        px, py = x[index], y[index]
        far = int(np.argmax(np.hypot(px, py)))
        angle = float(np.arctan2(py[far], px[far]))
        along, beside = px * np.cos(angle) + py * np.sin(angle), px * np.sin(angle) - py * np.cos(angle)
        if np.max(np.abs(beside)) > 1e-6 * radius:
            raise LayoutError(f"line {name} is no diameter", where=_WHERE, expected="points on diameters or radii")
        centre = np.abs(along) <= 1e-9 * radius
        for side, turn in ((along > 0, 0.0), (along < 0, np.pi)):
            if (side & ~centre).any():
                used = (side & ~centre) | centre
                yield _Radius(index=index[used], fraction=np.abs(along[used]) / radius, angle=angle + turn)


def _sectors(angle: Array) -> Array:
    """Return each radius' share of the full circle: half the way to its neighbours on either side; equal angles share."""
    turned = np.mod(np.round(angle, 12), 2.0 * np.pi)
    places, owner, count = np.unique(np.round(turned, 9), return_inverse=True, return_counts=True)
    if len(places) == 1:
        return np.full(len(angle), 1.0 / len(angle))
    gap = np.diff(places, append=places[0] + 2.0 * np.pi)
    share = (gap + np.roll(gap, 1)) / 2.0 / (2.0 * np.pi)
    return np.asarray((share / count)[owner])


def _lines(size: sections.Size, line: Sequence[str], x: Array, y: Array) -> Iterator[_Line]:
    width, height = (float(v) for v in sections.extent("rectangle", size))
    for name in dict.fromkeys(line):
        index = np.flatnonzero([other == name for other in line])
        u, v = x[index] / width + 0.5, y[index] / height + 0.5
        if np.ptp(u) <= 1e-9:
            yield _Line(index=index, fraction=v, across=float(u[0]), along="height")
        elif np.ptp(v) <= 1e-9:
            yield _Line(index=index, fraction=u, across=float(v[0]), along="width")
        else:
            raise LayoutError(f"line {name} is not parallel to a side", where=_WHERE, expected="points on lines parallel to a side")
