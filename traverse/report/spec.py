"""What a workbook page is, without any spreadsheet library: cells, formulas, charts, print set-up.

A cell is registered under a *key*; a formula refers to it as ``«key»``, to a range as ``«first:last»``. Addresses are
filled in when all pages exist (:func:`resolve`), so that a page never counts rows of another.
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

_PLACEHOLDER = re.compile(r"«([^«»]+)»")
# What spreadsheet programs take for a cell or a row/column and therefore refuse as a name.
_NO_NAME = re.compile(r"\A(?:[A-Za-z]{1,3}\d+|[RrCc]|[Rr]\d*[Cc]\d*)\Z")


@dataclass(frozen=True, slots=True)
class Text:
    """Text; the only way for foreign text to get into a cell. It can never become a formula."""

    text: str


@dataclass(frozen=True, slots=True)
class Live:
    """A formula, and the value it has: shown by programs that do not calculate, and checked by those that do."""

    formula: str
    value: float | int | bool | str


Content = Text | Live | float | int


@dataclass(frozen=True, slots=True, kw_only=True)
class Cell:
    """One cell with the name of its style, its number format and a note."""

    content: Content
    style: str
    format: str
    note: str


@dataclass(frozen=True, slots=True)
class Series:
    """One series of a scatter chart; x and y are ranges of keys, ``first:last``."""

    title: str
    x: str
    y: str
    style: Literal["points", "line", "line+points", "outline"]


@dataclass(frozen=True, slots=True, kw_only=True)
class ScatterChart:
    """A chart of y against x. ``square`` draws both axes at one scale."""

    title: str
    x_title: str
    y_title: str
    series: tuple[Series, ...]
    anchor: str
    width_cm: float
    height_cm: float
    square: bool = False
    x_min: float | None = None
    x_max: float | None = None
    y_min: float | None = None
    y_max: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class BarChart:
    """Horizontal bars, the first on top."""

    title: str
    x_title: str
    y_title: str
    labels: str
    values: str
    anchor: str
    width_cm: float
    height_cm: float


Chart = ScatterChart | BarChart


@dataclass(slots=True)
class SheetSpec:
    """One page of a workbook.

    Parameters
    ----------
    title : str
        The name of the page.
    orientation : {'portrait', 'landscape'}
        How it prints.
    repeat_rows : (first, last), optional
        Rows repeated on every printed page; the rows below the last are scrolled under them.
    """

    title: str
    orientation: Literal["portrait", "landscape"] = "portrait"
    repeat_rows: tuple[int, int] | None = None
    cells: dict[tuple[int, int], Cell] = field(default_factory=dict)
    keys: dict[str, tuple[int, int]] = field(default_factory=dict)
    names: dict[str, tuple[int, int]] = field(default_factory=dict)
    widths: dict[int, float] = field(default_factory=dict)
    charts: list[Chart] = field(default_factory=list)
    spans: dict[tuple[int, int], int] = field(default_factory=dict)

    def put(
        self, row: int, column: int, content: Content, *, style: str = "value", format: str = "General",  # noqa: A002
        key: str | None = None, name: str | None = None, note: str = "", span: int = 1,
    ) -> None:
        """Put a cell; register it under a key, and under a defined name for formulas by hand.

        ``span`` lets text run over that many columns.
        """
        assert (row, column) not in self.cells, f"{self.title}: cell {row}, {column} is put twice"
        self.cells[row, column] = Cell(content=content, style=style, format=format, note=note)
        if key is not None:
            assert key not in self.keys, f"{self.title}: key {key!r} is put twice"
            self.keys[key] = (row, column)
        if name is not None:
            assert not _NO_NAME.match(name), f"{name!r} cannot be a defined name"
            self.names[name] = (row, column)
        if span > 1:
            self.spans[row, column] = span

    def width(self, column: int, characters: float) -> None:
        """Set a column's width in characters."""
        self.widths[column] = characters

    def chart(self, chart: Chart) -> None:
        """Add a chart."""
        self.charts.append(chart)


def column_letters(column: int) -> str:
    """Return A, B, ..., Z, AA, ... for 1, 2, ..."""
    letters = ""
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


class Addresses:
    """Where every key of a workbook lies."""

    def __init__(self, sheets: Sequence[SheetSpec]) -> None:
        self._places: dict[str, tuple[str, int, int]] = {}
        for sheet in sheets:
            for key, (row, column) in sheet.keys.items():
                assert key not in self._places, f"key {key!r} stands on two pages"
                self._places[key] = (sheet.title, row, column)

    def cell(self, key: str, page: str = "") -> str:
        """Return the address of a key, with the page's name unless it is on ``page``."""
        title, row, column = self._places[key]
        absolute = f"${column_letters(column)}${row}"
        return absolute if title == page else f"'{title}'!{absolute}"

    def span(self, keys: str, page: str = "") -> str:
        """Return the address of a range ``first:last``."""
        first, last = keys.split(":")
        title, row, column = self._places[last]
        assert title == self._places[first][0], f"{keys!r} reaches over two pages"
        return f"{self.cell(first, page)}:${column_letters(column)}${row}"

    def formula(self, formula: str, page: str) -> str:
        """Return a formula with every placeholder replaced by an address."""
        return _PLACEHOLDER.sub(lambda m: self.span(m[1], page) if ":" in m[1] else self.cell(m[1], page), formula)

    def bounds(self, keys: str) -> tuple[str, int, int, int, int]:
        """Return page, first column, first row, last column, last row of a range."""
        first, last = (self._places[key] for key in keys.split(":"))
        return first[0], first[2], first[1], last[2], last[1]


def live_cells(sheets: Sequence[SheetSpec]) -> Mapping[tuple[str, str], Live]:
    """Return every formula of a workbook by page and address."""
    return {
        (sheet.title, f"{column_letters(column)}{row}"): cell.content
        for sheet in sheets for (row, column), cell in sheet.cells.items() if isinstance(cell.content, Live)
    }
