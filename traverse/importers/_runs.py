"""Records and conditions made into runs: a column beats [[run]], which beats the default; every filling is a finding."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from traverse.errors import JobError, ReadingError
from traverse.importers import _gas, _plane, _probe
from traverse.importers._document import Document, Override
from traverse.importers._matching import Matched, Plan, match
from traverse.importers._records import Record
from traverse.importers._records import Table as ReadingTable
from traverse.importers._schema import COLUMNS, Table
from traverse.methods import Method
from traverse.model import NULL, UNREAD, Array, Column, Conditions, Finding, Pitot, Readings, Run
from traverse.units import Stated

Flags = npt.NDArray[np.bool_]

_KEPT = tuple(name for name in COLUMNS if name not in {"run", "line", "point"})


@dataclass(slots=True)
class Filling:
    """One run while its gaps are filled. Arrays have shape (points,)."""

    run: str
    table: ReadingTable
    matched: Matched
    position: Mapping[str, int]
    findings: list[Finding] = field(default_factory=list)

    def values(self, name: str) -> Array:
        """Return the SI values of a column, NaN where nothing was recorded."""
        return np.array([record.si(name) if record is not None else math.nan for record in self.matched.records])

    def label(self, index: int) -> str:
        """Return a point's label."""
        return f"{self.matched.line[index]}{self.matched.point[index]}"

    def labels(self, flags: Flags) -> str:
        """Return the labels of the flagged points."""
        return ", ".join(self.label(int(i)) for i in np.flatnonzero(flags))

    def unread(self) -> Flags:
        """Return which points gave no usable pressure."""
        return np.array([record is None or record.status in UNREAD for record in self.matched.records])

    def note(self, topic: str, message: str, setting: str, *, attention: bool = False) -> None:
        """Record a finding of this run."""
        self.findings.append(Finding(
            level="attention" if attention else "note", topic=topic, message=message, where=f"run {self.run}", setting=setting
        ))


def build(
    document: Document, table: ReadingTable, plan: Plan, method: Method, system: str
) -> tuple[tuple[Run, ...], tuple[Finding, ...]]:
    """Return all runs of the readings, in the order of the file.

    Raises
    ------
    JobError
        If [[run]] names a run that the readings lack.
    """
    overrides = {override.name: override for override in document.runs}
    for name in overrides:
        if name not in table.runs:
            raise JobError(
                f"the readings have no run {name!r}", where="[[run]] name",
                expected=f"one of {', '.join(repr(run) for run in table.runs)}",
            )
    runs: list[Run] = []
    findings: list[Finding] = []
    for name, records in table.runs.items():
        run, found = _run(name, records, table, document, overrides.get(name), plan, method, system)
        runs.append(run)
        findings += found
    return tuple(runs), tuple(findings)


def _run(
    name: str, records: Sequence[Record], table: ReadingTable, document: Document, override: Override | None, plan: Plan,
    method: Method, system: str,
) -> tuple[Run, list[Finding]]:
    over: Mapping[str, Table] = override.tables if override else {}
    gas, gas_findings = _gas.build(_gas.merge(document.table("gas"), over.get("gas")))
    pitot, pitot_findings = _probe.build(_probe.merge(document.table("pitot"), over.get("pitot")), method, document.beside)
    recorded = {column for column in ("temperature", "static") if any(math.isfinite(r.si(column)) for r in records)}
    conditions, state_findings = _plane.conditions(
        _plane.merge_conditions(document.table("conditions"), over.get("conditions")), static_column="static" in recorded,
        epa=system if method.constants else "",
    )
    matched = match(name, records, plan)
    filling = Filling(name, table, matched, {record.where: place for place, record in enumerate(records)})
    filling.findings += [*gas_findings, *pitot_findings, *state_findings, *matched.findings]
    for column in sorted(recorded & set(over["conditions"].values)) if "conditions" in over else ():
        filling.note(column, f"{column} of [[run]] is not used: the readings' column counts", f"[readings.columns] {column}")
    readings = _readings(filling, conditions, document.table("readings").stated("meter_density"), pitot)
    return Run(name=name, conditions=conditions, gas=gas, pitot=pitot, readings=readings), filling.findings


def _readings(filling: Filling, conditions: Conditions, meter_density: Stated | None, pitot: Pitot) -> Readings:
    matched = filling.matched
    pressure = filling.values("differential_pressure")
    status = tuple(record.status if record is not None else "missing" for record in matched.records)
    pressure[[word in NULL for word in status]] = np.nan
    columns = _columns(filling)
    error, root = filling.values("standard_error"), filling.values("mean_root_differential_pressure")
    return Readings(
        differential_pressure=pressure, temperature=_temperature(filling, conditions, columns),
        static=_static(filling, conditions, columns), yaw=_yaw(filling, pitot, columns), pitch=_angle(filling, "pitch"),
        pitch_pressure=_pitch_pressure(filling, pitot, columns),
        status=status, reason=tuple(record.reason if record is not None else "" for record in matched.records),
        line=matched.line, point=matched.point, columns=columns,
        meter_density=meter_density if "velocity" in columns else None,
        standard_error=error if np.isfinite(error).any() else None, mean_root=root if np.isfinite(root).any() else None,
    )


def _columns(filling: Filling) -> dict[str, Column]:
    """Return the columns as recorded, in the plan's order; a column without any entry in this run is none."""
    found: dict[str, Column] = {}
    for name in _KEPT:
        head = filling.table.heads.get(name)
        if head is None:
            continue
        records = filling.matched.records
        number = np.array([r.number.get(name, math.nan) if r is not None else math.nan for r in records])
        text = tuple(r.text.get(name, "") if r is not None else "" for r in records)
        empty = not np.isfinite(number).any() if COLUMNS[name] else not any(text)
        if empty and name not in {"differential_pressure", "velocity"}:
            continue
        found[name] = Column(
            name=name, header=head.text, unit=head.unit, number=number, text=text,
            where=tuple(r.where if r is not None else "" for r in records),
        )
    return found


