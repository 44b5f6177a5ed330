"""Whether an S-type tube's calibration is good enough to be used."""

from traverse.checks._base import Check, Verdict, View, limits


def decide(view: View) -> Verdict:
    """Fail when the pairs of a side scatter, or the two sides differ, by more than is allowed."""
    limit = limits("pitot-calibration")
    within, apart = float(limit["deviation"]), float(limit["sides"])
    pitot = view.result.run.pitot
    sides = pitot.calibration.sides if pitot.calibration else {}
    criterion = f"mean deviation of a side at most {within:g}, sides within {apart:g}"
    if not pitot.legs:
        message = "The coefficient is not stated by the sides of an S-type tube."
        return Verdict(status="not applicable", observed="", message=message, criterion=criterion, source=limit["source"])
    observed = [f"{side} {value:.4f}" for side, value in pitot.legs.items()]
    observed += [f"mean deviation {side} {pairs.deviation:.4f}" for side, pairs in sides.items()]
    wrong = [f"side {side} scatters" for side, pairs in sides.items() if pairs.deviation > within * (1 + 1e-9)]
    difference = abs(pitot.legs["A"] - pitot.legs["B"]) if len(pitot.legs) == 2 else 0.0
    if len(pitot.legs) == 2:
        observed.append(f"A from B {difference:.4f}")
    if difference > apart * (1 + 1e-9):
        wrong.append("the sides differ")
    if wrong:
        return Verdict(
            status="fail", observed=", ".join(observed), criterion=criterion, source=limit["source"],
            message=f"{' and '.join(wrong).capitalize()}: the calibration may not be used.",
            effect=f"up to about {100 * max(difference, *(pairs.deviation for pairs in sides.values()), 0.0) / pitot.coefficient:.2g} %",
        )
    unknown = "" if sides else "The scatter of the calibration is not stated."
    return Verdict(
        status="pass" if sides or len(pitot.legs) == 2 else "not evaluated", observed=", ".join(observed), criterion=criterion,
        source=limit["source"], message=unknown, effect="none",
    )


CHECK = Check(id="pitot-calibration", title="Calibration of the S-type tube", scope="run", decide=decide)
