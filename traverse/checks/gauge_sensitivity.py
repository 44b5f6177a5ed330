"""Whether the gauge is fine enough for the readings (EPA Method 2, section 6.2)."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, limits
from traverse.units import UNITS, parse


def decide(view: View) -> Verdict:
    """Fail when the readings are low by the method's rule and its ratio test does not excuse them."""
    limit = limits("gauge-sensitivity")
    criterion = (
        f"mean at least {limit['least']}, few readings below it (one for fewer than {limit['many']} points, else "
        f"{100 * float(limit['share']):g} %), or ratio T at most {limit['ratio']}"
    )
    if not view.method.id.startswith("epa"):
        return Verdict(
            status="not applicable", observed="", message="A rule of EPA Method 2.", criterion=criterion, source=limit["source"]
        )
    pressure = np.maximum(view.result.treated.differential_pressure[view.result.treated.counted], 0.0)
    least = parse(limit["least"], "pressure").value
    constant = parse(limit[f"constant_{view.job.units}"], "pressure").value
    low = int(np.sum(pressure < least))
    allowed = 1 if pressure.size < int(limit["many"]) else int(np.floor(float(limit["share"]) * pressure.size))
    fine = bool(np.mean(pressure) >= least and low <= allowed)
    roots = float(np.sum(np.sqrt(pressure)))
    ratio = float(np.sum(np.sqrt(pressure + constant))) / roots if roots > 0 else np.inf
    met = fine or ratio <= float(limit["ratio"])
    mean = UNITS["inH2O"].from_si(float(np.mean(pressure)))
    return Verdict(
        status="pass" if met else "fail", observed=f"mean {mean:.3g} inH2O, {low} below {limit['least']}, T = {ratio:.3f}",
        criterion=criterion, source=limit["source"],
        message="" if met else "The method wants a gauge of greater sensitivity.", effect="none" if met else "not estimated",
    )


CHECK = Check(id="gauge-sensitivity", title="Sensitivity of the gauge", scope="run", decide=decide)
