"""The record: inputs verbatim with their digests, versions, every decision that was taken, what was not done."""

from __future__ import annotations

from traverse.report import cautions
from traverse.report.numbers import unit_of
from traverse.report.sheets._cells import WORKING
from traverse.report.sheets._view import View, heads
from traverse.report.spec import SheetSpec, Text
from traverse.units import UNITS

ORDER, TITLE = 60, "Record"


def sheets(view: View) -> list[SheetSpec]:
    """Return the page of the record."""
    result = view.result
    sheet = SheetSpec(TITLE, orientation="landscape")
    sheet.put(1, 1, Text("Record"), style="title")
    row = 3
    for label, text in (
        ("Program", result.program), ("Method", view.method.title), ("Source of the method", view.method.source),
        ("Layout term of the uncertainty", result.layout_term),
    ):
        sheet.put(row, 1, Text(label), style="label")
        sheet.put(row, 2, Text(text), style="text")
        row += 1
    for note in view.method.notes:
        sheet.put(row, 1, Text("Note on the method"), style="label")
        sheet.put(row, 2, Text(note), style="text")
        row += 1
    row = _findings(sheet, view, row + 1)
    row = _units(sheet, view, row + 1)
    row = _files(sheet, view, row + 1)
    sheet.put(row + 1, 1, Text("Cautions"), style="subtitle")
    for offset, text in enumerate((*cautions.TEXTS, cautions.DEFER), start=2):
        sheet.put(row + offset, 2, Text(text), style="text")
    for column, width in enumerate((28, 84, 26, 34), start=1):
        sheet.width(column, width)
    return [sheet]


def _findings(sheet: SheetSpec, view: View, row: int) -> int:
    sheet.put(row, 1, Text("Decisions and findings"), style="subtitle")
    heads(sheet, row + 1, ("kind", "what", "where", "setting that decides otherwise"))
    row += 2
    for finding in view.result.findings:
        sheet.put(row, 1, Text(f"{finding.level}: {finding.topic}"), style="attention" if finding.level == "attention" else "text")
        sheet.put(row, 2, Text(finding.message), style="text")
        sheet.put(row, 3, Text(finding.where), style="text")
        sheet.put(row, 4, Text(finding.setting), style="text")
        row += 1
    return row


def _units(sheet: SheetSpec, view: View, row: int) -> int:
    """Put the conversion factors that the formulas of the first page use."""
    sheet.put(row, 1, Text("Units of the first page"), style="subtitle")
    heads(sheet, row + 1, ("unit", "in SI", "zero of the scale [SI]", "source"), right={"in SI"})
    row += 2
    for symbol in dict.fromkeys(unit_of(name, system) for name in WORKING for system in (view.system, view.other)):
        unit = UNITS[symbol]
        if unit.factor == 1.0 and unit.offset == 0.0:
            continue
        sheet.put(row, 1, Text(symbol), style="label")
        sheet.put(row, 2, unit.factor, style="value", format="General", key=f"unit.{symbol}.factor")
        if unit.offset:
            sheet.put(row, 3, unit.offset, style="value", format="General", key=f"unit.{symbol}.offset")
        sheet.put(row, 4, Text(unit.source), style="source")
        row += 1
    return row


def _files(sheet: SheetSpec, view: View, row: int) -> int:
    sheet.put(row, 1, Text("Files, verbatim"), style="subtitle")
    row += 1
    for source in view.result.job.sources:
        sheet.put(row, 1, Text(source.name), style="label")
        sheet.put(row, 2, Text(f"SHA-256 {source.sha256}"), style="source")
        row += 1
        for number, line in enumerate(source.text.splitlines(), start=1):
            sheet.put(row, 1, number, style="faint", format="0")
            sheet.put(row, 2, Text(line), style="verbatim")
            row += 1
    return row
