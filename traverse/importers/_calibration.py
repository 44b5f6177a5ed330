"""The file of a probe's calibration: a coefficient over velocity, F1 and F2 over pitch, or the pairs of an S-type tube."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from traverse import files
from traverse.errors import ReadingError
from traverse.importers import _cells, _text
from traverse.importers._document import source
from traverse.importers._text import Row, Token
from traverse.model import Array, Calibration, Curve, Directional, Finding, Pairs
from traverse.physics import probe
from traverse.units import Unit, unit

# Columns, the dimension of their unit ('' for plain numbers, None for words) and what they are called, without case and spaces.
_COLUMNS: Mapping[str, tuple[str | None, str]] = {
    "velocity": ("velocity", "velocity, v, speed, air velocity"), "coefficient": ("", "coefficient, c, cp, pitot coefficient, factor"),
    "side": (None, "side, leg"), "standard_pressure": ("pressure", "standard pressure, standard, dp standard, dp std, dpstd"),
    "s_type_pressure": ("pressure", "s type pressure, s type, dp s type, dp s, dps"),
    "pitch": ("angle", "pitch, pitch angle"), "f1": ("", "f1"), "f2": ("", "f2"),
}
_FORMS: Mapping[str, tuple[str, ...]] = {
    "curve": ("velocity", "coefficient"), "directional": ("pitch", "f1", "f2"), "runs": ("side", "standard_pressure", "s_type_pressure"),
}
# A coefficient outside these is no pitot tube's; F2 of a spherical or prismatic head lies within them as well.
PLAUSIBLE = (0.3, 1.5)
LEAST_PAIRS = 3  # a side: EPA Method 2, 10.1.3
_EXPECTED = "columns velocity and coefficient; pitch, F1 and F2; or side, standard_pressure and s_type_pressure"


def _fold(text: str) -> str:
    return re.sub(r"[\s_\-]+", "", text).lower()


_NAMES = {_fold(word): name for name, (_, words) in _COLUMNS.items() for word in (name, *words.split(","))}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Sheet:
    """The rows of a calibration file under the head they were found by."""

    name: str
    form: str
    place: Mapping[str, int]
    head: Mapping[str, str]
    units: Mapping[str, Unit]
    rows: tuple[Row, ...]
    decimal: str

    def where(self, row: Row, column: str) -> str:
        return f'{self.name}:{row.line} column "{self.head[column]}"'

    def text(self, row: Row, column: str) -> str:
        place = self.place[column]
        text = row.cells[place] if place < len(row.cells) else ""
        if _cells.is_blank(text):
            raise ReadingError("a gap", where=self.where(row, column), expected="a value in every row", how="leave the whole row out")
        return text

    def numbers(self, column: str, rows: Sequence[Row] | None = None) -> Array:
        """Return the numbers of a column in the unit of the file."""
        return np.array([
            _cells.plain(self.text(row, column), self.decimal, self.where(row, column)) for row in (self.rows if rows is None else rows)
        ])


def read(path: Path, name: str, standard_coefficient: float) -> tuple[Calibration, tuple[Finding, ...]]:
    """Return the calibration that a text table holds; its columns say which kind it is.

    Parameters
    ----------
    path, name
        The file, and how the job calls it.
    standard_coefficient : float
        Of the standard tube that an S-type tube was held against.

    Raises
    ------
    ReadingError
        With file and line, for a gap, a row that stands twice or out of order, a missing unit, and numbers that cannot be.
    """
    if not path.is_file():
        raise ReadingError("no such file", where=name, expected=f"the calibration of the probe beside the job file: {_EXPECTED}")
    text, encoding, note = files.read_text(path)
    findings = [Finding(level="note", topic="encoding", message=f"read as {encoding}; {note}", where=name)] if note else []
    sheet, ignored = _sheet(text, name)
    if ignored:
        shown = ", ".join(f'"{head}"' for head in ignored)
        findings.append(Finding(level="note", topic="calibration", message=f"columns not used: {shown}", where=name))
    origin = source(path, name, text)
    if sheet.form == "curve":
        return Calibration(source=origin, curve=_curve(sheet)), tuple(findings)
    if sheet.form == "directional":
        return Calibration(source=origin, directional=_directional(sheet)), tuple(findings)
    sides = _sides(sheet, standard_coefficient)
    return Calibration(source=origin, sides=sides, standard_coefficient=standard_coefficient), tuple(findings)


def _sheet(text: str, name: str) -> tuple[_Sheet, list[str]]:
    """Return the table that has a known head, and the heads that mean nothing."""
    for delimiter in _text.DELIMITERS:
        rows = [row for row in _text.rows(text, delimiter, name) if not row.cells[0].startswith("#")]
        for at, row in enumerate(rows):
            known = [(place, cell, _NAMES.get(_fold(_split(cell)[0]))) for place, cell in enumerate(row.cells)]
            found = {column for _, _, column in known if column}
            form = next((form for form, columns in _FORMS.items() if found >= set(columns)), "")
            if form:
                return _headed(name, form, row, rows[at + 1:], delimiter), [cell for _, cell, column in known if cell and not column]
    raise ReadingError("no row names the columns of a calibration", where=name, expected=_EXPECTED)


def _split(cell: str) -> tuple[str, str]:
    """Return name and unit of a head."""
    match = re.fullmatch(r"(.*?)\s*[\[(]([^\[\]()]*)[\])]", cell.strip(), re.S)
    return (match[1], match[2].strip()) if match else (cell, "")


def _headed(name: str, form: str, header: Row, rows: list[Row], delimiter: str) -> _Sheet:
    place: dict[str, int] = {}
    head: dict[str, str] = {}
    units: dict[str, Unit] = {}
    for at, cell in enumerate(header.cells):
        title, symbol = _split(cell)
        column = _NAMES.get(_fold(title))
        if column not in _FORMS[form]:
            continue
        where = f'{name}:{header.line} column "{cell}"'
        if column in place:
            raise ReadingError(f'columns "{head[column]}" and "{cell}" are both the {column}', where=where, expected="one of them")
        place[column], head[column] = at, cell
        dimension = _COLUMNS[column][0]
        if dimension and not symbol:
            example = {"velocity": "m/s", "angle": "deg"}.get(dimension, "Pa")
            raise ReadingError(f"no unit for the {column}", where=where, expected=f"a unit in the head, such as [{example}]")
        if dimension:
            units[column] = unit(symbol, dimension, where)
    if not rows:
        raise ReadingError("no row of numbers", where=f"{name}:{header.line}", expected="rows under the head")
    tokens = [
        Token(row.cells[at], f'{name}:{row.line} column "{head[column]}"') for row in rows for column, at in place.items()
        if at < len(row.cells) and column != "side" and _text.is_number(row.cells[at])
    ]
    try:
        decimal, _ = _text.decimal_sign(tokens, (), delimiter)
    except ReadingError as problem:
        raise ReadingError(
            problem.found, where=problem.where, expected="one decimal sign throughout", how="write decimal points"
        ) from problem
    return _Sheet(name=name, form=form, place=place, head=head, units=units, rows=tuple(rows), decimal=decimal)


def _increasing(sheet: _Sheet, column: str, values: Array) -> None:
    """Refuse a value that stands twice, or out of order."""
    for k in range(1, len(values)):
        where = sheet.where(sheet.rows[k], column)
        if np.any(values[:k] == values[k]):
            first = sheet.rows[int(np.flatnonzero(values[:k] == values[k])[0])]
            raise ReadingError(
                f"{sheet.text(sheet.rows[k], column)!r} stands in line {first.line} already", where=where, expected=f"each {column} once",
                how="average repeated calibrations before",
            )
        if values[k] < values[k - 1]:
            raise ReadingError(
                f"{sheet.text(sheet.rows[k], column)!r} after {sheet.text(sheet.rows[k - 1], column)!r}", where=where,
                expected=f"each {column} above the one before",
            )


def _coefficients(sheet: _Sheet, column: str) -> Array:
    values = sheet.numbers(column)
    for row, value in zip(sheet.rows, values, strict=True):
        if not PLAUSIBLE[0] <= value <= PLAUSIBLE[1]:
            raise ReadingError(
                f"{sheet.text(row, column)!r}", where=sheet.where(row, column),
                expected=f"a number from {PLAUSIBLE[0]:g} to {PLAUSIBLE[1]:g}, not in percent",
            )
    return values


def _curve(sheet: _Sheet) -> Curve:
    number, coefficient = sheet.numbers("velocity"), _coefficients(sheet, "coefficient")
    symbol = sheet.units["velocity"]
    for row, value in zip(sheet.rows, number, strict=True):
        if not value > 0:
            raise ReadingError(f"{sheet.text(row, 'velocity')!r}", where=sheet.where(row, "velocity"), expected="a velocity above zero")
    _increasing(sheet, "velocity", number)
    if len(number) < 2:
        raise ReadingError(
            "a curve of one point", where=f"{sheet.name}:{sheet.rows[0].line}", expected="at least two velocities",
            how=f"or one number for all: [pitot] coefficient = {coefficient[0]:g}",
        )
    velocity = np.array([symbol.to_si(value) for value in number])
    # Where the coefficient rises faster than the velocity one reading would belong to several velocities.
    steps = np.flatnonzero(np.diff(velocity / coefficient) <= 0)
    if steps.size:
        row = sheet.rows[int(steps[0]) + 1]
        raise ReadingError(
            f"a coefficient of {sheet.text(row, 'coefficient')!r} so soon after the one before", where=sheet.where(row, "coefficient"),
            expected="coefficients that rise less than the velocity does: one reading would belong to two velocities",
        )
    return Curve(velocity=velocity, coefficient=coefficient, number=number, unit=symbol)


def _directional(sheet: _Sheet) -> Directional:
    number, ratio, coefficient = sheet.numbers("pitch"), sheet.numbers("f1"), _coefficients(sheet, "f2")
    _increasing(sheet, "pitch", number)
    if len(number) < 3:
        raise ReadingError(f"{len(number)} pitch angles", where=f"{sheet.name}:{sheet.rows[-1].line}", expected="at least three")
    if number[0] > 0 or number[-1] < 0:
        raise ReadingError(
            f"pitch angles from {number[0]:g} to {number[-1]:g}", where=f"{sheet.name}:{sheet.rows[0].line}",
            expected="angles on both sides of zero",
        )
    steps = np.diff(ratio)
    wrong = np.flatnonzero(steps * np.sign(ratio[-1] - ratio[0]) <= 0)
    if wrong.size:
        row = sheet.rows[int(wrong[0]) + 1]
        raise ReadingError(
            f"F1 of {sheet.text(row, 'f1')!r} after {sheet.text(sheet.rows[int(wrong[0])], 'f1')!r}", where=sheet.where(row, "f1"),
            expected="F1 that rises or falls throughout: one reading would belong to two pitch angles",
        )
    symbol = sheet.units["pitch"]
    pitch = np.array([symbol.to_si(value) for value in number])
    return Directional(pitch=pitch, ratio=ratio, coefficient=coefficient, number=number, unit=symbol)


def _sides(sheet: _Sheet, standard_coefficient: float) -> dict[str, Pairs]:
    rows: dict[str, list[Row]] = {}
    for row in sheet.rows:
        side = sheet.text(row, "side").upper()
        if side not in {"A", "B"}:
            raise ReadingError(f"{sheet.text(row, 'side')!r}", where=sheet.where(row, "side"), expected="side A or B")
        rows.setdefault(side, []).append(row)
    found: dict[str, Pairs] = {}
    for side in sorted(rows):
        pressure = {column: _pressures(sheet, column, rows[side]) for column in ("standard_pressure", "s_type_pressure")}
        if len(rows[side]) < LEAST_PAIRS:
            raise ReadingError(
                f"{len(rows[side])} pairs of side {side}", where=f"{sheet.name}:{rows[side][-1].line}",
                expected=f"at least {LEAST_PAIRS} of each side that was calibrated (Method 2, 10.1.3)",
            )
        coefficient = probe.s_type_coefficient(standard_coefficient, pressure["standard_pressure"], pressure["s_type_pressure"])
        for row, value in zip(rows[side], coefficient, strict=True):
            if not PLAUSIBLE[0] <= value <= PLAUSIBLE[1]:
                raise ReadingError(
                    f"a pair that gives a coefficient of {value:.3g}", where=f"{sheet.name}:{row.line}",
                    expected=f"one from {PLAUSIBLE[0]:g} to {PLAUSIBLE[1]:g}", how="are the columns the other way round?",
                )
        found[side] = Pairs(
            standard=pressure["standard_pressure"], s_type=pressure["s_type_pressure"], coefficient=coefficient,
            deviation=probe.mean_deviation(coefficient),
        )
    return found


def _pressures(sheet: _Sheet, column: str, rows: Sequence[Row]) -> Array:
    values = sheet.numbers(column, rows)
    for row, value in zip(rows, values, strict=True):
        if not value > 0:
            raise ReadingError(f"{sheet.text(row, column)!r}", where=sheet.where(row, column), expected="a pressure above zero")
    return np.array([sheet.units[column].to_si(value) for value in values])
