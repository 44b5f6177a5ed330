"""Readings in the long form: a text table with one row per reading."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path

from traverse.errors import ReadingError
from traverse.importers import _cells, _grid
from traverse.importers._cells import Cell
from traverse.importers._grid import Grid, Told
from traverse.importers._labels import split_points
from traverse.importers._plane import LOOKS_ABSOLUTE
from traverse.importers._records import Head, Record, Table
from traverse.model import Finding, Source
from traverse.units import Stated, Unit

# Columns of plain numbers beside the pressure; weight and places are for custom layouts.
_PLAIN = ("depth", "x", "y", "weight", "temperature", "static", "yaw", "pitch", "pitch_pressure", "standard_error",
          "mean_root_differential_pressure")
_LABELS = ("run", "line", "point")


@dataclass(frozen=True, slots=True)
class Wanted:
    """What [readings] says about a long table."""

    told: Told = field(default_factory=Told)
    blank_as_above: bool = False
    meter_density: Stated | None = None


def read(path: Path, name: str, wanted: Wanted) -> Table:
    """Return the records of a text table, run by run.

    Parameters
    ----------
    path, name
        The file and how the job calls it.
    wanted : Wanted
        What [readings] says about it.

    Raises
    ------
    ReadingError
        Where a cell cannot be read or the file can be read in two ways; the message holds the setting that decides.
    """
    grid = _grid.read(path, name, wanted.told)
    findings = list(grid.findings)
    grid = _filled(grid, wanted, findings)
    way = _pressure_way(grid, wanted, findings)
    records = [_record(grid, place, way, wanted.meter_density) for place in range(len(grid.rows))]
    records, split = split_points(records, "line" in grid.heads)
    findings += split
    runs: dict[str, list[Record]] = {}
    for record in records:
        runs.setdefault(record.run, []).append(record)
    return Table(
        source=grid.source, heads=_heads(grid, way), runs={run: tuple(found) for run, found in runs.items()},
        findings=tuple(findings),
    )


def _filled(grid: Grid, wanted: Wanted, findings: list[Finding]) -> Grid:
    """Return the grid with blank cells taken from above: labels always, everything when the job says so."""
    names = tuple(grid.heads) if wanted.blank_as_above else ("run", "line")
    above: dict[str, str] = {}
    filled: dict[str, int] = {}
    rows = []
    for row in grid.rows:
        cells = list(row.cells)
        for name in names:
            if name not in grid.heads:
                continue
            place = grid.heads[name].place
            cells += [""] * (place + 1 - len(cells))
            if cells[place]:
                above[name] = cells[place]
            elif name in above:
                cells[place] = above[name]
                filled[name] = filled.get(name, 0) + 1
            elif name in _LABELS[:2]:
                raise ReadingError("no label, and none above it", where=grid.where(row, name), expected=f"the {name} of the row")
        rows.append(replace(row, cells=tuple(cells)))
    for name, count in filled.items():
        level = "note" if name in _LABELS else "attention"
        findings.append(Finding(
            level=level, topic="blank cells", where=grid.name, setting="[readings] blank",  # type: ignore[arg-type]
            message=f"{count} blank cells of {name} taken from the row above",
        ))
    return replace(grid, rows=tuple(rows))


def _pressure_way(grid: Grid, wanted: Wanted, findings: list[Finding]) -> str:
    """Return where the differential pressure comes from: its own column, total less static, or a velocity."""
    heads = grid.heads
    beside = [name for name in ("total", "velocity") if name in heads]
    if "differential_pressure" in heads:
        counts = f'the pressure in "{heads["differential_pressure"].text}" counts'
        findings += [
            _note("readings", grid.name, "[readings.columns]", f'column "{heads[name].text}" is not used: {counts}')
            for name in beside
        ]
        if wanted.meter_density is not None:
            findings.append(_note("readings", grid.name, "[readings] meter_density", f"meter_density is not used: {counts}"))
        return "differential_pressure"
    if "total" in heads:
        if "static" not in heads:
            raise ReadingError(
                f'a total pressure ("{heads["total"].text}") without a static pressure', where=grid.name,
                expected="a static column beside it, or a differential pressure",
            )
        findings.append(_note("readings", grid.name, "[readings.columns] differential_pressure", (
            f'differential pressure = "{heads["total"].text}" less "{heads["static"].text}"')))
        return "total"
    if "velocity" not in heads:
        raise ReadingError(
            "no column of differential pressure or velocity", where=grid.name, expected="one of them",
            how='[readings.columns] differential_pressure = "the head in the file"',
        )
    if wanted.meter_density is None:
        raise ReadingError(
            "velocities without the density the meter computed them with", where=grid.name,
            expected="the density that the meter had set",
            how='[readings] meter_density = "1.2 kg/m3" (or "0.075 lb/ft3"), as the meter\'s manual states it',
        )
    findings.append(_note("readings", grid.name, "[readings] meter_density", (
        f"pressure from the meter's velocity v and density {wanted.meter_density.text}: dp = density v |v| / 2")))
    return "velocity"


def _note(topic: str, where: str, setting: str, message: str) -> Finding:
    return Finding(level="note", topic=topic, message=message, where=where, setting=setting)


def _record(grid: Grid, place: int, way: str, meter_density: Stated | None) -> Record:
    row = grid.rows[place]
    number: dict[str, float] = {}
    text = {name: grid.cell(row, name) for name in grid.heads}
    for name in _PLAIN:
        if name in grid.heads and not (way == "total" and name == "static"):
            number[name] = _plain(text[name], grid.decimal, grid.where(row, name))
    reading = way if way != "total" else "differential_pressure"
    cell = _difference(grid, place, number) if way == "total" else _cells.read(text[way], grid.decimal, grid.where(row, way))
    if way == "total":
        text[reading] = f"{text['total']} \u2212 {text['static']}"
    if text.get("status") or text.get("reason"):
        name = "status" if "status" in grid.heads else "reason"
        cell = _cells.combine(cell, text.get("status", ""), text.get("reason", ""), grid.where(row, name))
    number[reading] = cell.number
    units = dict(grid.units)
    if way == "total":
        units[reading] = grid.units["total"]
    value = {name: _si(units[name], found) for name, found in number.items()}
    if way == "velocity":
        assert meter_density is not None
        value["differential_pressure"] = 0.5 * meter_density.value * value["velocity"] * abs(value["velocity"])
    _refuse(grid, row.line, value, text)
    return Record(
        where=f"{grid.name}:{row.line}", run=text.get("run") or "1", line=text.get("line", ""), point=text.get("point", ""),
        status=cell.status, reason=cell.reason, value=value, number=number, text=text,
    )


def _si(unit: Unit, number: float) -> float:
    return unit.to_si(number) if not math.isnan(number) else number


def _plain(text: str, decimal: str, where: str) -> float:
    """Return a number beside the pressure; a word such as OBS leaves it unread, a limit does not pass for a number."""
    if _cells.is_word(text) and not text.lstrip().startswith(("<", ">", "\u2264", "\u2265")):
        return math.nan
    return _cells.plain(text, decimal, where)


def _difference(grid: Grid, place: int, number: dict[str, float]) -> Cell:
    """Return total less static in the total's unit, and put the static pressure among the numbers."""
    row = grid.rows[place]
    cells = {name: _cells.read(grid.cell(row, name), grid.decimal, grid.where(row, name)) for name in ("total", "static")}
    number["total"], number["static"] = cells["total"].number, cells["static"].number
    for cell in cells.values():
        if cell.status not in {"read", "negative"}:
            if cell.status == "below range":
                raise ReadingError("a limit has no difference", where=f"{grid.name}:{row.line}", expected="two readings")
            return Cell(math.nan, cell.status, cell.reason)
    unit = grid.units["total"]
    value = unit.from_si(unit.to_si(cells["total"].number) - grid.units["static"].to_si(cells["static"].number))
    return Cell(value, "negative" if value < 0 else "read")


