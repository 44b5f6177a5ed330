"""A text table with its columns recognised: where the head is, what is junk, what the units are, what decimal sign."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from pathlib import Path

from traverse import files
from traverse.errors import JobError, ReadingError
from traverse.importers import _cells, _text
from traverse.importers._columns import KNOWN_EXTRA, NEED_UNIT, READING, Head, fold, looks_like_unit, recognise
from traverse.importers._document import source
from traverse.importers._schema import COLUMNS
from traverse.importers._text import Row, Token
from traverse.model import Finding, Source
from traverse.units import Unit, lookup, unit

NUMERIC = frozenset(name for name, dimension in COLUMNS.items() if dimension)
_STATISTICS = re.compile(
    r"(total|sum|average|avg|mean|min|minimum|max|maximum|std\.?(?:\s*dev\.?)?|st\.?\s*dev\.?|standard deviation|"
    r"summe|mittel|mittelwert|durchschnitt|gesamt|somme|moyenne|suma|promedio|media)s?"
)
_FILLER = r"(run|line|port|point|points|value|values|of|all|test|traverse|readings?|lines|ports|[a-z]|\d+)"
_FOOTER = re.compile(rf"(?:{_FILLER}[\s:.\-]+)*{_STATISTICS.pattern}(?:[\s:.=\-]+(?:{_FILLER}|{_STATISTICS.pattern}))*[\s:.=]*")
_SPREADSHEETS = (".xlsx", ".xls", ".xlsm", ".xlsb", ".ods")


@dataclass(frozen=True, slots=True, kw_only=True)
class Grid:
    """The rows of data of a file with the columns that were recognised."""

    name: str
    source: Source
    heads: Mapping[str, Head]
    units: Mapping[str, Unit]
    rows: tuple[Row, ...]
    decimal: str
    findings: tuple[Finding, ...]

    def where(self, row: Row, name: str) -> str:
        """Return the place of a cell for a message."""
        return f'{self.name}:{row.line} column "{self.heads[name].text}"'

    def cell(self, row: Row, name: str) -> str:
        """Return the text of a cell, empty where there is none."""
        head = self.heads.get(name)
        return row.cells[head.place] if head is not None and head.place < len(row.cells) else ""

    def number(self, row: Row, name: str) -> float | None:
        """Return a plain number in the file's unit, None where the cell is blank."""
        text = self.cell(row, name)
        return None if _cells.is_blank(text) else _cells.plain(text, self.decimal, self.where(row, name))


@dataclass(frozen=True, slots=True)
class Told:
    """What the job says about a file: the decimal sign, and columns and units by canonical name."""

    decimal: str | None = None
    columns: Mapping[str, str] = field(default_factory=dict)
    units: Mapping[str, str] = field(default_factory=dict)


def read(path: Path, name: str, told: Told, needed: frozenset[str] = READING) -> Grid:
    """Read a text table.

    Parameters
    ----------
    path, name
        The file and how the job calls it.
    told : Told
        What the job says about it.
    needed : frozenset of str
        Canonical columns one of which a head row must have.

    Raises
    ------
    ReadingError
        With the file, the row and the setting that answers the question, wherever the file can be read in two ways.
    """
    if not path.is_file():
        raise ReadingError("no such file", where=name, expected="a text table beside the job file")
    if path.suffix.lower() in _SPREADSHEETS:
        raise JobError(
            f"{name}: spreadsheet files are not available in this version", where="[readings] file",
            expected="text files: CSV, TSV or semicolon-separated", how="save the sheet as CSV",
        )
    text, encoding, note = files.read_text(path)
    findings = [Finding(level="note", topic="encoding", message=f"read as {encoding}{f'; {note}' if note else ''}", where=name)]
    delimiter, rows, place = _layout(text, name, told, needed)
    header = rows[place]
    heads, ignored = _heads(header, name, told)
    findings += _said(name, header, delimiter, place, ignored)
    data, unit_row = _data(rows, place, heads, name, findings)
    units = _units(header, heads, unit_row, name, told, findings)
    decimal = _decimal(data, heads, delimiter, name, told, findings)
    return Grid(
        name=name, source=source(path, name, text), heads=heads, units=units, rows=tuple(data), decimal=decimal,
        findings=tuple(findings),
    )


