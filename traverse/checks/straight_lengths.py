"""Straight lengths before and after the plane, in equivalent diameters."""

from traverse import siting
from traverse.checks._base import Check, Verdict, View
from traverse.tables import load


def decide(view: View) -> Verdict:
    """Compare the stated straight lengths with the rule of the job's method."""
    rule = load("site_rules")["straight_lengths"].get(view.method.site_rule or view.method.id)
    if rule is None and view.method.site_rule:
        return _by_site_rule(view)
    if rule is None:
        return Verdict(
            status="not applicable", observed="", message="The method sets no straight lengths.", criterion="none", source=""
        )
    wanted = [float(length) for length in rule["preferred"]]
    least = [float(length) for length in rule["least"]]
    criterion = f"{wanted[0]:g} diameters before and {wanted[1]:g} after the plane; diameter = {rule['diameter']}"
    plane = view.job.plane
    if plane.upstream is None or plane.downstream is None:
        return Verdict(
            status="not evaluated", observed="", criterion=criterion, source=rule["source"],
            message="[plane] upstream and downstream are not both stated.",
        )
    diameter = plane.section.hydraulic_diameter
    found = [plane.upstream.value / diameter, plane.downstream.value / diameter]
    observed = f"{found[0]:.2f} before, {found[1]:.2f} after"
    slack = 1 - 1e-9
    if all(have >= want * slack for have, want in zip(found, wanted, strict=True)):
        return Verdict(status="pass", observed=observed, message="", criterion=criterion, source=rule["source"], effect="none")
    if rule["between"] and all(have >= want * slack for have, want in zip(found, least, strict=True)):
        return Verdict(
            status="pass", observed=observed, criterion=criterion, source=rule["source"],
            message=f"Preferred lengths not met; {rule['between']}.",
        )
    return Verdict(
        status="fail", observed=observed, criterion=criterion, source=rule["source"],
        message="Take more points, choose another plane, or have the deviation accepted.",
    )


def _by_site_rule(view: View) -> Verdict:
    """Decide by the rule that the method names in the table of site rules."""
    found = siting.straight_lengths(view.method.site_rule, view.job)
    assert found is not None, "a method names a rule that exists, of any size"
    source = found.source + (" (from memory)" if found.from_memory and "memory" not in found.source else "")
    criterion = f"{found.wanted} in diameters; diameter = {found.diameter_name}"
    if found.verdict == "not stated":
        return Verdict(
            status="not evaluated", observed="", criterion=criterion, source=source,
            message="[plane] upstream and downstream are not both stated.",
        )
    observed = f"{_number(found.before)} before, {_number(found.after)} after"
    met = found.verdict != "not met"
    return Verdict(
        status="pass" if met else "fail", observed=observed, criterion=criterion, source=source,
        message=f"{found.allowed[:1].upper()}{found.allowed[1:]}." if found.allowed else "",
        effect="none" if found.verdict == "met" else "not estimated",
    )


def _number(value: float | None) -> str:
    return "?" if value is None else f"{value:.2f}"


CHECK = Check(id="straight-lengths", title="Straight lengths", scope="job", decide=decide)
