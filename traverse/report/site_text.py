"""The place of the plane and the number of points against every rule, as text."""

from __future__ import annotations

import textwrap

from traverse.model import Setup
from traverse.report.text import table
from traverse.siting import PointCount, SiteVerdict, assess, points_wanted

WIDTH = 110


def site(setup: Setup) -> list[str]:
    """Return both tables, with which diameter they go by, as lines."""
    section = setup.plane.section
    lines = ["Straight lengths by every rule, in diameters", *_sites(assess(setup)), "", "Least number of points by every rule"]
    rows = [("rule", "least", "here", "", ""), *(_count_row(one) for one in points_wanted(setup))]
    lines += table(rows, right=(1, 2)).splitlines()
    lines += ["", *_sources(setup)]
    lines += ["", "(m): from memory, not held against the document; (c): common practice, no source. Diameter: " + (
        f"{_length(section.hydraulic_diameter, setup.units)}." if section.shape == "round" else
        f"the hydraulic one, {_length(section.hydraulic_diameter, setup.units)}"
    )]
    if section.shape != "round":
        equal = _length(section.equal_area_diameter, setup.units)
        lines.append(f"(four times the area over the perimeter); the one of equal area, {equal}, is not used for siting.")
    return lines


def _sources(setup: Setup) -> list[str]:
    """Return where each figure stands."""
    titles: dict[str, list[str]] = {}
    every: list[SiteVerdict | PointCount] = [*assess(setup), *points_wanted(setup)]
    for one in every:
        titles.setdefault(one.source + (", from memory" if one.from_memory and "memory" not in one.source else ""), []).append(one.title)
    text = "; ".join(f"{' and '.join(dict.fromkeys(names))}: {source}" for source, names in titles.items())
    return textwrap.wrap(f"Sources. {text}.", WIDTH, break_long_words=False, break_on_hyphens=False)


def _sites(verdicts: tuple[SiteVerdict, ...]) -> list[str]:
    rows = [("rule", "wanted", "before", "after", "verdict"), *(_site_row(one) for one in verdicts)]
    lines = table(rows, right=(2, 3)).splitlines()
    found = lines[:1]
    for line, one in zip(lines[1:], verdicts, strict=True):
        found.append(line)
        if one.allowed:
            found.append(f"    then: {one.allowed}")
    return found


def _length(value: float, system: str) -> str:
    return f"{value / 0.0254:.2f} in" if system == "us" else f"{value * 1000:.0f} mm"


def _site_row(one: SiteVerdict) -> tuple[str, ...]:
    name = "" if one.diameter_name == "hydraulic diameter" else f", by the {one.diameter_name}"
    return _marked(one.title, one.from_memory, one.source) + name, one.wanted, _number(one.before), _number(one.after), one.verdict


def _count_row(one: PointCount) -> tuple[str, ...]:
    verdict = "" if one.met is None else ("enough" if one.met else "too few")
    return _marked(one.title, one.from_memory, one.source), "-" if one.least is None else str(one.least), str(one.ours), verdict, one.note


def _marked(title: str, from_memory: bool, source: str) -> str:
    if "common practice" in source:
        return f"{title} (c)"
    return f"{title} (m)" if from_memory else title


def _number(value: float | None) -> str:
    return "?" if value is None else f"{value:.2f}"