def _layout(text: str, name: str, told: Told, needed: frozenset[str]) -> tuple[str, list[Row], int]:
    """Return the delimiter that makes the best table, its rows, and which of them is the head."""
    best: tuple[tuple[int, float], str, list[Row], int] | None = None
    problem: ReadingError | None = None
    for delimiter in _text.DELIMITERS:
        try:
            rows = _text.rows(text, delimiter, name)
        except ReadingError as found:
            problem = found
            continue
        place, known = _head_row(rows, told, needed)
        if known == 0:
            continue
        width = len(rows[place].cells)
        below = rows[place + 1:]
        score = (known, sum(len(row.cells) <= width for row in below) / max(len(below), 1))
        if best is None or score > best[0]:
            best = (score, delimiter, rows, place)
    if best is None:
        if problem is not None and not _text.rows(text.replace('"', ""), ",", name):
            raise problem
        raise ReadingError(
            "no row names a column that is known", where=name,
            expected=f"a head row with {' or '.join(sorted(needed))}, or a trade name of it",
            how='or name the columns: [readings.columns] differential_pressure = "the head in the file"',
        )
    return best[1], best[2], best[3]


def _head_row(rows: Sequence[Row], told: Told, needed: frozenset[str]) -> tuple[int, int]:
    """Return the row with the most known names that has no number in it; the first of equals."""
    best, most = 0, 0
    wanted = {_told_key(text) for text in told.columns.values()}
    for place, row in enumerate(rows):
        if any(_text.is_number(cell) for cell in row.cells):
            continue
        names = {head.name for i, cell in enumerate(row.cells) if cell and (head := recognise(i, cell))}
        named = {_told_key(cell) for cell in row.cells if cell} & wanted
        if not names & needed and not (named and told.columns.keys() & needed):
            continue
        known = len(names) + len(named)
        if known > most:
            best, most = place, known
    return best, most


def _told_key(text: str) -> str:
    return re.sub(r"\s+", " ", text.strip()).casefold()


def _heads(header: Row, name: str, told: Told) -> tuple[dict[str, Head], list[str]]:
    """Return the recognised columns, and the heads that mean nothing to a reduction."""
    found: dict[str, Head] = {}
    taken: set[int] = set()
    for canonical, text in told.columns.items():
        head = _told(header, name, canonical, text)
        found[canonical] = head
        taken.add(head.place)
    ignored: list[str] = []
    for place, text in enumerate(header.cells):
        if place in taken or not text:
            continue
        guess = recognise(place, text)
        if guess is None or guess.name in told.columns:
            if fold(text) not in KNOWN_EXTRA:
                ignored.append(text)
            continue
        other = found.get(guess.name)
        if other is not None and other.weak != guess.weak:
            ignored.append(other.text if other.weak else text)
            found[guess.name] = guess if other.weak else other
            continue
        if other is not None:
            raise ReadingError(
                f'columns "{other.text}" and "{text}" could both be {guess.name}', where=f"{name}:{header.line}",
                expected="one of them", how=f'say which: [readings.columns] {guess.name} = "{text}"',
            )
        found[guess.name] = guess
    return found, ignored


def _told(header: Row, name: str, canonical: str, text: str) -> Head:
    """Return the column that [readings.columns] names, by its head with or without its unit."""
    wanted = _told_key(text)
    exact = [place for place, cell in enumerate(header.cells) if _told_key(cell) == wanted]
    bare = [place for place, cell in enumerate(header.cells) if _told_key(_without_unit(cell)[0]) == wanted]
    places = exact or bare
    if len(places) != 1:
        raise ReadingError(
            f'{"two columns" if places else "no column"} "{text}"', where=f"{name}:{header.line}",
            expected="one of " + ", ".join(f'"{cell}"' for cell in header.cells if cell),
            how=f"correct [readings.columns] {canonical}",
        )
    cell = header.cells[places[0]]
    return Head(places[0], canonical, cell, _without_unit(cell)[1])


