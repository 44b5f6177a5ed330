"""The plan as a page: the same text the terminal shows."""

from __future__ import annotations

from traverse.planning import Plan
from traverse.report import plan_text
from traverse.report.spec import SheetSpec, Text

COLUMNS = 8


def page(planned: Plan) -> SheetSpec:
    """Return the plan, line by line."""
    sheet = SheetSpec("Plan", protected=True, footer="marks are counted as the plan says; see the cautions at its end")
    lines = plan_text.plan(planned).splitlines()
    sheet.put(1, 1, Text(lines[0]), style="title")
    for row, line in enumerate(lines[1:], start=2):
        heading = bool(line) and row > 2 and not lines[row - 2].strip() and len(line) < 40 and line[0].isupper() and "  " not in line
        if line:
            sheet.put(row, 1, Text(line), style="subtitle" if heading else "verbatim", span=COLUMNS)
    # Several columns: a page that is one column wide is not made to fit the paper by every program.
    for column in range(1, COLUMNS + 1):
        sheet.width(column, 13.5)
    return sheet
