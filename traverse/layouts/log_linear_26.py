"""The log-linear scheme of 26 weighted points for a rectangle."""

from __future__ import annotations

import numpy as np

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import Frame, Rule, SchemeLine

_TABLE = tables.load("layout_log_linear_26")


def scheme(frame: Frame) -> tuple[SchemeLine, ...]:
    """Return four lines of 7, 6, 6 and 7 points with the weights of the scheme, of 96 in all.

    Raises
    ------
    LayoutError
        For other numbers of lines or points.
    """
    if frame.lines not in (0, 4):
        raise LayoutError(f"{frame.lines} lines", where="[layout] lines", expected="4, the lines of the scheme")
    if frame.points not in (0, 26):
        raise LayoutError(
            f"points = {frame.points}", where="[layout] points",
            expected="26 in all, or no points: the scheme has 7, 6, 6 and 7 on its four lines",
        )
    travel, across = (frame.height, frame.width) if frame.along == "height" else (frame.width, frame.height)
    total = float(_TABLE["total"])
    found = []
    for number, text in enumerate(_TABLE["lines"]):
        rows = np.array([[float(cell) for cell in row] for row in _TABLE["outer" if number in (0, 3) else "inner"]])
        depth, offset = rows[:, 0] * travel, np.full(len(rows), float(text) * across)
        x, y = (offset - across / 2.0, travel / 2.0 - depth) if frame.along == "height" else (depth - travel / 2.0, across / 2.0 - offset)
        found.append(SchemeLine(x=x, y=y, depth=depth, weight=rows[:, 1] / total))
    return tuple(found)


RULE = Rule(
    name="log-linear-26",
    title="Log-linear, 26 weighted points",
    source=_TABLE["source"],
    schemes={"rectangle": scheme},
    exact_for="a constant; a logarithmic wall law in both directions within 0.12 % (k = 0.10)",
)
