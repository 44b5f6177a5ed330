"""The unit table: the only place where a number changes its unit.

Inside the program every number is SI: Pa, K, m, kg/m3, m/s, m3/s, rad, mole fraction. A dimensioned value enters as
text with a unit, is converted here once, and its text is kept. What is *not* a unit (gauge or absolute, wet or dry,
actual or standard conditions) is never guessed from one.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import lru_cache

from traverse.errors import UnitError, nearest

# Definitions the factors are built from. Exact unless noted; international yard and pound agreement of 1959.
INCH = 0.0254
FOOT = 0.3048
POUND = 0.45359237
STANDARD_GRAVITY = 9.80665  # m/s2, 3rd CGPM 1901
_EXACT = "exact by definition"
_WATER = "1000 kg/m3 and standard gravity, conventional"
_MERCURY = "13595.1 kg/m3 (0 degC) and standard gravity, conventional"


@dataclass(frozen=True, slots=True)
class Unit:
    """One unit: ``SI value = number * factor + offset``.

    ``basis`` is set where the trade writes the basis of a flow into its unit (scfm, dscfm, acfm).
    """

    symbol: str
    dimension: str
    factor: float
    offset: float = 0.0
    source: str = _EXACT
    basis: str = ""

    def to_si(self, number: float) -> float:
        """Return ``number`` of this unit in SI."""
        return number * self.factor + self.offset

    def from_si(self, value: float) -> float:
        """Return an SI value in this unit."""
        return (value - self.offset) / self.factor


@dataclass(frozen=True, slots=True)
class Stated:
    """A value as somebody stated it: the SI value, and the number, unit and text it came from."""

    value: float
    number: float
    unit: Unit
    text: str


def _table() -> tuple[Unit, ...]:
    def u(symbol: str, dimension: str, factor: float, offset: float = 0.0, source: str = _EXACT, basis: str = "") -> Unit:
        return Unit(symbol, dimension, factor, offset, source, basis)

    water = STANDARD_GRAVITY * 1000.0 * INCH
    mercury = 13595.1 * STANDARD_GRAVITY
    pint = "pint unit constants"
    return (
        u("Pa", "pressure", 1.0), u("hPa", "pressure", 100.0), u("kPa", "pressure", 1000.0), u("MPa", "pressure", 1e6),
        u("mbar", "pressure", 100.0), u("bar", "pressure", 1e5), u("atm", "pressure", 101325.0),
        u("torr", "pressure", 101325.0 / 760.0), u("psi", "pressure", POUND * STANDARD_GRAVITY / INCH**2),
        u("inH2O", "pressure", water, source=_WATER), u("mmH2O", "pressure", STANDARD_GRAVITY, source=_WATER),
        u("cmH2O", "pressure", 10.0 * STANDARD_GRAVITY, source=_WATER),
        u("ftH2O", "pressure", 12.0 * water, source=_WATER),
        u("inH2O@4C", "pressure", 249.0819, source=f"{pint}: water of 999.972 kg/m3"),
        u("inH2O@60F", "pressure", 248.8401, source=f"{pint}: water of 999.001 kg/m3"),
        u("inH2O@68F", "pressure", 998.2067 * STANDARD_GRAVITY * INCH, source="water of 998.2067 kg/m3, Tanaka density"),
        u("mmH2O@4C", "pressure", 0.999972 * STANDARD_GRAVITY, source="water of 999.972 kg/m3"),
        u("inHg", "pressure", mercury * INCH, source=_MERCURY),
        u("mmHg", "pressure", mercury * 0.001, source=_MERCURY),
        u("inHg@60F", "pressure", 3376.85, source=pint),
        u("K", "temperature", 1.0), u("degC", "temperature", 1.0, 273.15),
        u("degF", "temperature", 5.0 / 9.0, 273.15 - 32.0 * 5.0 / 9.0), u("degR", "temperature", 5.0 / 9.0),
        u("m", "length", 1.0), u("mm", "length", 0.001), u("cm", "length", 0.01), u("in", "length", INCH),
        u("ft", "length", FOOT), u("km", "length", 1000.0), u("yd", "length", 3 * FOOT),
        u("m2", "area", 1.0), u("cm2", "area", 1e-4), u("mm2", "area", 1e-6), u("ft2", "area", FOOT**2),
        u("in2", "area", INCH**2),
        u("m/s", "velocity", 1.0), u("ft/s", "velocity", FOOT), u("ft/min", "velocity", FOOT / 60.0),
        u("km/h", "velocity", 1.0 / 3.6), u("m/min", "velocity", 1.0 / 60.0), u("cm/s", "velocity", 0.01),
        u("m3/s", "flow", 1.0), u("m3/min", "flow", 1.0 / 60.0), u("m3/h", "flow", 1.0 / 3600.0),
        u("L/s", "flow", 0.001), u("L/min", "flow", 0.001 / 60.0), u("cfm", "flow", FOOT**3 / 60.0),
        u("ft3/s", "flow", FOOT**3), u("ft3/h", "flow", FOOT**3 / 3600.0),
        u("acfm", "flow", FOOT**3 / 60.0, basis="actual"), u("scfm", "flow", FOOT**3 / 60.0, basis="standard"),
        u("dscfm", "flow", FOOT**3 / 60.0, basis="dry standard"),
        u("wscfm", "flow", FOOT**3 / 60.0, basis="standard"),
        u("acfh", "flow", FOOT**3 / 3600.0, basis="actual"), u("scfh", "flow", FOOT**3 / 3600.0, basis="standard"),
        u("dscfh", "flow", FOOT**3 / 3600.0, basis="dry standard"),
        u("acm/h", "flow", 1.0 / 3600.0, basis="actual"), u("scm/h", "flow", 1.0 / 3600.0, basis="standard"),
        u("dscm/h", "flow", 1.0 / 3600.0, basis="dry standard"), u("dscm/min", "flow", 1.0 / 60.0, basis="dry standard"),
        u("scm/min", "flow", 1.0 / 60.0, basis="standard"), u("acm/min", "flow", 1.0 / 60.0, basis="actual"),
        u("kg/s", "mass flow", 1.0), u("kg/h", "mass flow", 1.0 / 3600.0), u("g/s", "mass flow", 0.001),
        u("lb/s", "mass flow", POUND), u("lb/min", "mass flow", POUND / 60.0), u("lb/h", "mass flow", POUND / 3600.0),
        u("t/h", "mass flow", 1000.0 / 3600.0),
        u("kg", "mass", 1.0), u("g", "mass", 0.001),
        u("m3", "volume", 1.0), u("L", "volume", 0.001), u("ml", "volume", 1e-6), u("ft3", "volume", FOOT**3),
        u("kg/m3", "density", 1.0), u("g/cm3", "density", 1000.0), u("g/L", "density", 1.0),
        u("lb/ft3", "density", POUND / FOOT**3),
        u("g/mol", "molar mass", 1.0), u("kg/mol", "molar mass", 1000.0), u("kg/kmol", "molar mass", 1.0),
        u("lb/lbmol", "molar mass", 1.0),
        u("%", "fraction", 0.01), u("ppm", "fraction", 1e-6), u("mol/mol", "fraction", 1.0),
        u("kg/kg", "humidity ratio", 1.0), u("g/kg", "humidity ratio", 0.001), u("lb/lb", "humidity ratio", 1.0),
        u("gr/lb", "humidity ratio", 1.0 / 7000.0),
        u("rad", "angle", 1.0), u("deg", "angle", math.pi / 180.0),
        u("s", "time", 1.0), u("min", "time", 60.0), u("h", "time", 3600.0),
        u("Hz", "frequency", 1.0), u("1", "number", 1.0),
        u("Pa^0.5", "root of pressure", 1.0), u("inH2O^0.5", "root of pressure", math.sqrt(water), source=_WATER),
    )


UNITS: dict[str, Unit] = {unit.symbol: unit for unit in _table()}

# The spellings met in the trade. Keys are folded by ``_fold``: lower case, no spaces, dots or brackets.
_SPELLINGS: dict[str, str] = {
    "inwc": "inH2O", "inwg": "inH2O", "iwc": "inH2O", "iwg": "inH2O", '"wc': "inH2O", '"wg': "inH2O", "inh2o": "inH2O",
    '"h2o': "inH2O", "inchesh2o": "inH2O", "incheswater": "inH2O", "inchwater": "inH2O", "incheswc": "inH2O",
    "incheswg": "inH2O", "inaq": "inH2O", "mmwc": "mmH2O", "mmwg": "mmH2O", "mmws": "mmH2O", "mmce": "mmH2O",
    "mmca": "mmH2O", "mmh2o": "mmH2O", "mmaq": "mmH2O", "cmh2o": "cmH2O", "cmwc": "cmH2O",
    "inhg": "inHg", '"hg': "inHg", "incheshg": "inHg", "mmhg": "mmHg", "psia": "psi", "psig": "psi", "lb/in2": "psi",
    "pascal": "Pa", "pa": "Pa", "hpa": "hPa", "kpa": "kPa", "mpa": "MPa",
    "c": "degC", "°c": "degC", "ºc": "degC", "celsius": "degC", "degc": "degC", "f": "degF", "°f": "degF", "ºf": "degF",
    "fahrenheit": "degF", "degf": "degF", "r": "degR", "°r": "degR", "rankine": "degR", "degr": "degR", "k": "K",
    "kelvin": "K",
    "inch": "in", "inches": "in", '"': "in", "''": "in", "foot": "ft", "feet": "ft", "'": "ft", "metre": "m", "meter": "m",
    "metres": "m", "meters": "m",
    "m²": "m2", "m^2": "m2", "sqm": "m2", "ft²": "ft2", "ft^2": "ft2", "sqft": "ft2", "in²": "in2", "in^2": "in2",
    "sqin": "in2", "mm²": "mm2", "cm²": "cm2",
    "fps": "ft/s", "fpm": "ft/min", "ft/sec": "ft/s", "m/sec": "m/s", "ms-1": "m/s", "ms^-1": "m/s", "kph": "km/h",
    "m³/s": "m3/s", "m^3/s": "m3/s", "m³/h": "m3/h", "m^3/h": "m3/h", "m3/hr": "m3/h", "m³/hr": "m3/h", "cmh": "m3/h",
    "m³/min": "m3/min", "l/s": "L/s", "lps": "L/s", "l/min": "L/min", "lpm": "L/min", "ft3/min": "cfm", "ft³/min": "cfm",
    "cuft/min": "cfm", "ft³/s": "ft3/s", "cfs": "ft3/s", "ft³/h": "ft3/h", "ft3/hr": "ft3/h", "cfh": "ft3/h",
    "dscf/h": "dscfh", "dscf/hr": "dscfh", "scf/h": "scfh", "scf/hr": "scfh", "dscf/min": "dscfm", "scf/min": "scfm",
    "acf/min": "acfm", "acf/h": "acfh", "dscmh": "dscm/h", "dscm/hr": "dscm/h", "scmh": "scm/h", "acmh": "acm/h",
    "am3/h": "acm/h", "kg/hr": "kg/h", "lb/hr": "lb/h", "lbm/h": "lb/h", "lbm/hr": "lb/h", "lbm/s": "lb/s",
    "kg/m³": "kg/m3", "kg/m^3": "kg/m3", "g/l": "g/L", "lb/ft³": "lb/ft3", "lbm/ft3": "lb/ft3", "lb/ft^3": "lb/ft3",
    "lb/cuft": "lb/ft3", "g/g-mol": "g/mol", "g/gmol": "g/mol", "lb/lb-mol": "lb/lbmol", "lbm/lbmol": "lb/lbmol",
    "percent": "%", "pct": "%", "vol%": "%", "%vol": "%", "%v/v": "%", "ppmv": "ppm", "molmol-1": "mol/mol",
    "grains/lb": "gr/lb", "lbm/lbm": "lb/lb", "°": "deg", "degree": "deg", "degrees": "deg", "sec": "s", "hr": "h",
    "gram": "g", "grams": "g", "m³": "m3", "m^3": "m3", "ft³": "ft3", "ft^3": "ft3", "cuft": "ft3", "dcf": "ft3", "dcm": "m3",
    "litre": "L", "liter": "L", "litres": "L", "liters": "L",
}
# Folded spellings that are read with case lost: K and k, M and m differ, so the exact symbol is tried first.
_FOLDED = {symbol.lower(): symbol for symbol in UNITS if symbol not in {"MPa", "Hz"}}
_EXAMPLES = {
    "pressure": "Pa, hPa, kPa, inH2O, mmH2O, inHg, mmHg, psi", "temperature": "degC, degF, K, degR",
    "length": "m, mm, cm, in, ft", "fraction": "%", "humidity ratio": "g/kg, kg/kg, gr/lb, lb/lb",
    "velocity": "m/s, ft/s, ft/min (fpm)", "flow": "m3/s, m3/h, L/s, cfm", "density": "kg/m3, lb/ft3",
    "molar mass": "g/mol, lb/lbmol", "angle": "deg, rad", "mass flow": "kg/s, kg/h, lb/h", "area": "m2, ft2, in2",
    "time": "s, min, h", "mass": "g, kg", "volume": "m3, L, ml, ft3",
}
_NUMBER = r"[+\-\u2212]?(?:\d+\.?\d*|\.\d+)(?:[eE][+\-]?\d+)?"
_VALUE = re.compile(rf"\s*({_NUMBER})\s*(.*?)\s*\Z", re.S)
_MIXED = re.compile(r"\s*(\d+)\s*(?:ft|feet|foot|')\s*(?:-|\s)?\s*(.+)\Z", re.I)
_FRACTION = re.compile(r"\s*(?:(\d+)[\s-]+)?(\d+)\s*/\s*(\d+)\s*([a-zA-Z\"'].*?)\s*\Z")


def _fold(text: str) -> str:
    return re.sub(r"[\s.\[\]()_·*]", "", text).lower().replace("w.c", "wc").replace("″", '"').replace("′", "'").replace("₂", "2")


@lru_cache(maxsize=512)
def lookup(text: str) -> Unit | None:
    """Return the unit that ``text`` names, by symbol first and then by trade spelling, or None."""
    plain = text.strip().strip("[]()").strip()
    if plain in UNITS:
        return UNITS[plain]
    at = plain.replace(" ", "")
    if at in UNITS:
        return UNITS[at]
    folded = _fold(plain)
    if "@" in folded:
        for symbol, candidate in UNITS.items():
            if "@" in symbol and symbol.lower() == folded:
                return candidate
        return None
    name = _SPELLINGS.get(folded) or _FOLDED.get(folded)
    return UNITS[name] if name else None


def unit(text: str, dimension: str, where: str = "") -> Unit:
    """Return the unit that ``text`` names, insisting on its dimension.

    Raises
    ------
    UnitError
        If the unit is missing, unknown, ambiguous (a bare ``mm`` or ``in`` for a pressure) or of another kind.
    """
    examples = _EXAMPLES.get(dimension, "")
    if not text.strip():
        raise UnitError(f"no unit for a {dimension}", where=where, expected=f"one of {examples}")
    if dimension == "pressure" and _fold(text) in {"in", "mm", "inch", "inches", '"', "cm"}:
        mark = "in" if _fold(text) not in {"mm", "cm"} else _fold(text)
        raise UnitError(
            f"{text!r} may be a column of water or of mercury", where=where, expected="the liquid named",
            how=f"write {mark}H2O or {mark}Hg",
        )
    found = lookup(text)
    if found is None:
        guess = nearest(text, UNITS)
        raise UnitError(
            f"unknown unit {text!r}", where=where, expected=f"a {dimension} such as {examples}",
            how=f"perhaps {guess}" if guess else "",
        )
    if found.dimension != dimension:
        raise UnitError(
            f"{text!r} is a unit of {found.dimension}", where=where, expected=f"a {dimension} such as {examples}"
        )
    return found


def parse(text: object, dimension: str, where: str = "", *, basis: str = "") -> Stated:
    """Return a stated value from text such as ``"60 in"``, ``"5 ft 3 1/2 in"`` or ``"9.4 %"``.

    Parameters
    ----------
    text : object
        What stands in the job file. Anything but text is refused: a bare number has no unit.
    dimension : str
        The kind of quantity that is wanted.
    basis : str
        For flows, the basis the value must not contradict (``actual``, ``standard``, ``dry standard``).

    Raises
    ------
    UnitError
        For a bare number, a number that cannot be read, an unknown unit or one of the wrong kind.
    """
    if not isinstance(text, str):
        shown = str(text).lower() if isinstance(text, bool) else str(text)
        example = _EXAMPLES.get(dimension, "").split(",")[0]
        raise UnitError(
            f"{shown} has no unit", where=where, expected=f"a {dimension} as text with its unit",
            how=f'for example "{shown} {example}"' if isinstance(text, (int, float)) and not isinstance(text, bool) else "",
        )
    if dimension == "length":
        compound = _compound_length(text, where)
        if compound is not None:
            return compound
    match = _VALUE.match(text)
    if match is None:
        raise UnitError(
            f"{text!r} is no number with a unit", where=where,
            expected=f'a decimal-point number and a {dimension} unit such as {_EXAMPLES.get(dimension, "")}',
        )
    number = float(match.group(1).replace("\u2212", "-"))
    if not math.isfinite(number):
        raise UnitError(f"{text!r} is not finite", where=where, expected="a finite number")
    found = unit(match.group(2), dimension, where)
    if basis and found.basis and found.basis != basis:
        raise UnitError(f"{text!r} is a flow at {found.basis} conditions", where=where, expected=f"a flow at {basis} conditions")
    return Stated(found.to_si(number), number, found, text)


def _compound_length(text: str, where: str) -> Stated | None:
    """Read ``5 ft 3 1/2 in`` and ``12 1/4 in``; None when the text has neither shape."""
    inch = UNITS["in"]
    mixed = _MIXED.match(text)
    if mixed and mixed.group(2).strip():
        rest = parse(mixed.group(2), "length", where)
        value = int(mixed.group(1)) * FOOT + rest.value
        return Stated(value, inch.from_si(value), inch, text)
    fraction = _FRACTION.match(text)
    if fraction:
        whole, top, bottom, symbol = fraction.groups()
        if int(bottom) == 0:
            raise UnitError(f"{text!r} divides by zero", where=where, expected="a length such as 12 1/4 in")
        number = int(whole or 0) + int(top) / int(bottom)
        found = unit(symbol, "length", where)
        return Stated(found.to_si(number), number, found, text)
    return None


def convert(value: float, symbol: str) -> float:
    """Return an SI value in the unit of that symbol."""
    return UNITS[symbol].from_si(value)
