"""Points that a job gives itself, with their weights."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.layouts._base import Array, Placement, checked_angles, checked_size, diameters, one_of
from traverse.physics import sections

_WHERE = "[layout] points"


def place_custom(
    *, shape: str, width: float, height: float, line: Sequence[str], point: Sequence[int], weight: npt.ArrayLike | None,
    depth: npt.ArrayLike | None = None, x: npt.ArrayLike | None = None, y: npt.ArrayLike | None = None,
    angles: Sequence[float] | None = None, positions: Sequence[float] | None = None, along: str = "height",
    names: Sequence[str] | None = None,
) -> Placement:
    """Return points stated by the job.

    Parameters
    ----------
    shape, width, height
        The section. [m]
    line, point
        Label of each point.
    weight : array_like, shape (points,)
        Share of the area of each point; brought to a sum of 1, with a note where it was not.
    depth : array_like, shape (points,), optional
        From the inner wall at the port, along the line. [m]  Either this, or ``x`` and ``y`` from the centre.
    angles : sequence, optional
        Port angles of the lines of a round section; equally spaced over 180 degrees from 0 by default. [rad]
    positions : sequence, optional
        Where the lines of a rectangle lie across the section, from the left (from the top when the probe travels along
        the width); centres of equal parts by default. [m]
    along : {'height', 'width'}
        Along which side of a rectangle the probe travels.
    names : sequence, optional
        The lines in the order of ``angles`` or ``positions``; the order of first appearance by default.

    Raises
    ------
    LayoutError
        For a point outside the section, two points in one place, a missing or unusable weight.
    """
    checked_size(shape, width, height)
    one_of("along", along, ("height", "width"), "[layout] along")
    _refuse_strangers(shape, angles, positions)
    if weight is None:
        raise LayoutError("custom points have no weights", where=_WHERE, expected="a weight for every point, its share of the area")
    shares = np.asarray(weight, dtype=np.float64)
    if not np.all(np.isfinite(shares)) or np.any(shares <= 0):
        raise LayoutError("a weight is missing or not positive", where=_WHERE, expected="a positive weight for every point")
    _refuse_lengths(len(line), point=point, weight=shares, depth=depth, x=x, y=y)
    order = _order(line, names)
    notes: list[str] = []
    if depth is not None and x is None and y is None:
        deep = np.asarray(depth, dtype=np.float64)
        px, py = _from_depth(shape, width, height, line, order, deep, angles, positions, along)
    elif depth is None and x is not None and y is not None:
        px, py = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
        deep, beside = _to_depth(shape, width, height, line, order, px, py, angles, along)
        notes += _off_line(line, point, beside > 1e-6 * width)
    else:
        twice = depth is not None
        raise LayoutError(
            "custom points have both a depth and x or y" if twice else "custom points have no places", where=_WHERE,
            expected="either a depth, or x and y, for every point",
        )
    _refuse(shape, width, height, line, point, px, py)
    total = float(shares.sum())
    if abs(total - 1.0) > 1e-9:
        notes.insert(0, f"weights summed to {total:.6g} and were brought to a sum of 1")
    return Placement(
        title="Points given by the job", source="weights stated by the job", x=px, y=py, depth=deep, weight=shares / total,
        line=tuple(line), point=tuple(point), moved=(False,) * len(shares), notes=tuple(notes),
    )


def _refuse_strangers(shape: str, angles: Sequence[float] | None, positions: Sequence[float] | None) -> None:
    if shape == "round" and positions is not None:
        raise LayoutError("positions in a round section", where="[layout] positions", expected="angles, for a round section")
    if shape != "round" and angles is not None:
        raise LayoutError("angles for a rectangle", where="[layout] angles", expected="angles only for a round section")


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


def _from_depth(
    shape: str, width: float, height: float, line: Sequence[str], names: tuple[str, ...], depth: Array,
    angles: Sequence[float] | None, positions: Sequence[float] | None, along: str,
) -> tuple[Array, Array]:
    number = np.array([names.index(name) for name in line])
    if shape == "round":
        return diameters(width, depth, checked_angles(angles, len(names))[number])
    across_size = width if along == "height" else height
    across = np.asarray(positions) if positions is not None else (np.arange(len(names)) + 0.5) / len(names) * across_size
    if across.shape != (len(names),):
        raise LayoutError(f"{across.size} positions", where="[layout] positions", expected=f"{len(names)}, one a line")
    if along == "height":
        return across[number] - width / 2.0, height / 2.0 - depth
    return depth - width / 2.0, height / 2.0 - across[number]


def _to_depth(
    shape: str, width: float, height: float, line: Sequence[str], names: tuple[str, ...], x: Array, y: Array,
    angles: Sequence[float] | None, along: str,
) -> tuple[Array, Array]:
    """Return the depths, and how far each point of a round section lies beside the diameter of its line."""
    if shape == "round":
        number = np.array([names.index(name) for name in line])
        angle = checked_angles(angles, len(names))[number]
        depth = width / 2.0 - (x * np.cos(angle) + y * np.sin(angle))
        return np.asarray(depth), np.asarray(np.abs(y * np.cos(angle) - x * np.sin(angle)))
    return np.asarray(height / 2.0 - y if along == "height" else x + width / 2.0), np.zeros(x.shape)


def _refuse(
    shape: str, width: float, height: float, line: Sequence[str], point: Sequence[int], x: Array, y: Array
) -> None:
    size = {"diameter": width} if shape == "round" else {"width": width, "height": height}
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
