"""Labels of lines and points as people write them: ``A-1``, ``Port B``, ``point 3``, ``1-12``."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import replace

from traverse.errors import ReadingError
from traverse.importers._records import Record
from traverse.model import Finding

_JOINED = re.compile(r"\s*(?:port|line|linie|axis|achse|traverse)?\s*([A-Za-z]+|\d+(?=\s*[-_/:]))\s*[-_/:]?\s*(\d+)\s*\Z", re.I)
_POINT_WORDS = frozenset({"p", "pt", "pnt", "point", "punkt", "punto", "no", "nr", "n"})
_LINE_WORDS = re.compile(r"\s*(?:port|line|linie|ligne|linea|axis|achse|axe|traverse|stutzen|diameter)\s*[-_:#]?\s*(?=\w)", re.I)


def split_points(records: Sequence[Record], has_line: bool) -> tuple[list[Record], list[Finding]]:
    """Split labels such as ``A-1`` in the point column into line and point where there is no line column.

    Where there is one, a label that repeats the line (``A1`` on line A) loses it.
    """
    labels = [record.point for record in records]
    matches = [_JOINED.match(label) for label in labels]
    if not labels or not all(matches):
        return [replace(record, point=_number_text(record.point)) for record in records], []
    parts = [(match[1], match[2]) for match in matches if match]
    prefixes = {line.lower() for line, _ in parts}
    if prefixes <= _POINT_WORDS and len(prefixes) == 1:
        return [replace(record, point=point) for record, (_, point) in zip(records, parts, strict=True)], []
    if has_line:
        return [_unrepeated(record, line, point) for record, (line, point) in zip(records, parts, strict=True)], []
    found = [replace(record, line=line, point=point) for record, (line, point) in zip(records, parts, strict=True)]
    return found, [Finding(
        level="note", topic="labels", setting="[readings.columns] line", where=records[0].where,
        message=f"labels such as {labels[0]!r} were read as line {parts[0][0]}, point {parts[0][1]}",
    )]


def _unrepeated(record: Record, line: str, point: str) -> Record:
    if line.casefold() != bare_line(record.line).casefold():
        raise ReadingError(
            f"point {record.point!r} on line {record.line!r}", where=record.where, expected="a point of the line it stands on"
        )
    return replace(record, point=point)


def _number_text(label: str) -> str:
    match = re.fullmatch(r"#?\s*(\d+)(?:[.,]0+)?", label.strip())
    return match[1] if match else label


def bare_line(label: str) -> str:
    """Return a line's label without words such as 'Port'.

    >>> bare_line("Port A")
    'A'
    """
    return _LINE_WORDS.sub("", label, count=1).strip() or label.strip()


def point_number(record: Record) -> int:
    """Return the number of a record's point.

    Raises
    ------
    ReadingError
        If the label is no whole number from 1.
    """
    if not re.fullmatch(r"\d{1,4}", record.point) or int(record.point) < 1:
        raise ReadingError(
            f"point {record.point!r}" if record.point else "no point number", where=record.where,
            expected="a whole number from 1, or labels such as A1",
        )
    return int(record.point)
