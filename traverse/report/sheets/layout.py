"""The points: where they lie, what share of the area each stands for, the marks on the probe, a drawn section."""

from __future__ import annotations

import math

import numpy as np

from traverse.physics import sections
from traverse.report.sheets._view import View, heads
from traverse.report.spec import Live, ScatterChart, Series, SheetSpec, Text
from traverse.units import UNITS

ORDER, TITLE = 30, "Layout"
HEADS = ("point", "line", "no.", "x", "y", "depth", "mark on probe", "weight", "moved")
FIRST = 9


def sheets(view: View) -> list[SheetSpec]:
    """Return the layout page."""
    sheet = SheetSpec(TITLE)
    layout, job, unit = view.layout, view.result.job, view.length_unit
    sheet.put(1, 1, Text("Layout of the measuring points"), style="title")
    origin = "" if job.plane.section.shape == "polygon" else " from the centre"
    facts = (
        ("Rule", f"{layout.title}; positions {layout.digits}"), ("Source", layout.source),
        ("Section", f"{job.plane.section.words}, looking downstream; x to the right, y up{origin}"),
        ("Depth", "from the inner wall at the port; mark on probe = depth + port depth, + head offset where one is stated"),
    )
    for row, (label, text) in enumerate(facts, start=2):
        sheet.put(row, 1, Text(label), style="label")
        sheet.put(row, 2, Text(text), style="text", span=8)
    _ports(sheet, view)
    labels = tuple(f"{name} [{unit}]" if name in {"x", "y", "depth", "mark on probe"} else name for name in HEADS)
    heads(sheet, FIRST - 1, labels, right={*labels[2:8]})
    for i in range(layout.size):
        _point(sheet, view, i)
    last = layout.size - 1
    sheet.put(FIRST + layout.size, 7, Text("sum of weights"), style="label")
    sheet.put(FIRST + layout.size, 8, Live(f"=SUM(«lay.w.0:lay.w.{last}»)", float(np.sum(layout.weight))), style="value",
              format="0.000000", key="lay.sum")
    _outline(sheet, view, FIRST + layout.size + 2)
    for column, width in enumerate((14, 8, 8, 11, 11, 11, 14, 12, 20), start=1):
        sheet.width(column, width)
    return [sheet]


def _ports(sheet: SheetSpec, view: View) -> None:
    """Put the port depth, one for all or one a line, and the head offset."""
    plane, unit, offset = view.result.job.plane, view.length_unit, _head_offset(view)
    sheet.put(6, 1, Text("Port depth"), style="label")
    note = "Length of the port nipple, added to every mark on the probe."
    if plane.port_depths and plane.port_depth is None:
        for column, (line, nipple) in enumerate(zip(view.layout.lines, plane.port_depths, strict=True), start=2):
            sheet.put(6, column, view.length(nipple.value), style="input", format=view.length_format(), key=f"port_depth.{line}", note=note)
            sheet.put(7, column, Text(f"line {line} [{unit}]"), style="unit")
    else:
        value = view.length(plane.port_depth.value) if plane.port_depth else 0.0
        sheet.put(6, 2, value, style="input", format=view.length_format(), key="port_depth", note=note)
        sheet.put(6, 3, Text(unit if plane.port_depth else f"{unit} (not stated)"), style="unit")
    if offset is not None and not plane.port_depths:
        sheet.put(7, 1, Text("Head offset"), style="label")
        sheet.put(7, 2, view.length(offset), style="input", format=view.length_format(), key="head_offset")
        sheet.put(7, 3, Text(unit), style="unit")


def _head_offset(view: View) -> float | None:
    stated = view.result.job.runs[0].pitot.head_offset
    return None if stated is None else stated.value