def _refuse(grid: Grid, line: int, value: Mapping[str, float], text: Mapping[str, str]) -> None:
    """Raise for a temperature below absolute zero, or a static pressure that looks absolute."""
    temperature, static = value.get("temperature", math.nan), value.get("static", math.nan)
    if temperature <= 0:
        raise ReadingError(
            f"{text['temperature']!r}", where=f'{grid.name}:{line} column "{grid.heads["temperature"].text}"',
            expected="a temperature above absolute zero",
        )
    if LOOKS_ABSOLUTE[0] <= static <= LOOKS_ABSOLUTE[1]:
        raise ReadingError(
            f"a static pressure of {text['static']!r} looks absolute",
            where=f'{grid.name}:{line} column "{grid.heads["static"].text}"', expected="gauge pressure at the plane",
            how="subtract the barometric pressure",
        )


def _heads(grid: Grid, way: str) -> dict[str, Head]:
    """Return the columns that count, with the symbols of their units."""
    heads = {
        name: Head(name=name, text=head.text, unit=grid.units[name].symbol if name in grid.units else "")
        for name, head in grid.heads.items() if name not in {"total", "velocity"} or name == way
    }
    if way == "total":
        total, static = heads["total"], heads["static"]
        heads["differential_pressure"] = Head(
            name="differential_pressure", text=f"{total.text} \u2212 {static.text}", unit=total.unit
        )
    return heads


def points(path: Path, name: str) -> tuple[Source, list[Record]]:
    """Return the rows of a file of custom points: line, point, depth or x and y, weight."""
    grid = _grid.read(path, name, Told(), frozenset({"weight", "depth", "x"}))
    records = []
    for row in grid.rows:
        number = {
            column: _plain(grid.cell(row, column), grid.decimal, grid.where(row, column))
            for column in ("depth", "x", "y", "weight") if column in grid.heads
        }
        records.append(Record(
            where=f"{name}:{row.line}", run="1", line=grid.cell(row, "line"), point=grid.cell(row, "point"), status="read",
            value={column: _si(grid.units[column], found) for column, found in number.items()}, number=number,
        ))
    return grid.source, split_points(records, "line" in grid.heads)[0]
