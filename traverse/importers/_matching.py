"""Which reading belongs to which point of the plan: by label, by depth, or by the stated order."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse import layouts
from traverse.errors import ReadingError
from traverse.importers._labels import bare_line, point_number
from traverse.importers._records import Record
from traverse.importers._repeats import mean_of
from traverse.model import Array, Finding, Layout

Places = npt.NDArray[np.intp]


@dataclass(frozen=True, slots=True, kw_only=True)
class Matched:
    """One run's records in the order of the plan's points, None where the file has no row for a point."""

    records: tuple[Record | None, ...]
    line: tuple[str, ...]
    point: tuple[int, ...]
    findings: tuple[Finding, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """The plan and how readings without point numbers run through it. ``length`` [m] is that of a line, in a section of ``shape``."""

    layout: Layout
    length: float
    order: str | None
    repeats: bool
    shape: str = ""

    def indices(self, line: str) -> list[int]:
        """Return the places of a line's points in the plan."""
        return [i for i, name in enumerate(self.layout.line) if name == line]


@dataclass(slots=True, kw_only=True)
class _Group:
    """The records of one line. ``label`` is the file's name of it, empty where it has none."""

    label: str
    records: list[Record]
    line: str = ""


def match(run: str, records: Sequence[Record], plan: Plan) -> Matched:
    """Match the records of one run with the plan.

    Raises
    ------
    ReadingError
        If the counts differ (naming both), a point stands twice, a label is not in the plan, or a depth fits no point.
    """
    findings: list[Finding] = []
    groups = _groups(run, records, plan, findings)
    _name_lines(run, groups, records, plan, findings)
    found: dict[int, list[Record]] = {}
    number: dict[int, int] = {}
    numbered = _renumbered(run, groups, records, plan, findings)
    for group in groups:
        for index, record, label in _match_line(run, group, numbered.get(id(group)), records, plan, findings):
            found.setdefault(index, []).append(record)
            number[index] = label
    single = _single(run, found, plan, findings)
    _absent(run, single, records, plan, findings)
    labels = {group.line: group.label or group.line for group in groups}
    return Matched(
        records=tuple(single.get(i) for i in range(plan.layout.size)),
        line=tuple(labels.get(line, line) for line in plan.layout.line),
        point=tuple(number.get(i, point) for i, point in enumerate(plan.layout.point)), findings=tuple(findings),
    )


def _count_error(run: str, records: Sequence[Record], plan: Plan, detail: str = "") -> ReadingError:
    count = len(records)
    where = f'run "{run}"' + (f", {detail}" if detail else "")
    return ReadingError(
        f"{count} reading{'s' if count != 1 else ''} for {plan.layout.size} points of the plan", where=where,
        expected="a reading for each point, in the plan's lines and points",
        how="correct [layout] lines and points, or write the word missing for a point that was not read",
    )


def _groups(run: str, records: Sequence[Record], plan: Plan, findings: list[Finding]) -> list[_Group]:
    """Return the records line by line, in order of first appearance."""
    if any(record.line for record in records):
        by_label: dict[str, _Group] = {}
        for record in records:
            by_label.setdefault(record.line, _Group(label=record.line, records=[])).records.append(record)
        return list(by_label.values())
    lines = plan.layout.lines
    if len(lines) == 1:
        return [_Group(label="", records=list(records), line=lines[0])]
    if all(record.point for record in records):
        return _by_restart(run, records, plan, findings)
    if len(records) != plan.layout.size:
        raise _count_error(run, records, plan)
    groups, start = [], 0
    for line in lines:
        count = len(plan.indices(line))
        groups.append(_Group(label="", records=list(records[start:start + count]), line=line))
        start += count
    return groups


def _by_restart(run: str, records: Sequence[Record], plan: Plan, findings: list[Finding]) -> list[_Group]:
    """Lines without a name: counted on through the plan (1 to 24), or a new one wherever the numbers begin again."""
    numbers = [point_number(record) for record in records]
    lines = plan.layout.lines
    if max(numbers) > max(len(plan.indices(line)) for line in lines):
        if max(numbers) > plan.layout.size:
            raise _count_error(run, records, plan, f"point {max(numbers)}")
        bounds = np.cumsum([len(plan.indices(line)) for line in lines])
        groups = [_Group(label="", records=[], line=line) for line in lines]
        for record, number in zip(records, numbers, strict=True):
            groups[int(np.searchsorted(bounds, number))].records.append(record)
        return [group for group in groups if group.records]
    groups = []
    for place, record in enumerate(records):
        if place == 0 or (numbers[place] < numbers[place - 1]):
            groups.append(_Group(label="", records=[]))
        groups[-1].records.append(record)
    if len(groups) != len(lines):
        raise _count_error(run, records, plan, f"{len(groups)} times numbered from the beginning, {len(lines)} lines planned")
    for group, line in zip(groups, lines, strict=True):
        group.line = line
    findings.append(Finding(
        level="note", topic="labels", where=f"run {run}", setting="[readings.columns] line",
        message="a new line was taken to begin where the point numbers begin again",
    ))
    return groups


