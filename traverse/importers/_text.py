"""Text tables before any meaning: rows and cells, the delimiter, the decimal sign, and the grammar of numbers."""

from __future__ import annotations

import csv
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Literal

from traverse.errors import ReadingError

Decimal = Literal[".", ","]
DELIMITERS: tuple[str, ...] = ("\t", ";", ",", "|")
# Spaces (also no-break, thin, narrow no-break) and apostrophes that group digits by threes.
_GROUP = " \u00a0\u2009\u202f'\u2019"
LONGEST = 60  # characters; no number that anybody reads off a gauge is longer
_SIGN = "+\\-\u2212\u2013"
_TOKEN = re.compile(rf"[{_SIGN}]?\s?[\d.,{_GROUP}]*\d[\d.,]*(?:[eE][{_SIGN}]?\d+)?\Z")
_PLAIN = {
    ".": re.compile(r"(?:\d+\.?\d*|\.\d+)\Z"), ",": re.compile(r"(?:\d+,?\d*|,\d+)\Z"),
}
_GROUPED = {
    ".": re.compile(rf"[1-9]\d{{0,2}}(?:([,{_GROUP}])\d{{3}})(?:\1\d{{3}})*(?:\.\d*)?\Z"),
    ",": re.compile(rf"[1-9]\d{{0,2}}(?:([.{_GROUP}])\d{{3}})(?:\1\d{{3}})*(?:,\d*)?\Z"),
}


@dataclass(frozen=True, slots=True)
class Row:
    """One row of cells; ``line`` is the physical line it begins on, counted from 1."""

    line: int
    cells: tuple[str, ...]

    @property
    def filled(self) -> tuple[str, ...]:
        """The cells that hold something."""
        return tuple(cell for cell in self.cells if cell)


def rows(text: str, delimiter: str, name: str) -> list[Row]:
    """Return the rows of a text that are not blank, with stripped cells and without blank cells at their end.

    Raises
    ------
    ReadingError
        If the quoting makes no table, such as a quote that is never closed.
    """
    lines = text.replace("\r\n", "\n").replace("\r", "\n").split("\n")
    reader = csv.reader((line + "\n" for line in lines), delimiter=delimiter, skipinitialspace=True)
    found: list[Row] = []
    start = 1
    try:
        for cells in reader:
            clean = [_strip(cell) for cell in cells]
            while clean and not clean[-1]:
                clean.pop()
            if clean:
                found.append(Row(start, tuple(clean)))
            start = reader.line_num + 1
    except csv.Error as problem:
        raise ReadingError(f"no table: {problem}", where=f"{name}:{start}", expected="rows of cells") from problem
    return found


def _strip(cell: str) -> str:
    return cell.strip(" \t\n\u00a0\u2009\u202f\ufeff")


def is_number(text: str) -> bool:
    """Return whether a cell looks like a number with either decimal sign."""
    return len(text) <= LONGEST and _TOKEN.match(text) is not None


def number(text: str, decimal: str) -> float | None:
    r"""Return the number a cell holds, None where it is none with that decimal sign.

    Minus may be U+2212 or an en dash; digits may be grouped by threes with spaces, apostrophes or the other sign.

    >>> number("\u22121'013,25", ",")
    -1013.25
    >>> number("12,5", ".") is None
    True
    """
    if len(text) > LONGEST:
        return None
    match = re.match(rf"([{_SIGN}]?)\s?(.*?)([eE][{_SIGN}]?\d+)?\Z", text, re.S)
    assert match is not None, "every text matches"
    sign, digits, exponent = match.groups()
    if not (_PLAIN[decimal].match(digits) or _GROUPED[decimal].match(digits)):
        return None
    if not digits.isascii() and not re.fullmatch(rf"[0-9.,{_GROUP}]*", digits):
        return None
    kept = re.sub(rf"[{_GROUP}]", "", digits).replace("," if decimal == "." else ".", "").replace(",", ".")
    power = (exponent or "").replace("\u2212", "-").replace("\u2013", "-")
    value = float(kept + power)
    if value in (float("inf"),):
        return None
    return -value if sign in {"-", "\u2212", "\u2013"} else value


def reading(text: str) -> Literal[".", ",", "either", ""]:
    """Return which decimal sign a number-like cell speaks for: one, either (``1,234``), or none (``12``)."""
    body = re.sub(rf"^[{_SIGN}]?\s?|[eE].*\Z", "", text)
    signs = [character for character in body if character in ".,"]
    if not signs:
        return ""
    point, comma = number(text, ".") is not None, number(text, ",") is not None
    if point and comma:
        return "either"
    if point:
        return "."
    return "," if comma else ""


@dataclass(frozen=True, slots=True)
class Token:
    """A number-like cell and where it stands."""

    text: str
    where: str


def decimal_sign(
    tokens: Sequence[Token], others: Iterable[str], delimiter: str
) -> tuple[Decimal, str]:
    """Return the decimal sign of a file and how it was found out.

    Parameters
    ----------
    tokens : sequence of Token
        The number-like cells of the columns that are read.
    others : iterable of str
        All other number-like cells; they may settle what the first leave open.
    delimiter : str
        A file that separates its cells by bare commas writes decimal points unless a quoted cell says otherwise.

    Raises
    ------
    ReadingError
        If both signs occur, or every number can be read in two ways.
    """
    first = {sign: next((token for token in tokens if reading(token.text) == sign), None) for sign in (".", ",", "either")}
    point, comma, either = first["."], first[","], first["either"]
    if point and comma:
        raise ReadingError(
            f"{point.text!r} has a decimal point and {comma.text!r} ({comma.where}) a decimal comma", where=point.where,
            expected="one decimal sign throughout", how='say which counts: [readings] decimal = "." or ","',
        )
    if point or comma:
        return ("." if point else ","), f"decimal {'point' if point else 'comma'}, as in {(point or comma).text!r}"  # type: ignore[union-attr]
    if either is None:
        return ".", ""
    signs = {reading(text) for text in others} & {".", ","}
    if len(signs) == 1:
        sign: Decimal = "." if signs == {"."} else ","
        return sign, f"decimal {'point' if sign == '.' else 'comma'}, settled by another column"
    if delimiter == "," and "," not in either.text:
        return ".", f"decimal point in {either.text!r}, because bare commas separate the cells"
    raise ReadingError(
        f"{either.text!r} can be read in two ways, and no other number of the file settles it", where=either.where,
        expected="the decimal sign of the file", how='say [readings] decimal = "." or decimal = ","',
    )
