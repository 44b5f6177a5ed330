"""The records of a result, and their JSON form (format 'traverse reduction', version 1): SI values only."""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from traverse.model import NULL, Array, Finding, Job, Run
from traverse.quantities import BY_NAME, NAMES
from traverse.treatment import Treated

# Quantities whose budgets are reported line by line.
BUDGETS = ("mean_velocity", "actual_flow", "standard_flow", "dry_standard_flow", "mass_flow")


@dataclass(frozen=True, slots=True, kw_only=True)
class Measured:
    """A value with its unit and, where the job states uncertainties, its uncertainty.

    ``standard_uncertainty`` and ``expanded_uncertainty`` are in the unit of the value; ``degrees_of_freedom`` is None
    for infinitely many.
    """

    value: float
    unit: str
    standard_uncertainty: float | None = None
    expanded_uncertainty: float | None = None
    coverage_factor: float | None = None
    degrees_of_freedom: float | None = None

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return {
            "value": self.value, "unit": self.unit, "standard_uncertainty": self.standard_uncertainty,
            "expanded_uncertainty": self.expanded_uncertainty, "coverage_factor": self.coverage_factor,
            "degrees_of_freedom": self.degrees_of_freedom,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class BudgetRow:
    """One line of an uncertainty budget.

    ``contribution`` is the standard uncertainty of the result due to this input alone, in the result's unit;
    ``sensitivity`` is contribution over standard uncertainty, with its sign for a shared input; ``share`` is the part
    of the variance.
    """

    input: str
    kind: str
    shared: bool
    standard_uncertainty: float
    unit: str
    sensitivity: float
    contribution: float
    share: float
    degrees_of_freedom: float
    stated: str

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return {
            "input": self.input if self.kind == "plain" else f"{self.input} {self.kind}",
            "shared": self.shared, "standard_uncertainty": self.standard_uncertainty, "unit": self.unit,
            "sensitivity": self.sensitivity, "contribution": self.contribution, "share": self.share,
            "degrees_of_freedom": finite(self.degrees_of_freedom), "stated": self.stated,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class CheckOutcome:
    """What a check found. ``status`` is never 'pass' unless the criterion was evaluated and met."""

    id: str
    title: str
    status: Literal["pass", "fail", "not evaluated", "not applicable"]
    observed: str
    criterion: str
    source: str
    message: str
    demanded: bool
    effect: str = "not estimated"

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return {
            "id": self.id, "title": self.title, "status": self.status, "observed": self.observed,
            "criterion": self.criterion, "source": self.source, "message": self.message,
            "demanded_by_method": self.demanded, "effect": self.effect,
        }


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class RunResult:
    """One run's result. Point arrays have shape (points,), in SI.

    ``probe`` holds what the calibration of the probe gave at every point: coefficient, pitch [rad] and the velocity along its
    direction (``speed``); empty where one coefficient serves all.
    """

    run: Run
    quantities: Mapping[str, Measured | None]
    notes: Mapping[str, str]
    treated: Treated
    velocity: Array
    density: Array
    budget: Mapping[str, tuple[BudgetRow, ...]]
    checks: tuple[CheckOutcome, ...]
    treatments: Mapping[str, Mapping[str, float]]
    missing: Mapping[str, Mapping[str, float]]
    exact: Mapping[str, float]
    findings: tuple[Finding, ...] = ()
    gas: Mapping[str, float] = field(default_factory=dict)
    probe: Mapping[str, Array] = field(default_factory=dict)

    def value(self, name: str) -> float:
        """Return a quantity's value; NaN where the job cannot give it."""
        measured = self.quantities[name]
        return measured.value if measured is not None else math.nan


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Spread:
    """A quantity over the runs: mean with its uncertainty, standard deviation (None for one run), extremes."""

    measured: Measured
    standard_deviation: float | None
    minimum: float
    maximum: float

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return self.measured.to_dict() | {
            "standard_deviation": self.standard_deviation, "minimum": self.minimum, "maximum": self.maximum,
            "range": self.maximum - self.minimum,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class DesignComparison:
    """Measured against design flow, for balancing work."""

    design: float
    measured: float
    percent_of_design: float
    tolerance: float | None
    within: bool | None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Reduction:
    """The result of a job: what traverse.reduce returns."""

    job: Job
    runs: tuple[RunResult, ...]
    summary: Mapping[str, Spread | None]
    summary_notes: Mapping[str, str]
    checks: tuple[CheckOutcome, ...]
    design: DesignComparison | None
    findings: tuple[Finding, ...]
    layout_term: str
    program: str

    def all_checks(self) -> tuple[tuple[str, CheckOutcome], ...]:
        """Return every check with the run it belongs to ('all runs' for those over the job)."""
        own = tuple((result.run.name, check) for result in self.runs for check in result.checks)
        return own + tuple(("all runs", check) for check in self.checks)

    def failed(self) -> tuple[tuple[str, CheckOutcome], ...]:
        """Return the failed checks with their runs."""
        return tuple(pair for pair in self.all_checks() if pair[1].status == "fail")

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form: SI values, null with a reason in ``notes`` where the job cannot give a quantity."""
        job = self.job
        coverage = job.uncertainties.coverage if job.uncertainties else None
        return {
            "format": "traverse reduction", "version": 1, "program": self.program,
            "job": {
                "title": job.title, "date": job.date.isoformat() if job.date else None, "method": job.method,
                "units": job.units, "source": job.source.name, "sha256": job.source.sha256,
                "files": [{"name": source.name, "sha256": source.sha256} for source in job.sources],
            },
            "runs": [self._run(result) for result in self.runs],
            "summary": {
                "runs": len(self.runs),
                "quantities": {name: spread.to_dict() if spread else None for name, spread in self.summary.items()},
                "notes": dict(self.summary_notes),
                "checks": [check.to_dict() for check in self.checks],
            },
            "uncertainty": {"coverage": coverage, "layout_term": self.layout_term},
            "design": _design(self.design),
            "findings": [
                {"level": f.level, "topic": f.topic, "message": f.message, "where": f.where, "setting": f.setting}
                for f in self.findings
            ],
        }

    def _run(self, result: RunResult) -> dict[str, Any]:
        return {
            "run": result.run.name,
            "quantities": {name: m.to_dict() if m else None for name, m in result.quantities.items()},
            "notes": dict(result.notes),
            "budget": {name: [row.to_dict() for row in result.budget[name]] for name in BUDGETS if result.budget.get(name)},
            "points": _points(self.job, result),
            "checks": [check.to_dict() for check in result.checks],
            "negative_treatments": {rule: dict(values) for rule, values in result.treatments.items()},
            "missing_treatments": {rule: dict(values) for rule, values in result.missing.items()},
            "exact_physics": dict(result.exact),
            "findings": [{"level": f.level, "topic": f.topic, "message": f.message} for f in result.findings],
            **({"gas": dict(result.gas)} if result.gas else {}),
        }

    def to_json(self, indent: int | None = 2) -> str:
        """Return the JSON text, the same for the same inputs."""
        return json.dumps(self.to_dict(), indent=indent, ensure_ascii=False, allow_nan=False)


def finite(value: float) -> float | None:
    """Return the value, or None where it is infinite or not a number."""
    return float(value) if math.isfinite(value) else None


def _points(job: Job, result: RunResult) -> list[dict[str, Any]]:
    layout, readings, treated = job.layout, result.run.readings, result.treated
    rows = []
    for i in range(layout.size):
        counted = bool(treated.counted[i])
        pressure = None if readings.status[i] in NULL else finite(float(readings.differential_pressure[i]))
        rows.append({
            "line": readings.line[i], "point": readings.point[i], "depth": float(layout.depth[i]),
            "x": float(layout.x[i]), "y": float(layout.y[i]), "weight": float(treated.weight[i]),
            "layout_weight": float(layout.weight[i]), "differential_pressure": pressure,
            "temperature": float(readings.temperature[i]),
            "static_pressure": float(readings.static[i]),
            "density": finite(float(result.density[i])) if counted else None,
            "velocity": finite(float(result.velocity[i])) if counted else None,
            "status": readings.status[i], "text": readings.text[i], "rule": treated.rule[i],
            **({name: finite(float(result.probe[name][i])) for name in ("coefficient", "pitch")} if result.probe and counted else {}),
        })
    return rows


def _design(design: DesignComparison | None) -> dict[str, Any] | None:
    if design is None:
        return None
    return {
        "actual_flow": design.design, "measured": design.measured, "unit": BY_NAME["actual_flow"].unit,
        "percent_of_design": design.percent_of_design, "tolerance_percent": design.tolerance, "within": design.within,
    }


def ordered(quantities: Mapping[str, Any]) -> dict[str, Any]:
    """Return the quantities in the order of the nomenclature."""
    return {name: quantities[name] for name in NAMES if name in quantities}
