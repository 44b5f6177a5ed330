"""[wall_effects]: the wall-effect factor from velocities measured near the wall, in place of the default."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from pathlib import Path

from traverse import tables
from traverse.errors import JobError, ReadingError
from traverse.importers._document import Document
from traverse.importers._records import Record
from traverse.importers._records import Table as ReadingTable
from traverse.importers._schema import Table
from traverse.model import Finding, Layout, Plane, Run, Source
from traverse.physics import wall_effects
from traverse.physics.wall_effects import Sector, Worked
from traverse.units import UNITS, parse

QUARTER = 0.25 * 0.0254
SOURCE = "EPA Method 2H, 8.2, 8.7, 12.2 to 12.6"


# How a table of readings beside the job is read.
ReadRows = Callable[[Path, str], ReadingTable]


def measured(
    document: Document, plane: Plane, layout: Layout, runs: Sequence[Run], system: str, rows: ReadRows
) -> tuple[float, str, tuple[Finding, ...], Source]:
    """Return the factor to four decimals, what it is from, the findings, and the file it was read from.

    Raises
    ------
    JobError
        Where the section, the layout or the file do not allow a measured factor.
    ReadingError
        For a wall point that belongs to no exterior sector or lies at no step from the wall.
    """
    table = document.table("wall_effects")
    example = 'for example file = "wall.csv", with columns line, point, depth, differential_pressure'
    table.need("file", "the readings near the wall", example)
    kind = table.text("kind") or "partial"
    rules = tables.load("wall_effects")
    points = _refuse_section(plane, layout, rules)
    run = _run(table, runs)
    name = str(table.text("file"))
    read = rows(document.beside(name), name)
    step = parse(rules["step"][system], "length").value
    radius = plane.section.width / 2.0
    farthest = parse(rules["farthest_last"], "length").value if kind == "complete" else math.inf
    last = wall_effects.last_step(radius, points, step, farthest)
    speed = _speeds(layout, run)
    sectors = _sectors([record for records in read.runs.values() for record in records], layout, speed, run, (radius, points, step, last))
    _refuse_counts(sectors, kind, rules, step, last)
    near = parse(rules["serve_both"], "length").value
    worked = {label: wall_effects.sector(sector, radius, points, step, last, near) for label, sector in sectors.items()}
    for label, one in worked.items():
        if not math.isfinite(one.velocity):
            place = UNITS["in"].from_si(one.remainder_distance)
            what = f"no reading at {place:.2f} in from the wall in the sector of {label}"
            raise JobError(what, where=name, expected="the point of the remainder")
    value = wall_effects.factor(
        [sectors[label].exterior for label in sectors], [worked[label].velocity for label in sectors], list(speed.values())
    )
    factor, said = _floored(value, kind, rules)
    text = f"{SOURCE}: {kind} traverse of run {run.name} ({name}), {value:.4f}{said}"
    return factor, text, (*_findings(worked, sectors, text, step, name), *read.findings), read.source


def _refuse_section(plane: Plane, layout: Layout, rules: Mapping[str, object]) -> int:
    """Return the number of points on a diameter, or say why there can be no measured factor."""
    least = parse(str(rules["least_diameter"]), "length")
    if plane.section.shape != "round" or plane.section.width < least.value * (1 - 1e-9):
        raise JobError(plane.section.words, where="[wall_effects]", expected=f"a round section of at least {least.text}")
    counts = [layout.line.count(name) for name in layout.lines]
    if layout.rule != "equal-area" or len(counts) != 2 or len(set(counts)) != 1 or layout.size < int(str(rules["least_points"])):
        raise JobError(
            f"{layout.title}, {len(counts)} lines, {layout.size} points", where="[wall_effects]",
            expected=f"two diameters of equal-area points, at least {rules['least_points']} in all",
        )
    return counts[0]


def _run(table: Table, runs: Sequence[Run]) -> Run:
    name = table.text("run")
    found = next((run for run in runs if name in (None, run.name)), None)
    if found is None:
        raise JobError(f"run {name!r}", where=table.where("run"), expected=f"one of {', '.join(run.name for run in runs)}")
    return found


def _speeds(layout: Layout, run: Run) -> dict[str, float]:
    """Return a number that goes with the velocity at every point: the root of pressure times temperature (eq. 2G-6, yaw 0)."""
    found = {}
    for i, label in enumerate(layout.labels()):
        pressure = float(run.readings.differential_pressure[i])
        if not pressure > 0.0:
            what = f"no positive reading at {label} of run {run.name}"
            raise ReadingError(what, where="[wall_effects]", expected="all Method 1 points read")
        found[label] = math.sqrt(pressure * float(run.readings.temperature[i]))
    return found


def _sectors(
    records: Sequence[Record], layout: Layout, speed: Mapping[str, float], run: Run, geometry: tuple[float, int, float, int]
) -> dict[str, Sector]:
    """Return the readings near the wall by the label of their sector's exterior point."""
    radius, points, step, last = geometry
    exterior = [f"{name}{point}" for name in layout.lines for point in (1, points)]
    place = wall_effects.remainder_distance(radius, points, last * step)
    steps: dict[str, dict[int, float]] = {label: {} for label in exterior}
    rest: dict[str, float] = {}
    for record in records:
        label = f"{record.line}{record.point}"
        if label not in exterior:
            raise ReadingError(f"a wall point of {label}", where=record.where, expected=f"an outermost point: {', '.join(exterior)}")
        depth, pressure = record.si("depth"), record.si("differential_pressure")
        if not math.isfinite(pressure):
            continue  # not measured: the next point farther from the wall stands in for it
        if pressure < 0 or not math.isfinite(depth):
            what = "a wall point without its distance, or below zero"
            raise ReadingError(what, where=record.where, expected="depth from the wall, and a pressure")
        warm = record.si("temperature")
        index = layout.labels().index(label)
        value = math.sqrt(pressure * (warm if math.isfinite(warm) else float(run.readings.temperature[index])))
        number = round(depth / step)
        # The remainder may be marked to a quarter of an inch, and lie near the last step.
        near = abs(depth - place) <= QUARTER * (1 + 1e-9)
        if near and number >= last and abs(depth - place) <= abs(depth - number * step) + 1e-9:
            rest[label] = value
        elif abs(depth - number * step) <= 0.05 * step and 1 <= number <= last:
            steps[label][number] = value
        else:
            raise ReadingError(
                f"a wall point at {UNITS['in'].from_si(depth):.2f} in", where=record.where,
                expected=f"whole steps of {UNITS['in'].from_si(step):.3g} in up to {last}, or {UNITS['in'].from_si(place):.2f} in "
                "(to a quarter inch)",
            )
    return {label: Sector(exterior=speed[label], steps=steps[label], remainder=rest.get(label)) for label in exterior}


