"""A job in a temporary folder, written from a template with parts exchanged."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

FORMS = Path(__file__).parent.parent / "forms"
PARTS = {
    "job": 'title = "Test"\ndate = 2026-10-14\nmethod = "exact"\nunits = "si"',
    "plane": 'shape = "round"\ndiameter = "300 mm"',
    "layout": 'rule = "equal-area"\nlines = 2\npoints = 6',
    "pitot": 'type = "pitot-static"\ncoefficient = 1.0',
    "gas": 'kind = "air"\nrelative_humidity = "45 %"',
    "conditions": 'barometric = "1002 hPa"\nstatic = "-150 Pa"\ntemperature = "25 degC"',
    "readings": 'file = "readings.csv"',
}
# Twelve readings of a 2 x 6 plan.
LABELLED = "line,point,dp [Pa]\n" + "".join(
    f"{line},{point},{10 * point + number}.5\n" for number, line in enumerate("AB") for point in range(1, 7)
)

Write = Callable[..., Path]


@pytest.fixture
def write(tmp_path: Path) -> Write:
    """Write a job and its readings; return the path of the job file. A part of None leaves the table out."""

    def _write(text: str | bytes | None = LABELLED, /, more: str = "", **parts: str | None) -> Path:
        tables = {**PARTS, **parts}
        job = "".join(f"[{name}]\n{body}\n" for name, body in tables.items() if body is not None) + more
        path = tmp_path / "job.toml"
        path.write_text(job, encoding="utf-8")
        if text is not None:
            content = text if isinstance(text, bytes) else text.encode()
            (tmp_path / "readings.csv").write_bytes(content)
        return path

    return _write