def _without_unit(cell: str) -> tuple[str, str]:
    match = re.fullmatch(r"(.*?)\s*[\[(]([^\[\]()]*)[\])]", cell.strip(), re.S)
    if match:
        return match[1], match[2].strip()
    head = recognise(0, cell)
    if head is not None and head.unit:
        return re.sub(rf"[\s,/_]*{re.escape(head.unit)}\s*\Z", "", cell), head.unit
    return cell, ""


def _said(name: str, header: Row, delimiter: str, place: int, ignored: Sequence[str]) -> Iterator[Finding]:
    """Yield what was found out about the shape of the file."""
    shown = {"\t": "tab", ";": "semicolon", ",": "comma", "|": "bar"}[delimiter]
    junk = f"; {place} rows above it left out" if place else ""
    yield Finding(
        level="note", topic="table", message=f"head in line {header.line}, cells separated by {shown}{junk}",
        where=f"{name}:{header.line}", setting="[readings.columns]",
    )
    if ignored:
        yield Finding(
            level="note", topic="columns", where=f"{name}:{header.line}", setting="[readings.columns]",
            message="columns not used: " + ", ".join(f'"{text}"' for text in ignored),
        )


def _data(
    rows: Sequence[Row], place: int, heads: Mapping[str, Head], name: str, findings: list[Finding]
) -> tuple[list[Row], Row | None]:
    """Return the rows of data, and the row of units under the head where there is one."""
    header, below = rows[place], list(rows[place + 1:])
    unit_row = below.pop(0) if below and _is_unit_row(below[0], heads) else None
    data: list[Row] = []
    for row in below:
        left_out = _left_out(row, header, heads)
        if left_out:
            findings.append(Finding(
                level="attention" if left_out == "no reading" else "note", topic="rows", where=f"{name}:{row.line}",
                message=f"row left out ({left_out}): {' | '.join(row.filled)[:80]}", setting="[readings] file",
            ))
            continue
        if len(row.cells) > len(header.cells):
            raise ReadingError(
                f"{len(row.cells)} cells under a head of {len(header.cells)}", where=f"{name}:{row.line}",
                expected="no more cells than the head has",
                how="a decimal comma beside a comma as separator needs quotes, or another separator",
            )
        data.append(row)
    if not data:
        raise ReadingError("no row of readings", where=f"{name}:{header.line}", expected="rows under the head")
    return data, unit_row


def _is_unit_row(row: Row, heads: Mapping[str, Head]) -> bool:
    if any(_text.is_number(cell) for cell in row.filled):
        return False
    cells = {name: row.cells[head.place] for name, head in heads.items() if head.place < len(row.cells)}
    units = [name for name, cell in cells.items() if name in NUMERIC and cell and looks_like_unit(_bare(cell))]
    others = [cell for name, cell in cells.items() if name in NUMERIC and name not in units and not _cells.is_blank(cell)]
    return bool(units) and not others


def _bare(cell: str) -> str:
    return cell.strip().strip("[]()").strip()


def _left_out(row: Row, header: Row, heads: Mapping[str, Head]) -> str:
    """Return why a row under the head is no reading, empty when it is one."""
    first = row.filled[0]
    if first.startswith("#") and not re.fullmatch(r"#\s*\d+", first):
        return "comment"
    if row.cells == header.cells:
        return "the head again"
    cells = {name: row.cells[head.place] for name, head in heads.items() if head.place < len(row.cells)}
    labels = [first, *(cells.get(name, "") for name in ("run", "line", "point"))]
    if any(label and _FOOTER.fullmatch(label.strip().lower()) for label in labels if not _text.is_number(label)):
        return "a total or an average"
    if any(cells.get(name) for name in NUMERIC) or cells.get("status"):
        return ""
    if _text.is_number(cells.get("point", "")) or (cells.get("point") and cells.get("line")):
        return ""
    return "no reading" if not re.fullmatch(r"[A-Za-z]{0,2}[\s\-/]?\d{1,3}", cells.get("point", "")) else ""


