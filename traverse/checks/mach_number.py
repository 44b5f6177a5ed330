"""The Mach number is within the scope of the velocity-area method."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels, limits


def decide(view: View) -> Verdict:
    """Compare the largest local Mach number with the limit; speed of sound from pressure and density."""
    limit = limits("mach-number")
    readings = view.result.run.readings
    pressure = view.result.run.conditions.barometric.value + readings.static
    ratio = view.result.run.gas.ratio_of_specific_heats or 1.4
    counted = view.result.treated.counted
    mach = np.where(counted, np.abs(view.result.velocity) / np.sqrt(ratio * pressure / view.result.density), np.nan)
    worst = int(np.nanargmax(mach))
    met = bool(mach[worst] <= float(limit["mach"]))
    return Verdict(
        status="pass" if met else "fail", observed=f"{mach[worst]:.3f} at {labels(view.result, [worst])}",
        criterion=f"at most {limit['mach']}", source=limit["source"],
        message="" if met else "Outside the scope of the method.", effect="none" if met else "not estimated",
    )


CHECK = Check(id="mach-number", title="Mach number", scope="run", decide=decide)
