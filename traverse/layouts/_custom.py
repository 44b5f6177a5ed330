"""Points that a job gives itself, with their weights."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.layouts._base import Array, Placement, checked_angles, checked_size, diameter_at, diameters, one_of
from traverse.physics import sections, voronoi

_WHERE = "[layout] points"
# Shapes whose lines are diameters (or radii) at angles.
ROUND = ("round", "ellipse", "annulus")


def place_custom(
    *, shape: str, width: float, height: float, line: Sequence[str], point: Sequence[int], weight: npt.ArrayLike | None = None,
    depth: npt.ArrayLike | None = None, x: npt.ArrayLike | None = None, y: npt.ArrayLike | None = None,
    angles: Sequence[float] | None = None, positions: Sequence[float] | None = None, along: str = "height",
    names: Sequence[str] | None = None, size: sections.Size | None = None,
) -> Placement:
    """Return points stated by the job.

    Parameters
    ----------
    shape, width, height
        The section. [m]
    line, point
        Label of each point.
    weight : array_like, shape (points,), optional
        Share of the area of each point; brought to a sum of 1, with a note where it was not. Without weights each point stands
        for the part of the section that is nearest to it.
    depth : array_like, shape (points,), optional
        From the inner wall at the port, along the line. [m]  Either this, or ``x`` and ``y`` from the centre.
    angles : sequence, optional
        Port angles of the lines of a round section; equally spaced over 180 degrees from 0 by default. [rad]
    positions : sequence, optional
        Where the lines of any other section lie across it, from the left (from the top when the probe travels along
        the width); centres of equal parts by default. [m]
    along : {'height', 'width'}
        Along which side the probe travels where the section is not round.
    names : sequence, optional
        The lines in the order of ``angles`` or ``positions``; the order of first appearance by default.
    size : mapping, optional
        The dimensions of the section where width and height do not say all: an annulus, a polygon. [m]

    Raises
    ------
    LayoutError
        For a point outside the section, two points in one place, a missing or unusable weight.
    """
    checked_size(shape, width, height)
    one_of("along", along, ("height", "width"), "[layout] along")
    _refuse_strangers(shape, angles, positions)
    full = size if size is not None else ({"diameter": width} if shape == "round" else {"width": width, "height": height})
    _refuse_lengths(len(line), point=point, weight=weight, depth=depth, x=x, y=y)
    frame = _Lines(shape=shape, size=full, line=tuple(line), order=_order(line, names), angles=angles, positions=positions, along=along)
    notes: list[str] = []
    if depth is not None and x is None and y is None:
        deep = np.asarray(depth, dtype=np.float64)
        px, py = frame.places(deep)
    elif depth is None and x is not None and y is not None:
        px, py = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
        deep, beside = frame.depths(px, py)
        notes += _off_line(line, point, beside > 1e-6 * width)
    else:
        twice = depth is not None
        raise LayoutError(
            "custom points have both a depth and x or y" if twice else "custom points have no places", where=_WHERE,
            expected="either a depth, or x and y, for every point",
        )
    _refuse(shape, full, width, line, point, px, py)
    shares, said, source = _shares(shape, full, weight, px, py)
    return Placement(
        title="Points given by the job", source=source, x=px, y=py, depth=deep, weight=shares,
        line=tuple(line), point=tuple(point), moved=(False,) * len(shares), notes=(*said, *notes),
    )


def _shares(
    shape: str, size: sections.Size, weight: npt.ArrayLike | None, x: Array, y: Array
) -> tuple[Array, tuple[str, ...], str]:
    """Return the weights with what there is to say about them, and where they come from."""
    if weight is None:
        note = "no weights are given: each point stands for the part of the section that is nearest to it"
        return voronoi.shares(shape, size, x, y), (note,), "weights from the area nearest to each point"
    shares = np.asarray(weight, dtype=np.float64)
    if not np.all(np.isfinite(shares)) or np.any(shares <= 0):
        raise LayoutError("a weight is missing or not positive", where=_WHERE, expected="a positive weight for every point")
    total = float(shares.sum())
    notes = (f"weights summed to {total:.6g} and were brought to a sum of 1",) if abs(total - 1.0) > 1e-9 else ()
    return shares / total, notes, "weights stated by the job"


@dataclass(frozen=True, slots=True, kw_only=True)
class _Lines:
    """The lines of custom points: diameters at angles where the section is round, else straight lines across it."""

    shape: str
    size: sections.Size
    line: tuple[str, ...]
    order: tuple[str, ...]
    angles: Sequence[float] | None
    positions: Sequence[float] | None
    along: str

    def _number(self) -> npt.NDArray[np.intp]:
        return np.array([self.order.index(name) for name in self.line])

    def _rays(self) -> tuple[Array, Array]:
        """Return the angle of each point's line and the length of that diameter."""
        angle = checked_angles(self.angles, len(self.order), 2.0 * np.pi if self.shape == "annulus" else np.pi)[self._number()]
        width, height = (float(v) for v in sections.extent(self.shape, self.size))
        return angle, diameter_at(width, height, angle)

    def _offsets(self) -> Array:
        """Return where each point's line lies across the section, in its coordinates."""
        left, right, bottom, top = (float(v) for v in sections.bounds(self.shape, self.size))
        across = right - left if self.along == "height" else top - bottom
        count = len(self.order)
        place = (np.arange(count) + 0.5) / count * across if self.positions is None else np.asarray(self.positions, dtype=np.float64)
        if place.shape != (count,):
            raise LayoutError(f"{place.size} positions", where="[layout] positions", expected=f"{count}, one a line")
        return np.asarray(left + place if self.along == "height" else top - place)[self._number()]

    def places(self, depth: Array) -> tuple[Array, Array]:
        """Return x and y of points at depths from the inner wall at the port."""
        if self.shape in ROUND:
            angle, length = self._rays()
            return diameters(length, depth, angle)
        offset = self._offsets()
        low, high = sections.chord(self.shape, self.size, offset, self.along)
        return (offset, high - depth) if self.along == "height" else (low + depth, offset)

    def depths(self, x: Array, y: Array) -> tuple[Array, Array]:
        """Return the depths, and how far each point of a round section lies beside the diameter of its line."""
        if self.shape in ROUND:
            angle, length = self._rays()
            depth = length / 2.0 - (x * np.cos(angle) + y * np.sin(angle))
            return np.asarray(depth), np.asarray(np.abs(y * np.cos(angle) - x * np.sin(angle)))
        low, high = sections.chord(self.shape, self.size, x if self.along == "height" else y, self.along)
        return np.asarray(high - y if self.along == "height" else x - low), np.zeros(x.shape)


