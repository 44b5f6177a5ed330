"""The numbers of lines and points a rule asks for in a section of a size, where a job leaves them to the rule."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from typing import Any

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import Extent

Count = Callable[[Extent], tuple[int, int]]


def by_table(name: str, *, centre: bool = False) -> Count:
    """Return the count of a rule of the table of point counts: two diameters, or rows of nearly square cells."""

    def count(extent: Extent) -> tuple[int, int]:
        rule = next(rule for rule in tables.load("site_rules")["count"] if rule["rule"] == name)
        total, _ = least(rule, extent)
        if extent.shape == "round":
            if total == 1:
                raise LayoutError(
                    f"{name} asks for a single point in a duct of {extent.width:.3g} m", where="[layout]",
                    expected="lines and points, to measure more", how='or one point of your own: rule = "custom"',
                )
            points = (total + 1) // 2 if centre else math.ceil(total / 4) * 2
            return 2, points + (points + 1) % 2 if centre else points
        if "cell_side" in rule and _area(extent) <= float(rule["cell_side"][-1][0]):
            return _cells(rule, extent)
        side = math.isqrt(int(_step(rule["rectangle"], _area(extent)))) if "rectangle" in rule else 1
        return _split(side, rule, extent) if "longest_cell" in rule else grid(total, extent, side)

    return count


def at_least(round_points: int, rectangle_points: int) -> Count:
    """Return the count of a rule with a fixed least number: two diameters, or rows of nearly square cells."""
    return lambda extent: (2, round_points // 2) if extent.shape == "round" else grid(rectangle_points, extent)


def least(rule: Mapping[str, Any], extent: Extent) -> tuple[int, str]:
    """Return the least number of points of one rule of the table in a round or rectangular section, and how it comes to it."""
    return _round(rule, extent) if extent.shape == "round" else _rectangle(rule, extent)


def grid(total: int, extent: Extent, side: int = 1) -> tuple[int, int]:
    """Return lines across the width and points along the height: so many in all and on a side at least, cells as square as can be."""
    found = []
    for lines in range(side, max(total, side) + 1):
        points = max(math.ceil(total / lines), side)
        across, up = extent.width / lines, extent.height / points
        found.append((max(across / up, up / across), lines * points, lines, points))
    # Cells of at most 2 : 1 (EN 13284-1, from memory), then the fewest points, then the squarest.
    fitting = [entry for entry in found if entry[0] <= 2.0] or [min(found)]
    _, _, lines, points = min(fitting, key=lambda entry: (entry[1], entry[0]))
    return lines, points


def _round(rule: Mapping[str, Any], extent: Extent) -> tuple[int, str]:
    by_area, area = rule["by"] == "area", _area(extent)
    total = int(_step(rule["round"], area if by_area else extent.width))
    if "round_by_diameter" in rule:
        total = max(total, int(_step(rule["round_by_diameter"], extent.width)))
    return _by_area(rule, area, total, f"area {area:.3g} m2") if by_area else (total, f"diameter {extent.width:.3g} m")


def _rectangle(rule: Mapping[str, Any], extent: Extent) -> tuple[int, str]:
    if "side_points" in rule:
        across, up = (int(_step(rule["side_points"], side)) for side in (extent.width, extent.height))
        return max(across * up, 25), f"{across} x {up}"
    area = _area(extent)
    if "cell_side" in rule:
        if area <= float(rule.get("single_up_to", "0")):
            return 1, f"area {area:.3g} m2: one central point allowed"
        if area > float(rule["cell_side"][-1][0]):
            return int(rule["most"]), f"area {area:.3g} m2: equal areas, normally up to {rule['most']}"
        across, up = _cells(rule, extent)
        side = float(_step(rule["cell_side"], area))
        return min(across * up, int(rule["most"])), f"cells of at most {side:g} m: {across} x {up}"
    total, note = int(_step(rule["rectangle"], area)), f"area {area:.3g} m2"
    if "longest_cell" in rule:
        across, up = _split(math.isqrt(total), rule, extent)
        total, note = across * up, f"{note}; {across} x {up}, cells of at most {rule['longest_cell']} : 1"
    total, note = _by_area(rule, area, total, note)
    if "cell_most" in rule:
        most = float(rule["cell_most"])
        total = max(total, _pieces(extent.width, most) * _pieces(extent.height, most))
    return total, note


def _by_area(rule: Mapping[str, Any], area: float, total: int, note: str) -> tuple[int, str]:
    """Return the number with what a rule wants for every square metre of a large section."""
    if "per_square_metre" not in rule or area <= float(rule["above"]):
        return total, note
    total = max(total, math.ceil(float(rule["per_square_metre"]) * area * (1 - 1e-9)))
    if "enough" not in rule:
        return total, note
    return min(total, int(rule["enough"])), f"{note}; {rule['enough']} normally enough"


def _split(side: int, rule: Mapping[str, Any], extent: Extent) -> tuple[int, int]:
    """Return the same number on either side, more on the longer one where the cells would be too long."""
    long, short = max(extent.width, extent.height), min(extent.width, extent.height)
    pieces = max(side, _pieces(long, float(rule["longest_cell"]) * short / side))
    return (pieces, side) if extent.width >= extent.height else (side, pieces)


def _cells(rule: Mapping[str, Any], extent: Extent) -> tuple[int, int]:
    side = float(_step(rule["cell_side"], _area(extent)))
    return _pieces(extent.width, side), _pieces(extent.height, side)


def _pieces(length: float, most: float) -> int:
    """Return in how many pieces of at most a length another is cut."""
    return math.ceil(length / most * (1 - 1e-9))


def _area(extent: Extent) -> float:
    return math.pi / 4.0 * extent.width * extent.height if extent.shape == "round" else extent.width * extent.height


def _step(steps: Sequence[Sequence[str]], value: float) -> str:
    """Return the entry of the first step whose limit is not exceeded."""
    return next(entry for limit, entry in steps if value <= float(limit) * (1 + 1e-12))
