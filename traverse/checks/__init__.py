"""Quality checks, one file each, found by scanning this folder. A failed check never withholds a result."""

from __future__ import annotations

import pkgutil
from functools import lru_cache
from importlib import import_module

from traverse.checks._base import Check, Verdict, View
from traverse.methods import Method
from traverse.model import Job
from traverse.result import CheckOutcome, DesignComparison, RunResult

__all__ = ["Check", "Verdict", "View", "checks", "over_job", "over_run"]


@lru_cache(maxsize=1)
def checks() -> dict[str, Check]:
    """Return all checks by id."""
    modules = (import_module(f"{__name__}.{entry.name}") for entry in pkgutil.iter_modules(__path__) if entry.name[0] != "_")
    found: list[Check] = [module.CHECK for module in modules]
    return {check.id: check for check in sorted(found, key=lambda check: check.id)}


def over_run(job: Job, method: Method, result: RunResult) -> tuple[CheckOutcome, ...]:
    """Return the outcomes of the checks that look at one run."""
    view = View(job=job, method=method, result=result, design=None)
    return tuple(check.outcome(view) for check in checks().values() if check.scope == "run")


def over_job(
    job: Job, method: Method, results: tuple[RunResult, ...], design: DesignComparison | None
) -> tuple[CheckOutcome, ...]:
    """Return the outcomes of the checks that look at the job as a whole."""
    view = View(job=job, method=method, result=results[0], design=design)
    return tuple(check.outcome(view) for check in checks().values() if check.scope == "job")
