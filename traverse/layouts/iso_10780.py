"""The general method as the stack standards use it, with their numbers of points."""

from __future__ import annotations

from traverse.layouts import _areas
from traverse.layouts._base import Rule
from traverse.layouts._counts import by_table
from traverse.layouts._general import EXACT_FOR, MOST, on_diameters, terms

RULE = Rule(
    name="iso-10780",
    title="General method with a centre point (ISO 10780, EN 13284-1)",
    source="ISO 10780:1994, ISO 9096 and EN 13284-1:2001; formula and numbers of points from memory",
    round=lambda points: on_diameters(points, 2.0),
    round_by_lines=on_diameters,
    rectangle=_areas.on_side,
    exact_for=EXACT_FOR,
    exact=terms,
    round_points=range(3, MOST + 1, 2),
    side_points=range(1, 1000),
    count=by_table("iso-10780", centre=True),
)
