"""One to five rings of equal area on two diameters, and equal rectangles."""

from __future__ import annotations

from traverse.errors import LayoutError
from traverse.layouts import _areas
from traverse.layouts._base import Array, Rule
from traverse.layouts._counts import by_table


def on_diameter(points: int) -> tuple[Array, Array]:
    """Return the points of 1 to 5 rings on a diameter; equal weights."""
    if points not in range(2, 11, 2):
        raise LayoutError(f"{points} points on a diameter", where="[layout] points", expected="2, 4, 6, 8 or 10: one to five rings")
    return _areas.on_diameter(points)


RULE = Rule(
    name="jis-z-8808",
    title="Equal areas for flue gas (JIS Z 8808)",
    source="JIS Z 8808: 0.707; 0.500 0.866; 0.408 0.707 0.913; ... of the radius, one to five rings by diameter; from memory",
    round=on_diameter,
    rectangle=_areas.on_side,
    exact_for=_areas.EXACT_FOR,
    exact=_areas.exact,
    round_points=range(2, 11, 2),
    side_points=range(1, 1000),
    line_counts={"round": (2,)},
    count=by_table("jis-z-8808"),
)