def _name_lines(run: str, groups: list[_Group], records: Sequence[Record], plan: Plan, findings: list[Finding]) -> None:
    """Give each group its line of the plan: by name where all names are the plan's, else in order of appearance."""
    if all(group.line for group in groups):
        return
    lines = plan.layout.lines
    named = {bare_line(line).casefold(): line for line in lines}
    if len(named) == len(lines) and all(bare_line(group.label).casefold() in named for group in groups):
        for group in groups:
            group.line = named[bare_line(group.label).casefold()]
        if len({group.line for group in groups}) == len(groups):
            return
    if len(groups) != len(lines):
        raise _count_error(run, records, plan, f"lines {', '.join(group.label for group in groups)} for {', '.join(lines)}")
    for group, line in zip(groups, lines, strict=True):
        group.line = line
    said = ", ".join(f"{group.label} is {group.line}" for group in groups)
    labels = [bare_line(group.label) for group in groups]
    natural = sorted(labels, key=lambda label: (len(label), label))
    known = any(label.casefold() in named for label in labels)
    findings.append(Finding(
        level="attention" if labels != natural or known else "note", topic="labels", where=f"run {run}",
        setting="[layout] names", message=f"lines of the file in order of appearance: {said} of the plan",
    ))


def _renumbered(
    run: str, groups: Sequence[_Group], records: Sequence[Record], plan: Plan, findings: list[Finding]
) -> dict[int, list[int]]:
    """Return the point numbers of each group counted anew on its line; groups without numbers are left out."""
    found: dict[int, list[int]] = {}
    offset, moved = 0, False
    order = {line: place for place, line in enumerate(plan.layout.lines)}
    for group in groups:
        count = len(plan.indices(group.line))
        if any(record.point for record in group.records):
            numbers = [point_number(record) for record in group.records]
            before = offset if group.label else sum(len(plan.indices(line)) for line in plan.layout.lines[:order[group.line]])
            if max(numbers) > count and min(numbers) > before and max(numbers) <= before + count:
                numbers = [number - before for number in numbers]
                moved = True
            if max(numbers) > count:
                detail = f"line {group.label or group.line}: point {max(numbers)} on a line of {count}"
                raise _count_error(run, records, plan, detail)
            found[id(group)] = numbers
        offset += count
    if moved:
        findings.append(Finding(
            level="note", topic="labels", where=f"run {run}", setting="[readings.columns] point",
            message="points numbered through all lines were counted anew on each line",
        ))
    return found


def _match_line(
    run: str, group: _Group, numbers: list[int] | None, records: Sequence[Record], plan: Plan, findings: list[Finding]
) -> list[tuple[int, Record, int]]:
    """Return (place in the plan, record, label) for the records of one line."""
    indices = plan.indices(group.line)
    depths = [record.si("depth") for record in group.records]
    if np.isfinite(depths).all():
        return _by_depth(run, group, numbers, records, plan, findings)
    if np.isfinite(depths).any():
        place = group.records[int(np.argmin(np.isfinite(depths)))].where
        raise ReadingError("no depth", where=place, expected="a depth in every row, or in none")
    planned = {plan.layout.point[i]: i for i in indices}
    if numbers is not None:
        return [(planned[number], record, number) for record, number in zip(group.records, numbers, strict=True)]
    if len(group.records) != len(indices):
        raise _count_error(run, records, plan, f"line {group.label or group.line}: {len(group.records)} for {len(indices)}")
    backward = _backward(group.line, plan)
    if plan.order is None and len(indices) > 1:
        findings.append(Finding(
            level="attention", topic="order", where=f"run {run}", setting="[layout] order",
            message='readings without point numbers were taken from the port inward, order = "inward"',
        ))
    places = indices[::-1] if backward else indices
    return [(i, record, plan.layout.point[i]) for i, record in zip(places, group.records, strict=True)]


def _backward(line: str, plan: Plan) -> bool:
    place = plan.layout.lines.index(line)
    return plan.order == "outward" or (plan.order == "alternate" and place % 2 == 1)


def _by_depth(
    run: str, group: _Group, numbers: list[int] | None, records: Sequence[Record], plan: Plan, findings: list[Finding]
) -> list[tuple[int, Record, int]]:
    """Match by depth: by rank when the counts agree, else to the nearest point."""
    indices = sorted(plan.indices(group.line), key=lambda i: plan.layout.depth[i])
    planned = plan.layout.depth[indices]
    depths = np.array([record.si("depth") for record in group.records])
    distinct = len(set(np.round(depths, 9).tolist()))
    if distinct > len(indices):
        raise _count_error(run, records, plan, f"line {group.label or group.line}: {distinct} depths for {len(indices)} points")
    if len(depths) == len(indices):
        ranks = np.empty(len(depths), dtype=np.intp)
        ranks[np.argsort(depths, kind="stable")] = np.arange(len(depths))
    else:
        ranks = np.argmin(np.abs(planned[None, :] - depths[:, None]), axis=1)
    departure = depths - planned[ranks]
    _check_depths(run, group, departure, ranks, planned, plan, findings)
    found = []
    for place, (rank, record) in enumerate(zip(ranks, group.records, strict=True)):
        index = indices[int(rank)]
        found.append((index, record, numbers[place] if numbers else plan.layout.point[index]))
    if numbers and any(label != plan.layout.point[index] for index, _, label in found):
        findings.append(Finding(
            level="attention", topic="depths", where=f"run {run}, line {group.label or group.line}",
            setting="[readings.columns] depth", message="point numbers do not run as the plan's do; the depths set the order",
        ))
    return found


