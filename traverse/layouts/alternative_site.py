"""The points for a site too near to a disturbance: equal areas, at least 40 in a round stack, 42 in a rectangular one."""

from __future__ import annotations

import sys

from traverse.layouts import _areas
from traverse.layouts._base import Extent, Rule
from traverse.layouts._counts import at_least
from traverse.physics import wall_limits
from traverse.units import parse

LEAST_DIAMETER = "24 in"


def remarks(extent: Extent) -> tuple[str, ...]:
    """Say what the procedure asks for besides the points, and where it may not be used."""
    found = ["the procedure wants pitch and yaw at every point: mean resultant angle at most 20 degrees, standard deviation at most 10"]
    if not extent.hydraulic_diameter > parse(LEAST_DIAMETER, "length").value:
        found.append(f"the duct is not wider than {LEAST_DIAMETER}: the procedure is for wider ducts only")
    return tuple(found)


RULE = Rule(
    name="alternative-site",
    title="Equal areas for the alternative site procedure",
    source="EPA Method 1 section 11.5: at least 40 points (round) or 42 points (rectangular); positions as in 11.3",
    round=_areas.on_diameter,
    rectangle=_areas.on_side,
    printed=_areas.printed(),
    printed_source="40 CFR 60 Appendix A-1, Method 1, table 1-2; from memory",
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, sys.maxsize, 2),
    side_points=range(1, sys.maxsize),
    least={"round": 40, "rectangle": 42},
    wall_distance=wall_limits.method_1,
    remarks=remarks,
    count=at_least(40, 42),
)
