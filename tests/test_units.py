"""The unit table against pint, and what a stated value may look like."""

import math

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.errors import UnitError
from traverse.units import UNITS, convert, lookup, parse, unit

PINT = pint.UnitRegistry()
NAMES = {
    "Pa": "pascal", "hPa": "hectopascal", "kPa": "kilopascal", "MPa": "megapascal", "mbar": "millibar", "bar": "bar", "atm": "atm",
    "torr": "torr", "psi": "psi", "inH2O@60F": "inch_H2O_60F", "inHg": "inch_Hg", "mmHg": "millimeter_Hg",
    "inHg@60F": "inch_Hg_60F", "m": "meter", "mm": "millimeter", "cm": "centimeter", "in": "inch", "ft": "foot", "yd": "yard",
    "ft2": "foot**2", "in2": "inch**2", "ft/s": "foot/second", "ft/min": "foot/minute", "km/h": "kilometer/hour", "m3/h": "meter**3/hour",
    "L/s": "liter/second", "cfm": "foot**3/minute", "lb/h": "pound/hour", "lb/ft3": "pound/foot**3", "kg/h": "kilogram/hour",
    "lb/lbmol": "gram/mole", "deg": "degree", "ft3/h": "foot**3/hour", "m3/min": "meter**3/minute", "gr/lb": "grain/pound",
    "g": "gram", "ml": "milliliter", "L": "liter", "ft3": "foot**3",
}
SI = {"pressure": "pascal", "length": "meter", "area": "meter**2", "velocity": "meter/second", "flow": "meter**3/second",
      "mass flow": "kilogram/second", "density": "kilogram/meter**3", "molar mass": "gram/mole", "angle": "radian", "humidity ratio": "dimensionless",
      "mass": "kilogram", "volume": "meter**3"}
# pint's mercury is 13.5951 kg/L rounded to 13.5951; its water columns are rounded constants: 1e-5 and 3e-6.
LOOSE = {"inHg": 1e-6, "mmHg": 1e-6, "inH2O@60F": 1e-6, "inHg@60F": 1e-5}


@pytest.mark.parametrize("symbol", NAMES)
def test_factor_against_pint(symbol):
    ours = UNITS[symbol]
    theirs = PINT.Quantity(1.0, NAMES[symbol]).to(SI[ours.dimension]).magnitude
    assert ours.factor == pytest.approx(theirs, rel=LOOSE.get(symbol, 1e-12))


@pytest.mark.parametrize(("symbol", "pascal"), [("inH2O", "249.08891"), ("mmH2O", "9.80665"), ("inH2O@68F", "248.6422"), ("inH2O@4C", "249.0819"), ("inHg", "3386.389"), ("mmHg", "133.322387")])
def test_conventional_columns(symbol, pascal):
    """Conventional water 1000 kg/m3 and mercury 13595.1 kg/m3 with standard gravity; 68 degF water 998.2067 kg/m3."""
    assert UNITS[symbol].factor == pytest.approx(float(pascal), abs=0.5 * 10.0 ** -len(pascal.partition(".")[2]))


@pytest.mark.parametrize(("text", "kelvin"), [("20 degC", 293.15), ("68 degF", 293.15), ("-40 degF", 233.15), ("-40 °C", 233.15), ("528 R", 528 / 1.8), ("300 K", 300.0)])
def test_temperatures(text, kelvin):
    assert parse(text, "temperature").value == pytest.approx(kelvin, rel=1e-14)


@pytest.mark.parametrize(("text", "metres"), [
    ("60 in", 1.524), ("5 ft", 1.524), ("5 ft 3 1/2 in", 1.6129), ("12 1/4 in", 0.31115), ("3/8 in", 0.009525), ("6 1/2\"", 0.1651),
    ("1500 mm", 1.5), ("5' 3\"", 1.6002), ("1.2e3 mm", 1.2), ("5ft", 1.524),
])
def test_lengths(text, metres):
    stated = parse(text, "length")
    assert stated.value == pytest.approx(metres, rel=1e-12)
    assert stated.text == text
    assert stated.unit.to_si(stated.number) == pytest.approx(metres, rel=1e-12)


@pytest.mark.parametrize(("spelling", "symbol"), [
    ("in. w.c.", "inH2O"), ("in w.g.", "inH2O"), ("iwc", "inH2O"), ("in. H2O", "inH2O"), ("inH₂O", "inH2O"), ("in. Hg", "inHg"), ("mm H2O", "mmH2O"),
    ("mmWS", "mmH2O"), ("fpm", "ft/min"), ("m³/h", "m3/h"), ("°F", "degF"), ("F", "degF"), ("deg C", "degC"), ("CFM", "cfm"), ("[Pa]", "Pa"),
    ("inH2O@68F", "inH2O@68F"), ("Pascal", "Pa"), ("kPa", "kPa"), ("lb/lb-mol", "lb/lbmol"), ("percent", "%"), ("l/s", "L/s"),
])
def test_trade_spellings(spelling, symbol):
    found = lookup(spelling)
    assert found is not None and found.symbol == symbol


@pytest.mark.parametrize(("text", "dimension", "words"), [
    (9.4, "fraction", "no unit"), ("9.4", "fraction", "no unit"), ("60 lb", "length", "unknown"), ("60 Pa", "length", "unit of pressure"), ("5 in", "pressure", "inH2O or inHg"),
    ("5 mm", "pressure", "mmH2O or mmHg"), (True, "length", "no unit"), ("twelve in", "length", "no number"), ("12,5 Pa", "pressure", "unknown unit"),
    ("1 0/0 in", "length", "divides by zero"), ("inf Pa", "pressure", "no number"), ("20 m/s", "flow", "unit of velocity"), ("", "pressure", "no number"),
    ("5 inH2O@99F", "pressure", "unknown"), (None, "length", "no unit"), ("1e999 Pa", "pressure", "not finite"),
])
def test_refusals(text, dimension, words):
    with pytest.raises(UnitError, match=words):
        parse(text, dimension, "[plane] diameter")


def test_a_basis_is_not_mixed_up():
    assert parse("100 acfm", "flow", basis="actual").value == pytest.approx(parse("100 cfm", "flow").value)
    with pytest.raises(UnitError, match="standard conditions"):
        parse("100 scfm", "flow", basis="actual")


@given(number=st.floats(-1e6, 1e6), symbol=st.sampled_from(sorted(UNITS)))
def test_round_trip(number, symbol):
    unit_ = UNITS[symbol]
    assert unit_.from_si(unit_.to_si(number)) == pytest.approx(number, rel=1e-12, abs=1e-7 if unit_.offset else 1e-12)


@given(number=st.floats(0.01, 1e5), symbol=st.sampled_from([s for s in sorted(UNITS) if UNITS[s].dimension == "pressure"]))
def test_text_to_si(number, symbol):
    assert parse(f"{number!r} {symbol}", "pressure").value == pytest.approx(number * UNITS[symbol].factor, rel=1e-14)


def test_every_unit_has_a_source_and_is_found():
    for symbol, found in UNITS.items():
        assert found.source and lookup(symbol) is found and unit(symbol, found.dimension) is found
        assert math.isfinite(found.factor) and found.factor > 0
    assert convert(1.524, "in") == pytest.approx(60.0)
