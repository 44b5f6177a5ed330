"""reduce(Job) -> Reduction: the chain, its uncertainty, the other treatments, the exact physics beside it, the checks."""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import replace

import numpy as np

from traverse import checks, methods
from traverse._version import __version__
from traverse.chain import Flow, evaluate
from traverse.errors import LayoutError, ReadingError
from traverse.methods import Method
from traverse.model import UNREAD, Array, Finding, Job, Reference, Run
from traverse.quantities import BY_NAME, NAMES
from traverse.result import DesignComparison, Measured, Reduction, RunResult, Spread
from traverse.treatment import (
    MISSING_RULES,
    Treated,
    air_findings,
    compressibility_factor,
    correction_findings,
    derived_gas,
    inputs,
    matter_findings,
    probe_findings,
    refuse_impossible,
    refuse_outside,
    setting,
    treat,
)
from traverse.uncertainty import directions, propagation
from traverse.uncertainty.runs import of_mean
from traverse.units import parse

# Quantities of the other treatments and of the exact physics that stand beside the result.
BESIDE = ("mean_velocity", "actual_flow", "standard_flow", "dry_standard_flow", "mass_flow")


def reduce(job: Job) -> Reduction:
    """Reduce a job's readings to flows with their uncertainty.

    Parameters
    ----------
    job : Job
        From :func:`traverse.load`, or built by hand.

    Returns
    -------
    Reduction
        Per run and over the runs; quantities the job cannot give are None, with the reason in ``notes``.

    Raises
    ------
    ReadingError
        For an unread point where the job does not say what to do about it.
    DomainError
        For inputs that describe something physically impossible.
    """
    method = methods.get(job.method)
    job, own = with_reference(job, method)
    runs = tuple(_run(job, run, method) for run in job.runs)
    summary, notes = _summary(job, runs)
    design = _design(job, summary)
    term, layout_findings = _layout_term(job)
    findings = job.findings + job.layout.findings + own + layout_findings
    findings += tuple(finding for result in runs for finding in result.findings)
    return Reduction(
        job=job, runs=runs, summary=summary, summary_notes=notes, design=design,
        checks=checks.over_job(job, method, runs, design), findings=tuple(dict.fromkeys(findings)), layout_term=term,
        program=f"traverse {__version__}",
    )


def with_reference(job: Job, method: Method) -> tuple[Job, tuple[Finding, ...]]:
    """Return the job with the standard conditions that hold for it: its own, else the method's."""
    stated = method.standard_air.get(job.units) or " and ".join(method.reference.get(job.units, ()))
    if job.reference is not None:
        if not stated:
            return job, ()
        return job, (Finding(
            level="note", topic="standard conditions", setting="[reference]",
            message=f"{job.reference.source} stands in place of the method's own standard conditions ({stated}).",
        ),)
    source = f"{method.id}: {stated}"
    if method.standard_air:
        return replace(job, reference=Reference(density=parse(stated, "density"), source=source)), ()
    if method.reference:
        temperature, pressure = method.reference[job.units]
        return replace(job, reference=Reference(
            temperature=parse(temperature, "temperature"), pressure=parse(pressure, "pressure"), source=source
        )), ()
    return job, ()


def _run(job: Job, run: Run, method: Method) -> RunResult:
    treated = treat(run.readings, job.layout, job.plane.section, job.policies)
    signed = job.policies.negative == "signed"
    arrays, equations = inputs(job, run, method, treated), setting(job, run, method, signed=signed)
    flow = evaluate(arrays, equations)
    refuse_outside(run, treated.counted, arrays, flow.points)
    refuse_impossible(flow.quantities, run)
    # What the probe's calibration gave at every point is what a percentage of the coefficient is a percentage of.
    arrays |= {name: flow.points[name] for name in ("coefficient",) if name in flow.points}
    rows = directions.rows(job, run, arrays, treated.counted)
    moved = propagation.deviations(rows, arrays, equations)
    quantities, notes = _quantities(job, method, flow, moved, rows)
    treatments, findings = _negative(job, run, method)
    missing, missing_findings = _missing(job, run, method)
    findings += missing_findings + _integration(run, treated) + matter_findings(run, arrays, equations)
    findings += air_findings(run, arrays, equations) + probe_findings(run, treated.counted, flow.points)
    findings += correction_findings(job.corrections, run, job.layout, job.plane.section, arrays, flow, treated.counted)
    result = RunResult(
        run=run, quantities=quantities, notes=notes, treated=treated, velocity=_point(flow.points["velocity"], job),
        density=_point(flow.points["density"], job),
        budget={name: propagation.budget(rows, moved, name) for name in flow.quantities} if rows else {},
        checks=(), treatments=treatments, missing=missing, exact=_exact(job, run, method, treated, signed), findings=findings,
        gas=derived_gas(run, arrays, equations) | compressibility_factor(arrays, equations),
        probe={name: _point(flow.points[name], job) for name in ("coefficient", "pitch", "speed") if name in flow.points},
    )
    return replace(result, checks=checks.over_run(job, method, result))


