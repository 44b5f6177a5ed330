"""What every sheet sees, and the small functions they share."""

from __future__ import annotations

from collections.abc import Container
from dataclasses import dataclass

from traverse import methods
from traverse.methods import Method
from traverse.model import Layout
from traverse.report.numbers import OTHER
from traverse.report.spec import SheetSpec, Text
from traverse.result import Reduction, RunResult
from traverse.units import UNITS


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class View:
    """A reduction, and the two unit systems in the order the job speaks."""

    result: Reduction

    @property
    def system(self) -> str:
        """The job's own unit system."""
        return self.result.job.units

    @property
    def other(self) -> str:
        """The other unit system."""
        return OTHER[self.system]

    @property
    def method(self) -> Method:
        """The job's method."""
        return methods.get(self.result.job.method)

    @property
    def layout(self) -> Layout:
        """The job's layout."""
        return self.result.job.layout

    @property
    def runs(self) -> tuple[tuple[int, RunResult], ...]:
        """The runs with their index, which stands in every key."""
        return tuple(enumerate(self.result.runs))

    @property
    def length_unit(self) -> str:
        """The unit of lengths on the sheets."""
        return "in" if self.system == "us" else "mm"

    def length_format(self) -> str:
        """The number format of lengths on the sheets."""
        return "0.000" if self.system == "us" else "0.0"

    def length(self, value: float) -> float:
        """Return a length in the sheets' unit."""
        return UNITS[self.length_unit].from_si(value)


def heads(sheet: SheetSpec, row: int, names: tuple[str, ...], column: int = 1, right: Container[str] = ()) -> None:
    """Put a row of column heads; those named in ``right`` stand over numbers."""
    for offset, name in enumerate(names):
        sheet.put(row, column + offset, Text(name), style="heading right" if name in right else "heading")


def decimals(places: int) -> str:
    """Return the number format with that many decimals and thousands set apart."""
    return "#,##0" + ("." + "0" * places if places else "")
