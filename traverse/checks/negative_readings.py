"""No local negative flow."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels, limits


def decide(view: View) -> Verdict:
    """Fail when a recorded differential pressure is negative."""
    pressure = view.result.run.readings.differential_pressure
    negative = np.flatnonzero(pressure < 0)
    criterion, source = "no negative differential pressure", limits("negative-readings")["source"]
    if not negative.size:
        return Verdict(status="pass", observed="none", message="", criterion=criterion, source=source, effect="none")
    flows = [values["actual_flow"] for values in view.result.treatments.values()]
    spread = ""
    if flows and min(flows) > 0:
        spread = f"the treatments of negative readings differ by {100 * (max(flows) / min(flows) - 1):.2g} % in flow"
    return Verdict(
        status="fail", observed=f"{negative.size} of {pressure.size}: {labels(view.result, negative)}",
        message="Reverse flow, swapped hoses or a gauge off zero. The readings stand in the record; the rule that was "
        "applied and the results of the other rules are reported beside the flow.",
        criterion=criterion, source=source, effect=spread or "not estimated",
    )


CHECK = Check(id="negative-readings", title="No negative readings", scope="run", decide=decide)
