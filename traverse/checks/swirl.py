"""Swirling or cyclonic flow, from the yaw angles."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels
from traverse.tables import load


def decide(view: View) -> Verdict:
    """Compare the yaw angles with the limit of the method's family; not evaluated where none were read."""
    epa = view.method.id.startswith("epa")
    limit: dict[str, str] = dict(load("check_limits")["swirl"]["epa" if epa else "other"])
    allowed = float(limit["degrees"])
    criterion = f"mean of absolute angles at most {allowed:g} deg" if epa else f"every angle within {allowed:g} deg of the axis"
    if "yaw" not in view.result.run.readings.columns:
        return Verdict(
            status="not evaluated", observed="", message="No yaw angles were recorded.", criterion=criterion,
            source=limit["source"],
        )
    angles = np.abs(np.degrees(view.result.run.readings.yaw))
    worst = int(np.argmax(angles))
    observed = f"mean {np.mean(angles):.1f} deg, largest {angles[worst]:.1f} deg at {labels(view.result, [worst])}"
    if epa and view.method.uses_yaw:
        return Verdict(
            status="not applicable", observed=observed, criterion=criterion, source=limit["source"],
            message="The method measures the angle at every point and counts the axial component.",
        )
    value = float(np.mean(angles)) if epa else float(angles[worst])
    met = value <= allowed + 1e-9 if epa else value < allowed
    overstated = 100 * (1 / np.cos(np.radians(min(value, 89.0))) - 1)
    return Verdict(
        status="pass" if met else "fail",
        observed=observed,
        criterion=criterion, source=limit["source"],
        message="" if met else "The method may not be used in this flow; use a directional probe or another plane.",
        effect="none" if met else f"flow overstated by up to about {overstated:.2g} % where the yaw is not corrected",
    )


CHECK = Check(id="swirl", title="Swirl", scope="run", decide=decide)
