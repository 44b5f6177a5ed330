"""Points and quantities as tables: the only room that knows pandas."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pandas as pd

from traverse import files
from traverse.result import Reduction


def points(result: Reduction) -> pd.DataFrame:
    """Return one row per run and point, in SI, in the order of the plan."""
    rows = [{"run": run["run"], **point} for run in result.to_dict()["runs"] for point in run["points"]]
    return pd.DataFrame(rows)


def quantities(result: Reduction) -> pd.DataFrame:
    """Return one row per run and quantity, in SI; the mean over the runs last."""
    data = result.to_dict()
    blocks = [(run["run"], run["quantities"], run["notes"]) for run in data["runs"]]
    blocks.append(("mean", data["summary"]["quantities"], data["summary"]["notes"]))
    rows: list[dict[str, Any]] = []
    for run, values, notes in blocks:
        for name, measured in values.items():
            rows.append({"run": run, "quantity": name, **(measured or {}), "note": notes.get(name, "")})
    return pd.DataFrame(rows)


def write_all(result: Reduction, target: Path) -> list[Path]:
    """Write points.csv and quantities.csv; ``target`` is a folder, or a folder with a prefix for the names."""
    written = []
    for name, frame in (("points", points(result)), ("quantities", quantities(result))):
        path = target / f"{name}.csv" if target.is_dir() else target.with_name(f"{target.name}{name}.csv")
        text = frame.map(_inert).to_csv(index=False, lineterminator="\n")
        with files.atomic(path) as stream:
            stream.write(text.encode("utf-8"))
        written.append(path)
    return written


def _inert(value: Any) -> Any:
    """Keep foreign text from becoming a formula when a spreadsheet program opens the file."""
    return f"'{value}" if isinstance(value, str) and value[:1] in {"=", "+", "-", "@", "\t", "\r"} else value
