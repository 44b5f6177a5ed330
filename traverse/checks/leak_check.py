"""The leak check of the probe and its lines."""

from traverse.checks._base import Check, Verdict, View, limits

CRITERION = "no leak: a pressure held on either side, before (advised) and after the run (needed)"


def decide(view: View) -> Verdict:
    """Fail when one failed; not evaluated where the one after the run is not stated."""
    limit, quality = limits("leak-check"), view.quality
    said = [f"{when}: {word}" for when, word in (("before", quality.leak_before), ("after", quality.leak_after)) if word]
    observed = ", ".join(said)
    if "failed" in (quality.leak_before, quality.leak_after):
        return Verdict(
            status="fail", observed=observed, criterion=CRITERION, source=limit["source"],
            message="A run with a failed leak check after it is void under the stack methods; repeat it.",
        )
    if quality.leak_after == "passed":
        return Verdict(status="pass", observed=observed, message="", criterion=CRITERION, source=limit["source"], effect="none")
    demanded = "leak-check" in view.method.checks or bool(said)
    return Verdict(
        status="not evaluated" if demanded else "not applicable", observed=observed, criterion=CRITERION, source=limit["source"],
        message="No leak check after the run is stated: [quality] leak_after.",
    )


CHECK = Check(id="leak-check", title="Leak check", scope="run", decide=decide)
