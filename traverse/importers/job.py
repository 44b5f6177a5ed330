"""The job file with its readings: tables of the document to the records of a job or of a plan."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Literal, cast

from traverse import methods
from traverse.errors import JobError
from traverse.importers import _gas, _layout, _plane, _probe, _quality, _runs, _uncertainty, _wall_effects
from traverse.importers._document import Document
from traverse.importers._labels import point_number
from traverse.importers._matching import Plan
from traverse.importers._records import Record
from traverse.importers._records import Table as ReadingTable
from traverse.methods import Method
from traverse.model import Corrections, Finding, Job, Layout, Plane, Policies, Run, Setup, Source

# How the readings of a document, and a file of custom points, are read: given by the importer of their form.
ReadReadings = Callable[[Document], ReadingTable]
ReadPoints = Callable[[Path, str], "tuple[Source, list[Record]]"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """What a job and a plan have in common."""

    document: Document
    method: Method
    units: Literal["si", "us"]
    plane: Plane
    layout: Layout
    table: ReadingTable | None
    sources: tuple[Source, ...]
    findings: tuple[Finding, ...]


def load(document: Document, readings: ReadReadings, points: ReadPoints, rows: _wall_effects.ReadRows) -> Job:
    """Return the job of a document."""
    table = readings(document)
    frame = _frame(document, table, readings, points)
    corrections, correction_findings = _plane.corrections(document.table("corrections"), frame.plane)
    runs, run_findings = _runs.build(document, table, _plan(frame), frame.method, frame.units)
    _probe.refuse_unsized(corrections, runs)
    corrections, sources, wall_findings = _wall(document, frame, runs, corrections, rows)
    return Job(
        title=_title(document), date=document.table("job").get("date"), method=frame.method.id, units=frame.units,
        plane=frame.plane, layout=frame.layout, runs=runs, reference=_plane.reference(document.table("reference")),
        quality=_quality.build(document.quality, tuple(run.name for run in runs), frame.layout),
        uncertainties=_uncertainty.build(document.uncertainty, runs),
        design=_plane.design(document.table("design"), frame.plane.section),
        corrections=corrections, policies=_policies(document),
        sources=(*_sources(frame, table), *_probe.sources(run.pitot for run in runs), *sources),
        findings=tuple(dict.fromkeys((*frame.findings, *table.findings, *correction_findings, *run_findings, *wall_findings))),
    )


def load_setup(document: Document, readings: ReadReadings, points: ReadPoints) -> Setup:
    """Return what a document says before the first reading; gas, conditions and pitot may be absent."""
    frame = _frame(document, None, readings, points)
    findings = list(frame.findings)
    pitot = gas = conditions = None
    if document.table("pitot").values:
        coefficient = any(way in document.table("pitot") for way in _probe.WAYS)
        if coefficient or (document.table("pitot").text("type") or "pitot-static") in frame.method.default_coefficients:
            pitot, found = _probe.build(document.table("pitot"), frame.method, document.beside)
            findings += found
    if document.table("gas").values:
        gas, found = _gas.build(document.table("gas"))
        findings += found
    state = document.table("conditions")
    if "barometric" in state or "altitude" in state:
        conditions, found = _plane.conditions(state, static_column=True, epa=frame.units if frame.method.constants else "")
        findings += found
    return Setup(
        title=_title(document), date=document.table("job").get("date"), method=frame.method.id, units=frame.units,
        plane=frame.plane, layout=frame.layout, pitot=pitot, gas=gas, conditions=conditions,
        design=_plane.design(document.table("design"), frame.plane.section),
        sources=(*frame.sources, *_probe.sources([pitot] if pitot else [])),
        findings=tuple(dict.fromkeys(findings)), gauge=_plane.gauge(document.table("gauge")),
    )


def _wall(
    document: Document, frame: Frame, runs: tuple[Run, ...], corrections: Corrections, rows: _wall_effects.ReadRows
) -> tuple[Corrections, tuple[Source, ...], tuple[Finding, ...]]:
    """Return the corrections with the wall factor that was measured, where the job has one."""
    asked, given = document.table("corrections").get("wall_factor") == "measured", bool(document.table("wall_effects").values)
    if not asked and not given:
        return corrections, (), ()
    if not asked:
        raise JobError("[wall_effects] without its use", where="[corrections] wall_factor", expected='wall_factor = "measured"')
    if frame.plane.section.shape != "round" or not given:
        raise JobError(
            'wall_factor = "measured"', where="[corrections] wall_factor", expected="a round section, and [wall_effects] with the readings"
        )
    factor, text, findings, source = _wall_effects.measured(
        document, frame.plane, frame.layout, runs, frame.units, rows
    )
    return replace(corrections, wall_factor=factor, wall_factor_source=text), (source,), findings


def _sources(frame: Frame, table: ReadingTable) -> tuple[Source, ...]:
    """Return every file once: a field workbook is both the job and its readings."""
    known = {source.name for source in frame.sources}
    return frame.sources if table.source.name in known else (*frame.sources, table.source)


def _title(document: Document) -> str:
    return document.table("job").text("title") or document.path.stem


def _frame(document: Document, table: ReadingTable | None, readings: ReadReadings, points: ReadPoints) -> Frame:
    head, findings = document.table("job"), list(document.findings)
    if "method" not in head:
        findings.append(Finding(
            level="note", topic="method", setting="[job] method", message='method is not stated; "exact" was taken.'
        ))
    method = methods.get(head.text("method") or "exact")
    plane, found = _plane.plane(document.table("plane"))
    findings += found
    units, found = _plane.units_system(head, plane.section)
    findings += found
    sources = [document.source]
    layout_table = document.table("layout")
    if _layout.is_custom(layout_table):
        layout, extra = _custom(document, plane, table, readings, points)
        sources += extra
    else:
        layout = _layout.build(layout_table, plane.section, method, units)
    return Frame(
        document=document, method=method, units=units, plane=plane, layout=layout, table=table, sources=tuple(sources),
        findings=tuple(findings),
    )


def _custom(
    document: Document, plane: Plane, table: ReadingTable | None, readings: ReadReadings, points: ReadPoints
) -> tuple[Layout, list[Source]]:
    """Return a layout whose points stand in the job file, in a file of points, or in the readings themselves."""
    layout_table = document.table("layout")
    stated = _layout.stated_points(layout_table)
    if stated is not None:
        return _layout.custom(layout_table, plane.section, stated), []
    name = layout_table.text("file")
    if name is not None:
        source, records = points(document.beside(name), name)
        return _layout.custom(layout_table, plane.section, _collected(records)), [source]
    if "file" not in document.table("readings"):
        raise JobError(
            "custom points, but none are given", where="[layout]",
            expected="points = [...], depths with weights and lines, file, or columns depth (or x, y) and weight in the readings",
        )
    table = table or readings(document)
    first = next(iter(table.runs.values()))
    return _layout.custom(layout_table, plane.section, _collected(first)), []


def _collected(records: list[Record] | tuple[Record, ...]) -> _layout.Points:
    """Return the points that rows of a table give."""
    found = _layout.Points()
    for record in records:
        line = record.line or "A"
        number = point_number(record) if record.point else found.line.count(line) + 1
        _layout.append(found, line, number, **{key: record.si(key) for key in ("depth", "x", "y", "weight")})
    return found


def _plan(frame: Frame) -> Plan:
    section, table = frame.plane.section, frame.document.table("layout")
    length = section.width if section.shape == "round" or table.text("along") == "width" else section.height
    return Plan(
        layout=frame.layout, length=length, order=table.text("order"),
        repeats="repeats" in frame.document.table("readings"), shape=section.shape,
    )


def _policies(document: Document) -> Policies:
    table = document.table("readings")
    return Policies(
        negative=cast("Literal['method', 'zero', 'signed', 'omit']", table.text("negative") or "method"),
        missing=cast("Literal['error', 'neighbour', 'field', 'omit']", table.text("missing") or "error"),
        below=cast("Literal['half', 'zero', 'limit']", table.text("below") or "half"),
    )
