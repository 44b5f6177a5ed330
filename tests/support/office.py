"""A real spreadsheet program recalculates our workbooks; the cached values are stripped first."""

from __future__ import annotations

import io
import math
import os
import shutil
import subprocess
import tempfile
import zipfile
from collections.abc import Mapping
from pathlib import Path
from xml.etree import ElementTree

import openpyxl
import pytest

TOLERANCE = 1e-12
NAMESPACE = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"


def program() -> str:
    """Return the program's path; skip without it, unless the run says it must be there."""
    found = shutil.which("soffice") or shutil.which("libreoffice")
    if not found:
        if os.environ.get("TRAVERSE_OFFICE") == "required":
            pytest.fail("no spreadsheet program, and this run may not go without one")
        pytest.skip("no spreadsheet program on this machine")
    return found


def stripped(content: bytes) -> bytes:
    """Return the workbook without its cached values, everything else as it was: no program can hand them back to us."""
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(content)) as source, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as target:
        for name in source.namelist():
            part = source.read(name)
            if name.startswith("xl/worksheets/sheet"):
                part = _without_values(part)
            target.writestr(name, part)
    return out.getvalue()


def _without_values(part: bytes) -> bytes:
    root = ElementTree.fromstring(part)
    for cell in root.iter(f"{NAMESPACE}c"):
        value = cell.find(f"{NAMESPACE}v")
        if cell.find(f"{NAMESPACE}f") is not None and value is not None:
            cell.remove(value)
            cell.attrib.pop("t", None)
    return ElementTree.tostring(root)


def recalculate(books: Mapping[str, bytes]) -> dict[str, bytes]:
    """Return the workbooks as the spreadsheet program computes them, all in one call."""
    office = program()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "in").mkdir()
        for title, content in books.items():
            (folder / "in" / f"{title}.xlsx").write_bytes(stripped(content))
        subprocess.run(
            [office, "--headless", "--norestore", f"-env:UserInstallation=file://{folder}/profile", "--convert-to",
             "xlsx:Calc MS Excel 2007 XML", "--outdir", str(folder / "out"), *map(str, sorted((folder / "in").iterdir()))],
            check=False, capture_output=True, timeout=240,
        )
        result = {}
        for title in books:
            made = folder / "out" / f"{title}.xlsx"
            assert made.exists(), f"the spreadsheet program made no {title}.xlsx"
            result[title] = made.read_bytes()
        return result


def values(content: bytes) -> dict[str, dict[str, object]]:
    """Return what every cell shows, by page and address."""
    book = openpyxl.load_workbook(io.BytesIO(content), data_only=True)
    return {
        sheet.title: {cell.coordinate: cell.value for row in sheet.iter_rows() for cell in row if cell.value is not None}
        for sheet in book.worksheets
    }


def formulas(content: bytes) -> dict[str, dict[str, str]]:
    """Return every formula, by page and address."""
    book = openpyxl.load_workbook(io.BytesIO(content))
    return {
        sheet.title: {cell.coordinate: cell.value for row in sheet.iter_rows() for cell in row if cell.data_type == "f"}
        for sheet in book.worksheets
    }


def disagreements(content: bytes, recalculated: bytes, tolerance: float = TOLERANCE) -> list[str]:
    """Return every formula cell whose cached value is not what the spreadsheet program computes."""
    cached, computed, found, count = values(content), values(recalculated), [], 0
    for page, cells in formulas(content).items():
        for address, formula in cells.items():
            count += 1
            ours, theirs = cached[page].get(address), computed[page].get(address)
            if not _same(ours, theirs, tolerance):
                found.append(f"{page}!{address} {formula}: {ours!r} cached, {theirs!r} computed")
    assert count, "a workbook without formulas proves nothing"
    return found


def _same(ours: object, theirs: object, tolerance: float) -> bool:
    if isinstance(ours, bool) or isinstance(theirs, bool):
        return ours is theirs
    if isinstance(ours, int | float) and isinstance(theirs, int | float):
        # Programs show a difference of two nearly equal numbers as 0: there, and only there, an absolute bound.
        exact_zero = 0 in {ours, theirs}
        return math.isclose(ours, theirs, rel_tol=tolerance, abs_tol=tolerance if exact_zero else 0.0)
    # An empty text formula reads back as nothing; an error is never right, even when both have it.
    ours, theirs = "" if ours is None else ours, "" if theirs is None else theirs
    return isinstance(ours, str) and ours == theirs and not ours.startswith("#")


def convert(path: Path, folder: Path, kind: str) -> Path:
    """Let the spreadsheet program open a file and save it as another; return the new file."""
    office = program()
    folder.mkdir(parents=True, exist_ok=True)
    with tempfile.TemporaryDirectory() as name:
        subprocess.run(
            [office, "--headless", "--norestore", f"-env:UserInstallation=file://{name}/profile", "--convert-to", kind,
             "--outdir", str(folder), str(path)],
            check=False, capture_output=True, timeout=120,
        )
    made = folder / f"{path.stem}.{kind}"
    assert made.exists(), f"the spreadsheet program made no {made.name}"
    return made