def _temperature(filling: Filling, conditions: Conditions, columns: Mapping[str, Column]) -> Array:
    default = conditions.temperature
    if "temperature" not in columns:
        if default is None:
            raise JobError(
                "no temperature", where=f"run {filling.run}", expected="the temperature of the gas at the plane",
                how='[conditions] temperature = "…", or a temperature column in the readings',
            )
        return np.full(len(filling.matched.records), default.value)
    values = _carried(filling, filling.values("temperature"))
    return _filled(filling, "temperature", values, default)


def _carried(filling: Filling, values: Array) -> Array:
    """Carry a temperature that stands once at the head of each line to the rest of the line."""
    lines: dict[str, list[int]] = {}
    for index, record in enumerate(filling.matched.records):
        if record is not None:
            lines.setdefault(filling.matched.line[index], []).append(index)
    carried = values.copy()
    for indices in lines.values():
        order = sorted(indices, key=lambda i: filling.position.get(filling.matched.records[i].where, 0))  # type: ignore[union-attr]
        first, rest = order[0], order[1:]
        if not math.isfinite(values[first]) or np.isfinite(values[rest]).any():
            return values
        carried[rest] = values[first]
    if np.isfinite(carried).sum() == np.isfinite(values).sum():
        return values
    filling.note(
        "temperature", "the temperature at the head of each line was taken for the rest of the line",
        "[readings.columns] temperature", attention=True,
    )
    return carried


def _static(filling: Filling, conditions: Conditions, columns: Mapping[str, Column]) -> Array:
    if "static" not in columns:
        return np.full(len(filling.matched.records), conditions.static.value if conditions.static else 0.0)
    return _filled(filling, "static", filling.values("static"), conditions.static)


def _filled(filling: Filling, name: str, values: Array, default: Stated | None) -> Array:
    """Fill blanks with the default; without one, only points that do not count may be blank."""
    blank = ~np.isfinite(values)
    if not blank.any():
        return values
    if default is not None:
        filling.note(
            name, f"blank {name} at {filling.labels(blank)} taken from [conditions]: {default.text}", f"[conditions] {name}",
            attention=True,
        )
        return np.where(blank, default.value, values)
    needed = blank & ~filling.unread()
    if needed.any():
        record = filling.matched.records[int(np.flatnonzero(needed)[0])]
        raise ReadingError(
            f"no {name} at {filling.labels(needed)} of run {filling.run}", where=record.where if record else "",
            expected=f"a {name} at every point",
            how=f'give [conditions] {name}, or say [readings] blank = "as above" if a blank means the value above it',
        )
    # The remaining blanks belong to points that were not read: the mean of the others keeps the mean as it is.
    mean = float(np.mean(values[~blank]))
    message = f"blank {name} at {filling.labels(blank)}, not read, taken as the mean of the others"
    filling.note(name, message, f"[conditions] {name}")
    return np.where(blank, mean, values)


def _angle(filling: Filling, name: str) -> Array:
    values = filling.values(name)
    recorded = np.isfinite(values)
    if not recorded.any():
        return np.zeros(len(values))
    needed = ~recorded & ~filling.unread()
    if needed.any():
        record = filling.matched.records[int(np.flatnonzero(needed)[0])]
        raise ReadingError(
            f"no {name} angle at {filling.labels(needed)} of run {filling.run}", where=record.where if record else "",
            expected=f"a {name} angle at every point, 0 where it was 0",
        )
    return np.where(recorded, values, 0.0)


def _yaw(filling: Filling, pitot: Pitot, columns: Mapping[str, Column]) -> Array:
    """Return the yaw angles counted from the axis: as read less the offsets of the probe (EPA Method 2G, 8.9.4.2)."""
    values = _angle(filling, "yaw")
    if not pitot.yaw_offset:
        return values
    offset = sum(stated.value for stated in pitot.yaw_offset)
    texts = " and ".join(stated.text for stated in pitot.yaw_offset)
    if "yaw" not in columns:
        raise JobError(
            f"a yaw offset of {texts}, and no yaw angle of run {filling.run}", where="[pitot] yaw_offset",
            expected="a yaw column in the readings",
        )
    filling.note("yaw", f"{texts} taken off every yaw angle", "[pitot] yaw_offset")
    return np.where(filling.unread() & ~np.isfinite(filling.values("yaw")), values, values - offset)


def _pitch_pressure(filling: Filling, pitot: Pitot, columns: Mapping[str, Column]) -> Array | None:
    """Return P4 - P5 of a three-dimensional probe; None where the readings have none, or the pitch was read itself."""
    if pitot.directional is None:
        return None
    if "pitch_pressure" not in columns:
        if "pitch" not in columns:
            raise ReadingError(
                f"no pitch of run {filling.run}", where=filling.table.source.name,
                expected="a column pitch_pressure (P4-P5), or pitch, beside the differential pressure (P1-P2)",
            )
        return None
    if "pitch" in columns:
        filling.note("pitch", "the pitch column is not used: pitch_pressure counts", "[readings.columns] pitch_pressure")
    values = filling.values("pitch_pressure")
    needed = ~np.isfinite(values) & ~filling.unread()
    if needed.any():
        record = filling.matched.records[int(np.flatnonzero(needed)[0])]
        raise ReadingError(
            f"no pitch_pressure at {filling.labels(needed)} of run {filling.run}", where=record.where if record else "",
            expected="P4-P5 at every point, 0 where it was 0",
        )
    return values
