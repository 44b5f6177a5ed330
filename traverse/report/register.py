"""The register of several reductions: one row a job, and the jobs that could not be done."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from traverse.errors import TraverseError
from traverse.quantities import BY_NAME
from traverse.report.numbers import decimals_for, shown, unit_text
from traverse.report.sheets._view import decimals, heads
from traverse.report.spec import SheetSpec, Text
from traverse.result import Reduction

NAMES = ("actual_flow", "standard_flow", "dry_standard_flow", "mean_velocity")


def sheets(results: Sequence[tuple[Path, Reduction]], problems: Sequence[tuple[Path, TraverseError]]) -> list[SheetSpec]:
    """Return the one page of the register."""
    sheet = SheetSpec("Register", orientation="landscape", repeat_rows=(3, 3))
    sheet.put(1, 1, Text("Register of reductions"), style="title")
    labels = ["job", "title", "date", "method", "runs"]
    for name in NAMES:
        labels += [BY_NAME[name].label, "unit"]
    labels += ["\u00b1 U of actual flow, %", "% of design", "failed checks", "SHA-256 of the job file"]
    heads(sheet, 3, tuple(labels))
    for row, (path, result) in enumerate(results, start=4):
        _row(sheet, row, path, result)
    row = 5 + len(results)
    for path, problem in problems:
        sheet.put(row, 1, Text(path.name), style="fail")
        sheet.put(row, 2, Text(f"not done: {problem}"), style="text")
        row += 1
    for column, width in enumerate((22, 34, 12, 12, 6, *(14, 9) * len(NAMES), 12, 12, 30, 40), start=1):
        sheet.width(column, width)
    return [sheet]


def _row(sheet: SheetSpec, row: int, path: Path, result: Reduction) -> None:
    job = result.job
    texts = (path.name, job.title, job.date.isoformat() if job.date else "", job.method)
    for column, text in enumerate(texts, start=1):
        sheet.put(row, column, Text(text), style="text")
    sheet.put(row, 5, len(result.runs), style="value", format="0")
    column = 6
    for name in NAMES:
        spread = result.summary[name]
        if spread is None:
            sheet.put(row, column, Text("not given"), style="faint")
        else:
            value = spread.measured.value
            sheet.put(row, column, shown(name, value, job.units), style="value",
                      format=decimals(decimals_for(name, value, job.units)))
            sheet.put(row, column + 1, Text(unit_text(name, job.units)), style="unit")
        column += 2
    flow = result.summary["actual_flow"]
    if flow is not None and flow.measured.expanded_uncertainty is not None and flow.measured.value:
        sheet.put(row, column, 100 * flow.measured.expanded_uncertainty / abs(flow.measured.value), style="value", format="0.0")
    if result.design is not None:
        sheet.put(row, column + 1, result.design.percent_of_design, style="value", format="0.0")
    failed = "; ".join(dict.fromkeys(check.title for _, check in result.failed()))
    sheet.put(row, column + 2, Text(failed or "none"), style="fail" if failed else "pass")
    sheet.put(row, column + 3, Text(job.source.sha256), style="source")