def _refuse_counts(sectors: Mapping[str, Sector], kind: str, rules: Mapping[str, object], step: float, last: int) -> None:
    total = sum(len(sector.steps) + (sector.remainder is not None) for sector in sectors.values())
    least = int(str(rules["least_wall_points"]))
    if total < least:
        raise JobError(f"{total} wall points", where="[wall_effects] file", expected=f"at least {least}, in all four sectors")
    first = parse(str(rules["farthest_first"]), "length").value
    for label, sector in sectors.items():
        if not sector.steps:
            what = f"no wall point in the sector of {label}"
            raise JobError(what, where="[wall_effects] file", expected="one at least in each sector")
        if kind == "complete":
            start = min(sector.steps)
            if start * step > first * (1 + 1e-9):
                what = f"the first wall point of {label} at step {start}"
                raise JobError(what, where="[wall_effects] file", expected="no farther than 4 in")
            lacking = [number for number in range(start, last + 1) if number not in sector.steps]
            if lacking:
                numbers = ", ".join(map(str, lacking))
                raise JobError(
                    f"steps {numbers} of {label} not measured", where="[wall_effects] kind",
                    expected='every step in a complete traverse, or kind = "partial"',
                )


def _floored(value: float, kind: str, rules: Mapping[str, object]) -> tuple[float, str]:
    floors = rules["floor"]
    assert isinstance(floors, Mapping), "a table of floors"
    floor = float(floors[kind])
    if round(value, 4) > 1.0:
        raise JobError(
            f"a factor of {value:.4f}", where="[wall_effects]", expected="a factor of at most 1: a wall does not speed the flow up",
            how="check the readings near the wall",
        )
    if round(value, 4) < floor:
        return floor, f", raised to the floor of a {kind} traverse, {floor:.4f}"
    return round(value, 4), ""


def _findings(
    worked: Mapping[str, Worked], sectors: Mapping[str, Sector], text: str, step: float, name: str
) -> tuple[Finding, ...]:
    """Say what each sector gave and which steps were not measured."""
    found = [Finding(
        level="attention", topic="wall factor", setting="[wall_effects]", where=name, message=f"wall factor from {text}.",
    )]
    for label, one in worked.items():
        numbers = ", ".join(map(str, one.filled))
        missing = f"; steps {numbers} not measured (NM), taken from the next point farther from the wall" if numbers else ""
        change = 100 * (one.velocity / sectors[label].exterior - 1)
        found.append(Finding(
            level="note", topic="wall factor", where=name, setting="[wall_effects]",
            message=f"sector of {label}: {one.last} steps of {UNITS['in'].from_si(step):.3g} in and a point at "
            f"{UNITS['in'].from_si(one.remainder_distance):.2f} in; its velocity {change:+.2f} % against its Method 1 point{missing}.",
        ))
    return tuple(found)
