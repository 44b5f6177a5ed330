"""The place of the plane and the number of points against the standards' rules: all at once for a plan, one for a check."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from traverse import layouts, tables
from traverse.model import Job, Section, Setup
from traverse.units import parse

SLACK = 1.0 - 1e-9
Verdict = Literal["met", "met with a condition", "not met", "not stated"]


@dataclass(frozen=True, slots=True, kw_only=True)
class SiteVerdict:
    """What one standard says of the straight lengths; ``before`` and ``after`` in its diameters, None where not stated or not wanted."""

    rule: str
    title: str
    verdict: Verdict
    wanted: str
    before: float | None
    after: float | None
    diameter: float
    diameter_name: str
    allowed: str
    source: str
    from_memory: bool


@dataclass(frozen=True, slots=True, kw_only=True)
class PointCount:
    """The least number of points by one rule; ``least`` is None where the rule gives none for this section or site."""

    rule: str
    title: str
    least: int | None
    ours: int
    note: str
    source: str
    from_memory: bool

    @property
    def met(self) -> bool | None:
        """Whether the layout has enough points."""
        return None if self.least is None else self.ours >= self.least


def assess(setup: Setup) -> tuple[SiteVerdict, ...]:
    """Return what every rule says of the straight lengths before and after the plane."""
    rules = tables.load("site_rules")["site"]
    found = [_verdict(rule, setup) for rule in rules if _within(setup.plane.section, rule)]
    return (*found, *_fan_outlet(setup))


def _fan_outlet(setup: Setup) -> tuple[SiteVerdict, ...]:
    """Return the effective length behind a fan outlet: 2.5 diameters up to 2500 ft/min, one more for every 1000 ft/min."""
    if setup.design is None:
        return ()
    table = tables.load("site_rules")["fan_outlet"]
    speed, step = (parse(table[name], "velocity").value for name in ("up_to", "step"))
    velocity = setup.design.actual_flow.value / setup.plane.section.area
    wanted = float(table["least"]) + max(0.0, (velocity - speed) / step)
    rule = dict(table) | {"before": f"{wanted:.3g}"}
    return (_verdict(rule, setup),)


def straight_lengths(rule: str, setup: Setup | Job) -> SiteVerdict | None:
    """Return what one rule says of the straight lengths, None where there is no such rule or the section is not of its size."""
    found = next((one for one in tables.load("site_rules")["site"] if one["rule"] == rule), None)
    return None if found is None or not _within(setup.plane.section, found) else _verdict(found, setup)


def least_points(rule: str, setup: Setup | Job) -> PointCount | None:
    """Return the least number of points by one rule that goes by the size of the section, None where there is no such rule."""
    found = next((one for one in tables.load("site_rules")["count"] if one["rule"] == rule), None)
    return None if found is None else _count(found, setup)


def _within(section: Section, rule: Mapping[str, Any]) -> bool:
    """Return whether the rule is for ducts of this size."""
    if "narrowest" not in rule:
        return True
    low, high = (parse(rule[name], "length").value for name in ("narrowest", "widest"))
    return low <= section.hydraulic_diameter < high


def _verdict(rule: Mapping[str, Any], setup: Setup | Job) -> SiteVerdict:
    section, plane = setup.plane.section, setup.plane
    diameter, name = _diameter(rule["diameter"], section)
    before, after = (None if length is None else length.value / diameter for length in (plane.upstream, plane.downstream))
    wanted = tuple(float(rule[name]) if rule[name] else None for name in ("before", "after"))
    least = tuple(float(rule[name]) if rule[name] else None for name in ("least_before", "least_after"))
    words = " and ".join(f"{value:g} {side}" for value, side in zip(wanted, ("before", "after"), strict=True) if value is not None)
    verdict, allowed = _judge((before, after), wanted, least, rule)
    if verdict == "met" and "caveat" in rule and after is not None and after < float(rule["caveat_after"]) * SLACK:
        allowed = str(rule["caveat"])
    return SiteVerdict(
        rule=rule["rule"], title=rule["title"], verdict=verdict, wanted=words, before=before, after=after, diameter=diameter,
        diameter_name=name, allowed=allowed, source=rule["source"],
        from_memory=rule["memory"],
    )


def _diameter(kind: str, section: Section) -> tuple[float, str]:
    """Return the diameter a rule counts in, and its name. On a circle all are one."""
    if kind == "mean" and section.shape != "round":
        return (section.width + section.height) / 2.0, "mean of width and height"
    if kind == "equal-area" and section.shape != "round":
        return section.equal_area_diameter, "diameter of equal area"
    return section.hydraulic_diameter, "hydraulic diameter"


def _judge(
    lengths: Sequence[float | None], wanted: Sequence[float | None], least: Sequence[float | None], rule: Mapping[str, Any]
) -> tuple[Verdict, str]:
    needed = [have for have, want in zip(lengths, wanted, strict=True) if want is not None]
    if _all(lengths, wanted):
        return "met", ""
    # One stated length that is too short decides, whether the other is known or not.
    short = any(have is not None and want is not None and have < want * SLACK for have, want in zip(lengths, least, strict=True))
    if None in needed and not short:
        return "not stated", "state [plane] upstream and downstream"
    if any(value is not None for value in least) and _all(lengths, least):
        return "met with a condition", str(rule["between"])
    return "not met", str(rule["otherwise"])


def _all(lengths: Sequence[float | None], wanted: Sequence[float | None]) -> bool:
    return all(want is None or (have is not None and have >= want * SLACK) for have, want in zip(lengths, wanted, strict=True))


def points_wanted(setup: Setup) -> tuple[PointCount, ...]:
    """Return the least number of points by every rule, beside the number of the layout; a centre read on several lines is one."""
    ours, _ = places(setup)
    return (*_method_1(setup, ours), *(_count(rule, setup) for rule in tables.load("site_rules")["count"]))


def places(setup: Setup | Job) -> tuple[int, bool]:
    """Return the number of points of the layout, a centre read on several lines being one, and whether there is a centre."""
    section, layout = setup.plane.section, setup.layout
    centre = sum(bool(math.hypot(x, y) < 1e-9 * section.width) for x, y in zip(layout.x, layout.y, strict=True))
    return layout.size - max(centre - 1, 0), centre > 0


def _count(rule: Mapping[str, Any], setup: Setup | Job) -> PointCount:
    least, note = _least(rule, setup.plane.section)
    ours, centre = places(setup)
    return PointCount(
        rule=rule["rule"], title=rule["title"], least=least, ours=ours - (centre and bool(rule.get("without_centre"))), note=note,
        source=rule["source"], from_memory=rule["memory"],
    )


def _method_1(setup: Setup, ours: int) -> list[PointCount]:
    table = tables.load("site_rules")
    velocity, particulate = table["point_count"]["epa-2"], table["particulate"]
    section, plane = setup.plane.section, setup.plane
    small = section.hydraulic_diameter < 0.3 * SLACK
    wanted = [("EPA Method 1A, velocity" if small else "EPA Method 1, velocity", velocity["steps"], velocity["source"])]
    wanted += [] if small else [("EPA Method 1, particulate", particulate["steps"], particulate["source"])]
    found = []
    for title, steps, source in wanted:
        if section.shape not in ("round", "ellipse", "rectangle"):
            least, note = None, f"Method 1 has no {section.shape}"
        elif section.hydraulic_diameter < 0.1 * SLACK:
            least, note = None, "below 0.10 m: neither Method 1 nor 1A"
        elif plane.upstream is None or plane.downstream is None:
            least, note = None, "straight lengths not stated"
        else:
            least, note = by_distance(steps, section, plane.upstream.value, plane.downstream.value, setup.units)
        found.append(PointCount(
            rule="epa-1a" if small else "epa-1", title=title, least=least, ours=ours, note=note, source=source, from_memory=True
        ))
    return found


def by_distance(
    steps: Sequence[Sequence[str]], section: Section, upstream: float, downstream: float, system: str
) -> tuple[int | None, str]:
    """Return the number of points of Method 1 by the straight lengths [m]: the higher of what the two ask for, or why there is none."""
    small = tables.load("site_rules")["point_count"]["epa-2"]
    diameter = section.hydraulic_diameter
    before, after = upstream / diameter, downstream / diameter
    rounded = section.shape != "rectangle"
    limit = parse(small["small_limit_us" if system == "us" else "small_limit"], "length").value
    for least_before, least_after, round_count, rectangle_count in steps:
        if before >= float(least_before) * SLACK and after >= float(least_after) * SLACK:
            count = int(round_count if rounded else rectangle_count)
            if count == 12 and diameter <= limit * (1 + 1e-12):
                count = int(small["small_round" if rounded else "small_rectangle"])
            return count, f"at {before:.2f} diameters before and {after:.2f} after"
    if diameter > parse("24 in", "length").value:
        return (40 if rounded else 42), "site below 2 and 0.5 diameters: alternative procedure with a directional probe (11.5)"
    return None, "site below 2 and 0.5 diameters and duct not above 24 in: another plane"


def _least(rule: Mapping[str, Any], section: Section) -> tuple[int | None, str]:
    """Return a rule's least number of points for a section, and how it comes to it."""
    if section.shape not in ("round", "rectangle"):
        return None, f"no figure for a section of shape {section.shape}"
    return layouts.least(rule, layouts.Extent(
        shape=section.shape, width=section.width, height=section.height, hydraulic_diameter=section.hydraulic_diameter
    ))