def _refuse_strangers(shape: str, angles: Sequence[float] | None, positions: Sequence[float] | None) -> None:
    if shape in ROUND and positions is not None:
        raise LayoutError("positions in a round section", where="[layout] positions", expected="angles, for a round section")
    if shape not in ROUND and angles is not None:
        raise LayoutError(f"angles for a {shape}", where="[layout] angles", expected="angles only for a round section")


def _refuse_lengths(count: int, **columns: Sequence[int] | npt.ArrayLike | None) -> None:
    if count == 0:
        raise LayoutError("no points", where=_WHERE, expected="at least one point")
    for name, values in columns.items():
        shape = (count,) if values is None else np.shape(values)
        if shape != (count,):
            raise LayoutError(
                f"{int(np.prod(shape))} of {name} for {count} points", where=_WHERE, expected=f"a {name} for every point"
            )


def _order(line: Sequence[str], names: Sequence[str] | None) -> tuple[str, ...]:
    """Return the lines in the order in which their angles or positions are counted."""
    found = tuple(dict.fromkeys(line))
    if names is None:
        return found
    if sorted(names) != sorted(found):
        raise LayoutError(
            f"lines {', '.join(found)} and names {', '.join(names)}", where="[layout] names", expected="each line of the points once"
        )
    return tuple(names)


def _off_line(line: Sequence[str], point: Sequence[int], beside: npt.NDArray[np.bool_]) -> list[str]:
    """Say which points have no depth along their line, so that nobody marks a probe with it."""
    labels = [f"{line[i]}{point[i]}" for i in np.flatnonzero(beside).tolist()]
    if not labels:
        return []
    which = ", ".join(labels[:8]) + (f" and {len(labels) - 8} more" if len(labels) > 8 else "")
    return [f"{which} not on the diameter of the line: the depth is only measured parallel to it and is no mark for the probe"]


def _refuse(
    shape: str, size: sections.Size, width: float, line: Sequence[str], point: Sequence[int], x: Array, y: Array
) -> None:
    outside = np.flatnonzero(~(sections.wall_distance(shape, size, x, y) > -1e-9 * width))
    if outside.size:
        i = int(outside[0])
        raise LayoutError(
            f"point {line[i]}{point[i]} at x = {x[i] * 1000:.1f} mm, y = {y[i] * 1000:.1f} mm lies outside the section",
            where=_WHERE, expected="points inside, from the centre or as depth from the inner wall",
        )
    seen: dict[tuple[str, int], int] = {}
    for i, label in enumerate(zip(line, point, strict=True)):
        if label in seen:
            raise LayoutError(f"point {label[0]}{label[1]} stands twice", where=_WHERE, expected="each point once")
        seen[label] = i
    places = np.round(np.column_stack([x, y]) / (1e-6 * width))
    unique, counts = np.unique(places, axis=0, return_counts=True)
    if counts.max() > 1:
        twice = unique[np.argmax(counts)]
        both = [f"{line[i]}{point[i]}" for i in np.flatnonzero((places == twice).all(axis=1)).tolist()]
        raise LayoutError(f"points {' and '.join(both)} lie in one place", where=_WHERE, expected="different places")
