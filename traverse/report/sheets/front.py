"""The first page: what was measured, the flow with its uncertainty and basis, checks, cautions. A client reads only this."""

from __future__ import annotations

from traverse.quantities import BY_NAME
from traverse.report import cautions
from traverse.report.numbers import decimals_for, difference, plain, shown, unit_of, unit_text
from traverse.report.sheets._cells import WITH_BUDGET, WORKING
from traverse.report.sheets._view import View, decimals, heads
from traverse.report.spec import Live, SheetSpec, Text
from traverse.report.text import difference_from_exact
from traverse.units import UNITS

ORDER, TITLE = 0, "Result"
FLOWS = ("actual_flow", "standard_flow", "dry_standard_flow", "mass_flow", "mean_velocity")
STATE = tuple(name for name in WORKING if name not in FLOWS)
DEFINED = {"actual_flow": "actual_flow", "dry_standard_flow": "dry_standard_flow", "mean_velocity": "mean_velocity"}


def sheets(view: View) -> list[SheetSpec]:
    """Return the first page."""
    job = view.result.job
    sheet = SheetSpec(TITLE, orientation="landscape" if len(view.runs) > 4 else "portrait")
    sheet.put(1, 1, Text(job.title), style="title")
    sheet.put(2, 1, Text("Volumetric flow by pitot-tube traverse"), style="subtitle")
    row = _facts(sheet, view, 4)
    row = _table(sheet, view, row + 1, "Flow and velocity", FLOWS)
    row = _statement(sheet, view, row)
    row = _table(sheet, view, row + 1, "State of the gas and the section", STATE)
    row = _checks(sheet, view, row + 1)
    _cautions(sheet, view, row + 1)
    runs = len(view.runs)
    for column, width in enumerate((33, *(13,) * runs, *((13,) if runs > 1 else ()), 12, 10, 13, 10), start=1):
        sheet.width(column, width)
    return [sheet]


def _across(view: View) -> int:
    """Return the number of columns of the page."""
    return len(view.runs) + (6 if len(view.runs) > 1 else 5)


def _facts(sheet: SheetSpec, view: View, row: int) -> int:
    job = view.result.job
    plane = job.plane
    lengths = ", ".join(
        f"{stated.text} {word}" for stated, word in ((plane.upstream, "before"), (plane.downstream, "after")) if stated
    )
    pitot = job.runs[0].pitot
    facts = [
        ("Date", job.date.isoformat() if job.date else "not stated"),
        ("Method", f"{view.method.title}"),
        ("Section", plane.section.words),
        ("Straight lengths", lengths or "not stated"),
        ("Points", f"{view.layout.size} on {len(view.layout.lines)} lines, {view.layout.title.lower()}; {len(view.runs)} run(s)"),
        ("Probe", f"{pitot.type}, {pitot.words}"),
        ("Standard conditions", job.reference.source if job.reference else "none stated; no standard flows"),
    ]
    for label, text in facts:
        sheet.put(row, 1, Text(label), style="label")
        sheet.put(row, 2, Text(text), style="text", span=_across(view) - 1)
        row += 1
    return row


def _table(sheet: SheetSpec, view: View, row: int, title: str, names: tuple[str, ...]) -> int:
    """Put quantities by run with mean and uncertainty, in the job's units and the mean in the other system."""
    runs = len(view.runs)
    labels = [title, *(f"run {result.run.name}" for _, result in view.runs)]
    labels += ["mean"] if runs > 1 else []
    labels += ["\u00b1 U", "unit", "in other units", "unit"]
    heads(sheet, row, tuple(labels), right={*labels[1:-4], "\u00b1 U", "in other units"})
    assert len(labels) == _across(view), "heads fill the page"
    for name in names:
        row += 1
        quantity = BY_NAME[name]
        sheet.put(row, 1, Text(quantity.label), style="label", note=f"{quantity.meaning}; symbol {quantity.symbol}")
        spread = view.result.summary[name]
        if spread is None:
            sheet.put(row, 2, Text(f"not given: {view.result.summary_notes[name]}"), style="caution", span=_across(view) - 1)
            continue
        fmt = decimals(decimals_for(name, spread.measured.value, view.system))
        style = "result" if name in FLOWS else "value"
        for index, result in view.runs:
            sheet.put(row, 2 + index, Live(_converted(f"«w{index}.{WORKING[name]}»", name, view.system),
                                           shown(name, result.value(name), view.system)),
                      style=style if runs == 1 else "value", format=fmt, key=f"front.{name}.{index}")
        mean = f"«front.{name}.0»"
        column = 2 + runs
        if runs > 1:
            mean = f"«front.{name}.mean»"
            sheet.put(row, column, Live(f"=AVERAGE(«front.{name}.0:front.{name}.{runs - 1}»)",
                                        shown(name, spread.measured.value, view.system)), style=style, format=fmt,
                      key=f"front.{name}.mean", name=DEFINED.get(name))
            column += 1
        _uncertainty(sheet, view, row, column, name, fmt)
        sheet.put(row, column + 1, Text(unit_text(name, view.system)), style="unit")
        other = decimals(decimals_for(name, spread.measured.value, view.other))
        sheet.put(row, column + 2, Live(_other(mean, name, view), shown(name, spread.measured.value, view.other)), style="faint",
                  format=other)
        sheet.put(row, column + 3, Text(unit_text(name, view.other)), style="unit")
    return row + 1


