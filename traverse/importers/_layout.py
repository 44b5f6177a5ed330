"""[layout]: the rule's points, or points that the job gives itself, as the plan's layout."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Literal, cast

import numpy as np

from traverse import layouts
from traverse.errors import JobError, LayoutError, nearest
from traverse.importers._schema import Table, plain_number, quantity
from traverse.layouts import Placement
from traverse.methods import Method
from traverse.model import Finding, Layout, Section

_OWN_POINTS = ("depths", "weights", "file", "positions")


@dataclass(slots=True)
class Points:
    """Custom points as they are collected: labels, places and weights, point by point."""

    line: list[str] = field(default_factory=list)
    point: list[int] = field(default_factory=list)
    depth: list[float] = field(default_factory=list)
    x: list[float] = field(default_factory=list)
    y: list[float] = field(default_factory=list)
    weight: list[float] = field(default_factory=list)


def is_custom(table: Table) -> bool:
    """Return whether the job gives its points itself."""
    return table.text("rule") == "custom"


def build(table: Table, section: Section, method: Method, system: Literal["si", "us"]) -> Layout:
    """Return the layout that a rule prescribes."""
    table.need("rule", f"one of {', '.join((*layouts.rules(), 'custom'))}")
    rule = str(table.text("rule"))
    if rule not in layouts.rules():
        known = (*layouts.rules(), "custom")
        guess = nearest(rule, known)
        raise JobError(
            f"unknown rule {rule!r}", where=table.where("rule"), expected=f"one of {', '.join(known)}",
            how=f'perhaps "{guess}"' if guess else "",
        )
    for key in _OWN_POINTS:
        if key in table:
            raise JobError(f'{key} with rule = "{rule}"', where=table.where(key), expected='these only with rule = "custom"')
    lines, points = counts(table)
    digits = cast("Literal['exact', 'printed']", table.text("digits") or "exact")
    distance = 0.0
    if section.shape == "round" and rule == "equal-area":
        distance = method.wall_distance(section.width, system)
    placement = layouts.place(
        rule, shape=section.shape, width=section.width, height=section.height, lines=lines, points=points,
        angles=_angles(table), along=_along(table, section), names=_names(table), digits=digits, wall_distance=distance,
    )
    return to_layout(rule, placement, digits)


def counts(table: Table) -> tuple[int, int]:
    """Return the numbers of lines and of points on each."""
    points = table.get("points")
    for key, value in (("lines", table.count("lines")), ("points", points)):
        if value is None:
            raise JobError(f"no {key}", where=table.name, expected="lines and points (on each line)")
    if isinstance(points, bool) or not isinstance(points, int) or not 1 <= points <= 1000:
        raise JobError(f"{points!r}", where=table.where("points"), expected="a whole number from 1 to 1000, without quotes")
    return int(table.count("lines") or 0), points


def _angles(table: Table) -> list[float] | None:
    angles = table.get("angles")
    return None if angles is None else [angle.value for angle in angles]


def _names(table: Table) -> tuple[str, ...] | None:
    names: tuple[str, ...] | None = table.get("names")
    return names


def _along(table: Table, section: Section) -> str:
    along = table.text("along")
    if along is not None and section.shape == "round":
        raise JobError("along in a round section", where=table.where("along"), expected="angles, for a round section")
    return along or "height"


def to_layout(rule: str, placement: Placement, digits: Literal["exact", "printed"] = "exact") -> Layout:
    """Return a placement as the layout record, its notes as findings."""
    notes = tuple(Finding(
        level="attention" if any(placement.moved) else "note", topic="layout", message=f"{note}.", setting="[layout]",
    ) for note in placement.notes)
    return Layout(
        rule=rule, title=placement.title, source=placement.source, x=placement.x, y=placement.y, depth=placement.depth,
        weight=placement.weight, line=placement.line, point=placement.point, moved=placement.moved, digits=digits,
        findings=notes,
    )


def custom(table: Table, section: Section, points: Points) -> Layout:
    """Return the layout of points that the job, or a file of it, gives."""
    known = [name for name in ("depth", "x", "y") if np.isfinite(getattr(points, name)).any()]
    if known not in (["depth"], ["x", "y"], ["depth", "x", "y"]):
        raise JobError("custom points without a place", where=table.name, expected="a depth, or x and y, for every point")
    for name in known:
        if not np.isfinite(getattr(points, name)).all():
            raise JobError(f"some custom points have no {name}", where=table.name, expected=f"a {name} for every point")
    cartesian = "x" in known
    positions = table.get("positions")
    placement = layouts.place_custom(
        shape=section.shape, width=section.width, height=section.height, line=points.line, point=points.point,
        depth=None if cartesian else points.depth, x=points.x if cartesian else None, y=points.y if cartesian else None,
        weight=points.weight, angles=_angles(table), along=_along(table, section),
        positions=None if positions is None else [position.value for position in positions],
    )
    return to_layout("custom", placement)


def stated_points(table: Table) -> Points | None:
    """Return custom points that stand in the job file itself; None when they stand in a file."""
    if "digits" in table:
        raise JobError('digits with rule = "custom"', where=table.where("digits"), expected="points with your own digits")
    ways = [key for key in ("depths", "file") if key in table]
    if isinstance(table.get("points"), list):
        ways.append("points")
    if len(ways) > 1:
        raise JobError(f"{' and '.join(ways)}", where=table.name, expected="one way of giving the points")
    if ways == ["points"]:
        return _listed(table)
    if ways == ["depths"]:
        return _repeated(table)
    return None


def _repeated(table: Table) -> Points:
    """Points at the same depths on every line; weights are per point of a line."""
    depths, weights, lines = table.get("depths"), table.get("weights"), table.count("lines")
    if weights is None or lines is None:
        raise JobError(
            "no weights" if weights is None else "no lines", where=table.name, expected="lines, depths and weights together"
        )
    if len(weights) != len(depths):
        raise JobError(
            f"{len(depths)} depths and {len(weights)} weights", where=table.name, expected="a weight for each depth"
        )
    if isinstance(table.get("points"), int) and table.get("points") != len(depths):
        raise JobError(f"points = {table.get('points')} and {len(depths)} depths", where=table.name, expected="one number")
    names = line_labels(table, lines)
    found = Points()
    for name in names:
        for number, (depth, weight) in enumerate(zip(depths, weights, strict=True), 1):
            append(found, name, number, depth=depth.value, weight=weight / lines)
    return found


def line_labels(table: Table, lines: int) -> tuple[str, ...]:
    """Return the names of that many lines."""
    names = _names(table)
    if names is not None:
        if len(names) != lines:
            raise JobError(f"{len(names)} names", where=table.where("names"), expected=f"{lines} names, one a line")
        return names
    letters = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"
    return tuple(letters[i] if i < 26 else letters[i // 26 - 1] + letters[i % 26] for i in range(lines))


def append(
    points: Points, line: str, number: int, *, depth: float = np.nan, x: float = np.nan, y: float = np.nan,
    weight: float = np.nan,
) -> None:
    """Add one point."""
    points.line.append(line)
    points.point.append(number)
    points.depth.append(depth)
    points.x.append(x)
    points.y.append(y)
    points.weight.append(weight)


def _listed(table: Table) -> Points:
    """Points of ``points = [{line = "A", point = 1, depth = "31 mm", weight = 0.1}, ...]``."""
    found = Points()
    entries: Sequence[Any] = table.get("points")
    for place, entry in enumerate(entries, 1):
        where = f"{table.where('points')}[{place}]"
        if not isinstance(entry, dict):
            raise JobError(
                f"{entry!r}", where=where, expected='a table such as {line = "A", point = 1, depth = "31 mm", weight = 0.1}'
            )
        _one(found, entry, where)
    if not entries:
        raise LayoutError("no points", where=table.where("points"), expected="at least one point")
    return found


def _one(found: Points, entry: Mapping[str, Any], where: str) -> None:
    allowed = ("line", "point", "depth", "x", "y", "weight")
    for key in entry:
        if key not in allowed:
            guess = nearest(key, allowed)
            raise JobError(
                f"unknown key {key!r}", where=where, expected=f"one of {', '.join(allowed)}",
                how=f"perhaps {guess}" if guess else "",
            )
    line = entry.get("line", "A")
    number = entry.get("point", found.line.count(line) + 1)
    if not isinstance(line, str) or isinstance(number, bool) or not isinstance(number, int) or number < 1:
        raise JobError(f"{entry!r}", where=where, expected='line as text and point as a whole number from 1')
    if "weight" not in entry:
        raise JobError("no weight", where=where, expected="the share of the area the point stands for")
    places = {key: quantity(entry[key], "length", f"{where} {key}").value for key in ("depth", "x", "y") if key in entry}
    append(found, line, number, weight=plain_number(f"{where} weight", entry["weight"]), **places)
