"""The tangential rule, or centroids of equal areas: the same rings as equal areas, under the name ventilation standards use."""

from __future__ import annotations

import sys

from traverse.layouts import _areas
from traverse.layouts._base import Rule

RULE = Rule(
    name="tangential",
    title="Tangential rule (centroids of equal areas)",
    source="EN 12599: centroidal axes (round) and trivial method (rectangular); radii from memory",
    round=_areas.on_diameter,
    rectangle=_areas.on_side,
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
)
