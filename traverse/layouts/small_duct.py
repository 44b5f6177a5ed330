"""Equal areas in a small stack or duct, 4 to 12 inches wide."""

from __future__ import annotations

import sys

from traverse.layouts import _areas
from traverse.layouts._base import Extent, Rule
from traverse.layouts._counts import at_least
from traverse.physics import wall_limits
from traverse.units import parse

LEAST, MOST = "0.10 m", "0.30 m"


def remarks(extent: Extent) -> tuple[str, ...]:
    """Say where the method may not be used, and what it asks for besides the points."""
    low, high = parse(LEAST, "length").value, parse(MOST, "length").value
    found = ["a standard pitot tube, in a plane of its own downstream of the sampling plane"]
    if not low * (1 - 1e-9) <= extent.hydraulic_diameter < high * (1 - 1e-9):
        found.append(f"the method is for ducts of {LEAST} to {MOST}; this one has {extent.hydraulic_diameter:.3f} m")
    return tuple(found)


RULE = Rule(
    name="small-duct",
    title="Equal areas in a small duct",
    source="EPA Method 1A section 11.2: at least 8 points (round, a multiple of 4) or 9 (rectangular); positions as in Method 1, 11.3",
    round=_areas.on_diameter,
    rectangle=_areas.on_side,
    printed=_areas.printed(),
    printed_source="40 CFR 60 Appendix A-1, Method 1, table 1-2; from memory",
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
    least={"round": 8, "rectangle": 9},
    multiple={"round": 4},
    wall_distance=wall_limits.method_1,
    remarks=remarks,
    count=at_least(8, 9),
)
