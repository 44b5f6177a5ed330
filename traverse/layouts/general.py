"""The general method: rings of equal area about a centre point that counts once."""

from __future__ import annotations

from traverse import tables
from traverse.layouts import _areas
from traverse.layouts._base import Rule
from traverse.layouts._general import EXACT_FOR, MOST, on_diameters, terms

_TABLE = tables.load("layout_general")
RULE = Rule(
    name="general",
    title="General method with a centre point",
    source="ISO 10780, EN 13284-1 and EN 15259 Annex D; formula from memory, it satisfies the definition by equal areas exactly",
    round=lambda points: on_diameters(points, 2.0),
    round_by_lines=on_diameters,
    rectangle=_areas.on_side,
    printed={("round", int(points)): tuple(row) for points, row in _TABLE["fraction_of_diameter"].items()},
    printed_source=_TABLE["source"],
    exact_for=EXACT_FOR,
    exact=terms,
    round_points=range(3, MOST + 1, 2),
    side_points=range(1, 1000),
)