def _point(values: Array, job: Job) -> Array:
    return np.broadcast_to(values, (job.layout.size,))


def _quantities(
    job: Job, method: Method, flow: Flow, moved: Sequence[Mapping[str, Array]], rows: Sequence[directions.Row]
) -> tuple[dict[str, Measured | None], dict[str, str]]:
    """Dress every quantity with its unit and uncertainty, or say why the job cannot give it."""
    quantities: dict[str, Measured | None] = {}
    notes: dict[str, str] = {}
    for name in NAMES:
        value = float(flow.quantities[name]) if name in flow.quantities else math.nan
        reason = _reason(name, value, job, method)
        if reason:
            quantities[name], notes[name] = None, reason
            continue
        quantities[name] = _measured(name, value, job, moved, rows)
    return quantities, notes


def _measured(
    name: str, value: float, job: Job, moved: Sequence[Mapping[str, Array]], rows: Sequence[directions.Row]
) -> Measured:
    unit = BY_NAME[name].unit
    if job.uncertainties is None or name == "wall_factor":
        return Measured(value=value, unit=unit)
    budget = propagation.budget(rows, moved, name)
    combined = propagation.combine(
        [(row.contribution, row.degrees_of_freedom) for row in budget], job.uncertainties.coverage
    )
    return Measured(
        value=value, unit=unit, standard_uncertainty=combined.standard, expanded_uncertainty=combined.expanded,
        coverage_factor=combined.factor,
        degrees_of_freedom=combined.degrees_of_freedom if math.isfinite(combined.degrees_of_freedom) else None,
    )


def _reason(name: str, value: float, job: Job, method: Method) -> str:
    """Return why a quantity is not given; empty when it is."""
    if name == "wall_factor":
        return "" if job.corrections.wall_factor is not None else "no wall-effect factor was applied"
    if math.isfinite(value):
        return ""
    if name in {"standard_flow", "dry_standard_flow"} and job.reference is None:
        return f"{method.id} has no standard conditions of its own; state [reference]"
    if name in {"moisture", "molar_mass_dry", "dry_standard_flow"}:
        return "the moisture of the given gas is not stated; state [gas] moisture"
    return "the inputs do not determine it"


def _flows(job: Job, run: Run, method: Method, *, negative: str | None = None, missing: str | None = None) -> dict[str, float]:
    """Return the flows that another rule for the readings would give."""
    treated = treat(run.readings, job.layout, job.plane.section, job.policies, negative=negative, missing=missing)
    signed = (negative or job.policies.negative) == "signed"
    flow = evaluate(inputs(job, run, method, treated), setting(job, run, method, signed=signed))
    return {name: float(flow.quantities[name]) for name in BESIDE if _finite(flow, name)}


def _negative(job: Job, run: Run, method: Method) -> tuple[dict[str, dict[str, float]], tuple[Finding, ...]]:
    """Return the flows under each rule for negative readings, and the finding; empty where there are none."""
    negative = np.flatnonzero(run.readings.differential_pressure < 0)
    if not negative.size:
        return {}, ()
    found = {rule: _flows(job, run, method, negative=rule) for rule in ("zero", "signed", "omit")}
    used = "zero" if job.policies.negative == "method" else job.policies.negative
    what = f"negative reading at {_labels(run, negative)}, treated by the rule '{used}'"
    message = what + (" (velocity 0, still counted)" if used == "zero" else "") + _others(found, used)
    return found, (Finding(
        level="attention", topic="negative readings", message=f"run {run.name}: {message}", setting="[readings] negative",
    ),)


def _missing(job: Job, run: Run, method: Method) -> tuple[dict[str, dict[str, float]], tuple[Finding, ...]]:
    """Return the flows under each rule for points that were not read, and the finding; empty where all were read."""
    unread = np.flatnonzero([status in UNREAD for status in run.readings.status])
    if not unread.size:
        return {}, ()
    found: dict[str, dict[str, float]] = {}
    reasons = []
    for rule in MISSING_RULES:
        try:
            found[rule] = _flows(job, run, method, missing=rule)
        except (ReadingError, LayoutError) as problem:
            reasons.append(f"'{rule}' cannot be followed ({problem.found})")
    used = job.policies.missing
    message = "; ".join((f"no reading at {_labels(run, unread)}, treated by the rule '{used}'{_others(found, used)}", *reasons))
    return found, (Finding(
        level="attention", topic="missing readings", message=f"run {run.name}: {message}", setting="[readings] missing",
    ),)


def _labels(run: Run, index: Iterable[int]) -> str:
    return ", ".join(f"{run.readings.line[i]}{run.readings.point[i]}" for i in index)


