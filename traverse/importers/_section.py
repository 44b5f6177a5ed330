"""[plane]: the section from its dimensions, each measured once or several times."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import cast

from traverse import tables
from traverse.errors import JobError
from traverse.importers._schema import Table, quantity
from traverse.model import Finding, Section, Shape
from traverse.physics.sections import SHAPES
from traverse.units import UNITS, Stated

# Dimensions that may be measured in several places; their arithmetic mean counts.
MEASURED = ("diameter", "circumference", "width", "height", "core", "core_circumference", "gap")
_SINGLE = ("wall_thickness", "lining", "deposit")
_RULE = {"diameter": "round", "circumference": "round", "gap": "ring"}


def build(table: Table) -> tuple[Section, tuple[Finding, ...]]:
    """Return the section of [plane], and what there is to say about how it was measured.

    Raises
    ------
    JobError
        If the dimensions are not exactly those of the shape, or leave nothing open.
    """
    table.need("shape", " | ".join(f'"{name}"' for name in SHAPES))
    shape = cast("Shape", table.text("shape"))
    if shape == "polygon":
        return Section(shape=shape, dimensions=_corners(table)), ()
    if "vertices" in table:
        raise JobError(f"a {shape} section has no vertices", where=table.where("vertices"), expected='shape = "polygon"')
    found: dict[str, Stated] = {}
    findings: list[Finding] = []
    for name in MEASURED:
        if name in table:
            found[name], said = _mean(name, table.get(name), table.where(name))
            findings += said
    for name in _SINGLE:
        stated = table.stated(name)
        if stated is not None:
            if stated.value < 0:
                raise JobError(f"{stated.text!r}", where=table.where(name), expected="a length of zero or more")
            found[name] = stated
    _fitting(table, shape, found)
    section = Section(shape=shape, dimensions=found)
    return section, (*findings, *_deducted(section))


def _fitting(table: Table, shape: Shape, found: dict[str, Stated]) -> None:
    """Raise unless the stated dimensions are exactly one set of the shape's."""
    record = SHAPES[shape]
    sets = record.dimensions
    wanted = " | ".join(" and ".join(one) for one in sets)
    allowed = {name for one in sets for name in one} | set(record.deductions)
    for name in found:
        if name not in allowed:
            raise JobError(f"a {shape} section has no {name}", where=table.where(name), expected=wanted)
    stated = frozenset(found) - set(record.deductions)
    if stated not in {frozenset(one) for one in sets}:
        lacking = sorted(next((set(one) - stated for one in sets if set(one) > stated), set()))
        what = f"no {' and no '.join(lacking)}" if lacking else (
            f"both {' and '.join(sorted(stated))}" if len(stated) > 1 else "no dimension")
        raise JobError(what, where=table.name, expected=f"exactly one of {wanted}" if len(sets) > 1 else wanted)
    if "gap" in found and stated != frozenset(found):
        raise JobError("lining or deposit beside a gap", where=table.name, expected="the open gap as it was measured")


def _mean(name: str, values: Sequence[Stated], where: str) -> tuple[Stated, list[Finding]]:
    """Return the arithmetic mean of a dimension, and whether a standard would want more readings of it."""
    for value in values:
        if not value.value > 0:
            raise JobError(f"{value.text!r}", where=where, expected="a length greater than zero")
    if len(values) == 1:
        return values[0], []
    mean = sum(value.value for value in values) / len(values)
    same = len({value.unit.symbol for value in values}) == 1
    unit = values[0].unit if same else UNITS["m"]
    texts = ", ".join(value.text for value in values)
    stated = Stated(mean, unit.from_si(mean), unit, f"mean of {len(values)}: {texts}")
    rule = tables.load("section_size")[_RULE.get(name, "sides")]
    ring = values if name not in _RULE or len(values) < 3 else (*values, values[0])
    apart = max(abs(a.value - b.value) / mean for a, b in pairwise(ring))
    said = [Finding(
        level="note", topic="section", setting=f"[plane] {name}",
        message=f"{name} {unit.from_si(mean):.6g} {unit.symbol}, the {stated.text}; neighbours differ by up to {100 * apart:.2f} %.",
    )]
    if apart > float(rule["apart"]):
        message = f"{name}: neighbouring readings differ by {100 * apart:.2f} %, more than {100 * float(rule['apart']):g} %: " \
            f"measure in twice as many places ({rule['source']})."
        said.append(Finding(level="attention", topic="section", setting=f"[plane] {name}", message=message))
    elif len(values) < int(rule["least"]):
        message = f"{name} from {len(values)} readings; at least {rule['least']} are wanted ({rule['source']})."
        said.append(Finding(level="note", topic="section", setting=f"[plane] {name}", message=message))
    return stated, said


def _corners(table: Table) -> dict[str, Stated]:
    """Return the coordinates of the corners of a polygon, x1, y1, x2, y2, ..."""
    example = 'for example vertices = [["0 m", "0 m"], ["2 m", "0 m"], ["0 m", "1 m"]]'
    table.need("vertices", "the corners in order around the section", example)
    for name in (*MEASURED, *_SINGLE):
        if name in table:
            raise JobError(f"a polygon has no {name}", where=table.where(name), expected="vertices, the inner corners")
    corners = table.get("vertices")
    if not isinstance(corners, list) or len(corners) < 3:
        raise JobError(f"{corners!r}"[:80], where=table.where("vertices"), expected="a list of at least three corners")
    found: dict[str, Stated] = {}
    for number, corner in enumerate(corners, 1):
        where = f"{table.where('vertices')}[{number}]"
        if not isinstance(corner, list) or len(corner) != 2:
            raise JobError(f"{corner!r}"[:80], where=where, expected='x and y with their units, such as ["1.2 m", "0 m"]')
        for axis, text in zip("xy", corner, strict=True):
            found[f"{axis}{number}"] = quantity(text, "length", where)
    _distinct(found, len(corners), table.where("vertices"))
    return found


def _distinct(found: dict[str, Stated], count: int, where: str) -> None:
    places = [(found[f"x{k}"].value, found[f"y{k}"].value) for k in range(1, count + 1)]
    for k, place in enumerate(places):
        if place == places[k - 1]:
            raise JobError(
                f"corners {count if k == 0 else k} and {k + 1} are one place", where=where,
                expected="each corner once; the last side closes the polygon by itself",
            )


def _deducted(section: Section) -> tuple[Finding, ...]:
    texts = [f"{name} {section.dimensions[name].text}" for name in ("lining", "deposit") if name in section.dimensions]
    if not texts:
        return ()
    return (Finding(
        level="note", topic="section", setting="[plane] lining, deposit",
        message=f"{' and '.join(texts)} taken off every wall; marks and depths are counted from the surface that the gas touches.",
    ),)
