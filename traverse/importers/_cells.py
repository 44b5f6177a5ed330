"""What a cell says that is not a plain number: missing, obstructed, below range, over range, plugged, excluded."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass

from traverse.errors import ReadingError, nearest
from traverse.importers._text import number
from traverse.model import STATUSES, Status

_WORDS: dict[str, Status] = {
    **dict.fromkeys(
        ("", "-", "--", "---", "\u2013", "\u2014", "\u2212", "na", "n/a", "n.a.", "n.a", "nan", "null", "none", "missing",
         "not measured", "nm", "k.a.", "k. a.", "fehlt", "manquant", "falta", "?"), "missing"),
    **dict.fromkeys(("obs", "obs.", "obstructed", "obstruction", "obstr", "obstr.", "blocked", "versperrt"), "obstructed"),
    **dict.fromkeys(("plugged", "plug", "clogged", "verstopft", "bouche", "obturado"), "plugged"),
    **dict.fromkeys(("excluded", "excl", "excl.", "deleted", "void", "rejected"), "excluded"),
    **dict.fromkeys(("over range", "overrange", "over-range", "ol", "o.l.", "ovr", "overload"), "over range"),
}  # fmt: skip
BLANK = frozenset(word for word, status in _WORDS.items() if status == "missing")
_LIMIT = re.compile(r"\s*([<>\u2264\u2265])\s*=?\s*(.+)\Z", re.S)
_REASON = re.compile(r"\s*([A-Za-z. -]+?)\s*(?:[:,;(\u2013-]\s*(.+?)\)?)?\s*\Z", re.S)


@dataclass(frozen=True, slots=True)
class Cell:
    """A reading: its number (NaN where there is none), status and the reason given for it."""

    number: float
    status: Status
    reason: str = ""


def is_blank(text: str) -> bool:
    """Return whether a cell says that nothing was recorded."""
    return text.strip().lower() in BLANK


def is_word(text: str) -> bool:
    """Return whether a cell holds one of the words with a meaning other than a number, or a limit."""
    return text.strip().lower() in _WORDS or _LIMIT.match(text) is not None


def read(text: str, decimal: str, where: str) -> Cell:
    """Return what a reading's cell says; a blank is never zero.

    Raises
    ------
    ReadingError
        If it is neither a number with that decimal sign nor a known word.
    """
    word = _WORDS.get(text.strip().lower())
    if word is not None:
        return Cell(math.nan, word)
    limit = _LIMIT.match(text)
    if limit:
        value = plain(limit[2].strip(), decimal, where, whole=text)
        if value <= 0 and limit[1] in "<\u2264":
            raise ReadingError(f"{text!r}", where=where, expected="a limit above zero")
        return Cell(value, "below range" if limit[1] in "<\u2264" else "over range")
    reasoned = _REASON.match(text)
    if reasoned and reasoned[2]:
        word = _WORDS.get(reasoned[1].strip().lower())
        if word is not None and word != "missing":
            return Cell(math.nan, word, reasoned[2].strip())
    value = plain(text, decimal, where)
    return Cell(value, "negative" if value < 0 else "read")


def plain(text: str, decimal: str, where: str, whole: str = "") -> float:
    """Return a plain number.

    Raises
    ------
    ReadingError
        If the text is none; with a hint where it is one with the other decimal sign.
    """
    value = number(text, decimal)
    if value is not None:
        return value
    name, other = ("point", ",") if decimal == "." else ("comma", ".")
    other_name = "commas" if other == "," else "points"
    hint = f'if the file uses decimal {other_name} set decimal = "{other}"' if number(text, other) is not None else ""
    raise ReadingError(f"{(whole or text)!r} is no number with a decimal {name}", where=where, expected=hint)


def combine(cell: Cell, word: str, reason: str, where: str) -> Cell:
    """Return a reading with what its status column says of it.

    Raises
    ------
    ReadingError
        If the word is unknown, or contradicts the reading.
    """
    status = _status(word, where)
    if status is None:
        return Cell(cell.number, cell.status, reason or cell.reason) if cell.status != "read" else cell
    blank = math.isnan(cell.number)
    if status in {"read", "negative", "below range"} and blank:
        raise ReadingError(
            f'status "{status}" beside a reading without a number', where=where, expected="a number, or another status"
        )
    if status == "negative" and cell.number >= 0:
        raise ReadingError(f'status "negative" beside {cell.number:g}', where=where, expected="the reading with its sign")
    if status == "missing" and not blank:
        raise ReadingError(
            f'status "missing" beside {cell.number:g}', where=where, expected="no number", how='"excluded" sets a reading aside'
        )
    if status == "read":
        status = "negative" if cell.number < 0 else cell.status
    return Cell(cell.number, status, reason or cell.reason)


def _status(word: str, where: str) -> Status | None:
    folded = word.strip().lower()
    if folded in {"", "-", "ok", "good", "valid"}:
        return None
    for status in STATUSES:
        if folded.replace("_", " ") == status:
            return status
    if folded in _WORDS:
        return _WORDS[folded]
    guess = nearest(folded, STATUSES)
    raise ReadingError(
        f"unknown status {word!r}", where=where, expected=f"one of {', '.join(STATUSES)}", how=f"perhaps {guess}" if guess else ""
    )
