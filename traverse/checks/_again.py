"""Readings taken a second time, against the first ones."""

import math
from collections.abc import Mapping

from traverse.checks._base import Verdict, View, limits
from traverse.units import Stated


def decide(view: View, name: str, again: Mapping[str, Stated], key: str, cure: str) -> Verdict:
    """Fail when a second reading is further from the first than the share allows."""
    limit = limits(name)
    share = float(limit["share"])
    criterion = f"within {100 * share:g} % of the first reading"
    if not again:
        return Verdict(
            status="not applicable", observed="", criterion=criterion, source=limit["source"], message=f"None is stated: [quality] {key}."
        )
    labels = view.job.layout.labels()
    parts = []
    for label, stated in again.items():
        first = float(view.result.run.readings.differential_pressure[labels.index(label)])
        parts.append((label, stated.value / first - 1.0 if math.isfinite(first) and first != 0.0 else math.inf))
    worst = max(parts, key=lambda part: abs(part[1]))
    met = abs(worst[1]) <= share * (1 + 1e-12)
    off = f"{100 * worst[1]:+.1f} %" if math.isfinite(worst[1]) else "without a first reading"
    return Verdict(
        status="pass" if met else "fail", criterion=criterion, source=limit["source"], message="" if met else cure,
        observed=f"{len(parts)} again; furthest {worst[0]} {off}",
        effect="none" if met else "not estimated",
    )
