"""The lowest differential pressure is large enough for a pitot tube."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels, limits


def decide(view: View) -> Verdict:
    """Fail when a counted reading lies at or below the limit; below-range readings count with their limit."""
    limit = limits("lowest-pressure")
    least = float(limit["pascal"])
    pressure = np.where(view.result.treated.counted, view.result.run.readings.differential_pressure, np.nan)
    low = np.flatnonzero(pressure <= least)
    criterion = f"every differential pressure above {least:g} Pa"
    lowest = f"lowest {np.nanmin(pressure):.3g} Pa"
    if not low.size:
        return Verdict(status="pass", observed=lowest, message="", criterion=criterion, source=limit["source"], effect="none")
    return Verdict(
        status="fail", observed=f"{lowest}; at or below the limit: {labels(view.result, low)}",
        message="Near zero the gauge's own error dominates. Use a finer gauge or another kind of meter at these points.",
        criterion=criterion, source=limit["source"],
    )


CHECK = Check(id="lowest-pressure", title="Lowest differential pressure", scope="run", decide=decide)