def _units(
    header: Row, heads: Mapping[str, Head], unit_row: Row | None, name: str, told: Told, findings: list[Finding]
) -> dict[str, Unit]:
    """Return the unit of every numeric column; where two places disagree, or none says it, it is a question."""
    for canonical in told.units:
        if canonical not in heads:
            raise JobError(
                f"{name} has no column {canonical}", where=f"[readings.units] {canonical}",
                expected=f"one of {', '.join(heads)}",
            )
    found: dict[str, Unit] = {}
    for canonical, head in heads.items():
        if canonical not in NUMERIC:
            continue
        below = unit_row.cells[head.place] if unit_row is not None and head.place < len(unit_row.cells) else ""
        stated = {
            "head": head.unit, "units row": "" if _cells.is_blank(below) else _bare(below),
            "[readings.units]": told.units.get(canonical, ""),
        }
        said = {key: text for key, text in stated.items() if text}
        found[canonical] = _unit(canonical, head, said, f"{name}:{header.line}", findings)
    return found


def _unit(canonical: str, head: Head, stated: Mapping[str, str], row: str, findings: list[Finding]) -> Unit:
    dimension, where = COLUMNS[canonical], f'{row} column "{head.text}"'
    if dimension == "number":
        symbol = next(iter(stated.values()), "1")
        found = lookup(symbol)
        if found is None or found.symbol not in {"%", "1"}:
            raise ReadingError(f"{symbol!r}", where=where, expected="weights as plain numbers or in %")
        return found
    if not stated:
        if canonical in NEED_UNIT:
            raise ReadingError(
                f"no unit for the {canonical}", where=where, expected="a unit in the head, such as [Pa]",
                how=f'or say it: [readings.units] {canonical} = "…"',
            )
        default = {"angle": "deg", "root of pressure": "Pa^0.5"}[dimension]
        findings.append(Finding(
            level="note", topic="units", where=where, setting=f"[readings.units] {canonical}",
            message=f"no unit in the file; {default} was taken",
        ))
        return unit(default, dimension, where)
    units = {place: unit(text, dimension, where) for place, text in stated.items()}
    if len({found.symbol for found in units.values()}) > 1:
        said = ", ".join(f"{place}: {found.symbol}" for place, found in units.items())
        raise ReadingError(
            f"the unit is told in two ways ({said})", where=where, expected="one unit",
            how="correct the file, or let [readings.columns] and [readings.units] agree with it",
        )
    return next(iter(units.values()))


def _decimal(
    data: Sequence[Row], heads: Mapping[str, Head], delimiter: str, name: str, told: Told, findings: list[Finding]
) -> str:
    """Return the decimal sign: the job's, or the one that all number-like cells agree on."""
    if told.decimal is not None:
        return told.decimal
    numeric = {head.place: head for canonical, head in heads.items() if canonical in NUMERIC}
    labels = {head.place for canonical, head in heads.items() if canonical not in NUMERIC}
    tokens: list[Token] = []
    others: list[str] = []
    for row in data:
        for place, cell in enumerate(row.cells):
            bare = cell.lstrip("<>\u2264\u2265= ")
            if not bare or not _text.is_number(bare) or place in labels:
                continue
            if place in numeric:
                tokens.append(Token(bare, f'{name}:{row.line} column "{numeric[place].text}"'))
            else:
                others.append(bare)
    sign, how = _text.decimal_sign(tokens, others, delimiter)
    if how:
        findings.append(Finding(level="note", topic="decimal sign", message=how, where=name, setting="[readings] decimal"))
    return sign
