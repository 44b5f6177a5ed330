"""The mean of several runs: what they share does not shrink, what is independent does."""

from __future__ import annotations

import math
from collections.abc import Sequence

from traverse.result import RunResult
from traverse.uncertainty.directions import signed_shared
from traverse.uncertainty.propagation import Combined, combine


def of_mean(results: Sequence[RunResult], name: str, coverage: float) -> Combined | None:
    """Return the uncertainty of the arithmetic mean of a quantity over the runs; None without a budget.

    A shared component deviates in all runs at once, so its signed contributions are averaged; a component independent
    from point to point adds in quadrature and falls with the root of the number of runs. The scatter between runs is
    not part of it: it is the process, and is reported beside it as a standard deviation.
    """
    if not any(result.budget.get(name) for result in results):
        return None
    runs = len(results)
    shared: dict[tuple[str, str], list[tuple[float, float]]] = {}
    parts: list[tuple[float, float]] = []
    for result in results:
        signed = signed_shared(result, name)
        for row in result.budget.get(name, ()):
            key = (row.input, row.kind)
            if row.shared:
                shared.setdefault(key, []).append((signed[key] / runs, row.degrees_of_freedom))
            else:
                parts.append((row.contribution / runs, row.degrees_of_freedom))
    parts += [(abs(math.fsum(u for u, _ in values)), min(nu for _, nu in values)) for values in shared.values()]
    return combine(parts, coverage)
