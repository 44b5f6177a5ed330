"""[quality]: leak checks, zeros, repeated readings and dates of calibration, for all runs or for one."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping, Sequence
from typing import Any, cast

from traverse.errors import JobError, nearest
from traverse.importers._schema import quantity
from traverse.model import CALIBRATED, Layout, Leak, Quality
from traverse.units import Stated

LEAKS = ("passed", "failed", "not done")
_DATES = {f"{name}_calibrated": name for name in CALIBRATED}
KEYS = ("leak_before", "leak_after", "zero_before", "zero_after", "repeats", "after_purge", *_DATES)


def build(raw: Mapping[str, Any] | None, runs: Sequence[str], layout: Layout) -> Mapping[str, Quality]:
    """Return what is stated for each run by its name; [quality.run."2"] goes over [quality].

    Raises
    ------
    JobError
        For unknown keys, runs or points, and values of another kind.
    """
    if raw is None:
        return {}
    own = raw.get("run", {})
    if not isinstance(own, Mapping) or not all(isinstance(values, Mapping) for values in own.values()):
        raise JobError("run is no table", where="[quality]", expected='[quality.run."2"] with the same keys')
    for name in own:
        if name not in runs:
            raise JobError(f"run {name!r}", where="[quality.run]", expected=f"one of {', '.join(runs)}")
    common = {key: value for key, value in raw.items() if key != "run"}
    return {name: _one({**common, **own.get(name, {})}, "[quality]", layout) for name in runs}


def _one(values: Mapping[str, Any], where: str, layout: Layout) -> Quality:
    for key in values:
        if key not in KEYS:
            guess = nearest(key, KEYS)
            raise JobError(
                f"unknown key {key!r}", where=where, expected=f"one of {', '.join(KEYS)}, run", how=f"perhaps {guess}" if guess else ""
            )
    for key in ("leak_before", "leak_after"):
        if values.get(key) not in (None, *LEAKS):
            raise JobError(f"{values[key]!r}", where=f"{where} {key}", expected=f"one of {', '.join(LEAKS)}")
    dates: dict[str, dt.date] = {}
    for key, name in _DATES.items():
        if key in values:
            dates[name] = _date(values[key], f"{where} {key}")
    zeros = {key: quantity(values[key], "pressure", f"{where} {key}") if key in values else None for key in ("zero_before", "zero_after")}
    return Quality(
        leak_before=cast("Leak | None", values.get("leak_before")), leak_after=cast("Leak | None", values.get("leak_after")),
        zero_before=zeros["zero_before"], zero_after=zeros["zero_after"], repeats=_readings(values, "repeats", where, layout),
        after_purge=_readings(values, "after_purge", where, layout), calibrated=dates,
    )


def _date(value: Any, where: str) -> dt.date:
    if isinstance(value, dt.datetime):
        return value.date()
    if not isinstance(value, dt.date):
        raise JobError(f"{value!r}", where=where, expected="a date without quotes", how="for example 2026-08-20")
    return value


def _readings(values: Mapping[str, Any], key: str, where: str, layout: Layout) -> dict[str, Stated]:
    found = values.get(key, {})
    if not isinstance(found, Mapping):
        raise JobError(f"{found!r}", where=f"{where} {key}", expected='readings by point, such as { A3 = "0.42 inH2O" }')
    for label in found:
        if label not in layout.labels():
            raise JobError(f"point {label!r}", where=f"{where} {key}", expected=f"a point of the plan, such as {layout.labels()[0]}")
    return {label: quantity(text, "pressure", f"{where} {key} {label}") for label, text in found.items()}
