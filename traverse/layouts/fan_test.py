"""The laboratory fan test: three diameters at 60 degrees with eight log-linear points each."""

from __future__ import annotations

from traverse.errors import LayoutError
from traverse.layouts._base import Array, Rule
from traverse.layouts._wall import log_linear_diameter, log_linear_terms


def on_diameter(points: int) -> tuple[Array, Array]:
    """Return the eight log-linear points on a diameter; equal weights."""
    if points != 8:
        raise LayoutError(f"{points} points on a diameter", where="[layout] points", expected="8, the points of a fan test")
    return log_linear_diameter(points)


RULE = Rule(
    name="fan-test",
    title="Fan test, 3 diameters of 8 points",
    source="AMCA 210 and ISO 5801 laboratory traverse: 0.021, 0.117, 0.184, 0.345 of the diameter; from memory",
    round=on_diameter,
    printed={("round", 8): ("0.021", "0.117", "0.184", "0.345")},
    printed_source="AMCA 210 and ISO 5801, from memory; the same digits as GOST ISO 5802-2012 table 3 (read)",
    exact_for="velocity = a + b ln y + c y in every zone",
    exact=log_linear_terms,
    round_points=(8,),
    line_counts={"round": (3,)},
)
