"""Highest against lowest local velocity."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels, limits


def decide(view: View) -> Verdict:
    """Fail when the ratio is at or above the limit, or a velocity is not positive."""
    limit = limits("velocity-ratio")
    velocity = np.where(view.result.treated.counted, view.result.velocity, np.nan)
    high, low = int(np.nanargmax(velocity)), int(np.nanargmin(velocity))
    criterion = f"below {float(limit['ratio']):g} : 1"
    if velocity[low] <= 0:
        observed = f"no ratio: velocity {velocity[low]:.3g} m/s at {labels(view.result, [low])}"
        met = False
    else:
        ratio = velocity[high] / velocity[low]
        observed = f"{ratio:.3g} : 1 ({labels(view.result, [high])} over {labels(view.result, [low])})"
        met = bool(ratio < float(limit["ratio"]))
    return Verdict(
        status="pass" if met else "fail", observed=observed, criterion=criterion, source=limit["source"],
        message="" if met else "An uneven profile: more points, or a plane farther from the disturbance.",
        effect="none" if met else "not estimated",
    )


CHECK = Check(id="velocity-ratio", title="Highest to lowest velocity", scope="run", decide=decide)
