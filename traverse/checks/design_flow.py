"""Measured against design flow, for balancing work."""

from traverse.checks._base import Check, Verdict, View


def decide(view: View) -> Verdict:
    """Compare the measured flow with the job's own design flow and tolerance; the uncertainty is not included."""
    source = "the job's own [design]; simple acceptance, the uncertainty is not part of the decision"
    if view.design is None:
        return Verdict(
            status="not applicable", observed="", message="The job states no design flow.", criterion="none", source=source
        )
    observed = f"{view.design.percent_of_design:.1f} % of design"
    if view.design.tolerance is None or view.design.within is None:
        return Verdict(
            status="not evaluated", observed=observed, message="[design] tolerance is not stated.", criterion="none", source=source
        )
    return Verdict(
        status="pass" if view.design.within else "fail", observed=observed,
        criterion=f"within {view.design.tolerance:g} % of design", source=source,
        message="" if view.design.within else "Adjust the system and traverse again.",
        effect="none",
    )


CHECK = Check(id="design-flow", title="Flow against design", scope="job", decide=decide)
