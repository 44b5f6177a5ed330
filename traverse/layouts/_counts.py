"""The numbers of lines and points a rule asks for in a section of a size, where a job leaves them to the rule."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import Extent

Count = Callable[[Extent], tuple[int, int]]


def by_table(name: str, *, centre: bool = False) -> Count:
    """Return the count of a rule of the table of point counts: two diameters, or rows of nearly square cells."""

    def count(extent: Extent) -> tuple[int, int]:
        rule = next(rule for rule in tables.load("site_rules")["count"] if rule["rule"] == name)
        if extent.shape == "round":
            least = _round(rule, extent)
            if least == 1:
                raise LayoutError(
                    f"{name} asks for a single point in a duct of {extent.width:.3g} m", where="[layout]",
                    expected="lines and points, to measure more", how='or one point of your own: rule = "custom"',
                )
            points = (least + 1) // 2 if centre else math.ceil(least / 4) * 2
            return 2, points + (points + 1) % 2 if centre else points
        if "cell_side" in rule:
            return _cells(rule, extent)
        least = int(_step(rule["rectangle"], _area(extent)))
        if "longest_cell" in rule:
            return _split(math.isqrt(least), float(rule["longest_cell"]), extent)
        return grid(_per_area(rule, _area(extent), least), extent, math.isqrt(least))

    return count


def at_least(round_points: int, rectangle_points: int) -> Count:
    """Return the count of a rule with a fixed least number: two diameters, or rows of nearly square cells."""
    return lambda extent: (2, round_points // 2) if extent.shape == "round" else grid(rectangle_points, extent)


def grid(least: int, extent: Extent, side: int = 1) -> tuple[int, int]:
    """Return lines across the width and points along the height: so many in all and on a side at least, cells as square as can be."""
    found = []
    for lines in range(side, max(least, side) + 1):
        points = max(math.ceil(least / lines), side)
        across, up = extent.width / lines, extent.height / points
        found.append((max(across / up, up / across), lines * points, lines, points))
    # Cells of at most 2 : 1 (EN 13284-1, from memory), then the fewest points, then the squarest.
    fitting = [entry for entry in found if entry[0] <= 2.0] or [min(found)]
    _, _, lines, points = min(fitting, key=lambda entry: (entry[1], entry[0]))
    return lines, points


def _split(side: int, longest: float, extent: Extent) -> tuple[int, int]:
    """Return the same number on either side, more on the longer one where the cells would be too long."""
    long, short = max(extent.width, extent.height), min(extent.width, extent.height)
    pieces = max(side, math.ceil(long / (longest * short / side) * (1 - 1e-9)))
    return (pieces, side) if extent.width >= extent.height else (side, pieces)


def _area(extent: Extent) -> float:
    return math.pi / 4.0 * extent.width * extent.height if extent.shape == "round" else extent.width * extent.height


def _step(steps: object, value: float) -> str:
    assert isinstance(steps, list), "a table of steps"
    return next(str(entry) for limit, entry in steps if value <= float(limit) * (1 + 1e-12))


def _round(rule: Mapping[str, object], extent: Extent) -> int:
    by_area = rule["by"] == "area"
    least = int(_step(rule["round"], _area(extent) if by_area else extent.width))
    if "round_by_diameter" in rule:
        least = max(least, int(_step(rule["round_by_diameter"], extent.width)))
    return _per_area(rule, _area(extent), least) if by_area else least


def _per_area(rule: Mapping[str, object], area: float, least: int) -> int:
    if "per_square_metre" not in rule or area <= float(str(rule["above"])):
        return least
    least = max(least, math.ceil(float(str(rule["per_square_metre"])) * area * (1 - 1e-9)))
    return min(least, int(str(rule.get("enough", least))))


def _cells(rule: Mapping[str, object], extent: Extent) -> tuple[int, int]:
    limits = rule["cell_side"]
    assert isinstance(limits, list), "a table of steps"
    area = _area(extent)
    if area > float(limits[-1][0]):
        return grid(int(str(rule["most"])), extent)
    side = float(_step(limits, area))
    return math.ceil(extent.width / side - 1e-9), math.ceil(extent.height / side - 1e-9)
