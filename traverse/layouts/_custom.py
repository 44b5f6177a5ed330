"""Points that a job gives itself, with their weights."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.layouts._base import Array, Placement, checked_angles, diameters
from traverse.physics import sections

_WHERE = "[layout] points"


def place_custom(
    *, shape: str, width: float, height: float, line: Sequence[str], point: Sequence[int], weight: npt.ArrayLike | None,
    depth: npt.ArrayLike | None = None, x: npt.ArrayLike | None = None, y: npt.ArrayLike | None = None,
    angles: Sequence[float] | None = None, positions: Sequence[float] | None = None, along: str = "height",
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
        Port angles of the lines of a round section, in order of first appearance; equally spaced by default. [rad]
    positions : sequence, optional
        Where the lines of a rectangle lie across the section, from the left (from the top when the probe travels along
        the width); centres of equal parts by default. [m]

    Raises
    ------
    LayoutError
        For a point outside the section, two points in one place, a missing or unusable weight.
    """
    if weight is None:
        raise LayoutError("custom points have no weights", where=_WHERE, expected="a weight for every point, its share of the area")
    shares = np.asarray(weight, dtype=np.float64)
    if not np.all(np.isfinite(shares)) or np.any(shares <= 0):
        raise LayoutError("a weight is missing or not positive", where=_WHERE, expected="a positive weight for every point")
    names = tuple(dict.fromkeys(line))
    if depth is not None:
        deep = np.asarray(depth, dtype=np.float64)
        px, py = _from_depth(shape, width, height, line, names, deep, angles, positions, along)
    elif x is not None and y is not None:
        px, py = np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)
        deep = _to_depth(shape, width, height, line, names, px, py, angles, along)
    else:
        raise LayoutError("custom points have no places", where=_WHERE, expected="a depth, or x and y, for every point")
    _refuse(shape, width, height, line, point, px, py)
    total = float(shares.sum())
    notes = () if abs(total - 1.0) <= 1e-9 else (f"weights summed to {total:.6g} and were brought to a sum of 1",)
    return Placement(
        title="Points given by the job", source="weights stated by the job", x=px, y=py, depth=deep, weight=shares / total,
        line=tuple(line), point=tuple(point), moved=(False,) * len(shares), notes=notes,
    )


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
) -> Array:
    if shape == "round":
        number = np.array([names.index(name) for name in line])
        angle = checked_angles(angles, len(names))[number]
        return np.asarray(width / 2.0 - (x * np.cos(angle) + y * np.sin(angle)))
    return np.asarray(height / 2.0 - y if along == "height" else x + width / 2.0)


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
