"""The pages of a field workbook as cells: found by their marks, read by the words beside them, whatever else was put in."""

from __future__ import annotations

import datetime as dt
import hashlib
import re
import zipfile
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

from traverse.errors import JobError, ReadingError
from traverse.planning.field import JOB_MARK, RUN_MARK, VERSION

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

# More than any plan needs: cells far out are somebody's, not ours, and cost memory.
ROWS, COLUMNS = 6000, 60
# A workbook of a few pages; more is no field workbook, whatever it unpacks to.
LARGEST = 60_000_000
_CODE = re.compile("_x([0-9A-Fa-f]{4})_")
_UNIT = re.compile(r"(.*?)\s*(?:\[([^\]]*)\])?\s*\Z", re.S)


@dataclass(frozen=True, slots=True)
class Page:
    """One page: its cells by row and column, and what to call it in a message."""

    file: str
    title: str
    cells: dict[tuple[int, int], Any]

    def where(self, row: int, column: int) -> str:
        """Return the place of a cell for a message."""
        return f"{self.file} '{self.title}'!{letters(column)}{row}"

    def find(self, text: str) -> tuple[int, int] | None:
        """Return the first cell whose words, without a unit, are these."""
        return next((place for place, value in sorted(self.cells.items()) if isinstance(value, str) and split(value)[0] == text), None)

    def starting(self, mark: str) -> str | None:
        """Return what follows a mark, None where the page does not have it."""
        for value in self.cells.values():
            if isinstance(value, str) and value.startswith(mark):
                return value[len(mark):].strip()
        return None


def letters(column: int) -> str:
    """Return A, B, ..., Z, AA, ..."""
    name = ""
    while column:
        column, rest = divmod(column - 1, 26)
        name = chr(65 + rest) + name
    return name


def split(head: str) -> tuple[str, str]:
    """Return the words of a head and its unit."""
    match = _UNIT.match(head.strip())
    assert match is not None, "the pattern takes any text"
    return match[1].strip(), (match[2] or "").strip()


def pages(path: Path) -> list[Page]:
    """Return all pages of a workbook with the values of their cells.

    Raises
    ------
    JobError
        If the file is no workbook, or one that unpacks to more than a field workbook can be.
    """
    import openpyxl

    try:
        with zipfile.ZipFile(path) as packed:
            size = sum(entry.file_size for entry in packed.infolist())
        if size > LARGEST:
            raise JobError(f"it unpacks to {size / 1e6:.0f} MB", where=path.name, expected="a field workbook of a few pages")
        values = openpyxl.load_workbook(path, data_only=True, read_only=False)
        typed = openpyxl.load_workbook(path, data_only=False, read_only=False)
    except JobError:
        raise
    except Exception as problem:
        what = f"no workbook that can be read ({type(problem).__name__})"
        raise JobError(what, where=path.name, expected="an .xlsx field workbook") from problem
    return [Page(path.name, sheet.title, _cells(sheet, typed[sheet.title])) for sheet in values.worksheets]


def _cells(sheet: Worksheet, typed: Worksheet) -> dict[tuple[int, int], Any]:
    """Return the values of a page; a formula that nobody calculated yet stands as its text, so that it is not taken for nothing."""
    found: dict[tuple[int, int], Any] = {}
    for (row, column), cell in sheet._cells.items():
        if row <= ROWS and column <= COLUMNS:
            value = cell.value
            if value is None and typed.cell(row, column).data_type == "f":
                value = Uncalculated(str(typed.cell(row, column).value))
            if value is not None:
                found[row, column] = value
    return found


class Uncalculated(str):
    """A formula without a value."""

    __slots__ = ()


def job_text(found: list[Page], name: str) -> tuple[str, str]:
    """Return the job's text and the line of its units.

    Raises
    ------
    JobError
        If the page of the job is missing, or was changed.
    """
    page = next((page for page in found if page.starting(JOB_MARK) is not None), None)
    if page is None:
        raise JobError(
            "no page with the job", where=name, expected=f'the page that "traverse plan --sheet" wrote, with {JOB_MARK!r} on it',
            how="a report or a table of readings is no field workbook: write a job file for it",
        )
    version, stamp = page.starting("version "), page.starting("sha256 ")
    count = next((int(v.split()[0]) for v in page.cells.values() if isinstance(v, str) and re.fullmatch(r"\d+ lines", v)), None)
    if version != str(VERSION):
        raise JobError(f"version {version}", where=f"{name} '{page.title}'", expected=f"a field workbook of version {VERSION}")
    place = page.find("sha256 " + str(stamp))
    if place is None or count is None:
        raise JobError("the page of the job is damaged", where=f"{name} '{page.title}'", expected="the page as it was written")
    row, column = place
    raw = [_line(page.cells.get((row - 2, column))), *(_line(page.cells.get((row + 2 + k, column))) for k in range(count))]
    # Programs differ in how they write a text that looks like the code of a character.
    for units, *lines in (raw, [_CODE.sub(lambda code: chr(int(code[1], 16)), line) for line in raw]):
        if hashlib.sha256("\n".join((units, *lines)).encode()).hexdigest() == stamp:
            return "\n".join(lines) + "\n", units
    raise JobError(
        "the job on it was changed", where=f"{name} '{page.title}'", expected="the page as it was written",
        how="change the job file, write a new field workbook and copy the readings; or put the values that differ on the run's page",
    )


def _line(value: Any) -> str:
    return "" if value is None else str(value)


def run_pages(found: list[Page], name: str) -> Iterator[tuple[str, Page]]:
    """Yield the pages of runs with the name of the run, in the order of the workbook.

    Raises
    ------
    ReadingError
        If there is none, or two pages of one run.
    """
    seen: dict[str, str] = {}
    for page in found:
        run = page.starting(RUN_MARK)
        if run is None:
            continue
        if run in seen:
            raise ReadingError(
                f"two pages of run {run}: {seen[run]!r} and {page.title!r}", where=name, expected="one page a run",
                how=f'on a copied page change "{RUN_MARK} {run}" to another number',
            )
        seen[run] = page.title
        yield run, page
    if not seen:
        raise ReadingError("no page of a run", where=name, expected=f"at least one page with {RUN_MARK!r} on it")


def shown(value: Any) -> str:
    """Return what a cell shows, as text: numbers without a needless fraction, times as they are."""
    if isinstance(value, float) and value.is_integer() and abs(value) < 1e15:
        return str(int(value))
    if isinstance(value, dt.datetime):
        return value.date().isoformat() if value.time() == dt.time() else value.isoformat(sep=" ")
    return "" if value is None else str(value)
