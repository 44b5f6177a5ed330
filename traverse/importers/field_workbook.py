"""A filled field workbook: the job it carries, and the readings of its pages."""

from __future__ import annotations

import datetime as dt
import math
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from traverse import files
from traverse.errors import ReadingError, UnitError
from traverse.importers import _cells, _document, _field_pages, _field_quality
from traverse.importers._cells import Cell
from traverse.importers._document import Document, Override
from traverse.importers._field_pages import Page, Uncalculated, shown
from traverse.importers._records import Head, Record, Table
from traverse.importers._schema import Table as JobTable
from traverse.model import Finding, Source
from traverse.planning.field import COLUMNS, HEADER, JOB_MARK, PRINTED, Entry
from traverse.units import UNITS

SUFFIX = ".xlsx"
# What a run's page can say in place of the job file.
_OVERRIDES = ("barometric", "static", "temperature", "coefficient")


@dataclass(frozen=True, slots=True, kw_only=True)
class Book:
    """A field workbook as read: the job with what the pages say otherwise, and the readings."""

    document: Document
    table: Table


def is_one(path: Path) -> bool:
    """Return whether a workbook carries the mark of a job; it is not read further."""
    try:
        with zipfile.ZipFile(path) as packed:
            names = [entry for entry in packed.infolist() if entry.filename.startswith("xl/") and entry.filename.endswith(".xml")]
            return any(JOB_MARK.encode() in packed.read(entry) for entry in names if entry.file_size < _field_pages.LARGEST)
    except (OSError, zipfile.BadZipFile, NotImplementedError, RuntimeError):
        return False


def read(path: Path, *, filled: bool) -> Book:
    """Read a field workbook.

    Parameters
    ----------
    path : Path
        An .xlsx file that ``traverse plan --sheet`` wrote, whatever program saved it since.
    filled : bool
        Whether readings are needed; a plan can be made of an empty one.

    Raises
    ------
    JobError, ReadingError
        With page and cell where something is missing, changed or cannot be read.
    """
    name = path.name
    found = _field_pages.pages(path)
    text, unit_text = _field_pages.job_text(found, name)
    origin = Source(name=name, sha256=files.sha256(files.read_bytes(path)), text=text)
    document = _document.interpreted(path, text, origin, ())
    printed = dict(part.split(" = ", 1) for part in unit_text.split("; "))
    decimal = document.table("readings").text("decimal") or "."
    runs: dict[str, tuple[Record, ...]] = {}
    findings: list[Finding] = []
    overrides: dict[str, Override] = {}
    dates: dict[str, dt.date] = {}
    quality: dict[str, dict[str, Any]] = {}
    for run, page in _field_pages.run_pages(found, name):
        sheet = _Sheet(page, run, printed, decimal)
        records = sheet.records()
        if not any(record.status != "missing" or record.reason for record in records):
            findings.append(_note("run", f"page {page.title!r} is empty: run {run} is left out", page))
            continue
        runs[run] = records
        header = sheet.header()
        overrides[run] = _override(run, header, printed, page, findings)
        if isinstance(header.get("date"), dt.datetime | dt.date):
            dates[run] = _date(header["date"])
        findings += _said(header, page, run)
        findings += _field_quality.findings(page, run, printed, header, records)
        quality[run] = _field_quality.stated(page, header, printed)
    if filled and not runs:
        raise ReadingError("no readings on any page", where=name, expected="at least one run with readings")
    document = _with(document, runs, overrides, dates, findings)
    common = {key: values for key, values in (document.quality or {}).items() if key != "run"}
    own = (document.quality or {}).get("run", {})
    document = replace(document, quality=common | {"run": {run: {**own.get(run, {}), **found} for run, found in quality.items()}})
    return Book(document=document, table=Table(source=origin, heads=_heads(printed), runs=runs, findings=tuple(findings)))


def _heads(printed: Mapping[str, str]) -> dict[str, Head]:
    found = {name: Head(name=name, text=name, unit="") for name in PRINTED}
    for entry in COLUMNS:
        name = "reason" if entry.key == "remark" else entry.key
        found[name] = Head(name=name, text=entry.head(dict(printed)), unit=printed.get(entry.key, ""))
    return found


