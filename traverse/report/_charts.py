"""Native charts: visible axes, colour-blind safe, each series with its own marker and dash."""

from __future__ import annotations

import math
from typing import Any

from openpyxl.chart import BarChart as XlBarChart
from openpyxl.chart import Reference
from openpyxl.chart import ScatterChart as XlScatterChart
from openpyxl.chart import Series as XlSeries
from openpyxl.chart.data_source import AxDataSource, NumData, NumDataSource, NumRef, NumVal, StrData, StrRef, StrVal
from openpyxl.chart.layout import Layout, ManualLayout
from openpyxl.chart.shapes import GraphicalProperties
from openpyxl.chart.text import RichText
from openpyxl.drawing.line import LineProperties
from openpyxl.drawing.text import CharacterProperties, Paragraph, ParagraphProperties
from openpyxl.workbook import Workbook

from traverse.report.spec import Addresses, BarChart, Chart, ScatterChart, Series, clean

COLOURS = ("0B3C6F", "C1440E", "4D8F8B", "8C6BB1", "B8860B", "555555")
MARKERS = ("circle", "square", "triangle", "diamond", "star", "x")
DASHES = ("solid", "dash", "dashDot", "sysDot", "lgDash", "sysDash")
EMU_PER_POINT = 12700


def add(book: Workbook, page: str, chart: Chart, addresses: Addresses) -> None:
    """Add a chart to a page."""
    drawn = _bars(book, chart, addresses) if isinstance(chart, BarChart) else _scatter(book, chart, addresses)
    drawn.width, drawn.height = chart.width_cm, chart.height_cm
    sheet: Any = book[page]
    sheet.add_chart(drawn, chart.anchor)


def _reference(book: Workbook, keys: str, addresses: Addresses) -> Reference:
    page, first_column, first_row, last_column, last_row = addresses.bounds(keys)
    return Reference(book[page], min_col=first_column, min_row=first_row, max_col=last_column, max_row=last_row)


def _numbers(keys: str, addresses: Addresses) -> NumRef:
    """Return a range of numbers with the values they have, for programs that do not calculate."""
    values = addresses.values(keys)
    points = [NumVal(idx=i, v=repr(float(value))) for i, value in enumerate(values) if isinstance(value, float | int)]
    return NumRef(f=addresses.span(keys), numCache=NumData(formatCode="General", ptCount=len(values), pt=points))


def _words(keys: str, addresses: Addresses) -> StrRef:
    """Return a range of text with the text it has."""
    values = addresses.values(keys)
    points = [StrVal(idx=i, v=str(value)) for i, value in enumerate(values) if value is not None]
    return StrRef(f=addresses.span(keys), strCache=StrData(ptCount=len(values), pt=points))


def _small(size: int = 900) -> RichText:
    style = CharacterProperties(sz=size, b=False)
    return RichText(p=[Paragraph(pPr=ParagraphProperties(defRPr=style), endParaRPr=style)])


def _axes(drawn: Any, chart: Chart) -> None:
    drawn.title = clean(chart.title)
    drawn.title.tx.rich.p[0].pPr = ParagraphProperties(defRPr=CharacterProperties(sz=1100, b=True))
    for run in drawn.title.tx.rich.p[0].r or []:
        run.rPr = CharacterProperties(sz=1100, b=True)
    for axis, title in ((drawn.x_axis, chart.x_title), (drawn.y_axis, chart.y_title)):
        axis.delete = False
        axis.txPr = _small()
        if title:
            axis.title = clean(title)
            for run in axis.title.tx.rich.p[0].r or []:
                run.rPr = CharacterProperties(sz=900, b=False)
        if axis.majorGridlines is not None:
            axis.majorGridlines.spPr = GraphicalProperties(ln=LineProperties(solidFill="DDDDDD", w=6350))


def _scatter(book: Workbook, chart: ScatterChart, addresses: Addresses) -> Any:
    drawn: Any = XlScatterChart()
    drawn.style = 2
    drawn.scatterStyle = "lineMarker"
    for number, series in enumerate(chart.series):
        drawn.series.append(_series(book, series, number, addresses))
    _axes(drawn, chart)
    for axis, low, high in ((drawn.x_axis, chart.x_min, chart.x_max), (drawn.y_axis, chart.y_min, chart.y_max)):
        axis.scaling.min, axis.scaling.max = low, high
        axis.crosses = "min"
    drawn.x_axis.number_format = drawn.y_axis.number_format = "General"
    drawn.legend.position = "b"
    if chart.square:
        limits = (chart.x_min, chart.x_max, chart.y_min, chart.y_max)
        low_x, high_x, low_y, high_y = (limit for limit in limits if limit is not None)
        assert math.isclose(high_x - low_x, high_y - low_y), f"{chart.title}: one scale needs one span"
        # The same length for the same span of both axes, so that a circle is a circle.
        side = 0.74
        drawn.layout = Layout(manualLayout=ManualLayout(
            layoutTarget="inner", xMode="edge", yMode="edge", x=0.14, y=0.10, w=side,
            h=side * chart.width_cm / chart.height_cm,
        ))
    return drawn


def _series(book: Workbook, series: Series, number: int, addresses: Addresses) -> Any:
    found: Any = XlSeries(_reference(book, series.y, addresses), _reference(book, series.x, addresses), title=clean(series.title))
    found.xVal = AxDataSource(numRef=_numbers(series.x, addresses))
    found.yVal = NumDataSource(numRef=_numbers(series.y, addresses))
    colour = "222222" if series.style == "outline" else COLOURS[number % len(COLOURS)]
    found.smooth = False
    line = found.graphicalProperties.line
    line.prstDash = "solid" if series.style in {"points", "outline"} else DASHES[number % len(DASHES)]
    if series.style == "points":
        # One kind of filling only: with a colour beside it, programs draw the line all the same.
        line.noFill = True
    else:
        line.solidFill = colour
        line.width = int((2.0 if series.style == "outline" else 1.5) * EMU_PER_POINT)
    if series.style in {"points", "line+points"}:
        found.marker.symbol = MARKERS[number % len(MARKERS)]
        found.marker.size = 6
        found.marker.graphicalProperties = GraphicalProperties(solidFill=colour)
        found.marker.graphicalProperties.line.solidFill = colour
    else:
        found.marker.symbol = "none"
    return found


def _bars(book: Workbook, chart: BarChart, addresses: Addresses) -> Any:
    drawn: Any = XlBarChart()
    drawn.style = 2
    drawn.type = "bar"
    drawn.add_data(_reference(book, chart.values, addresses), titles_from_data=False)
    drawn.series[0].cat = AxDataSource(strRef=_words(chart.labels, addresses))
    drawn.series[0].val = NumDataSource(numRef=_numbers(chart.values, addresses))
    drawn.series[0].graphicalProperties.solidFill = COLOURS[0]
    drawn.legend = None
    drawn.gapWidth = 40
    _axes(drawn, chart)
    drawn.x_axis.scaling.orientation = "maxMin"
    drawn.y_axis.number_format = "0 %"
    drawn.y_axis.crosses = "max"
    return drawn
