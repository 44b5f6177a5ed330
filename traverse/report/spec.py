"""What a workbook page is, without any spreadsheet library: cells, formulas, charts, print set-up.

A cell is registered under a *key*; a formula refers to it as ``«key»``, to a range as ``«first:last»``. Addresses are
filled in when all pages exist (:func:`resolve`), so that a page never counts rows of another.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

_PLACEHOLDER = re.compile(r"«([^«»]+)»")
# What spreadsheet programs take for a cell, a row, a column or a constant and therefore refuse as a name.
_NO_NAME = re.compile(r"\A(?:[A-Za-z]{1,3}\d+|[RC]|R\d*C\d*|TRUE|FALSE)\Z", re.IGNORECASE)
_NAME = re.compile(r"\A[A-Za-z_][A-Za-z0-9_.]{0,254}\Z")
_QUOTED = re.compile(r'"[^"]*"')
_CALL = re.compile(r"([A-Za-z_][A-Za-z0-9_.]*)\(")
# What formulas may call: known to every spreadsheet program since 2007, the same in every language and on every day.
# TEXT is not among them (its picture of a number is read in the user's language), nor is anything that changes by itself.
FUNCTIONS = frozenset((
    "ABS", "ACOS", "AND", "ASIN", "ATAN", "ATAN2", "AVERAGE", "COS", "COSH", "COUNT", "COUNTA", "COUNTIF", "DEGREES", "EXP", "IF",
    "IFERROR", "INDEX", "INT", "ISNUMBER", "LEFT", "LEN", "LN", "LOG10", "MATCH", "MAX", "MIN", "MOD", "NORMSDIST", "NORMSINV", "NOT",
    "OR", "PI", "POWER", "RADIANS", "ROUND", "ROUNDDOWN", "ROUNDUP", "SIGN", "SIN", "SINH", "SQRT", "STDEV", "SUM", "SUMIF",
    "SUMPRODUCT", "SUMSQ", "TAN", "TANH", "TDIST", "TINV", "VAR",
))
# At most 31 characters, none that stands for something in a reference, no apostrophe at either end.
_PAGE_TITLE = re.compile(r"\A(?!')[^\x00-\x1f\[\]:*?/\\]{1,31}(?<!')\Z")
LONGEST = 32_767
_CUT = " [cut here]"
_BREAK = re.compile("\r\n?")
# Control characters, lone surrogates and the two non-characters: no XML file can hold them.
_UNWRITABLE = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\ud800-\udfff\ufffe\uffff]")


def clean(text: str) -> str:
    """Return text that a workbook can hold; what it cannot is replaced visibly, and more than a cell holds is cut visibly."""
    text = _UNWRITABLE.sub("\ufffd", _BREAK.sub("\n", text))
    return text if len(text) <= LONGEST else text[: LONGEST - len(_CUT)] + _CUT


@dataclass(frozen=True, slots=True)
class Text:
    """Text; the only way for foreign text to get into a cell. It can never become a formula."""

    text: str


@dataclass(frozen=True, slots=True)
class Live:
    """A formula, and the value it has: shown by programs that do not calculate, and checked by those that do."""

    formula: str
    value: float | int | bool | str

    def __post_init__(self) -> None:
        assert self.formula.startswith("="), f"{self.formula!r} is no formula"
        assert isinstance(self.value, str) or math.isfinite(self.value), f"{self.formula}: a value that is no number"
        unknown = set(_CALL.findall(_QUOTED.sub("", _PLACEHOLDER.sub("", self.formula)))) - FUNCTIONS
        assert not unknown, f"{self.formula}: not every spreadsheet program knows {', '.join(sorted(unknown))}"


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


@dataclass(frozen=True, slots=True, kw_only=True)
class Validation:
    """What may be entered into a range of cells (``first:last``): one of a list, or whatever a formula finds true.

    ``formula`` speaks of the first cell of the range, as ``«first»``, which is then taken relatively.
    """

    cells: str
    choices: tuple[str, ...] = ()
    formula: str = ""
    title: str
    message: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Highlight:
    """A look that a range of cells (``first:last``) takes while a formula is true; it speaks of the first cell, as above."""

    cells: str
    formula: str
    style: Literal["attention", "pass", "fail"]


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
    protected : bool
        Only entry cells can be changed; no password, so that nobody is locked out of the file.
    footer : str
        The text at the foot of every printed page.
    """

    title: str
    orientation: Literal["portrait", "landscape"] = "portrait"
    repeat_rows: tuple[int, int] | None = None
    protected: bool = False
    footer: str = "values are live formulas; see Record for inputs and digests"
    cells: dict[tuple[int, int], Cell] = field(default_factory=dict)
    keys: dict[str, tuple[int, int]] = field(default_factory=dict)
    names: dict[str, tuple[int, int]] = field(default_factory=dict)
    widths: dict[int, float] = field(default_factory=dict)
    charts: list[Chart] = field(default_factory=list)
    spans: dict[tuple[int, int], int] = field(default_factory=dict)
    validations: list[Validation] = field(default_factory=list)
    highlights: list[Highlight] = field(default_factory=list)

    def put(
        self, row: int, column: int, content: Content, *, style: str = "value", format: str = "General",  # noqa: A002
        key: str | None = None, name: str | None = None, note: str = "", span: int = 1,
    ) -> None:
        """Put a cell; register it under a key, and under a defined name for formulas by hand.

        ``span`` lets text run over that many columns.
        """
        assert (row, column) not in self.cells, f"{self.title}: cell {row}, {column} is put twice"
        assert isinstance(content, Text | Live) or math.isfinite(content), f"{self.title}: cell {row}, {column} is no number"
        self.cells[row, column] = Cell(content=content, style=style, format=format, note=note)
        if key is not None:
            assert key not in self.keys, f"{self.title}: key {key!r} is put twice"
            self.keys[key] = (row, column)
        if name is not None:
            assert _NAME.match(name), f"{name!r} cannot be a defined name"
            assert not _NO_NAME.match(name), f"{name!r} as a defined name would be a cell or a constant"
            assert name not in self.names, f"{self.title}: the name {name!r} is given twice"
            self.names[name] = (row, column)
        if span > 1:
            self.spans[row, column] = span

    def width(self, column: int, characters: float) -> None:
        """Set a column's width in characters."""
        self.widths[column] = characters

    def validate(self, validation: Validation) -> None:
        """Say what may be entered."""
        self.validations.append(validation)

    def highlight(self, highlight: Highlight) -> None:
        """Let cells change their look."""
        self.highlights.append(highlight)

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


