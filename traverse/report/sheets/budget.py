"""The uncertainty budget, with the combination as live formulas."""

from __future__ import annotations

import math

from traverse.quantities import BY_NAME
from traverse.report.sheets._cells import WITH_BUDGET
from traverse.report.sheets._view import View, heads
from traverse.report.spec import BarChart, Live, SheetSpec, Text
from traverse.result import BudgetRow, Measured

ORDER, TITLE = 40, "Uncertainty"
CHART_ROWS = 20
HEADS = (
    "input", "kind", "acts on", "as stated", "standard uncertainty", "unit", "sensitivity", "contribution",
    "share of variance", "degrees of freedom", "contribution^4 / d.o.f.",
)
NUMBERS = frozenset(HEADS) - {"input", "kind", "acts on", "as stated", "unit"}


def sheets(view: View) -> list[SheetSpec]:
    """Return the budget page, or none where the job states no uncertainty."""
    if view.result.job.uncertainties is None:
        return []
    sheet = SheetSpec(TITLE, orientation="landscape")
    coverage = view.result.job.uncertainties.coverage
    sheet.put(1, 1, Text("Uncertainty budget"), style="title")
    sheet.put(2, 1, Text(
        "Law of propagation of uncertainty (JCGM 100:2008, clause 5). Sensitivities are central differences of the same "
        "equations as the working. A shared input holds for all points and all runs at once; a per-point one is independent."
    ), style="note")
    sheet.put(3, 1, Text("Coverage probability"), style="label")
    sheet.put(3, 2, coverage, style="input", format="0.0 %", key="coverage")
    sheet.put(4, 1, Text("Layout term"), style="label")
    sheet.put(4, 2, Text(view.result.layout_term), style="text", span=8)
    row = 6 + (CHART_ROWS if view.result.runs[0].budget.get("actual_flow") else 0)
    for index, result in view.runs:
        for name in WITH_BUDGET:
            rows, measured = result.budget.get(name, ()), result.quantities[name]
            if rows and measured is not None:
                row = _budget(sheet, row, f"u{index}.{name}", f"{BY_NAME[name].label}, run {result.run.name}", rows, measured)
    if len(view.runs) > 1:
        row = _means(sheet, row, view)
    for column, width in enumerate((34, 14, 11, 24, 13, 8, 13, 13, 11, 11, 13), start=1):
        sheet.width(column, width)
    _chart(sheet, view)
    return [sheet]


def _budget(sheet: SheetSpec, row: int, key: str, title: str, rows: tuple[BudgetRow, ...], measured: Measured) -> int:
    """Put one budget with its combination; return the next free row."""
    sheet.put(row, 1, Text(f"{title} [{measured.unit}]"), style="subtitle")
    heads(sheet, row + 1, HEADS, right=NUMBERS)
    last = len(rows) - 1
    total = math.fsum(entry.contribution**2 for entry in rows)
    for i, entry in enumerate(rows):
        place = row + 2 + i
        for column, text in ((1, _label(entry)), (2, entry.kind), (3, "shared" if entry.shared else "per point"),
                             (4, entry.stated), (6, entry.unit)):
            sheet.put(place, column, Text(text), style="text", key=f"{key}.label.{i}" if column == 1 else None)
        sheet.put(place, 5, entry.standard_uncertainty, style="value", format="0.000E+00", key=f"{key}.u.{i}")
        sheet.put(place, 7, entry.sensitivity, style="value", format="0.000E+00", key=f"{key}.c.{i}")
        sheet.put(place, 8, Live(f"=ABS(«{key}.c.{i}»)*«{key}.u.{i}»", entry.contribution), style="value", format="0.000E+00",
                  key=f"{key}.d.{i}")
        sheet.put(place, 9, Live(f"=«{key}.d.{i}»^2/SUMSQ(«{key}.d.0:{key}.d.{last}»)", entry.contribution**2 / total),
                  style="value", format="0.0 %", key=f"{key}.share.{i}")
        finite = math.isfinite(entry.degrees_of_freedom)
        sheet.put(place, 10, entry.degrees_of_freedom if finite else Text("infinite"), style="value", format="0.0",
                  key=f"{key}.nu.{i}")
        fourth = entry.contribution**4 / entry.degrees_of_freedom if finite else 0.0
        sheet.put(place, 11, Live(f"=IF(ISNUMBER(«{key}.nu.{i}»),«{key}.d.{i}»^4/«{key}.nu.{i}»,0)", fourth), style="faint",
                  format="0.0E+00", key=f"{key}.f.{i}")
    return _combination(sheet, row + 2 + len(rows), key, f"{key}.d.0:{key}.d.{last}", f"{key}.f.0:{key}.f.{last}", measured)


def _label(entry: BudgetRow) -> str:
    name = entry.input.replace("_", " ")
    return name if entry.kind == "plain" else f"{name}, {entry.kind}"


