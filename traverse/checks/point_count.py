"""The number of points the method wants for this section and site."""

from collections.abc import Mapping
from typing import Any

from traverse import siting
from traverse.checks._base import Check, Verdict, View
from traverse.model import Plane
from traverse.tables import load
from traverse.units import parse


def decide(view: View) -> Verdict:
    """Compare the number of points in the layout with the least number of the job's method."""
    rule = load("site_rules")["point_count"].get(view.method.count_rule or view.method.id)
    if rule is None and view.method.count_rule:
        return _by_count_rule(view)
    if rule is None:
        return Verdict(
            status="not applicable", observed="", message="The method sets no number of points.", criterion="none", source=""
        )
    size = view.job.layout.size
    wanted, why = _least(rule, view.job.plane, view.job.units)
    if wanted is None:
        return Verdict(
            status="not evaluated", observed=f"{size} points", message=why, source=rule["source"],
            criterion=f"depends on the {'straight lengths and the ' if 'steps' in rule else ''}shape",
        )
    met = size >= wanted
    return Verdict(
        status="pass" if met else "fail", observed=f"{size} points", criterion=f"at least {wanted} points{why}",
        source=rule["source"], message="" if met else "Too few points for the method.", effect="none" if met else "not estimated",
    )


def _least(rule: Mapping[str, Any], plane: Plane, system: str) -> tuple[int | None, str]:
    shape: str = plane.section.shape
    if shape == "ellipse" and "steps" in rule:
        shape = "round"  # Method 1, 11.3.1.3: an elliptical stack has the points of a round one on each of its diameters
    if shape not in ("round", "rectangle"):
        return None, f"The rule gives no number of points for this shape ({shape})."
    if "steps" not in rule:
        return int(rule[shape]), ""
    if plane.upstream is None or plane.downstream is None:
        return None, "[plane] upstream and downstream are not both stated."
    diameter = plane.section.hydraulic_diameter
    before, after = plane.upstream.value / diameter, plane.downstream.value / diameter
    for least_before, least_after, round_count, rectangle_count in rule["steps"]:
        if before >= float(least_before) * (1 - 1e-9) and after >= float(least_after) * (1 - 1e-9):
            count = int(round_count if shape == "round" else rectangle_count)
            small = parse(rule["small_limit_us" if system == "us" else "small_limit"], "length").value
            if count == 12 and diameter <= small * (1 + 1e-12):
                count = int(rule["small_round" if shape == "round" else "small_rectangle"])
            return count, f" at {before:.2f} diameters before and {after:.2f} after"
    return None, "The site is below the least distances; the simplified procedure does not apply."


def _by_count_rule(view: View) -> Verdict:
    """Decide by the rule that the method names in the table of point counts."""
    found = siting.least_points(view.method.count_rule, view.job)
    assert found is not None, "a method names a rule that exists"
    source = found.source + (" (from memory)" if found.from_memory and "memory" not in found.source else "")
    if found.least is None:
        return Verdict(
            status="not evaluated", observed=f"{found.ours} points", message=f"{found.note[:1].upper()}{found.note[1:]}.", source=source,
            criterion="depends on the shape",
        )
    met = found.ours >= found.least
    return Verdict(
        status="pass" if met else "fail", observed=f"{found.ours} points", criterion=f"at least {found.least} points ({found.note})",
        source=source, message="" if met else "Too few points for the method.", effect="none" if met else "not estimated",
    )


CHECK = Check(id="point-count", title="Number of points", scope="job", decide=decide)
