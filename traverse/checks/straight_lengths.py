"""Straight lengths before and after the plane, in equivalent diameters."""

from traverse.checks._base import Check, Verdict, View
from traverse.tables import load


def decide(view: View) -> Verdict:
    """Compare the stated straight lengths with the rule of the job's method."""
    rule = load("site_rules")["straight_lengths"].get(view.method.id)
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


CHECK = Check(id="straight-lengths", title="Straight lengths", scope="job", decide=decide)
