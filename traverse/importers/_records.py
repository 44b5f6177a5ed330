"""What every form of readings is turned into before it meets the plan: records, run by run."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field

from traverse.model import Finding, Source, Status


@dataclass(frozen=True, slots=True, kw_only=True)
class Head:
    """A column as the file has it: canonical name, head and the symbol of its unit ('' for labels and words)."""

    name: str
    text: str
    unit: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Record:
    """One row of readings.

    ``value`` holds SI values by canonical column, NaN where nothing was recorded; ``number`` the same in the file's
    units, ``text`` the cells as they stand. ``status`` and ``reason`` speak of the pressure (or velocity).
    """

    where: str
    run: str
    line: str
    point: str
    status: Status
    reason: str = ""
    value: Mapping[str, float] = field(default_factory=dict)
    number: Mapping[str, float] = field(default_factory=dict)
    text: Mapping[str, str] = field(default_factory=dict)

    def si(self, name: str) -> float:
        """Return an SI value, NaN where the column or the reading is absent."""
        return self.value.get(name, math.nan)


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """All records of a file by run, in the order of the file; ``heads`` by canonical column."""

    source: Source
    heads: Mapping[str, Head]
    runs: Mapping[str, tuple[Record, ...]]
    findings: tuple[Finding, ...]
