"""The place of the plane and the number of points against every standard's rule at once."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any, Literal

from traverse import tables
from traverse.model import Section, Setup
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
    return tuple(_verdict(rule, setup) for rule in rules if _within(setup.plane.section, rule))


def _within(section: Section, rule: Mapping[str, Any]) -> bool:
    """Return whether the rule is for ducts of this size."""
    if "narrowest" not in rule:
        return True
    low, high = (parse(rule[name], "length").value for name in ("narrowest", "widest"))
    return low <= section.hydraulic_diameter < high


def _verdict(rule: Mapping[str, Any], setup: Setup) -> SiteVerdict:
    section, plane = setup.plane.section, setup.plane
    mean = rule["diameter"] == "mean" and section.shape != "round"
    diameter = (section.width + section.height) / 2.0 if mean else section.hydraulic_diameter
    before, after = (None if length is None else length.value / diameter for length in (plane.upstream, plane.downstream))
    wanted = tuple(float(rule[name]) if rule[name] else None for name in ("before", "after"))
    least = tuple(float(rule[name]) if rule[name] else None for name in ("least_before", "least_after"))
    words = " and ".join(f"{value:g} {side}" for value, side in zip(wanted, ("before", "after"), strict=True) if value is not None)
    verdict, allowed = _judge((before, after), wanted, least, rule)
    return SiteVerdict(
        rule=rule["rule"], title=rule["title"], verdict=verdict, wanted=words, before=before, after=after, diameter=diameter,
        diameter_name="mean of width and height" if mean else "hydraulic diameter", allowed=allowed, source=rule["source"],
        from_memory=rule["memory"],
    )


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
    """Return the least number of points by every rule, beside the number of the layout."""
    found = [*_method_1(setup)]
    for rule in tables.load("site_rules")["count"]:
        least, note = _least(rule, setup.plane.section)
        found.append(PointCount(
            rule=rule["rule"], title=rule["title"], least=least, ours=setup.layout.size, note=note, source=rule["source"],
            from_memory=rule["memory"],
        ))
    return tuple(found)


def _method_1(setup: Setup) -> list[PointCount]:
    table = tables.load("site_rules")
    velocity, particulate = table["point_count"]["epa-2"], table["particulate"]
    section, plane = setup.plane.section, setup.plane
    if section.hydraulic_diameter < 0.3 * SLACK:
        return [PointCount(
            rule="epa-1a", title="EPA Method 1A, least", least=8 if section.shape == "round" else 9, ours=setup.layout.size,
            note="more by the distances, as in Method 1; round: a multiple of 4", source="40 CFR 60 App. A-1 Method 1A, 11.2 (read)",
            from_memory=False,
        )]
    found = []
    for title, steps, source in (
        ("EPA Method 1, velocity", velocity["steps"], velocity["source"]),
        ("EPA Method 1, particulate", particulate["steps"], particulate["source"]),
    ):
        least, note = (None, "straight lengths not stated") if plane.upstream is None or plane.downstream is None else by_distance(
            steps, section, plane.upstream.value, plane.downstream.value)
        found.append(PointCount(
            rule="epa-1", title=title, least=least, ours=setup.layout.size, note=note, source=source, from_memory=True
        ))
    return found


def by_distance(steps: Sequence[Sequence[str]], section: Section, upstream: float, downstream: float) -> tuple[int | None, str]:
    """Return the number of points of Method 1 by the straight lengths [m]: the higher of what the two ask for, or why there is none."""
    small = tables.load("site_rules")["point_count"]["epa-2"]
    diameter = section.hydraulic_diameter
    before, after = upstream / diameter, downstream / diameter
    rounded = section.shape == "round"
    for least_before, least_after, round_count, rectangle_count in steps:
        if before >= float(least_before) * SLACK and after >= float(least_after) * SLACK:
            count = int(round_count if rounded else rectangle_count)
            if count == 12 and diameter <= parse(small["small_limit"], "length").value * (1 + 1e-12):
                count = int(small["small_round" if rounded else "small_rectangle"])
            return count, f"at {before:.2f} diameters before and {after:.2f} after"
    if diameter > parse("24 in", "length").value:
        return (40 if rounded else 42), "site below 2 and 0.5 diameters: alternative procedure with a directional probe (11.5)"
    return None, "site below 2 and 0.5 diameters and duct not above 24 in: another plane"


def _least(rule: Mapping[str, Any], section: Section) -> tuple[int | None, str]:
    """Return a rule's least number of points for a section, and how it comes to it."""
    rounded = section.shape in ("round", "ellipse", "annulus")
    if not rounded and "side_points" in rule:
        across, up = (int(_step(rule["side_points"], side)) for side in (section.width, section.height))
        return max(across * up, 25), f"{across} x {up}"
    if not rounded and "cell_side" in rule:
        return _cells(rule, section)
    by = rule["by"] if rounded else rule.get("rectangle_by", rule["by"])
    value = section.area if by == "area" else section.hydraulic_diameter
    key = "round" if rounded else "rectangle"
    if key not in rule:
        return None, f"no figure for a {section.shape}"
    least = int(_step(rule[key], value))
    note = f"{'area' if by == 'area' else 'diameter'} {value:.3g} {'m2' if by == 'area' else 'm'}"
    if "per_square_metre" in rule and section.area > float(rule["above"]):
        if not rounded or rule["by"] == "area":
            least = max(least, math.ceil(float(rule["per_square_metre"]) * section.area * SLACK))
        if "enough" in rule:
            least, note = min(least, int(rule["enough"])), f"{note}; {rule['enough']} normally enough"
    if not rounded and "cell_most" in rule:
        side = float(rule["cell_most"])
        least = max(least, math.ceil(section.width / side * SLACK) * math.ceil(section.height / side * SLACK))
    return least, note


def _cells(rule: Mapping[str, Any], section: Section) -> tuple[int, str]:
    """Return the number of cells of at most a side that goes by the area."""
    limits = rule["cell_side"]
    if section.area > float(limits[-1][0]):
        return int(rule["most"]), f"area {section.area:.3g} m2: equal areas, normally up to {rule['most']}"
    side = float(_step(limits, section.area))
    across, up = (math.ceil(length / side * SLACK) for length in (section.width, section.height))
    return across * up, f"cells of at most {side:g} m: {across} x {up}"


def _step(steps: Sequence[Sequence[str]], value: float) -> str:
    """Return the entry of the first step whose limit is not exceeded."""
    return next(entry for limit, entry in steps if value <= float(limit) * (1 + 1e-12))
