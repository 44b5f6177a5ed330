"""The numbers of lines and points a rule asks for in a section of a size, where a job leaves them to the rule."""

from __future__ import annotations

import math
from collections.abc import Callable

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import Extent

Count = Callable[[Extent], tuple[int, int]]


def by_table(name: str, *, centre: bool = False) -> Count:
    """Return the count of a rule of the table of point counts: two diameters, or rows of nearly square cells."""

    def count(extent: Extent) -> tuple[int, int]:
        rule = next(rule for rule in tables.load("site_rules")["count"] if rule["rule"] == name)
        if extent.shape == "round":
            least = _least(rule, "round", rule["by"], extent)
            if least == 1:
                raise LayoutError(
                    f"{name} asks for a single point in a duct of {extent.width:.3g} m", where="[layout]",
                    expected="lines and points, to measure more", how='or one point of your own: rule = "custom"',
                )
            points = (least + 1) // 2 if centre else math.ceil(least / 4) * 2
            return 2, points + (points + 1) % 2 if centre else points
        if "cell_side" in rule:
            return _cells(rule, extent)
        return grid(_least(rule, "rectangle", rule.get("rectangle_by", rule["by"]), extent), extent)

    return count


def at_least(round_points: int, rectangle_points: int) -> Count:
    """Return the count of a rule with a fixed least number: two diameters, or rows of nearly square cells."""
    return lambda extent: (2, round_points // 2) if extent.shape == "round" else grid(rectangle_points, extent)


def grid(least: int, extent: Extent) -> tuple[int, int]:
    """Return lines across the width and points along the height, at least so many in all, cells as square as can be."""
    found = []
    for lines in range(1, least + 1):
        points = math.ceil(least / lines)
        across, up = extent.width / lines, extent.height / points
        found.append((max(across / up, up / across), lines * points, lines, points))
    # Cells of at most 2 : 1 (EN 13284-1, from memory), then the fewest points, then the squarest.
    fitting = [entry for entry in found if entry[0] <= 2.0] or [min(found)]
    _, _, lines, points = min(fitting, key=lambda entry: (entry[1], entry[0]))
    return lines, points


def _area(extent: Extent) -> float:
    return math.pi / 4.0 * extent.width * extent.height if extent.shape == "round" else extent.width * extent.height


def _least(rule: dict[str, object], key: str, by: object, extent: Extent) -> int:
    value = _area(extent) if by == "area" else extent.hydraulic_diameter
    steps = rule[key]
    assert isinstance(steps, list), "a table of steps"
    least = next(int(entry) for limit, entry in steps if value <= float(limit) * (1 + 1e-12))
    if "per_square_metre" in rule and by == "area" and value > float(str(rule["above"])):
        least = max(least, math.ceil(float(str(rule["per_square_metre"])) * value * (1 - 1e-9)))
        least = min(least, int(str(rule.get("enough", least))))
    return least


def _cells(rule: dict[str, object], extent: Extent) -> tuple[int, int]:
    limits = rule["cell_side"]
    assert isinstance(limits, list), "a table of steps"
    area = _area(extent)
    if area > float(limits[-1][0]):
        return grid(int(str(rule["most"])), extent)
    side = next(float(entry) for limit, entry in limits if area <= float(limit))
    return math.ceil(extent.width / side - 1e-9), math.ceil(extent.height / side - 1e-9)
