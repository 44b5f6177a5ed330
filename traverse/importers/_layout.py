"""[layout]: the rule's points, or points that the job gives itself, as the plan's layout."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, Literal, cast

import numpy as np

from traverse import layouts
from traverse.errors import JobError, LayoutError, nearest
from traverse.importers._schema import Table, plain_number, quantity
from traverse.layouts import Placement, Rule
from traverse.methods import Method
from traverse.model import Array, Finding, Layout, Section
from traverse.physics import sections, voronoi
from traverse.physics.velocity_area import MILDEST, STEEPEST

_OWN_POINTS = ("depths", "file", "positions")
MOST = 1000


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
    rule = layouts.rule(str(table.text("rule")))
    for key in _OWN_POINTS:
        if key in table:
            raise JobError(f'{key} with rule = "{rule.name}"', where=table.where(key), expected='these only with rule = "custom"')
    digits = cast("Literal['exact', 'printed']", table.text("digits") or "exact")
    lines, points, said = counts(table, rule, section)
    placement = layouts.place(
        rule.name, shape=section.shape, width=section.width, height=section.height, lines=lines, points=points,
        angles=_angles(table), along=_along(table, section), names=_names(table), digits=digits,
        wall_distance=_wall_distance(table, rule, section, method, system), radii=table.flag("radii"),
        core=float(sections.ring_diameters(section.size)[1]) if section.shape == "annulus" else 0.0,
        centre=table.text("centre") or "each",
    )
    layout = to_layout(table, rule.name, placement, section, digits)
    return replace(layout, findings=(*said, *layout.findings))


def _wall_distance(table: Table, rule: Rule, section: Section, method: Method, system: str) -> float:
    """Return the wall distance: as stated, else the rule's own, else that of the test method for equal areas."""
    stated = table.stated("wall_distance")
    if stated is not None:
        if section.shape not in ("round", "ellipse"):
            where = table.where("wall_distance")
            raise JobError(f"wall_distance in a {section.shape}", where=where, expected="a wall distance only in a round section")
        if stated.value < 0:
            raise JobError(f"{stated.text!r}", where=table.where("wall_distance"), expected="a length of zero or more")
        return stated.value
    if section.shape not in ("round", "ellipse"):
        return 0.0
    narrow = min(section.width, section.height)
    if rule.wall_distance is not None:
        return rule.wall_distance(narrow, system)
    return method.wall_distance(narrow, system) if rule.name == "equal-area" else 0.0


def counts(table: Table, rule: Rule, section: Section) -> tuple[int, int, tuple[Finding, ...]]:
    """Return the numbers of lines and of points on each, 0 where a scheme fixes them, and what the rule decided."""
    shape, points, lines = section.shape, table.get("points"), table.count("lines")
    if points is not None and (isinstance(points, bool) or not isinstance(points, int) or not 1 <= points <= MOST):
        raise JobError(f"{points!r}", where=table.where("points"), expected=f"a whole number from 1 to {MOST}, without quotes")
    if shape in rule.schemes and shape == "rectangle":
        return int(lines or 0), int(points or 0), ()
    if lines is None and points is None and rule.count is not None and shape in ("round", "rectangle") and "radii" not in table:
        lines, points = rule.count(layouts.Extent(
            shape=shape, width=section.width, height=section.height, hydraulic_diameter=section.hydraulic_diameter
        ))
        if table.text("along") == "width":
            lines, points = points, lines
        return lines, points, (Finding(
            level="note", topic="layout", setting="[layout] lines, points",
            message=f"{lines} lines of {points} points by the rule, for a section of this size.",
        ),)
    if lines is None and len(rule.line_counts.get(shape, ())) == 1:
        lines = rule.line_counts[shape][0]
    if points is None and shape == "round" and len(rule.round_points) == 1:
        points = rule.round_points[0]
    for key, value in (("lines", lines), ("points", points)):
        if value is None:
            raise JobError(f"no {key}", where=table.name, expected="lines and points (on each line)")
    return int(lines or 0), int(points or 0), ()


def _angles(table: Table) -> list[float] | None:
    angles = table.get("angles")
    return None if angles is None else [angle.value for angle in angles]


def _names(table: Table) -> tuple[str, ...] | None:
    names: tuple[str, ...] | None = table.get("names")
    return names


def _along(table: Table, section: Section) -> str:
    along = table.text("along")
    if along is not None and section.shape in ("round", "ellipse", "annulus"):
        raise JobError("along in a round section", where=table.where("along"), expected="angles, for a round section")
    return along or "height"


