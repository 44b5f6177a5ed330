"""Small job files for tests, written into a temporary folder."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import traverse

ROUND = {
    "job": {"title": "test", "method": "exact", "units": "si"},
    "plane": {"shape": "round", "diameter": "1 m"},
    "layout": {"rule": "equal-area", "lines": 2, "points": 4},
    "pitot": {"type": "pitot-static", "coefficient": 1.0},
    "gas": {"kind": "given", "density": "1.2 kg/m3"},
    "conditions": {"barometric": "1013.25 hPa", "static": "0 Pa", "temperature": "20 degC"},
    "readings": {"file": "readings.csv"},
}
READINGS = "line,point,differential_pressure [Pa]\n" + "\n".join(
    f"{line},{point},{pressure}" for line, values in (("A", (50, 60, 62, 48)), ("B", (49, 61, 63, 52)))
    for point, pressure in enumerate(values, start=1)
) + "\n"


def merged(base: dict[str, Any], change: dict[str, Any]) -> dict[str, Any]:
    """Return a job with tables changed; a value of None removes a key or a table."""
    result = {table: dict(values) if isinstance(values, dict) else values for table, values in base.items()}
    for table, values in change.items():
        if values is None:
            result.pop(table, None)
        elif isinstance(values, dict):
            inner = dict(result.get(table, {}))
            for key, value in values.items():
                if value is None:
                    inner.pop(key, None)
                else:
                    inner[key] = value
            result[table] = inner
        else:
            result[table] = values
    return result


def toml(value: Any) -> str:
    """Return a value as TOML."""
    if isinstance(value, bool):
        return str(value).lower()
    if isinstance(value, (int, float)):
        return repr(value)
    if isinstance(value, str):
        return '"' + value.replace("\\", "\\\\").replace('"', '\\"') + '"'
    if isinstance(value, list):
        return "[" + ", ".join(toml(item) for item in value) + "]"
    return "{ " + ", ".join(f"{key} = {toml(item)}" for key, item in value.items()) + " }"


def text(job: dict[str, Any]) -> str:
    """Return a job as the text of a job file; a list of tables under 'run' becomes [[run]]."""
    lines = []
    for table, values in job.items():
        if table == "run":
            for run in values:
                lines += ["[[run]]", *(f"{key} = {toml(value)}" for key, value in run.items())]
            continue
        lines += [f"[{table}]", *(f"{key} = {toml(value)}" for key, value in values.items())]
    return "\n".join(lines) + "\n"


def write(folder: Path, change: dict[str, Any] | None = None, readings: str = READINGS, name: str = "job.toml") -> Path:
    """Write a changed job and its readings; return the job file."""
    (folder / "readings.csv").write_text(readings, encoding="utf-8")
    path = folder / name
    path.write_text(text(merged(ROUND, change or {})), encoding="utf-8")
    return path


def reduced(folder: Path, change: dict[str, Any] | None = None, readings: str = READINGS) -> dict[str, Any]:
    """Return the JSON form of a changed job's reduction."""
    return traverse.reduce(traverse.load(write(folder, change, readings))).to_dict()


def value(result: dict[str, Any], name: str, run: int = 0) -> float:
    """Return a quantity of a run."""
    return result["runs"][run]["quantities"][name]["value"]
