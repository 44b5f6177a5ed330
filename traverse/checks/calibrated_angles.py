"""Whether the pitch calibration of a three-dimensional probe reaches far enough beyond the angles that were met."""

import numpy as np

from traverse.checks._base import Check, Verdict, View, labels, limits


def decide(view: View) -> Verdict:
    """Fail when the calibrated angles are too far apart, not symmetric, or end too near to the largest in the field."""
    limit = limits("calibrated-angles")
    step, least, beyond = (float(limit[name]) for name in ("step", "least", "beyond"))
    criterion = f"every {step:g} deg, symmetric, to {least:g} deg and {beyond:g} deg beyond the largest pitch"
    curves = view.result.run.pitot.directional
    if curves is None:
        message = "No pitch acts on the result."
        return Verdict(status="not applicable", observed="", message=message, criterion=criterion, source=limit["source"])
    angles = np.degrees(curves.pitch)
    reach = float(min(-angles[0], angles[-1]))
    counted = view.result.treated.counted
    pitch = np.where(counted, np.abs(np.degrees(view.result.probe["pitch"])), 0.0)
    worst = int(np.argmax(pitch))
    wrong = []
    if np.max(np.diff(angles)) > step + 1e-6:
        wrong.append(f"steps of up to {np.max(np.diff(angles)):.3g} deg")
    if abs(angles[0] + angles[-1]) > 1e-6:
        wrong.append("not symmetric")
    if reach < least - 1e-6:
        wrong.append(f"only to {reach:g} deg")
    if reach < pitch[worst] + beyond - 1e-6:
        wrong.append(f"only {reach - pitch[worst]:.1f} deg beyond the largest pitch")
    observed = f"{angles[0]:g} to {angles[-1]:g} deg; largest pitch {pitch[worst]:.1f} deg at {labels(view.result, [worst])}"
    return Verdict(
        status="fail" if wrong else "pass", observed=observed, criterion=criterion, source=limit["source"],
        message=f"The calibration is too coarse or too short: {', '.join(wrong)}." if wrong else "",
        effect="not estimated" if wrong else "none",
    )


CHECK = Check(id="calibrated-angles", title="Calibrated pitch angles", scope="run", decide=decide)