def place(row: int, column: int) -> str:
    """Return an absolute address."""
    return f"${column_letters(column)}${row}"


def quoted(title: str) -> str:
    """Return a page's title as it stands before the exclamation mark of a reference."""
    return "'" + title.replace("'", "''") + "'"


class Addresses:
    """Where every key of a workbook lies, and what stands there.

    A key or a defined name that stands twice, and a page that no program would accept, are mistakes of this program.
    """

    def __init__(self, sheets: Sequence[SheetSpec]) -> None:
        self._places: dict[str, tuple[str, int, int]] = {}
        self._pages = {sheet.title: sheet for sheet in sheets}
        assert len({title.casefold() for title in self._pages}) == len(sheets), "two pages of one title"
        names = [name.casefold() for sheet in sheets for name in sheet.names]
        assert len(set(names)) == len(names), "a defined name stands on two pages"
        for sheet in sheets:
            assert _PAGE_TITLE.match(sheet.title), f"{sheet.title!r} cannot be the title of a page"
            for key, (row, column) in sheet.keys.items():
                assert key not in self._places, f"key {key!r} stands on two pages"
                self._places[key] = (sheet.title, row, column)

    def cell(self, key: str, page: str = "") -> str:
        """Return the address of a key, with the page's name unless it is on ``page``."""
        title, row, column = self._places[key]
        return place(row, column) if title == page else f"{quoted(title)}!{place(row, column)}"

    def span(self, keys: str, page: str = "") -> str:
        """Return the address of a range ``first:last``."""
        first, last = keys.split(":")
        title, row, column = self._places[last]
        start, first_row, first_column = self._places[first]
        assert title == start, f"{keys!r} reaches over two pages"
        assert row >= first_row, f"{keys!r} runs upwards"
        assert column >= first_column, f"{keys!r} runs to the left"
        return f"{self.cell(first, page)}:{place(row, column)}"

    def formula(self, formula: str, page: str) -> str:
        """Return a formula with every placeholder replaced by an address."""
        return _PLACEHOLDER.sub(lambda m: self.span(m[1], page) if ":" in m[1] else self.cell(m[1], page), formula)

    def area(self, keys: str) -> str:
        """Return the plain address of a range, without its page."""
        _, left, top, right, bottom = self.bounds(keys)
        return f"{column_letters(left)}{top}:{column_letters(right)}{bottom}"

    def relative(self, formula: str, page: str, keys: str) -> str:
        """Return a formula in which the first cell of a range moves with the cell it is asked for; all others stay."""
        first = keys.split(":", maxsplit=1)[0]
        own = self.cell(first, page)
        return self.formula(formula, page).replace(own, own.replace("$", ""))

    def bounds(self, keys: str) -> tuple[str, int, int, int, int]:
        """Return page, first column, first row, last column, last row of a range."""
        first, last = (self._places[key] for key in keys.split(":"))
        return first[0], first[2], first[1], last[2], last[1]

    def values(self, keys: str) -> list[float | str | None]:
        """Return what the cells of a range show: numbers, text, or None for an empty cell."""
        title, left, top, right, bottom = self.bounds(keys)
        cells = self._pages[title].cells
        found = [cells.get((row, column)) for row in range(top, bottom + 1) for column in range(left, right + 1)]
        return [None if cell is None else _shown(cell.content) for cell in found]


def _shown(content: Content) -> float | str:
    if isinstance(content, Text):
        return clean(content.text)
    return content.value if isinstance(content, Live) else content


def live_cells(sheets: Sequence[SheetSpec]) -> Mapping[tuple[str, str], Live]:
    """Return every formula of a workbook by page and address."""
    return {
        (sheet.title, f"{column_letters(column)}{row}"): cell.content
        for sheet in sheets for (row, column), cell in sheet.cells.items() if isinstance(cell.content, Live)
    }
