"""The words of the field workbook: what the page that is filled in asks for. Writer and reader both go by them."""

from __future__ import annotations

from dataclasses import dataclass

from traverse.units import UNITS

VERSION = 1
JOB_MARK, RUN_MARK = "traverse field workbook: job", "traverse field workbook: run"
RUNS = ("1", "2", "3")
LEAK = ("passed", "failed", "not done")


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One cell to fill in: its key, what stands before it, the dimension of its unit ('' for words and plain numbers)."""

    key: str
    label: str
    dimension: str = ""
    words: bool = False

    def head(self, units: dict[str, str]) -> str:
        """Return the text before the cell, or above the column, with its unit."""
        return f"{self.label} [{units[self.key]}]" if self.dimension else self.label


# Before the readings: what held for the whole run.
HEADER = (
    Entry(key="date", label="Date", words=True), Entry(key="crew", label="Crew", words=True),
    Entry(key="start", label="Start time", words=True), Entry(key="end", label="End time", words=True),
    Entry(key="barometric", label="Barometric pressure, at the station", dimension="pressure"),
    Entry(key="static", label="Static pressure at the plane, gauge", dimension="pressure"),
    Entry(key="temperature", label="Gas temperature", dimension="temperature"),
    Entry(key="coefficient", label="Pitot coefficient"),
    Entry(key="gauge", label="Gauge, number", words=True),
    Entry(key="gauge_range", label="Gauge reads up to", dimension="pressure"),
    Entry(key="gauge_division", label="Gauge division", dimension="pressure"),
    Entry(key="leak_before", label="Leak check before", words=True), Entry(key="leak_after", label="Leak check after", words=True),
)
# A row a point: what the plan prints, then what is filled in.
PRINTED = ("line", "point")
COLUMNS = (
    Entry(key="differential_pressure", label="differential pressure", dimension="pressure"),
    Entry(key="temperature", label="temperature", dimension="temperature"),
    Entry(key="static", label="static", dimension="pressure"), Entry(key="yaw", label="yaw", dimension="angle"),
    Entry(key="status", label="status", words=True), Entry(key="remark", label="remark", words=True),
)
# A row a line, below the readings.
LINES = (
    Entry(key="zero_before", label="zero before", dimension="pressure"), Entry(key="zero_after", label="zero after", dimension="pressure"),
    Entry(key="repeated_point", label="point read again"), Entry(key="repeated_reading", label="second reading", dimension="pressure"),
)


def units(system: str, pressure: str) -> dict[str, str]:
    """Return the unit of every entry for a system of units and the pressure unit of the gauge."""
    inch = system == "us"
    found = {
        "barometric": "inHg" if inch else "hPa", "static": "inH2O" if inch else "Pa", "temperature": "degF" if inch else "degC",
        "yaw": "deg",
    }
    own = ("differential_pressure", "gauge_range", "gauge_division", "zero_before", "zero_after", "repeated_reading")
    return found | dict.fromkeys(own, pressure)


def default_pressure(system: str) -> str:
    """Return the unit of the gauge where nobody says another."""
    return "inH2O" if system == "us" else "Pa"


def pressure_units() -> tuple[str, ...]:
    """Return the units of pressure that a gauge may have."""
    return tuple(symbol for symbol, unit in UNITS.items() if unit.dimension == "pressure")


def unit_line(chosen: dict[str, str]) -> str:
    """Return all units in one line, for the page of the job: what stands in a head must still be what was printed."""
    return "; ".join(f"{key} = {symbol}" for key, symbol in sorted(chosen.items()))
