"""What the terminal shows: the result in a minute, the plan as a table."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence

from traverse import methods
from traverse.model import Finding
from traverse.planning import Plan, method_title, site
from traverse.quantities import BY_NAME
from traverse.report import cautions
from traverse.report.numbers import OTHER, plain, significant, with_uncertainty
from traverse.result import Reduction
from traverse.units import UNITS, Stated

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


def length(value: float, system: str) -> str:
    """Return a length as a crew would read it off a rule: millimetres, or inches to three decimals."""
    return f"{UNITS['in'].from_si(value):.3f}" if system == "us" else f"{value * 1000:.1f}"


def sixteenths(value: float) -> str:
    """Return a length in inches to the nearest sixteenth, such as '5 3/16'."""
    steps = round(UNITS["in"].from_si(value) * 16)
    whole, rest = divmod(steps, 16)
    if not rest:
        return str(whole)
    bottom = 16
    while rest % 2 == 0:
        rest, bottom = rest // 2, bottom // 2
    return f"{whole} {rest}/{bottom}" if whole else f"{rest}/{bottom}"


def plan(planned: Plan) -> str:
    """Return the plan of a traverse as text."""
    setup, layout, system = planned.setup, planned.layout, planned.setup.units
    unit = "in" if system == "us" else "mm"
    section = setup.plane.section
    size = " x ".join(stated.text for stated in section.dimensions.values())
    before, after = site(setup)
    lines = [
        setup.title, f"{method_title(setup)}", "",
        f"Section      {section.shape}, {size}; area {plain('area', section.area, system)}, "
        f"hydraulic diameter {length(section.hydraulic_diameter, system)} {unit}",
        f"Layout       {layout.title}: {len(layout.lines)} line{'s' if len(layout.lines) > 1 else ''}, "
        f"{layout.size} points ({layout.source})",
        f"Site         {_diameters(before)} before, {_diameters(after)} after the plane",
        f"Port depth   {_stated(setup.plane.port_depth)}", "",
    ]
    heads = ["line", "point", "weight", f"x [{unit}]", f"y [{unit}]", f"depth [{unit}]", f"mark [{unit}]"]
    heads += ["mark, nearest 1/16 in"] if system == "us" else ["mark, nearest mm"]
    rows = [heads]
    for i in range(layout.size):
        rounded = sixteenths(planned.rounded[i]) if system == "us" else f"{planned.rounded[i] * 1000:.0f}"
        rows.append([
            layout.line[i], str(layout.point[i]) + ("*" if layout.moved[i] else ""), f"{layout.weight[i]:.5f}",
            *(length(float(v[i]), system) for v in (layout.x, layout.y, layout.depth, planned.mark)), rounded,
        ])
    lines.append(table(rows, right=range(2, 8)))
    if any(layout.moved):
        lines.append("* moved to the least distance from the wall")
    lines += ["", "x to the right, y up from the centre, looking downstream; depth from the inner wall; mark = depth + port depth."]
    if planned.mean_velocity is not None:
        expected = "" if planned.expected is None else f", about {_pressure(planned.expected, system)} on the gauge"
        lines.append(f"At design flow the mean velocity is {plain('mean_velocity', planned.mean_velocity, system)}{expected}.")
    notes = findings(planned.findings, everything=False)
    lines += ["", notes] if notes else []
    lines += ["", "Cautions", *(f"- {text}" for text in cautions.TEXTS), cautions.DEFER]
    return "\n".join(lines)


def _pressure(value: float, system: str) -> str:
    unit = "inH2O" if system == "us" else "Pa"
    return f"{significant(UNITS[unit].from_si(value), 3)} {unit}"


def _diameters(value: float | None) -> str:
    return "not stated" if value is None else f"{value:.2f} diameters"


def _stated(value: Stated | None) -> str:
    return "not stated" if value is None else value.text
