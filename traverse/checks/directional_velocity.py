"""The least mean velocity for the methods with directional probes."""

from traverse.checks._base import Check, Verdict, View, limits
from traverse.units import UNITS, parse


def decide(view: View) -> Verdict:
    """Compare the mean velocity with the least one of Methods 2F and 2G."""
    limit = limits("directional-velocity")
    least = parse(limit["velocity"], "velocity")
    criterion = f"mean velocity of at least {least.text}"
    if not (view.method.constants and view.method.uses_yaw):
        message = "Asked of Methods 2F and 2G only."
        return Verdict(status="not applicable", observed="", message=message, criterion=criterion, source=limit["source"])
    found = view.result.value("mean_velocity")
    met = found >= least.value * (1 - 1e-9)
    return Verdict(
        status="pass" if met else "fail", observed=f"{UNITS['ft/s'].from_si(found):.1f} ft/s", criterion=criterion, source=limit["source"],
        message="" if met else "Too slow for the method.", effect="none" if met else "not estimated",
    )


CHECK = Check(id="directional-velocity", title="Velocity for a directional probe", scope="run", decide=decide)
