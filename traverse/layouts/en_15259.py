"""Centres of equal areas for emission measurements, without a centre point."""

from __future__ import annotations

import sys

from traverse.layouts import _areas
from traverse.layouts._base import Rule
from traverse.layouts._counts import by_table
from traverse.physics import wall_limits

RULE = Rule(
    name="en-15259",
    title="Equal areas for emission measurement (EN 15259)",
    source="EN 15259:2007, tangential method and centres of equal rectangles; numbers of points and wall distance from memory",
    round=_areas.on_diameter,
    rectangle=_areas.on_side,
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
    wall_distance=wall_limits.en_15259,
    count=by_table("en-15259"),
)
