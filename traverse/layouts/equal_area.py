"""Equal areas: ring centroids on diameters, centres of equal rectangles."""

from __future__ import annotations

import sys

from traverse import tables
from traverse.layouts import _areas, _flat_oval
from traverse.layouts._base import Rule

RULE = Rule(
    name="equal-area",
    title="Equal areas",
    source="EPA Method 1 sections 11.3.1 (round, table 1-2) and 11.3.4 (rectangular); ring centroids and centres of equal parts",
    round=_areas.on_diameter,
    rectangle=_areas.on_side,
    annulus=_areas.on_gap,
    schemes={"flat-oval": _flat_oval.scheme},
    printed=_areas.printed(),
    printed_source=tables.load("layout_equal_area")["source"],
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
)