def _mark(view: View, i: int) -> Live:
    """Return the mark of a point: depth, port depth and head offset."""
    plane, layout, offset = view.result.job.plane, view.layout, _head_offset(view) or 0.0
    differ = bool(plane.port_depths) and plane.port_depth is None
    nipple = plane.port_depths[layout.lines.index(layout.line[i])] if differ else plane.port_depth
    value = view.length(float(layout.depth[i])) + (view.length(nipple.value) if nipple else 0.0) + view.length(offset)
    added = f"«port_depth.{layout.line[i]}»" if differ else "«port_depth»"
    if not offset:
        return Live(f"=«lay.depth.{i}»+{added}", value)
    return Live(f"=«lay.depth.{i}»+{added}+" + (repr(view.length(offset)) if plane.port_depths else "«head_offset»"), value)


def _point(sheet: SheetSpec, view: View, i: int) -> None:
    layout, row, fmt = view.layout, FIRST + i, view.length_format()
    sheet.put(row, 1, Text(layout.labels()[i]), style="label", key=f"lay.label.{i}")
    sheet.put(row, 2, Text(layout.line[i]), style="text")
    sheet.put(row, 3, layout.point[i], style="value", format="0")
    for column, name in ((4, "x"), (5, "y"), (6, "depth")):
        sheet.put(row, column, view.length(float(getattr(layout, name)[i])), style="value", format=fmt, key=f"lay.{name}.{i}")
    sheet.put(row, 7, _mark(view, i), style="value", format=fmt)
    sheet.put(row, 8, float(layout.weight[i]), style="value", format="0.000000", key=f"lay.w.{i}")
    sheet.put(row, 9, Text("to the wall distance" if layout.moved[i] else ""), style="note")


def _outline(sheet: SheetSpec, view: View, row: int) -> None:
    """Draw the section with its points at true scale, and put the outline it is drawn from beside it."""
    section, layout = view.result.job.plane.section, view.layout
    rings = sections.outline(section.shape, section.size, 37)
    names = (f"outline x [{view.length_unit}]", f"y [{view.length_unit}]")
    heads(sheet, row, names, column=8, right=names)
    at, series = row + 1, []
    for number, ring in enumerate(rings):
        for i, (a, b) in enumerate(ring.tolist()):
            sheet.put(at, 8, view.length(a), style="faint", format=view.length_format(), key=f"lay.ox{number}.{i}")
            sheet.put(at, 9, view.length(b), style="faint", format=view.length_format(), key=f"lay.oy{number}.{i}")
            at += 1
        last = len(ring) - 1
        xs, ys = (f"lay.{axis}{number}.0:lay.{axis}{number}.{last}" for axis in ("ox", "oy"))
        series.append(Series("core" if number else "inner wall", xs, ys, "outline"))
    for name in layout.lines:
        index = [i for i, line in enumerate(layout.line) if line == name]
        if index == list(range(index[0], index[-1] + 1)):
            series.append(Series(
                f"line {name}", f"lay.x.{index[0]}:lay.x.{index[-1]}", f"lay.y.{index[0]}:lay.y.{index[-1]}", "points"
            ))
    left, right, bottom, top = (UNITS[view.length_unit].from_si(side) for side in section.bounds)
    half = _round_up(max(right - left, top - bottom) * 0.51)
    x, y = ((left + right) / 2, (bottom + top) / 2) if section.shape == "polygon" else (0.0, 0.0)
    sheet.chart(ScatterChart(
        title="Section, looking downstream", x_title=f"x [{view.length_unit}]", y_title=f"y [{view.length_unit}]",
        series=tuple(series), anchor=f"A{row}", width_cm=13, height_cm=13, square=True, x_min=x - half, x_max=x + half, y_min=y - half,
        y_max=y + half,
    ))


def _round_up(value: float) -> float:
    """Return the next value of 1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10 times a power of ten."""
    power = 10.0 ** math.floor(math.log10(value))
    return next(step * power for step in (1, 1.2, 1.5, 2, 2.5, 3, 4, 5, 6, 8, 10) if step * power >= value)