def _combination(sheet: SheetSpec, row: int, key: str, parts: str, fourths: str, measured: Measured) -> int:
    """Put u, degrees of freedom, k and U below a column of contributions; return the next free row."""
    standard, expanded = measured.standard_uncertainty or 0.0, measured.expanded_uncertainty or 0.0
    freedom: float | str = "infinite" if measured.degrees_of_freedom is None else measured.degrees_of_freedom
    lines: tuple[tuple[str, str, float | str, str, str], ...] = (
        ("combined standard uncertainty", f"=SQRT(SUMSQ(«{parts}»))", standard, "0.000E+00", "u"),
        ("effective degrees of freedom",
         f'=IF(SUM(«{fourths}»)=0,"infinite",MAX(1,INT(«{key}.combined.u»^4/SUM(«{fourths}»)+0.000000001)))', freedom, "0", "nu"),
        ("coverage factor k", "=NORMSINV(0.5+«coverage»/2)", measured.coverage_factor or 0.0, "0.000", "k"),
        ("expanded uncertainty U = k u", f"=«{key}.combined.k»*«{key}.combined.u»", expanded, "0.000E+00", "U"),
    )
    for offset, (label, formula, value, fmt, name) in enumerate(lines):
        sheet.put(row + offset, 5, Text(label), style="label", span=3)
        if name == "k" and measured.degrees_of_freedom is not None:
            # Spreadsheet programs give Student's quantile to about eleven digits only, so it stands as a number.
            sheet.put(row + offset, 8, float(value), style="input", format=fmt, key=f"{key}.combined.k",
                      note="Quantile of Student's t for these degrees of freedom: TINV(1 - coverage, d.o.f.)")
            continue
        sheet.put(row + offset, 8, Live(formula, value), style="result" if name == "U" else "value", format=fmt,
                  key=f"{key}.combined.{name}")
    return row + len(lines) + 1


def _means(sheet: SheetSpec, row: int, view: View) -> int:
    """Put the uncertainty of the mean over the runs: shared inputs averaged with their sign, the others over n."""
    count = len(view.runs)
    for name in WITH_BUDGET:
        spread = view.result.summary[name]
        entries: dict[tuple[str, str], list[tuple[int, int, BudgetRow]]] = {}
        for index, result in view.runs:
            for i, entry in enumerate(result.budget.get(name, ())):
                entries.setdefault((entry.input, entry.kind), []).append((index, i, entry))
        if spread is None or not entries:
            continue
        key = f"um.{name}"
        sheet.put(row, 1, Text(f"{BY_NAME[name].label}, mean of {count} runs [{spread.measured.unit}]"), style="subtitle")
        heads(sheet, row + 1, HEADS, right=NUMBERS)
        for i, found in enumerate(entries.values()):
            _mean_row(sheet, row + 2 + i, key, name, i, found, count)
        last = len(entries) - 1
        row = _combination(
            sheet, row + 2 + len(entries), key, f"{key}.d.0:{key}.d.{last}", f"{key}.f.0:{key}.f.{last}", spread.measured
        )
    return row


def _mean_row(
    sheet: SheetSpec, row: int, key: str, name: str, i: int, found: list[tuple[int, int, BudgetRow]], count: int
) -> None:
    first = found[0][2]
    for column, text in ((1, _label(first)), (2, first.kind), (3, "shared" if first.shared else "per point"),
                         (4, first.stated)):
        sheet.put(row, column, Text(text), style="text")
    if first.shared:
        terms = "+".join(f"«u{r}.{name}.c.{j}»*«u{r}.{name}.u.{j}»" for r, j, _ in found)
        formula = f"=ABS({terms})/{count}"
        value = abs(math.fsum(entry.sensitivity * entry.standard_uncertainty for _, _, entry in found)) / count
        freedom = min(entry.degrees_of_freedom for _, _, entry in found)
    else:
        terms = ",".join(f"«u{r}.{name}.d.{j}»" for r, j, _ in found)
        formula, value = f"=SQRT(SUMSQ({terms}))/{count}", math.sqrt(sum(e.contribution**2 for _, _, e in found)) / count
        fourth = math.fsum(
            entry.contribution**4 / entry.degrees_of_freedom for _, _, entry in found if math.isfinite(entry.degrees_of_freedom)
        )
        freedom = (value * count) ** 4 / fourth if fourth else math.inf
    sheet.put(row, 8, Live(formula, value), style="value", format="0.000E+00", key=f"{key}.d.{i}")
    finite = math.isfinite(freedom)
    sheet.put(row, 10, freedom if finite else Text("infinite"), style="value", format="0.0", key=f"{key}.nu.{i}")
    sheet.put(row, 11, Live(f"=IF(ISNUMBER(«{key}.nu.{i}»),«{key}.d.{i}»^4/«{key}.nu.{i}»,0)", value**4 / freedom if finite else 0.0),
              style="faint", format="0.0E+00", key=f"{key}.f.{i}")


def _chart(sheet: SheetSpec, view: View) -> None:
    """Draw the shares of the first run's flow."""
    rows = view.result.runs[0].budget.get("actual_flow", ())
    if not rows:
        return
    last = len(rows) - 1
    sheet.chart(BarChart(
        title=f"Shares of the variance of the actual flow, run {view.result.runs[0].run.name}", x_title="", y_title="share",
        labels=f"u0.actual_flow.label.0:u0.actual_flow.label.{last}",
        values=f"u0.actual_flow.share.0:u0.actual_flow.share.{last}", anchor="A6", width_cm=24, height_cm=9.5,
    ))
