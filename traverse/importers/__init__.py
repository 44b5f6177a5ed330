"""From files to a job: the job file and the readings beside it. One module per form of readings."""

from __future__ import annotations

import re
from pathlib import Path

from traverse import files
from traverse.errors import JobError
from traverse.importers import _document, field_workbook, job, long_table
from traverse.importers._document import Document
from traverse.importers._grid import Told
from traverse.importers._records import Table
from traverse.model import Job, Setup

__all__ = ["find_jobs", "load", "load_setup"]

_WORKBOOKS = (".xlsm", ".xls", ".xlsb", ".ods")


def load(path: str | Path) -> Job:
    """Return the job that a job file describes, with its readings.

    Parameters
    ----------
    path : str or Path
        A TOML job file, or a filled field workbook; the files it names are looked for beside it.

    Raises
    ------
    TraverseError
        With the place, what was found, what would be right, and the setting that says so.
    """
    place = _job_file(path)
    if place.suffix.lower() == field_workbook.SUFFIX:
        book = field_workbook.read(place, filled=True)
        return job.load(book.document, lambda _: book.table, long_table.points, _rows)
    return job.load(_document.read(place), _readings, long_table.points, _rows)


def load_setup(path: str | Path) -> Setup:
    """Return what a job file says before the first reading: section, layout, and what else is known."""
    place = _job_file(path)
    if place.suffix.lower() == field_workbook.SUFFIX:
        book = field_workbook.read(place, filled=False)
        return job.load_setup(book.document, lambda _: book.table, long_table.points)
    return job.load_setup(_document.read(place), _readings, long_table.points)


def find_jobs(path: str | Path) -> list[Path]:
    """Return the job files a path stands for: itself, or those of a folder in the order of their names.

    Raises
    ------
    JobError
        If there is nothing of that name, or no job file in the folder.
    """
    place = Path(path)
    if not place.is_dir():
        return [_job_file(place)]
    found = [entry for entry in sorted(place.iterdir()) if entry.is_file() and _is_job(entry)]
    if not found:
        raise JobError(
            "no job file in the folder", where=str(path), expected="at least one .toml file with a [job] table, or a field workbook"
        )
    return found


def _is_job(path: Path) -> bool:
    if path.suffix.lower() == field_workbook.SUFFIX:
        return not path.name.startswith("~$") and field_workbook.is_one(path)
    # By its text, not its meaning: a job file that is no valid TOML is still one, and its error must be seen.
    return path.suffix == ".toml" and re.search(r"^\s*\[\s*job\s*\]|^\s*job\.", files.read_text(path)[0], re.M) is not None


def _job_file(path: str | Path) -> Path:
    place = Path(path)
    if not place.is_file():
        raise JobError(
            "a folder" if place.is_dir() else "no such file", where=str(path), expected="a job file (TOML) or a field workbook (.xlsx)"
        )
    if place.suffix.lower() in _WORKBOOKS:
        raise JobError(
            f"a {place.suffix} file", where=place.name, expected="a job file (TOML) or a field workbook (.xlsx)",
            how="save the field workbook as .xlsx (Office Open XML)",
        )
    return place


def _rows(path: Path, name: str) -> Table:
    """Read a table of readings beside the job in the long form."""
    return long_table.read(path, name, long_table.Wanted())


def _readings(document: Document) -> Table:
    """Read the readings of a job in the form the job says."""
    table = document.table("readings")
    table.need("file", "the file of the readings, beside the job file", 'for example file = "readings.csv"')
    name = str(table.text("file"))
    told = Told(decimal=table.text("decimal"), columns=table.get("columns") or {}, units=table.get("units") or {})
    return long_table.read(document.beside(name), name, long_table.Wanted(
        told=told, blank_as_above="blank" in table, meter_density=table.stated("meter_density"),
    ))
