"""The readings exactly as recorded, in the units they were recorded in, and the rule that acted on each."""

from __future__ import annotations

import math

from traverse.report.sheets._view import View, heads
from traverse.report.spec import SheetSpec, Text

ORDER, TITLE = 10, "Readings"
RECORDED = (
    "differential_pressure", "velocity", "total_pressure", "temperature", "static", "yaw", "pitch", "pitch_pressure", "depth",
)


def sheets(view: View) -> list[SheetSpec]:
    """Return the page of readings; runs stand below one another, each under its own heads."""
    sheet = SheetSpec(TITLE, repeat_rows=(1, 2))
    sheet.put(1, 1, Text("Readings as recorded"), style="title")
    sheet.put(2, 1, Text("Text as it stood in the file, the number read from it, and the place it came from."), style="note")
    row = 4
    for index, result in view.runs:
        readings = result.run.readings
        names = [name for name in RECORDED if name in readings.columns]
        sheet.put(row, 1, Text(f"Run {result.run.name}"), style="subtitle")
        labels: list[str] = ["point"]
        for name in names:
            column = readings.columns[name]
            labels += [f"text under '{column.header}'", f"{name.replace('_', ' ')} [{column.unit}]"]
        labels += ["status", "rule applied", "reason", "place"]
        heads(sheet, row + 1, tuple(labels), right={label for label in labels if label.endswith("]")})
        for i in range(view.layout.size):
            _point(sheet, row + 2 + i, index, i, view, names)
        row += view.layout.size + 4
    for place in range(1, 20):
        sheet.width(place, 16)
    return [sheet]


def _point(sheet: SheetSpec, row: int, index: int, i: int, view: View, names: list[str]) -> None:
    result = view.result.runs[index]
    readings = result.run.readings
    sheet.put(row, 1, Text(f"{readings.line[i]}{readings.point[i]}"), style="label")
    place = 2
    for name in names:
        column = readings.columns[name]
        sheet.put(row, place, Text(column.text[i]), style="verbatim")
        number = float(column.number[i])
        key = f"read{index}.{name}.{i}"
        if math.isfinite(number):
            sheet.put(row, place + 1, number, style="input", format="General", key=key)
        else:
            sheet.put(row, place + 1, Text("no number"), style="faint", key=key)
        place += 2
    status = readings.status[i]
    sheet.put(row, place, Text(status), style="text" if status == "read" else "attention")
    sheet.put(row, place + 1, Text(result.treated.rule[i]), style="text")
    sheet.put(row, place + 2, Text(readings.reason[i]), style="text")
    first = readings.columns[names[0]] if names else None
    sheet.put(row, place + 3, Text(first.where[i] if first else ""), style="source")