def _check_depths(
    run: str, group: _Group, departure: Array, ranks: Places, planned: Array, plan: Plan,
    findings: list[Finding],
) -> None:
    """Raise where a depth is nearer to another point of the plan, note where it departs from the planned one."""
    worst = int(np.argmax(np.abs(departure)))
    unique = np.unique(planned)
    tolerance = max(0.003, 0.01 * plan.length)
    for place, (rank, off) in enumerate(zip(ranks, departure, strict=True)):
        others = np.abs(unique - planned[rank])
        gap = float(np.min(others[others > 1e-9], initial=plan.length))
        if abs(off) > max(gap / 2.0, 1e-6):
            record = group.records[place]
            raise ReadingError(
                f"depth {record.text.get('depth', '')!r} lies {abs(off) * 1000:.1f} mm from the planned "
                f"{planned[rank] * 1000:.1f} mm", where=record.where,
                expected="depths from the inner wall, within half a spacing of the plan's",
                how=_other_rule(group, departure + planned[ranks], plan)
                or 'if the points were placed otherwise, give them: [layout] rule = "custom"',
            )
    other = _other_rule(group, departure + planned[ranks], plan)
    if other:
        findings.append(Finding(
            level="attention", topic="depths", where=group.records[worst].where, setting="[layout] rule",
            message=f"run {run}: {other}, not of the plan's {plan.layout.rule}",
        ))
    if abs(departure[worst]) > tolerance:
        findings.append(Finding(
            level="attention", topic="depths", where=group.records[worst].where, setting="[layout]",
            message=f"depths of run {run} depart from the plan by up to {abs(departure[worst]) * 1000:.1f} mm "
            f"(allowed {tolerance * 1000:.1f} mm)",
        ))


def _other_rule(group: _Group, depths: Array, plan: Plan) -> str:
    """Return which other rule the depths of a line follow, where they do and the plan's they do not; empty otherwise."""
    if plan.shape not in ("round", "rectangle") or len(depths) < 3:
        return ""
    matches = layouts.recognise(depths, plan.length, shape=plan.shape, claimed=plan.layout.rule)
    if not matches or not matches[0].fits or plan.layout.rule in (matches[0].rule, *matches[0].also, "custom"):
        return ""
    best = matches[0]
    return f"the depths of line {group.label or group.line} are those of {best.title}, {best.points} points" + (
        f" ({best.note})" if best.note else "")


def _single(run: str, found: dict[int, list[Record]], plan: Plan, findings: list[Finding]) -> dict[int, Record]:
    """Return one record for each point; points that stand twice are averaged when the job says so."""
    single: dict[int, Record] = {}
    repeated = 0
    for index, records in found.items():
        if len(records) == 1:
            single[index] = records[0]
            continue
        if not plan.repeats:
            label = f"{plan.layout.line[index]}{plan.layout.point[index]}"
            raise ReadingError(
                f"point {label} of run \"{run}\" stands {len(records)} times (also {records[0].where})", where=records[1].where,
                expected="each point once", how='if they are repeated readings, say [readings] repeats = "mean"',
            )
        single[index] = mean_of(records)
        repeated += 1
    if repeated:
        findings.append(Finding(
            level="note", topic="repeats", where=f"run {run}", setting="[readings] repeats",
            message=f"{repeated} points were read more than once; the square of the mean root was taken",
        ))
    return single


def _absent(
    run: str, single: dict[int, Record], records: Sequence[Record], plan: Plan, findings: list[Finding]
) -> None:
    """Note the points of the plan without a row; rows lacking at the end of every line are another plan."""
    layout = plan.layout
    absent = [i for i in range(layout.size) if i not in single]
    if not absent:
        return
    ends = {line: [layout.point[i] for i in absent if layout.line[i] == line] for line in layout.lines}
    first = ends[layout.lines[0]]
    last = len(plan.indices(layout.lines[0]))
    if len(layout.lines) > 1 and first and first[-1] == last and all(points == first for points in ends.values()) \
            and first == list(range(first[0], last + 1)):
        raise _count_error(run, records, plan, f"every line lacks its points from {first[0]} on")
    names = ", ".join(f"{layout.line[i]}{layout.point[i]}" for i in absent)
    findings.append(Finding(
        level="attention", topic="readings", where=f"run {run}", setting="[readings] missing",
        message=f"no row for {names} of the plan: status missing",
    ))
