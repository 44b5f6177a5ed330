"""How near to the wall of a round duct a standard lets a point lie."""

from __future__ import annotations

from traverse import tables, units


def method_1(diameter: float, system: str) -> float:
    """Return the nearest distance of a point from the wall of a round stack, in the figures of a unit system. [m]

    EPA Method 1 sections 11.3.1.4, 11.3.2 and 11.3.3.
    """
    rule = tables.load("epa_method_2")["wall_distance"][system]
    limit, large, small = (units.parse(rule[name], "length").value for name in ("limit", "large", "small"))
    return large if diameter > limit * (1 + 1e-12) else small


def en_15259(diameter: float, system: str) -> float:  # noqa: ARG001 - the same figures in both systems
    """Return the larger of 3 % of the line and 5 cm. [m]  EN 15259:2007, from memory."""
    return max(0.03 * diameter, 0.05)
