"""Equal areas in a flat oval, as the trade divides it."""

from __future__ import annotations

import numpy as np

from traverse.errors import LayoutError
from traverse.layouts import _areas
from traverse.layouts._base import Frame, SchemeLine

SOURCE = (
    "flat oval: a straight part shorter than the ends are wide is traversed as a round duct on its two axes; a longer one as a "
    "rectangle, and the two half circles as one round duct (common practice, no source)"
)


def scheme(frame: Frame) -> tuple[SchemeLine, ...]:
    """Return the lines of a flat oval.

    Straight part shorter than the diameter of the ends: two lines, along the long and the short axis, ``points`` on each at
    the fractions of a round duct, equal weights. Otherwise ``lines`` lines of ``points`` across the straight part, at the
    centres of equal rectangles, and ``points`` more (an even number) on each of two lines through the ends as one round duct:
    the half circles' common long axis, and their short axis, which is read at both joints with half the weight each.

    Raises
    ------
    LayoutError
        For a number of lines that does not go with the proportions, or an odd number of points on an axis.
    """
    upright = frame.height > frame.width
    long, short = max(frame.width, frame.height), min(frame.width, frame.height)
    straight = long - short
    narrow = straight < short
    lines = _axes(frame, long, short) if narrow else _straight(frame, straight, short) + _ends(frame, straight, short)
    return tuple(line.turned() for line in lines) if upright else lines


def _axes(frame: Frame, long: float, short: float) -> tuple[SchemeLine, ...]:
    if frame.lines != 2:
        raise LayoutError(
            f"{frame.lines} lines", where="[layout] lines",
            expected="2: a flat oval whose straight part is shorter than its ends is traversed on its two axes",
        )
    fraction, share = _areas.on_diameter(frame.points)
    flat = np.zeros(frame.points)
    return (
        SchemeLine(x=fraction * long - long / 2.0, y=flat, depth=fraction * long, weight=share / 2.0),
        SchemeLine(x=flat, y=short / 2.0 - fraction * short, depth=fraction * short, weight=share / 2.0),
    )


def _straight(frame: Frame, straight: float, short: float) -> tuple[SchemeLine, ...]:
    across, _ = _areas.on_side(frame.lines)
    fraction, share = _areas.on_side(frame.points)
    part = straight * short / _area(straight, short)
    return tuple(
        SchemeLine(
            x=np.full(frame.points, place * straight - straight / 2.0), y=short / 2.0 - fraction * short, depth=fraction * short,
            weight=share * part / frame.lines,
        ) for place in across.tolist()
    )


def _ends(frame: Frame, straight: float, short: float) -> tuple[SchemeLine, ...]:
    points = frame.points + frame.points % 2
    fraction, share = _areas.on_diameter(points)
    part = 1.0 - straight * short / _area(straight, short)
    left = fraction < 0.5
    x = fraction * short - short / 2.0 + np.where(left, -straight / 2.0, straight / 2.0)
    along = SchemeLine(x=x, y=np.zeros(points), depth=x + (straight + short) / 2.0, weight=share * part / 2.0)
    joints = tuple(
        SchemeLine(x=np.full(points, side * straight / 2.0), y=short / 2.0 - fraction * short, depth=fraction * short,
                   weight=share * part / 4.0)
        for side in (-1.0, 1.0)
    )
    return (joints[0], joints[1], along)


def _area(straight: float, short: float) -> float:
    return float(np.pi / 4.0 * short * short + straight * short)