@dataclass(frozen=True, slots=True)
class _Sheet:
    """The page of a run."""

    page: Page
    run: str
    printed: Mapping[str, str]
    decimal: str

    def header(self) -> dict[str, Any]:
        """Return what was filled in for the whole run: numbers, words, dates."""
        found: dict[str, Any] = {}
        for entry in HEADER:
            place = self.page.find(entry.label)
            if place is None:
                where = f"{self.page.file} '{self.page.title}'"
                raise ReadingError(f"no {entry.label!r}", where=where, expected="the page as it was written")
            self._unit(entry, place)
            row, column = place
            # The words before a cell may reach over several columns: the cell is the next one to the right that is not part of them.
            for right in range(column + 1, column + 5):
                value = self.page.cells.get((row, right))
                if value is not None and not _planned(value):
                    found[entry.key] = self._entry(entry, value, row, right)
                    break
                if value is not None:
                    break
        return found

    def _entry(self, entry: Entry, value: Any, row: int, column: int) -> Any:
        if isinstance(value, Uncalculated):
            raise _uncalculated(value, self.page.where(row, column))
        if entry.words:
            return value if isinstance(value, dt.datetime | dt.date) else shown(value).strip()
        return self.number(value, row, column)

    def number(self, value: Any, row: int, column: int) -> float:
        """Return a plain number of a cell."""
        where = self.page.where(row, column)
        if isinstance(value, bool | dt.datetime | dt.date | dt.time):
            raise ReadingError(f"{shown(value)!r} where a number belongs", where=where, expected="a number")
        if isinstance(value, int | float):
            return float(value)
        return _cells.plain(shown(value).strip(), self.decimal, where)

    def _unit(self, entry: Entry, place: tuple[int, int]) -> None:
        """Refuse a head whose unit is not the one that was printed."""
        stated = _field_pages.split(str(self.page.cells[place]))[1]
        wanted = self.printed.get(entry.key, "")
        if entry.dimension and stated != wanted:
            raise UnitError(
                f"{self.page.cells[place]!r}", where=self.page.where(*place),
                expected=f"[{wanted}], the unit this workbook was written with",
                how="write a new one with the unit you want: traverse plan JOB --sheet FILE --pressure-unit UNIT",
            )

    def records(self) -> tuple[Record, ...]:
        """Return a record for every row of the table."""
        head = self._head()
        records: list[Record] = []
        row = head.row + 1
        while True:
            line, point = (self.page.cells.get((row, head.columns[name])) for name in PRINTED)
            if line is None and point is None:
                return tuple(records)
            records.append(self._record(row, head.columns, shown(line), shown(point)))
            row += 1

    def _head(self) -> _Head:
        """Find the row of heads: where every word of them stands in one row."""
        wanted = (*PRINTED, *(entry.label for entry in COLUMNS))
        rows: dict[int, dict[str, int]] = {}
        for (row, column), value in sorted(self.page.cells.items()):
            if isinstance(value, str) and _field_pages.split(value)[0] in wanted:
                rows.setdefault(row, {}).setdefault(_field_pages.split(value)[0], column)
        row = max(rows, key=lambda row: len(rows[row]), default=0)
        lacking = [word for word in wanted if word not in rows.get(row, {})]
        if lacking:
            raise ReadingError(
                f"no column {', '.join(map(repr, lacking))}", where=f"{self.page.file} '{self.page.title}'",
                expected="the heads of the readings as they were written",
            )
        names = {entry.label: entry.key for entry in COLUMNS} | {name: name for name in PRINTED}
        for entry in COLUMNS:
            self._unit(entry, (row, rows[row][entry.label]))
        return _Head(row, {names[word]: column for word, column in rows[row].items()})

    def _record(self, row: int, columns: Mapping[str, int], line: str, point: str) -> Record:
        page = self.page
        raw = {entry.key: page.cells.get((row, columns[entry.key])) for entry in COLUMNS}
        for key, value in raw.items():
            if isinstance(value, Uncalculated):
                raise _uncalculated(value, page.where(row, columns[key]))
        cell = self._reading(raw["differential_pressure"], row, columns["differential_pressure"])
        words, remark = shown(raw["status"]).strip(), shown(raw["remark"]).strip()
        if words or remark:
            cell = _cells.combine(cell, words, remark, page.where(row, columns["status"]))
        number = {"differential_pressure": cell.number}
        for key in ("temperature", "static", "yaw"):
            found = raw[key]
            blank = found is None or (isinstance(found, str) and _cells.is_word(found))
            number[key] = math.nan if blank else self.number(found, row, columns[key])
        value = {key: UNITS[self.printed[key]].to_si(found) if not math.isnan(found) else found for key, found in number.items()}
        if value["temperature"] <= 0:
            where = page.where(row, columns["temperature"])
            raise ReadingError(f"{shown(raw['temperature'])!r}", where=where, expected="a temperature above absolute zero")
        text = {("reason" if key == "remark" else key): shown(found) for key, found in raw.items()}
        return Record(
            where=page.where(row, columns["differential_pressure"]), run=self.run, line=line, point=point, status=cell.status,
            reason=cell.reason, value=value, number=number, text=text,
        )

    def _reading(self, value: Any, row: int, column: int) -> Cell:
        if isinstance(value, str):
            return _cells.read(value, self.decimal, self.page.where(row, column))
        if value is None:
            return Cell(math.nan, "missing")
        number = self.number(value, row, column)
        return Cell(number, "negative" if number < 0 else "read")