def _others(found: Mapping[str, Mapping[str, float]], used: str) -> str:
    """Say how far the flows under the other rules lie from the one under the rule that was used."""
    base = found[used]["actual_flow"]
    others = [f"'{rule}' would give {100 * (values['actual_flow'] / base - 1):+.2f} %"
              for rule, values in found.items() if rule != used and base]
    return f"; {'; '.join(others)} in flow." if others else "."


def _integration(run: Run, treated: Treated) -> tuple[Finding, ...]:
    """Say which exponent the wall law took, where the velocities were integrated."""
    if treated.wall_exponent is None:
        return ()
    return (Finding(
        level="note", topic="integration", setting="[layout] wall_exponent",
        message=f"run {run.name}: power law to the wall with exponent {treated.wall_exponent:.2f}; the integration carries "
        f"{100 * treated.profile_factor:.2f} % of a uniform velocity.",
    ),)


def _finite(flow: Flow, name: str) -> bool:
    return name in flow.quantities and bool(np.isfinite(flow.quantities[name]))


def _exact(job: Job, run: Run, method: Method, treated: Treated, signed: bool) -> dict[str, float]:
    """Return what the exact physics gives for the same readings and the same standard conditions."""
    plain = replace(methods.get("exact"), uses_yaw=method.uses_yaw, uses_pitch=method.uses_pitch)
    flow = evaluate(inputs(job, run, plain, treated), setting(job, run, plain, signed=signed))
    return {name: float(flow.quantities[name]) for name in (*BESIDE, "molar_mass", "density") if _finite(flow, name)}


def _summary(job: Job, runs: Sequence[RunResult]) -> tuple[dict[str, Spread | None], dict[str, str]]:
    """Return the arithmetic mean over the runs with its spread, and why a quantity is missing."""
    summary: dict[str, Spread | None] = {}
    notes: dict[str, str] = {}
    for name in NAMES:
        given = [result.quantities[name] for result in runs]
        values = [measured.value for measured in given if measured is not None]
        if len(values) < len(runs):
            summary[name] = None
            notes[name] = next(result.notes[name] for result in runs if name in result.notes)
            continue
        first = given[0]
        assert first is not None, "every run gives this quantity"
        measured = first if len(runs) == 1 else _mean_measured(job, runs, name, values)
        summary[name] = Spread(
            measured=measured, standard_deviation=float(np.std(values, ddof=1)) if len(values) > 1 else None,
            minimum=min(values), maximum=max(values),
        )
    return summary, notes


def _mean_measured(job: Job, runs: Sequence[RunResult], name: str, values: Sequence[float]) -> Measured:
    mean, unit = math.fsum(values) / len(values), BY_NAME[name].unit
    if job.uncertainties is None:
        return Measured(value=mean, unit=unit)
    combined = of_mean(runs, name, job.uncertainties.coverage)
    if combined is None:
        return Measured(value=mean, unit=unit)
    return Measured(
        value=mean, unit=unit, standard_uncertainty=combined.standard, expanded_uncertainty=combined.expanded,
        coverage_factor=combined.factor,
        degrees_of_freedom=combined.degrees_of_freedom if math.isfinite(combined.degrees_of_freedom) else None,
    )


def _design(job: Job, summary: Mapping[str, Spread | None]) -> DesignComparison | None:
    flow = summary["actual_flow"]
    if job.design is None or flow is None:
        return None
    percent = 100.0 * flow.measured.value / job.design.actual_flow.value
    tolerance = 100.0 * job.design.tolerance.value if job.design.tolerance else None
    return DesignComparison(
        design=job.design.actual_flow.value, measured=flow.measured.value, percent_of_design=percent,
        tolerance=tolerance, within=None if tolerance is None else bool(abs(percent - 100.0) <= tolerance + 1e-9),
    )


def _layout_term(job: Job) -> tuple[str, tuple[Finding, ...]]:
    """Say how the integration error of the layout enters the uncertainty."""
    if job.uncertainties is None:
        return "no uncertainty was stated", ()
    if job.uncertainties.layout == "stated":
        text = next(c.text for c in job.uncertainties.components if c.input == "layout")
        return f"stated: {text} of the mean velocity", ()
    if job.uncertainties.layout == "none":
        return "none: the interval does not cover how well the points represent the section", (Finding(
            level="note", topic="uncertainty", setting="[uncertainty] layout",
            message="No layout term: the interval leaves out how well the mean of these points represents the section.",
        ),)
    return "not estimated: the interval does not cover how well the points represent the section", (Finding(
        level="attention", topic="uncertainty", setting="[uncertainty] layout",
        message="layout = \"estimate\" was asked for, but this version has no estimate from the measured profile. The "
        "interval leaves out how well these points represent the section; state a value (such as \"1.5 %\") or \"none\".",
    ),)
