"""A real spreadsheet program recalculates our workbooks; the cached values are stripped first."""

from __future__ import annotations

import io
import math
import os
import shutil
import subprocess
import tempfile
from collections.abc import Mapping
from pathlib import Path

import openpyxl
import pytest

TOLERANCE = 1e-12


def program() -> str:
    """Return the program's path; skip without it, unless the run says it must be there."""
    found = shutil.which("soffice") or shutil.which("libreoffice")
    if not found:
        if os.environ.get("TRAVERSE_OFFICE") == "required":
            pytest.fail("no spreadsheet program, and this run may not go without one")
        pytest.skip("no spreadsheet program on this machine")
    return found


def stripped(content: bytes) -> bytes:
    """Return the workbook without its cached values: loading and saving formulas drops them."""
    book = openpyxl.load_workbook(io.BytesIO(content))
    out = io.BytesIO()
    book.save(out)
    return out.getvalue()


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


def disagreements(content: bytes, recalculated: bytes, tolerance: float = TOLERANCE) -> list[str]:
    """Return every formula cell whose cached value is not what the spreadsheet program computes."""
    formulas = openpyxl.load_workbook(io.BytesIO(content))
    cached = openpyxl.load_workbook(io.BytesIO(content), data_only=True)
    computed = openpyxl.load_workbook(io.BytesIO(recalculated), data_only=True)
    found, count = [], 0
    for sheet in formulas.worksheets:
        for row in sheet.iter_rows():
            for cell in row:
                if cell.data_type != "f":
                    continue
                count += 1
                ours, theirs = cached[sheet.title][cell.coordinate].value, computed[sheet.title][cell.coordinate].value
                if not _same(ours, theirs, tolerance):
                    found.append(f"{sheet.title}!{cell.coordinate} {cell.value}: {ours!r} cached, {theirs!r} computed")
    assert count, "a workbook without formulas proves nothing"
    return found


def _same(ours: object, theirs: object, tolerance: float) -> bool:
    if isinstance(ours, (int, float)) and isinstance(theirs, (int, float)):
        return math.isclose(ours, theirs, rel_tol=tolerance, abs_tol=tolerance)
    return ours == theirs and ours is not None
