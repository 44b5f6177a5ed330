"""Several readings of one point made into one."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from traverse.errors import ReadingError
from traverse.importers._records import Record

_ROOTED = ("differential_pressure",)


def mean_of(records: Sequence[Record]) -> Record:
    """Return one record for several readings of a point.

    The pressure is the signed square of the mean signed root, since the velocity goes with the root; everything else
    is the arithmetic mean of what was read.

    Raises
    ------
    ReadingError
        If one of the readings is a word or a limit: a mean of those is no reading.
    """
    for record in records:
        if record.status not in {"read", "negative"}:
            raise ReadingError(
                f'a repeated point with the status "{record.status}"', where=record.where,
                expected="numbers in all its rows", how="delete the rows that do not count",
            )
    value = {name: _mean([record.value[name] for record in records], name in _ROOTED) for name in records[0].value}
    number = {name: _mean([record.number[name] for record in records], name in _ROOTED) for name in records[0].number}
    text = {
        name: " | ".join(dict.fromkeys(record.text.get(name, "") for record in records)) for name in records[0].text
    }
    pressure = value.get("differential_pressure", math.nan)
    return replace(
        records[0], value=value, number=number, text=text, where=", ".join(record.where for record in records),
        status="negative" if pressure < 0 else "read",
    )


def _mean(values: Sequence[float], rooted: bool) -> float:
    given = [value for value in values if not math.isnan(value)]
    if not given:
        return math.nan
    if not rooted:
        return math.fsum(given) / len(given)
    root = math.fsum(math.copysign(math.sqrt(abs(value)), value) for value in given) / len(given)
    return math.copysign(root * root, root)