def to_layout(
    table: Table, rule: str, placement: Placement, section: Section, digits: Literal["exact", "printed"] = "exact"
) -> Layout:
    """Return a placement as the layout record, its notes as findings, with the integration that the job asks for."""
    notes = tuple(Finding(
        level="attention" if any(placement.moved) else "note", topic="layout", message=f"{note}.", setting="[layout]",
    ) for note in placement.notes)
    weight, exponent, said = _integration(table, placement, section)
    return Layout(
        rule=rule, title=placement.title, source=placement.source, x=placement.x, y=placement.y, depth=placement.depth,
        weight=weight, line=placement.line, point=placement.point, moved=placement.moved, digits=digits,
        findings=(*notes, *said), wall_exponent=exponent,
    )


def _integration(
    table: Table, placement: Placement, section: Section
) -> tuple[Array, float | Literal["fit"] | None, tuple[Finding, ...]]:
    """Return the weights, and the exponent of the wall law where the velocity is integrated instead of averaged."""
    way, exponent = table.get("weights"), table.get("wall_exponent")
    if isinstance(way, list) and "depths" not in table:
        raise JobError("a list of weights", where=table.where("weights"), expected='only with depths; else "area" or "velocity-area"')
    if way != "velocity-area" and exponent is not None:
        raise JobError("wall_exponent", where=table.where("wall_exponent"), expected='only with weights = "velocity-area"')
    if not isinstance(way, str):
        return placement.weight, None, ()
    if way == "area":
        shares = voronoi.shares(section.shape, section.size, placement.x, placement.y)
        return shares, None, (Finding(
            level="note", topic="layout", setting="[layout] weights",
            message="each point stands for the part of the section that is nearest to it.",
        ),)
    if way != "velocity-area":
        raise JobError(f"{way!r}", where=table.where("weights"), expected='"area", "velocity-area", or a list of numbers')
    found: float | Literal["fit"] = "fit"
    if exponent is not None and exponent != "fit":
        found = plain_number(table.where("wall_exponent"), exponent)
        if not MILDEST <= found <= STEEPEST:
            raise JobError(
                f"an exponent of {found:g}", where=table.where("wall_exponent"),
                expected=f'{MILDEST:g} (rough) to {STEEPEST:g} (smooth), or "fit"',
            )
    layouts.integrable(section.shape, section.size, placement.line, placement.x, placement.y)
    return placement.weight, found, (Finding(
        level="note", topic="layout", setting="[layout] weights",
        message="velocities are integrated over the section by cubic arcs between the points and a power law to the wall "
        f"(ISO 3966, numerical integration), exponent {'from the outer points' if found == 'fit' else f'{found:g}'}.",
    ),)


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
        weight=_weights(table, points), angles=_angles(table), along=_along(table, section),
        positions=None if positions is None else [position.value for position in positions], size=section.size,
    )
    return to_layout(table, "custom", placement, section)


def _weights(table: Table, points: Points) -> list[float] | None:
    """Return the weights as given, None where none is; some without others is a mistake."""
    given = np.isfinite(points.weight)
    if given.any() and not given.all():
        raise JobError("some custom points have no weight", where=table.name, expected="a weight for every point, or for none")
    if given.any() and isinstance(table.get("weights"), str):
        raise JobError(
            f'weights = "{table.get("weights")}" beside weights of the points', where=table.where("weights"), expected="one of the two"
        )
    return points.weight if given.any() else None


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
    """Points at the same depths on every line; weights, where given, are per point of a line."""
    depths, weights, lines = table.get("depths"), table.get("weights"), table.count("lines")
    if lines is None:
        raise JobError("no lines", where=table.name, expected="lines and depths together")
    if weights is None or isinstance(weights, str):
        weights = [np.nan] * len(depths)
    elif not isinstance(weights, list):
        raise JobError(f"{weights!r}", where=table.where("weights"), expected='"area", "velocity-area", or a list of numbers')
    else:
        weights = [plain_number(f"{table.where('weights')}[{place}]", entry) for place, entry in enumerate(weights, 1)]
    if len(weights) != len(depths):
        raise JobError(
            f"{len(depths)} depths and {len(weights)} weights", where=table.name, expected="a weight for each depth"
        )
    if isinstance(table.get("points"), int) and table.get("points") != len(depths):
        raise JobError(f"points = {table.get('points')} and {len(depths)} depths", where=table.name, expected="one number")
    names = _names(table) or layouts.line_names(lines)
    if len(names) != lines:
        raise JobError(f"{len(names)} names", where=table.where("names"), expected=f"{lines} names, one a line")
    found = Points()
    for name in names:
        for number, (depth, weight) in enumerate(zip(depths, weights, strict=True), 1):
            append(found, name, number, depth=depth.value, weight=weight / lines)
    return found


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
    weight = plain_number(f"{where} weight", entry["weight"]) if "weight" in entry else np.nan
    places = {key: quantity(entry[key], "length", f"{where} {key}").value for key in ("depth", "x", "y") if key in entry}
    append(found, line, number, weight=weight, **places)
