"""Log-linear: positions that integrate a logarithmic wall law plus a linear term."""

from __future__ import annotations

from traverse import tables
from traverse.layouts._base import Rule
from traverse.layouts._wall import MOST, log_linear_diameter, log_linear_terms

_TABLE = tables.load("layout_log_linear")
RULE = Rule(
    name="log-linear",
    title="Log-linear",
    source="ISO 3966 clause 11 and BS 1042 practice (Winternitz and Fischl); positions from the rule's definition",
    round=log_linear_diameter,
    printed={("round", int(points)): tuple(row) for points, row in _TABLE["fraction_of_diameter"].items()},
    printed_source=_TABLE["source"],
    exact_for="velocity = a + b ln y + c y in every zone (odd numbers per radius: no linear term in the outermost zone)",
    exact=log_linear_terms,
    round_points=range(4, MOST + 1, 2),
)
