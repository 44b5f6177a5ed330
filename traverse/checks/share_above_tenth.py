"""The share of the readings above a tenth of the largest."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, limits


def decide(view: View) -> Verdict:
    """Fail when fewer readings than the share demands exceed a tenth of the largest."""
    limit = limits("share-above-tenth")
    pressure = view.result.treated.differential_pressure[view.result.treated.counted]
    criterion = f"at least {100 * float(limit['share']):g} % of the readings above a tenth of the largest"
    if not np.max(pressure) > 0:
        return Verdict(
            status="fail", observed="no positive reading", message="No flow towards the probe was read.",
            criterion=criterion, source=limit["source"],
        )
    share = float(np.mean(pressure > float(limit["fraction"]) * np.max(pressure)))
    met = share >= float(limit["share"])
    return Verdict(
        status="pass" if met else "fail", observed=f"{100 * share:.0f} %", criterion=criterion, source=limit["source"],
        message="" if met else "The plane is unsuitable: much of the section carries little flow.",
        effect="none" if met else "not estimated",
    )


CHECK = Check(id="share-above-tenth", title="Share above a tenth of the largest", scope="run", decide=decide)
