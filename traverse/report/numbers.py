"""Numbers for readers: the right unit, sensible digits, the uncertainty to two figures."""

from __future__ import annotations

import math

from traverse.quantities import BY_NAME
from traverse.result import Measured
from traverse.units import UNITS

OTHER = {"si": "us", "us": "si"}


def unit_of(name: str, system: str) -> str:
    """Return the symbol of the unit a quantity is shown in."""
    quantity = BY_NAME[name]
    return quantity.us if system == "us" else quantity.si


def shown(name: str, value: float, system: str) -> float:
    """Return an SI value of a quantity in the unit of that system."""
    return UNITS[unit_of(name, system)].from_si(value)


def difference(name: str, value: float, system: str) -> float:
    """Return an SI difference or uncertainty of a quantity in the unit of that system (no offset)."""
    return value / UNITS[unit_of(name, system)].factor


def significant(value: float, digits: int) -> str:
    """Return a number with that many significant digits, without exponent, thousands set apart by a thin gap."""
    if value == 0 or not math.isfinite(value):
        return "0" if value == 0 else str(value)
    decimals = digits - 1 - math.floor(math.log10(abs(value)))
    rounded = round(value, decimals)
    if rounded != 0 and math.floor(math.log10(abs(rounded))) > math.floor(math.log10(abs(value))):
        decimals -= 1
    return f"{rounded:,.{max(decimals, 0)}f}".replace(",", "\u202f")


def decimals_for(name: str, value: float, system: str) -> int:
    """Return the decimals that show a quantity with its usual significant digits."""
    number = shown(name, value, system)
    digits = BY_NAME[name].digits
    if number == 0 or not math.isfinite(number):
        return 1
    return max(0, digits - 1 - math.floor(math.log10(abs(number))))


def unit_text(name: str, system: str) -> str:
    """Return the unit as a reader sees it; nothing for a plain number."""
    unit = unit_of(name, system)
    return "" if unit == "1" else unit


def plain(name: str, value: float, system: str) -> str:
    """Return a quantity with its unit, such as '12.34 m/s'."""
    return f"{significant(shown(name, value, system), BY_NAME[name].digits)} {unit_text(name, system)}".strip()


def with_uncertainty(name: str, measured: Measured, system: str) -> str:
    """Return 'value +/- U unit', U to two figures and the value to the same decimal (JCGM 100 7.2.6)."""
    if measured.expanded_uncertainty is None or measured.expanded_uncertainty <= 0:
        return plain(name, measured.value, system)
    expanded = difference(name, measured.expanded_uncertainty, system)
    decimals = max(0, 1 - math.floor(math.log10(expanded)))
    coarse = 1 - math.floor(math.log10(expanded))
    value = round(shown(name, measured.value, system), min(coarse, decimals) if coarse < 0 else decimals)
    spread = round(expanded, coarse)
    number = f"{value:,.{decimals}f} \u00b1 {spread:,.{decimals}f}".replace(",", "\u202f")
    return f"{number} {unit_text(name, system)}".strip()
