"""The job file, line by line, with what the reader needs to trust it."""

from __future__ import annotations

import hashlib

from traverse.planning.field import JOB_MARK, VERSION, unit_line
from traverse.report.spec import SheetSpec, Text

FIRST = 7


def page(job_text: str, units: dict[str, str]) -> SheetSpec:
    """Return the page that carries the job."""
    sheet = SheetSpec("Job", protected=True, footer="the job file of this workbook; not to be changed here")
    lines = job_text.splitlines()
    stamp = digest(unit_line(units), lines)
    rows = ((1, Text(JOB_MARK)), (2, Text(f"version {VERSION}")), (3, Text(unit_line(units))), (4, Text(f"{len(lines)} lines")),
            (5, Text(f"sha256 {stamp}")))
    for row, content in rows:
        sheet.put(row, 1, content, style="faint text")
    sheet.put(6, 1, Text("The job as it was planned. To plan otherwise change the job file and write a new workbook."), style="note")
    for number, line in enumerate(lines):
        sheet.put(FIRST + number, 1, Text(line), style="verbatim")
    sheet.width(1, 100)
    sheet.put(1, 2, Text("of this workbook"), style="faint text")
    sheet.width(2, 20)
    return sheet


def digest(unit_text: str, lines: list[str]) -> str:
    """Return the SHA-256 over the units and the lines of the job."""
    return hashlib.sha256("\n".join((unit_text, *lines)).encode()).hexdigest()
