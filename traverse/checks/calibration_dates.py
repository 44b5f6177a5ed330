"""Whether the calibrations held on the day of the measurement."""

from traverse.checks._base import Check, Verdict, View
from traverse.tables import load


def decide(view: View) -> Verdict:
    """Fail when a calibration is older than it may be, or later than the measurement."""
    family = "epa" if view.method.id.startswith("epa") else "other"
    limit = load("check_limits")["calibration-dates"][family]
    dates, day = view.quality.calibrated, view.job.date
    criterion = "not older than " + ", ".join(f"{name} {limit[name]} d" for name in ("pitot", "gauge", "thermometer", "barometer"))
    if not dates or day is None:
        why = "No dates of calibration are stated: [quality] pitot_calibrated, gauge_calibrated." if not dates else "The job has no date."
        return Verdict(
            status="not evaluated" if dates else "not applicable", observed="", criterion=criterion, source=limit["source"], message=why
        )
    ages = {name: (day - date).days for name, date in dates.items()}
    wrong = [name for name, age in ages.items() if not 0 <= age <= int(limit[name])]
    observed = ", ".join(f"{name} {age} d" for name, age in ages.items())
    return Verdict(
        status="fail" if wrong else "pass", criterion=criterion, observed=observed,
        source=limit["source"], message=f"Calibrate again: {', '.join(wrong)}." if wrong else "",
        effect="not estimated" if wrong else "none",
    )


CHECK = Check(id="calibration-dates", title="Dates of calibration", scope="run", decide=decide)
