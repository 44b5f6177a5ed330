"""The record of a quality check, and what it sees."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

from traverse import tables
from traverse.methods import Method
from traverse.model import Job, Quality
from traverse.result import CheckOutcome, DesignComparison, RunResult


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class View:
    """What a check sees: the job, its method, and one run (the first of all runs for a check over the job)."""

    job: Job
    method: Method
    result: RunResult
    design: DesignComparison | None

    @property
    def quality(self) -> Quality:
        """What was written down beside the readings of the run; nothing where the job has no [quality]."""
        return self.job.quality.get(self.result.run.name, Quality())


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """What a check says. ``effect`` is the likely effect on the flow with its sign."""

    status: Literal["pass", "fail", "not evaluated", "not applicable"]
    observed: str
    message: str
    criterion: str
    source: str
    effect: str = "not estimated"


@dataclass(frozen=True, slots=True, kw_only=True)
class Check:
    """A quality check: a name, what it is called in a report, and the function that decides."""

    id: str
    title: str
    scope: Literal["run", "job"]
    decide: Callable[[View], Verdict]

    def outcome(self, view: View) -> CheckOutcome:
        """Decide, and record whether the job's method demands this check."""
        verdict = self.decide(view)
        return CheckOutcome(
            id=self.id, title=self.title, status=verdict.status, observed=verdict.observed, criterion=verdict.criterion,
            source=verdict.source, message=verdict.message, demanded=self.id in view.method.checks, effect=verdict.effect,
        )


def limits(name: str) -> dict[str, str]:
    """Return the limits of one check as printed."""
    return dict(tables.load("check_limits")[name])


def labels(result: RunResult, indices: object) -> str:
    """Return the labels of points, such as 'A1, B6'."""
    readings = result.run.readings
    return ", ".join(f"{readings.line[int(i)]}{readings.point[int(i)]}" for i in indices)  # type: ignore[attr-defined]
