"""The records of a study and their JSON form (format 'traverse study', version 1)."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Any

from traverse._version import __version__
from traverse.model import Array, Layout, Section, Source
from traverse.physics import field, profiles
from traverse.study._candidates import FAMILIES

# Two rows are told apart from this many standard uncertainties on.
TOLD_APART = 2.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """What one layout would have given. Differences and uncertainties are parts of 1; None where there is no uncertainty.

    ``difference`` is from the section mean of the field, ``from_used`` from the layout actually used. ``read`` rows are
    weighted means of actual readings; all others are read from the field. ``rotation`` [rad] is from the used layout.
    """

    family: str
    name: str
    rule: str
    also: tuple[str, ...]
    lines: int
    points: int
    total: int
    rotation: float | None
    read: bool
    value: float
    difference: float
    uncertainty: float | None
    from_used: float
    from_used_uncertainty: float | None

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return {
            "family": self.family, "name": self.name, "rule": self.rule, "same_points": list(self.also), "lines": self.lines,
            "points_per_line": self.points, "points": self.total, "rotation": self.rotation, "from_readings": self.read,
            "mean_velocity": self.value, "difference": self.difference, "standard_uncertainty": self.uncertainty,
            "difference_from_used": self.from_used, "standard_uncertainty_from_used": self.from_used_uncertainty,
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class Comparison:
    """Two rules with equally many points, in parts of the section mean: ``difference`` is the first less the second.

    ``uncertainty`` is that of the difference, ``sum_uncertainty`` that of the sum of both differences from the section mean.
    """

    first: str
    second: str
    lines: int
    points: int
    first_difference: float
    second_difference: float
    difference: float
    uncertainty: float | None
    sum_uncertainty: float | None

    @property
    def told_apart(self) -> bool:
        """Whether the difference exceeds twice its standard uncertainty."""
        return abs(self.difference) > TOLD_APART * (self.uncertainty or 0.0)

    @property
    def nearer(self) -> str:
        """The rule that is nearer to the section mean; empty where that cannot be told.

        a is nearer to 0 than b where (a - b)(a + b) < 0: the signs of both the difference and the sum must be known.
        """
        total = self.first_difference + self.second_difference
        if not self.told_apart or abs(total) <= TOLD_APART * (self.sum_uncertainty or 0.0):
            return ""
        return self.first if self.difference * total < 0.0 else self.second

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form."""
        return {
            "first": self.first, "second": self.second, "lines": self.lines, "points_per_line": self.points,
            "first_difference": self.first_difference, "second_difference": self.second_difference,
            "difference": self.difference, "standard_uncertainty": self.uncertainty, "told_apart": self.told_apart,
            "nearer": self.nearer or None,
        }


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Study:
    """What other layouts would have given in this duct. Velocities [m/s]; of a formula, relative to that in the middle.

    ``counted`` are the places in the layout of the points with ``velocity``; ``field`` is None for a formula, whose kind and
    number are then ``formula``.
    """

    title: str
    source: Source
    units: str
    section: Section
    layout: Layout
    basis: str
    formula: tuple[str, float] | None
    field: field.Field | None
    counted: tuple[int, ...]
    velocity: Array
    section_mean: float
    section_uncertainty: float | None
    rows: tuple[Row, ...]
    comparisons: tuple[Comparison, ...]
    notes: tuple[str, ...]

    @property
    def used(self) -> Row:
        """The layout actually used."""
        return self.rows[0]

    def of(self, family: str) -> tuple[Row, ...]:
        """Return the rows of a family."""
        return tuple(row for row in self.rows if row.family == family)

    def at(self, x: Array, y: Array) -> Array:
        """Return the velocity over the section, NaN outside."""
        if self.field is not None:
            return self.field.at(x, y)
        kind, number = self.formula or ("", math.nan)
        return profiles.velocity(kind, number, self.section.shape, size_of(self.section), x, y)

    def to_dict(self) -> dict[str, Any]:
        """Return the JSON form, SI values."""
        return {
            "format": "traverse study", "version": 1, "program": f"traverse {__version__}",
            "job": {"title": self.title, "source": self.source.name, "sha256": self.source.sha256, "units": self.units},
            "basis": self.basis, "measured": self.formula is None, "unit": "m/s" if self.formula is None else "1",
            "section_mean": {"value": self.section_mean, "standard_uncertainty": self.section_uncertainty},
            "families": dict(FAMILIES), "rows": [row.to_dict() for row in self.rows],
            "comparisons": [comparison.to_dict() for comparison in self.comparisons], "notes": list(self.notes),
        }


def size_of(section: Section) -> dict[str, float]:
    """Return the dimensions of a section as numbers. [m]"""
    return {name: stated.value for name, stated in section.dimensions.items()}
