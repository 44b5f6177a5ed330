"""What a filled page says about its own quality: zeros, repeated readings, leak checks, the range of the gauge."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from traverse.errors import ReadingError
from traverse.importers import _field_pages
from traverse.importers._field_pages import Page
from traverse.importers._records import Record
from traverse.model import Finding
from traverse.planning.field import LEAK, LINES

# A repeated reading within this part of the first, else the traverse again: UFGS 15951N (read).
REPEAT = 0.10
# A zero that moved by more than this part of the mean reading: EPA Methods 2F and 2G, zero drift (read).
DRIFT = 0.05


def findings(
    page: Page, run: str, printed: Mapping[str, str], header: Mapping[str, Any], records: Sequence[Record]
) -> list[Finding]:
    """Return what the reader of the result must know; nothing is corrected by it."""
    found = [*_leaks(page, run, header), *_range(page, run, printed, header, records)]
    for line, values in _lines(page):
        found += _zero(page, run, line, values, printed, header, records)
        found += _repeat(page, run, line, values, records)
    return found


def stated(page: Page, header: Mapping[str, Any], printed: Mapping[str, str]) -> dict[str, Any]:
    """Return leak checks and repeated readings as [quality] has them, so that the checks decide on them."""
    found: dict[str, Any] = {key: str(header[key]).lower() for key in ("leak_before", "leak_after") if header.get(key)}
    again = {
        f"{line}{int(values['repeated_point'])}": f"{values['repeated_reading']!r} {printed['repeated_reading']}"
        for line, values in _lines(page) if {"repeated_point", "repeated_reading"} <= set(values)
    }
    return found | ({"repeats": again} if again else {})


def _finding(page: Page, topic: str, message: str, *, attention: bool) -> Finding:
    return Finding(level="attention" if attention else "note", topic=topic, message=message, where=f"{page.file} '{page.title}'")


def _leaks(page: Page, run: str, header: Mapping[str, Any]) -> Iterator[Finding]:
    for key, when in (("leak_before", "before"), ("leak_after", "after")):
        said = str(header.get(key, "") or "").lower()
        if said and said not in LEAK:
            raise ReadingError(f"leak check {when}: {said!r}", where=f"{page.file} '{page.title}'", expected=f"one of {', '.join(LEAK)}")
        if said:
            yield _finding(page, "leak check", f"run {run}: leak check {when} the run: {said}", attention=said == "failed")


def _range(
    page: Page, run: str, printed: Mapping[str, str], header: Mapping[str, Any], records: Sequence[Record]
) -> Iterator[Finding]:
    top = header.get("gauge_range")
    over = [f"{r.line}{r.point}" for r in records if top is not None and r.number.get("differential_pressure", math.nan) > top]
    if over:
        unit = printed["gauge_range"]
        yield _finding(page, "gauge", f"run {run}: above the range of the gauge ({top:g} {unit}) at {', '.join(over)}", attention=True)


def _lines(page: Page) -> Iterator[tuple[str, dict[str, float]]]:
    """Yield the zeros and repeats of every line."""
    places = {entry.key: page.find(entry.label) for entry in LINES}
    if any(place is None for place in places.values()):
        raise ReadingError(
            "no table of zeros and repeated readings", where=f"{page.file} '{page.title}'", expected="the page as it was written"
        )
    columns = {key: place[1] for key, place in places.items() if place is not None}
    row = next(place[0] for place in places.values() if place is not None)
    first = min(column for (at, column), value in page.cells.items() if at == row and value == "line")
    while (name := page.cells.get((row + 1, first))) is not None:
        row += 1
        values = {}
        for key, column in columns.items():
            value = page.cells.get((row, column))
            if value is None:
                continue
            if isinstance(value, bool) or not isinstance(value, int | float):
                raise ReadingError(f"{value!r} where a number belongs", where=page.where(row, column), expected="a number")
            values[key] = float(value)
        yield _field_pages.shown(name), values


def _zero(
    page: Page, run: str, line: str, values: Mapping[str, float], printed: Mapping[str, str], header: Mapping[str, Any],
    records: Sequence[Record],
) -> Iterator[Finding]:
    zeros = [values[key] for key in ("zero_before", "zero_after") if key in values]
    if not zeros:
        return
    unit = printed["zero_before"]
    read = [r.number["differential_pressure"] for r in records if r.line == line and math.isfinite(r.number["differential_pressure"])]
    mean = sum(read) / len(read) if read else math.nan
    division = header.get("gauge_division")
    limits = [0.5 * division] if division else []
    limits += [DRIFT * abs(mean)] if math.isfinite(mean) and mean else []
    worst = max([abs(z) for z in zeros] + ([abs(zeros[1] - zeros[0])] if len(zeros) > 1 else []))
    words = " and ".join(f"{zero:g}" for zero in zeros)
    message = f"run {run}, line {line}: zero of the gauge {words} {unit}, at most {100 * worst / abs(mean):.2g} % of the mean reading" \
        if read and mean else f"run {run}, line {line}: zero of the gauge {words} {unit}"
    yield _finding(page, "zero", message + "; nothing was taken off the readings.", attention=bool(limits) and worst > min(limits))


def _repeat(page: Page, run: str, line: str, values: Mapping[str, float], records: Sequence[Record]) -> Iterator[Finding]:
    if "repeated_reading" not in values:
        return
    if "repeated_point" not in values:
        yield _finding(page, "repeated reading", f"run {run}, line {line}: a second reading without its point", attention=True)
        return
    number = str(int(values["repeated_point"]))
    first = next((r.number["differential_pressure"] for r in records if r.line == line and r.point == number), None)
    if first is None:
        raise ReadingError(f"point {number} of line {line} read again", where=f"{page.file} '{page.title}'", expected="a point of the line")
    again = values["repeated_reading"]
    if not math.isfinite(first) or first == 0.0:
        yield _finding(page, "repeated reading", f"run {run}: {line}{number} again {again:g}, first reading none", attention=True)
        return
    apart = again / first - 1.0
    verdict = "within" if abs(apart) <= REPEAT * (1 + 1e-12) else "more than"
    yield _finding(
        page, "repeated reading", f"run {run}: {line}{number} read {first:g}, again {again:g}: {100 * apart:+.1f} %, {verdict} "
        f"{100 * REPEAT:g} % (UFGS 15951N)", attention=verdict != "within",
    )