def _converted(cell: str, name: str, system: str) -> str:
    """Return the formula that shows an SI cell in a system's unit."""
    unit = UNITS[unit_of(name, system)]
    if unit.factor == 1.0 and unit.offset == 0.0:
        return f"={cell}"
    zero = f"-«unit.{unit.symbol}.offset»" if unit.offset else ""
    return f"=({cell}{zero})/«unit.{unit.symbol}.factor»"


def _other(cell: str, name: str, view: View) -> str:
    """Return the formula from the job's unit to the other system's unit."""
    own, other = UNITS[unit_of(name, view.system)], UNITS[unit_of(name, view.other)]
    if own.symbol == other.symbol:
        return f"={cell}"
    si = f"{cell}*«unit.{own.symbol}.factor»" if own.factor != 1.0 else cell
    si += f"+«unit.{own.symbol}.offset»" if own.offset else ""
    zero = f"-«unit.{other.symbol}.offset»" if other.offset else ""
    return f"=({si}{zero})/«unit.{other.symbol}.factor»" if other.factor != 1.0 or other.offset else f"={si}"


def _uncertainty(sheet: SheetSpec, view: View, row: int, column: int, name: str, fmt: str) -> None:
    spread = view.result.summary[name]
    assert spread is not None, "called for quantities that exist"
    expanded = spread.measured.expanded_uncertainty
    if expanded is None or name not in WITH_BUDGET or expanded <= 0.0:
        sheet.put(row, column, Text("" if name not in FLOWS else "not stated"), style="faint")
        return
    key = f"um.{name}" if len(view.runs) > 1 else f"u0.{name}"
    unit = UNITS[unit_of(name, view.system)]
    formula = f"=«{key}.combined.U»" + (f"/«unit.{unit.symbol}.factor»" if unit.factor != 1.0 else "")
    sheet.put(row, column, Live(formula, difference(name, expanded, view.system)), style="value", format=fmt)


def _statement(sheet: SheetSpec, view: View, row: int) -> int:
    """Say in words what the interval is, how the method stands to exact physics, and how the flow stands to design."""
    result = view.result
    flow = result.summary["actual_flow"]
    lines = []
    if result.job.uncertainties is not None and flow is not None:
        lines.append(
            f"\u00b1 U is the expanded uncertainty, coverage {100 * result.job.uncertainties.coverage:g} %, k = "
            f"{flow.measured.coverage_factor or 0.0:.3g}. Layout term: {result.layout_term}."
        )
    else:
        lines.append("No uncertainty is stated: the job has no [uncertainty] table.")
    exact = difference_from_exact(result)
    if exact:
        lines.append(exact)
    if result.design is not None:
        verdict = {True: "within", False: "outside", None: "no tolerance stated for"}[result.design.within]
        lines.append(
            f"Design {plain('actual_flow', result.design.design, view.system)}: measured {result.design.percent_of_design:.1f} % "
            f"of design, {verdict} the tolerance"
            + (f" of \u00b1 {result.design.tolerance:g} %." if result.design.tolerance is not None else ".")
        )
    for text in lines:
        sheet.put(row, 1, Text(text), style="remark", span=_across(view))
        row += 1
    for finding in result.findings:
        if finding.level == "attention":
            sheet.put(row, 1, Text(finding.message), style="warning", span=_across(view))
            row += 1
    return row


def _checks(sheet: SheetSpec, view: View, row: int) -> int:
    heads(sheet, row, ("Checks", "count", "which", *("",) * (_across(view) - 3)), right={"count"})
    for status in ("fail", "not evaluated", "pass", "not applicable"):
        row += 1
        found = [(run, check) for run, check in view.result.all_checks() if check.status == status]
        style = {"fail": "fail" if found else "text", "pass": "pass", "not evaluated": "attention" if found else "text"}
        sheet.put(row, 1, Text(status), style=style.get(status, "faint text"))
        sheet.put(row, 2, len(found), style="value", format="0")
        names = dict.fromkeys(check.title for _, check in found)
        sheet.put(row, 3, Text("; ".join(names) or "none"), style="text", span=_across(view) - 2)
    return row + 1


def _cautions(sheet: SheetSpec, view: View, row: int) -> None:
    heads(sheet, row, ("Cautions for work at the plane", *("",) * (_across(view) - 1)))
    sheet.put(row + 1, 1, Text(" ".join((*cautions.TEXTS, cautions.DEFER))), style="caution", span=_across(view))