@dataclass(frozen=True, slots=True)
class _Head:
    row: int
    columns: Mapping[str, int]


def _planned(value: Any) -> bool:
    return isinstance(value, str) and (value.startswith("planned ") or value in ("to be entered", "0 if not entered"))


def _uncalculated(value: str, where: str) -> ReadingError:
    return ReadingError(
        f"the formula {value} without a value", where=where, expected="a number, or a formula that a spreadsheet program has calculated",
        how="open the workbook, let it calculate, and save it",
    )


def _note(topic: str, message: str, page: Page, *, attention: bool = False, setting: str = "") -> Finding:
    level = "attention" if attention else "note"
    return Finding(level=level, topic=topic, message=message, where=f"{page.file} '{page.title}'", setting=setting)  # type: ignore[arg-type]


def _date(value: dt.date) -> dt.date:
    return value.date() if isinstance(value, dt.datetime) else value


def _override(
    run: str, header: Mapping[str, Any], printed: Mapping[str, str], page: Page, findings: list[Finding]
) -> Override:
    """Return what the page says in place of the job file, each with its finding."""
    values: dict[str, Any] = {}
    for key in _OVERRIDES:
        if key in header:
            values[key] = header[key] if key == "coefficient" else f"{header[key]!r} {printed[key]}"
            stated = f"{header[key]:g} {printed.get(key, '')}".strip()
            findings.append(_note(key, f"{key} of run {run} as entered on the page: {stated}", page, setting=f"[[run]] {key}"))
    return _document.override(run, values, f"{page.file} '{page.title}'")


def _said(header: Mapping[str, Any], page: Page, run: str) -> list[Finding]:
    """Return what was written down beside the readings, so that it stands in the report."""
    words = [f"{entry.label.lower()} {shown(header[entry.key])}" for entry in HEADER
             if entry.words and header.get(entry.key) not in (None, "") and entry.key not in ("leak_before", "leak_after")]
    return [_note("field notes", f"run {run}: {'; '.join(words)}", page)] if words else []


def _with(
    document: Document, runs: Mapping[str, object], overrides: Mapping[str, Override], dates: Mapping[str, dt.date],
    findings: list[Finding],
) -> Document:
    """Return the document with what the pages say: over [[run]], which is over the job."""
    merged: dict[str, Override] = {}
    for override in document.runs:
        if runs and override.name not in runs:
            findings.append(Finding(
                level="note", topic="run", message=f"[[run]] {override.name!r} has no readings and is left out", where=document.source.name
            ))
            continue
        merged[override.name] = override
    for name, override in overrides.items():
        below = merged[name].tables if name in merged else {}
        tables = dict(below)
        for part, table in override.tables.items():
            tables[part] = JobTable(table.name, {**(below[part].values if part in below else {}), **table.values})
        if tables:
            merged[name] = Override(name=name, tables=tables)
    tables = dict(document.tables)
    if dates:
        job = document.table("job")
        first = next(iter(dates.values()))
        tables["job"] = JobTable(job.name, {**job.values, "date": first})
    if "file" in document.table("readings"):
        findings.append(Finding(
            level="note", topic="readings", where=document.source.name, setting="[readings] file",
            message=f"the pages of the workbook count, not {document.table('readings').text('file')}",
        ))
    return replace(document, tables=tables, runs=tuple(merged.values()))
