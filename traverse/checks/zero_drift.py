"""The zero of the gauge before and after the run."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, limits


def decide(view: View) -> Verdict:
    """Fail when a zero, or its change, is more than the share of the mean pressure. Nothing is taken off the readings."""
    limit, quality = limits("zero-drift"), view.quality
    share = float(limit["share"])
    criterion = f"zero and its change at most {100 * share:g} % of the mean pressure"
    zeros = [stated for stated in (quality.zero_before, quality.zero_after) if stated is not None]
    if not zeros:
        why = "No zeros are stated: [quality] zero_before."
        return Verdict(status="not applicable", observed="", criterion=criterion, source=limit["source"], message=why)
    counted = view.result.treated.counted
    mean = float(np.mean(np.abs(view.result.treated.differential_pressure[counted])))
    values = [stated.value for stated in zeros]
    worst = max([abs(value) for value in values] + ([abs(values[1] - values[0])] if len(values) > 1 else []))
    part = worst / mean if mean else np.inf
    met = part <= share * (1 + 1e-12)
    return Verdict(
        status="pass" if met else "fail", observed=f"{', '.join(stated.text for stated in zeros)}: {100 * part:.2g} % of the mean",
        criterion=criterion, source=limit["source"],
        message="" if met else "Set the zero and repeat the run; the readings stand as they were read.",
        effect="none" if met else f"about {50 * part:.2g} % of the velocity at the mean pressure, more at low readings",
    )


CHECK = Check(id="zero-drift", title="Zero of the gauge", scope="run", decide=decide)
