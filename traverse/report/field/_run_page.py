"""One run to fill in: what held for all points, a row a point with a live velocity and a warning, zeros and repeats."""

from __future__ import annotations

from traverse.model import STATUSES
from traverse.planning import Plan
from traverse.planning.field import COLUMNS, HEADER, LEAK, LINES, RUN_MARK
from traverse.report import cautions
from traverse.report.field._indication import Indication
from traverse.report.plan_text import length_unit, sixteenths
from traverse.report.spec import Highlight, SheetSpec, Text, Validation

# Columns: what the plan prints, what is filled in, what follows.
LINE, POINT, MARK, ENTRIES, LIVE = 1, 2, 3, 4, 10
WIDTHS = (7, 7, 17, 13, 13, 12, 8, 13, 24, 12, 30, 10, 9, 11, 11)


def page(planned: Plan, run: str, number: int, units: dict[str, str]) -> SheetSpec:
    """Return the page of one run."""
    sheet = SheetSpec(f"Run {run}", orientation="landscape", protected=True,
                      footer="yellow cells are filled in; the velocities here are an indication, the reduction counts")
    prefix = f"r{number}"
    sheet.put(1, 1, Text(f"{planned.setup.title}: run {run}"), style="title")
    sheet.put(2, 1, Text(f"{RUN_MARK} {run}"), style="faint text")
    live = Indication(sheet, planned, prefix, units)
    row = _header(sheet, prefix, units, live)
    row = live.summary(row)
    first = row + 2
    _table(sheet, planned, prefix, units, live, first)
    last = first + planned.layout.size
    _lines(sheet, planned, prefix, units, last + 2)
    _rules(sheet, prefix, planned)
    for column, width in enumerate(WIDTHS, start=1):
        sheet.width(column, width)
    sheet.repeat_rows = (first, first)
    return sheet


def _header(sheet: SheetSpec, prefix: str, units: dict[str, str], live: Indication) -> int:
    """Put the cells that hold for the whole run, two blocks side by side; return the next free row."""
    half = (len(HEADER) + 1) // 2
    for k, entry in enumerate(HEADER):
        row, left = 4 + k % half, 1 if k < half else 9
        sheet.put(row, left, Text(entry.head(units)), style="label", span=4 if left == 1 else 1)
        at = left + 4 if left == 1 else left + 1
        sheet.put(row, at, Text(""), style="entry text" if entry.words else "entry", key=f"{prefix}.{entry.key}",
                  span=2 if left == 1 and entry.words else 1)
        live.planned_value(row, at + 1, entry)
    return 4 + half


def _table(sheet: SheetSpec, planned: Plan, prefix: str, units: dict[str, str], live: Indication, head: int) -> None:
    """Put the heads and a row for every point."""
    layout, system = planned.layout, planned.setup.units
    heads = ["line", "point", f"mark [{length_unit(system)}]", *(entry.head(units) for entry in COLUMNS)]
    for column, text in enumerate((*heads, *live.heads()), start=1):
        sheet.put(head, column, Text(text), style="heading" if column in {1, 2, 8, 9, 11} else "heading right")
    for i in range(layout.size):
        row = head + 1 + i
        sheet.put(row, LINE, Text(layout.line[i]), style="label", key=f"{prefix}.line.{i}")
        sheet.put(row, POINT, layout.point[i], style="value", format="0")
        mark = sixteenths(float(planned.mark[i])) if system == "us" else f"{planned.rounded[i] * 1000:.0f}"
        sheet.put(row, MARK, Text(mark), style="value")
        for column, entry in enumerate(COLUMNS, start=ENTRIES):
            sheet.put(row, column, Text(""), style="entry text" if entry.words else "entry", key=f"{prefix}.{entry.key}.{i}")
        live.point(row, i)


def _lines(sheet: SheetSpec, planned: Plan, prefix: str, units: dict[str, str], row: int) -> None:
    """Put zeros and repeated readings, a row a line, and the cautions."""
    words = "Zero of the gauge, and one reading of every line again at its end (within 10 %, else the traverse again: UFGS 15951N)"
    sheet.put(row, 1, Text(words), style="subtitle")
    row += 1
    sheet.put(row, 1, Text("line"), style="heading")
    columns = (ENTRIES, ENTRIES + 1, ENTRIES + 2, ENTRIES + 4)
    for column, entry in zip(columns, LINES, strict=True):
        sheet.put(row, column, Text(entry.head(units)), style="heading right")
    for k, name in enumerate(planned.layout.lines):
        sheet.put(row + 1 + k, 1, Text(name), style="label")
        for column, entry in zip(columns, LINES, strict=True):
            sheet.put(row + 1 + k, column, Text(""), style="entry", key=f"{prefix}.{entry.key}.{name}")
    row += len(planned.layout.lines) + 2
    for text in (*cautions.TEXTS, cautions.DEFER):
        sheet.put(row, 1, Text(text), style="caution", span=11)
        row += 1


def _rules(sheet: SheetSpec, prefix: str, planned: Plan) -> None:
    """Say what may be entered, and let warnings stand out."""
    last = planned.layout.size - 1
    for key in ("temperature", "static", "yaw"):
        sheet.validate(_number(f"{prefix}.{key}.0:{prefix}.{key}.{last}", key))
    cells = f"{prefix}.differential_pressure.0:{prefix}.differential_pressure.{last}"
    start = f"«{prefix}.differential_pressure.0»"
    sheet.validate(Validation(
        cells=cells, title="differential pressure",
        formula=f'OR(ISNUMBER({start}),LEFT({start},1)="<",LEFT({start},1)=">")',
        message="A number in the unit of the head, or <0.01 for a reading below the range. Where nothing was read choose a status.",
    ))
    sheet.validate(Validation(
        cells=f"{prefix}.status.0:{prefix}.status.{last}", choices=STATUSES, title="status",
        message=f"One of {', '.join(STATUSES)}; blank: read.",
    ))
    for key in ("leak_before", "leak_after"):
        cells = f"{prefix}.{key}:{prefix}.{key}"
        sheet.validate(Validation(cells=cells, choices=LEAK, title="leak check", message=f"One of {', '.join(LEAK)}."))
    for entry in HEADER:
        if not entry.words:
            sheet.validate(_number(f"{prefix}.{entry.key}:{prefix}.{entry.key}", entry.label))
    lines = planned.layout.lines
    for entry in LINES:
        sheet.validate(_number(f"{prefix}.{entry.key}.{lines[0]}:{prefix}.{entry.key}.{lines[-1]}", entry.label))
    warning = f"{prefix}.warning.0:{prefix}.warning.{last}"
    sheet.highlight(Highlight(cells=warning, formula=f'LEN(«{prefix}.warning.0»)>0', style="attention"))


def _number(cells: str, title: str) -> Validation:
    first = cells.split(":", maxsplit=1)[0]
    return Validation(cells=cells, formula=f"ISNUMBER(«{first}»)", title=title.replace("_", " "), message="A number in the printed unit.")


