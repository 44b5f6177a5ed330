"""Every check: criterion, source, what was found, and what it means for the flow."""

from __future__ import annotations

from traverse.report.sheets._view import View, heads
from traverse.report.spec import SheetSpec, Text

ORDER, TITLE = 50, "Checks"
STYLE = {"pass": "pass", "fail": "fail", "not evaluated": "attention", "not applicable": "faint"}


def sheets(view: View) -> list[SheetSpec]:
    """Return the page of checks."""
    sheet = SheetSpec(TITLE, orientation="landscape", repeat_rows=(4, 4))
    sheet.put(1, 1, Text("Quality checks"), style="title")
    sheet.put(2, 1, Text(
        "A failed check does not withhold the result. 'Not evaluated' is not a pass: something needed for it was not recorded."
    ), style="note")
    heads(sheet, 4, ("run", "check", "status", "observed", "criterion", "asked by the method", "effect on the flow", "remark",
                     "source of the criterion"))
    for row, (run, check) in enumerate(view.result.all_checks(), start=5):
        cells = (
            run, check.title, check.status, check.observed, check.criterion, "yes" if check.demanded else "no", check.effect,
            check.message, check.source,
        )
        for column, text in enumerate(cells, start=1):
            sheet.put(row, column, Text(text), style=STYLE[check.status] if column == 3 else "text")
    for column, width in enumerate((9, 24, 13, 32, 34, 10, 26, 40, 44), start=1):
        sheet.width(column, width)
    return [sheet]
