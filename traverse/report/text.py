"""What the terminal shows: the result in a minute, the findings; the plan has a page of its own (plan_text)."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

from traverse import methods
from traverse.model import Finding
from traverse.quantities import BY_NAME
from traverse.report.numbers import OTHER, plain, with_uncertainty
from traverse.result import Reduction

FRONT = ("mean_velocity", "actual_flow", "standard_flow", "dry_standard_flow", "mass_flow")
STATE = (
    "area", "temperature", "absolute_pressure", "moisture", "molar_mass", "density", "mean_root_differential_pressure",
    "reynolds_number",
)


def table(rows: Sequence[Sequence[str]], *, right: Iterable[int] = ()) -> str:
    """Return rows as aligned columns, the first row being the heads."""
    widths = [max(len(row[i]) for row in rows) for i in range(len(rows[0]))]
    aligned = set(right)
    lines = []
    for row in rows:
        cells = [cell.rjust(w) if i in aligned else cell.ljust(w) for i, (cell, w) in enumerate(zip(row, widths, strict=True))]
        lines.append("  ".join(cells).rstrip())
    return "\n".join(lines)


def reduction(result: Reduction) -> str:
    """Return the summary of a reduction."""
    job, system = result.job, result.job.units
    method = methods.get(job.method)
    parts = [job.title, f"{method.title}; {len(result.runs)} run{'s' if len(result.runs) > 1 else ''}, "
             f"{job.layout.size} points, {job.layout.title}"]
    if job.reference is not None:
        parts.append(f"Standard conditions: {job.reference.source}")
    parts.append("")
    heads = ["", *(f"run {item.run.name}" for item in result.runs)]
    heads += ["mean"] if len(result.runs) > 1 else []
    rows = [[*heads, "other units"]]
    for name in (*FRONT, *STATE):
        row = [BY_NAME[name].label]
        for item in result.runs:
            measured = item.quantities[name]
            row.append("not given" if measured is None else with_uncertainty(name, measured, system) if len(result.runs) == 1
                       else plain(name, measured.value, system))
        spread = result.summary[name]
        if len(result.runs) > 1:
            row.append("not given" if spread is None else with_uncertainty(name, spread.measured, system))
        row.append("" if spread is None else plain(name, spread.measured.value, OTHER[system]))
        rows.append(row)
    parts.append(table(rows, right=range(1, len(rows[0]))))
    parts.extend(_below(result))
    return "\n".join(parts)


def _below(result: Reduction) -> list[str]:
    """The lines under the table: what the uncertainty is, what is missing, design, method, checks."""
    lines = [""]
    flow = result.summary["actual_flow"]
    if result.job.uncertainties and flow:
        factor = flow.measured.coverage_factor or 0.0
        lines.append(
            f"\u00b1 is the expanded uncertainty at {100 * result.job.uncertainties.coverage:g} % (k = {factor:.3g}). "
            f"Layout term: {result.layout_term}."
        )
    else:
        lines.append("No uncertainty: the job has no [uncertainty] table.")
    lines += [f"{BY_NAME[name].label}: {reason}." for name, reason in result.summary_notes.items()
              if name in FRONT and name in result.summary_notes]
    if result.design:
        lines.append(f"Design: {plain('actual_flow', result.design.design, result.job.units)}; measured "
                     f"{result.design.percent_of_design:.1f} % of design.")
    exact = difference_from_exact(result)
    if exact:
        lines.append(exact)
    counts = dict.fromkeys(("pass", "fail", "not evaluated", "not applicable"), 0)
    for _, check in result.all_checks():
        counts[check.status] += 1
    lines.append("Checks: " + ", ".join(f"{count} {status}" for status, count in counts.items()) + ".")
    lines += [f"  FAIL  {run}: {check.title}: {check.observed} (criterion: {check.criterion})" for run, check in result.failed()]
    return lines


def difference_from_exact(result: Reduction) -> str:
    """Return how far the named method and the exact physics differ in flow; empty for the exact method itself."""
    if result.job.method == "exact":
        return ""
    pairs = []
    for name, label in (("actual_flow", "actual flow"), ("dry_standard_flow", "dry standard flow")):
        own = [item.value(name) for item in result.runs]
        exact = [item.exact.get(name) for item in result.runs]
        total = math.fsum(value for value in exact if value is not None)
        if None not in exact and total:
            pairs.append(f"{label} {100 * (math.fsum(own) / total - 1):+.2f} %")
    if not pairs:
        return ""
    return f"{result.job.method} against exact physics on the same readings: {', '.join(pairs)}."


def findings(items: Sequence[Finding], *, everything: bool) -> str:
    """Return the findings as lines; only those that need attention unless everything is wanted."""
    lines = []
    for item in items:
        if not everything and item.level != "attention":
            continue
        where = f" [{item.where}]" if item.where else ""
        setting = f" (decided otherwise by {item.setting})" if item.setting else ""
        lines.append(f"{item.level}: {item.topic}{where}: {item.message}{setting if everything else ''}")
    return "\n".join(lines)
