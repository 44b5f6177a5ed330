"""The grammar of the job file: every table, every key, and the kind of value it takes."""

from __future__ import annotations

import datetime as dt
import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from traverse.errors import JobError, UnitError, nearest
from traverse.units import Stated, parse

Kind = Literal[
    "text", "choice", "flag", "number", "count", "date", "texts", "quantity", "quantities", "quantity or list", "measured",
    "numbers", "tables", "names", "any",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """What a key takes. ``later`` maps values that belong to later versions to nothing but a clear refusal."""

    kind: Kind
    dimension: str = ""
    choices: tuple[str, ...] = ()
    later: tuple[str, ...] = ()
    basis: str = ""


def _q(dimension: str, basis: str = "") -> Key:
    return Key(kind="quantity", dimension=dimension, basis=basis)


def _choice(*choices: str, later: tuple[str, ...] = ()) -> Key:
    return Key(kind="choice", choices=choices, later=later)


TEXT, FLAG, NUMBER, COUNT = Key(kind="text"), Key(kind="flag"), Key(kind="number"), Key(kind="count")
MEASURED = Key(kind="measured", dimension="length")
FRACTION, LENGTH, TEMPERATURE, PRESSURE = _q("fraction"), _q("length"), _q("temperature"), _q("pressure")

GAS: Mapping[str, Key] = {
    "kind": _choice("air", "flue-gas", "given", "mixture"), "equation": _choice("ideal", "cipm-2007", "virial", "real"),
    "oxygen": FRACTION, "carbon_dioxide": FRACTION, "carbon_monoxide": FRACTION, "sulfur_dioxide": FRACTION,
    "relative_humidity": FRACTION, "moisture": FRACTION, "wet_bulb": TEMPERATURE, "dew_point": TEMPERATURE,
    "humidity_ratio": _q("humidity ratio"), "dry": FLAG, "saturated": FLAG,
    "density": _q("density"), "temperature": TEMPERATURE, "pressure": PRESSURE, "molar_mass": _q("molar mass"),
    "ratio_of_specific_heats": NUMBER,
    "moisture_train": Key(kind="any"), "psychrometer": _choice("energy-balance", "carrier", "ferrel"), "fuel": Key(kind="any"),
    "excess_air": FRACTION, "air_humidity_ratio": _q("humidity ratio"), "components": Key(kind="any"), "rest": TEXT,
}
CONDITIONS: Mapping[str, Key] = {
    "barometric": PRESSURE, "altitude": LENGTH, "model": _choice("standard-atmosphere"), "static": PRESSURE,
    "sea_level_pressure": PRESSURE, "altimeter_setting": PRESSURE, "air_temperature": TEMPERATURE, "height_above_barometer": LENGTH,
    "temperature": TEMPERATURE,
}
PITOT: Mapping[str, Key] = {
    "type": _choice("pitot-static", "s-type", "two-dimensional", "three-dimensional"), "coefficient": NUMBER,
    "legs": Key(kind="any"), "leg": _choice("A", "B", "mean"), "calibration": TEXT, "standard_coefficient": NUMBER,
    "stem": LENGTH, "head_offset": LENGTH, "head": LENGTH, "hole": LENGTH,
    "yaw_offset": Key(kind="quantity or list", dimension="angle"),
}
# Canonical columns of the readings and the dimension of their unit ('' for labels and words).
COLUMNS: Mapping[str, str] = {
    "run": "", "line": "", "point": "", "depth": "length", "x": "length", "y": "length", "weight": "number",
    "differential_pressure": "pressure", "total": "pressure", "temperature": "temperature", "static": "pressure",
    "yaw": "angle", "pitch": "angle", "pitch_pressure": "pressure",
    "velocity": "velocity", "status": "", "reason": "", "standard_error": "pressure",
    "mean_root_differential_pressure": "root of pressure",
}
SCHEMA: Mapping[str, Mapping[str, Key]] = {
    "job": {
        "title": TEXT, "date": Key(kind="date"), "method": TEXT, "units": _choice("si", "us"),
    },
    "plane": {
        "shape": _choice("round", "ellipse", "rectangle", "flat-oval", "annulus", "polygon"),
        "diameter": MEASURED, "circumference": MEASURED, "wall_thickness": LENGTH, "width": MEASURED, "height": MEASURED,
        "core": MEASURED, "core_circumference": MEASURED, "gap": MEASURED, "vertices": Key(kind="any"),
        "lining": LENGTH, "deposit": LENGTH,
        "upstream": LENGTH, "downstream": LENGTH, "port_depth": Key(kind="quantity or list", dimension="length"),
        "wall": _choice("metal", "brick"),
    },
    "layout": {
        "rule": TEXT, "lines": COUNT, "points": Key(kind="any"), "angles": Key(kind="quantities", dimension="angle"),
        "along": _choice("height", "width"), "names": Key(kind="texts"),
        "order": _choice("inward", "outward", "alternate"), "digits": _choice("exact", "printed"),
        "depths": Key(kind="quantities", dimension="length"), "weights": Key(kind="any"), "file": TEXT,
        "positions": Key(kind="quantities", dimension="length"), "radii": FLAG, "wall_distance": LENGTH,
        "centre": _choice("each", "once"),
        "wall_exponent": Key(kind="any"),
    },
    "pitot": PITOT,
    "gas": GAS,
    "conditions": CONDITIONS,
    "reference": {"temperature": TEMPERATURE, "pressure": PRESSURE, "density": _q("density")},
    "readings": {
        "file": TEXT, "form": _choice("long", later=("matrix", "log")), "decimal": _choice(",", "."),
        "negative": _choice("method", "zero", "signed", "omit"),
        "missing": _choice("error", "neighbour", "field", "omit"),
        "below": _choice("half", "zero", "limit"), "blank": _choice("as above"), "repeats": _choice("mean"),
        "meter_density": _q("density"), "columns": Key(kind="names"), "units": Key(kind="names"),
    },
    "uncertainty": {},
    "design": {"actual_flow": _q("flow", basis="actual"), "velocity": _q("velocity"), "tolerance": TEXT, "profile": NUMBER},
    "gauge": {"range": PRESSURE, "division": PRESSURE},
    "wall_effects": {"kind": _choice("partial", "complete"), "file": TEXT, "run": TEXT},
    "corrections": {"wall_factor": Key(kind="any"), "turbulence": FRACTION, "blockage": FLAG, "displacement": Key(kind="any")},
}
# Keys of the contract that this version does not act on: refused, with what there is instead.
LATER: Mapping[str, str] = {
    "readings.sheet": "text files: CSV, TSV or semicolon-separated", "readings.matrix": 'long tables, form = "long"',
    "corrections.layout": "wall_factor, turbulence, blockage and displacement",
}
RUN_TABLES: tuple[str, ...] = ("conditions", "gas", "pitot")


@dataclass(frozen=True, slots=True)
class Table:
    """One table of a job file whose keys are known and whose values are of the right kind."""

    name: str
    values: Mapping[str, Any] = field(default_factory=dict)

    def __contains__(self, key: str) -> bool:
        return key in self.values

    def where(self, key: str) -> str:
        """Return the place of a key for a message."""
        return f"{self.name} {key}"

    def stated(self, key: str) -> Stated | None:
        """Return a value with its unit."""
        value = self.values.get(key)
        assert value is None or isinstance(value, Stated)
        return value

    def text(self, key: str) -> str | None:
        """Return a text."""
        value = self.values.get(key)
        assert value is None or isinstance(value, str)
        return value

    def number(self, key: str) -> float | None:
        """Return a bare number."""
        value = self.values.get(key)
        return None if value is None else float(value)

    def count(self, key: str) -> int | None:
        """Return a whole number."""
        value = self.values.get(key)
        return None if value is None else int(value)

    def flag(self, key: str) -> bool:
        """Return whether a key is true; false where it is absent."""
        return bool(self.values.get(key, False))

    def get(self, key: str) -> Any:
        """Return the value as it stands."""
        return self.values.get(key)

    def need(self, key: str, expected: str, how: str = "") -> None:
        """Raise where a key is missing."""
        if key not in self.values:
            raise JobError(f"no {key}", where=self.name, expected=expected, how=how)


def check(name: str, values: Mapping[str, Any]) -> Table:
    """Return a table of the job file with every value converted to its kind.

    Raises
    ------
    JobError
        For an unknown key (with the nearest known one), or a value of another kind.
    UnitError
        For a dimensioned value without unit, or with a unit of another kind.
    """
    return convert(f"[{name}]", name, values, SCHEMA[name])


def convert(shown: str, table: str, values: Mapping[str, Any], keys: Mapping[str, Key]) -> Table:
    """Convert the values of one table by its keys."""
    converted: dict[str, Any] = {}
    for key, value in values.items():
        if key not in keys:
            raise _unknown(shown, table, key, keys)
        converted[key] = _value(f"{shown} {key}", keys[key], value)
    return Table(shown, converted)


def _unknown(shown: str, table: str, key: str, keys: Mapping[str, Key]) -> JobError:
    later = LATER.get(f"{table}.{key}")
    if later:
        return JobError(f"{key} is not available in this version", where=shown, expected=later)
    guess = nearest(key, keys)
    elsewhere = "" if guess else next((name for name, others in SCHEMA.items() if key in others and name != table), "")
    how = f"perhaps {guess}" if guess else (f"{key} belongs into [{elsewhere}]" if elsewhere else "")
    return JobError(f"unknown key {key!r}", where=shown, expected=f"one of {', '.join(keys)}", how=how)


def _value(where: str, key: Key, value: Any) -> Any:
    match key.kind:
        case "quantity":
            return quantity(value, key.dimension, where, basis=key.basis)
        case "quantity or list" if not isinstance(value, list):
            return quantity(value, key.dimension, where, basis=key.basis)
        case "quantities" | "quantity or list":
            return tuple(
                quantity(entry, key.dimension, f"{where}[{place}]") for place, entry in enumerate(_list(where, value), 1)
            )
        case "measured":
            several = value if isinstance(value, list) and value else [value]
            return tuple(quantity(entry, key.dimension, where) for entry in several)
        case "choice":
            return _of_choice(where, key, value)
        case "text":
            return _text(where, value)
        case "texts":
            return tuple(_text(f"{where}[{place}]", entry) for place, entry in enumerate(_list(where, value), 1))
        case "names":
            return _names(where, value)
        case "flag":
            if not isinstance(value, bool):
                raise JobError(f"{value!r}", where=where, expected="true or false, without quotes")
            return value
        case "number":
            return plain_number(where, value)
        case "numbers":
            return tuple(plain_number(f"{where}[{place}]", entry) for place, entry in enumerate(_list(where, value), 1))
        case "count":
            return _count(where, value)
        case "date":
            return _date(where, value)
        case _:
            return value


def quantity(value: object, dimension: str, where: str, *, basis: str = "") -> Stated:
    """Return a dimensioned value, with the particular trap of a percentage written as a bare number."""
    if dimension == "fraction" and isinstance(value, (int, float)) and not isinstance(value, bool):
        shown = str(value)
        percent = f'"{100 * value:g} %" or ' if abs(value) < 1 else ""
        raise UnitError(
            f"{shown} may be a percentage or a fraction", where=where, expected='a percentage as text, such as "9.4 %"',
            how=f'write {percent}"{shown} %"',
        )
    return parse(value, dimension, where, basis=basis)


def plain_number(where: str, value: Any) -> float:
    """Return a bare number; text is refused, even when it looks like one."""
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        how = "write it without quotes" if isinstance(value, str) else ""
        raise JobError(f"{value!r}", where=where, expected="a bare number", how=how)
    try:
        number = float(value)
    except OverflowError:
        number = math.inf
    if not math.isfinite(number):
        raise JobError(f"{value!r}"[:40], where=where, expected="a finite number")
    return number


def _count(where: str, value: Any) -> int:
    if isinstance(value, bool) or not isinstance(value, int):
        raise JobError(f"{value!r}", where=where, expected="a whole number, without quotes")
    if not 1 <= value <= 1000:
        raise JobError(f"{value}", where=where, expected="a whole number from 1 to 1000")
    return value


def _text(where: str, value: Any) -> str:
    if not isinstance(value, str):
        raise JobError(f"{value!r}", where=where, expected="text in quotes")
    return value


def _date(where: str, value: Any) -> dt.date:
    if isinstance(value, dt.datetime):
        return value.date()
    if not isinstance(value, dt.date):
        raise JobError(f"{value!r}", where=where, expected="a date without quotes", how="for example date = 2026-10-14")
    return value


def _list(where: str, value: Any) -> list[Any]:
    if not isinstance(value, list) or not value:
        raise JobError(f"{value!r}", where=where, expected="a list in square brackets")
    return value


def _names(where: str, value: Any) -> dict[str, str]:
    """Read [readings.columns] and [readings.units]: canonical column name to text."""
    if not isinstance(value, dict):
        raise JobError(f"{value!r}", where=where, expected="a table, such as [readings.columns]")
    for name, text in value.items():
        if name not in COLUMNS:
            guess = nearest(name, COLUMNS)
            raise JobError(
                f"unknown column {name!r}", where=where, expected=f"one of {', '.join(COLUMNS)}",
                how=f"perhaps {guess}" if guess else "",
            )
        _text(f"{where} {name}", text)
    return dict(value)


def _of_choice(where: str, key: Key, value: Any) -> str:
    if value in key.later:
        raise JobError(
            f"{value!r} is not available in this version", where=where, expected=" or ".join(f'"{c}"' for c in key.choices)
        )
    if not isinstance(value, str) or value not in key.choices:
        guess = nearest(value, key.choices) if isinstance(value, str) else ""
        raise JobError(
            f"{value!r}", where=where, expected="one of " + ", ".join(f'"{choice}"' for choice in key.choices),
            how=f'perhaps "{guess}"' if guess else "",
        )
    return value
