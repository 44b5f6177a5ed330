"""Which column is which: trade synonyms and symbols, and the unit in a head."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

from traverse.importers._schema import COLUMNS
from traverse.units import lookup

# Spellings of each canonical column, English, German, French and Spanish; compared after ``fold``.
_SYNONYMS: dict[str, str] = {
    "run": "run, run no, run number, test run, test no, repeat, lauf, durchgang, essai, ensayo, serie, prueba",
    "line": "line, port, port no, traverse, traverse line, axis, row, measuring line, sampling port, linie, achse, messachse, "
            "messlinie, stutzen, messstutzen, ligne, axe, orifice, linea, eje, puerto",
    "point": "point, point no, point number, no, nr, #, traverse point, port point, port/point, measuring point, sample point, "
             "pos, position, punkt, messpunkt, punkt nr, point de mesure, punto, punto de medida, num",
    "depth": "depth, insertion, insertion depth, immersion, immersion depth, distance from wall, distance, wall distance, "
             "tiefe, eintauchtiefe, messtiefe, wandabstand, profondeur, profundidad, distance to wall",
    "x": "x, x position, x coordinate", "y": "y, y position, y coordinate",
    "weight": "weight, area weight, weighting, gewicht, wichtung, poids, ponderation, peso",
    "differential_pressure": "differential pressure, diff pressure, pressure difference, velocity pressure, vel pressure, "
        "vel press, velocity head, velocity head dp, vp, pv, dp, delta p, deltap, Δp, ∆p, Δ p, delta pressure, "
        "dynamic pressure, pd, pdyn, p dyn, pitot pressure, differenzdruck, staudruck, wirkdruck, dynamischer druck, "
        "druckdifferenz, geschwindigkeitsdruck, pression dynamique, pression differentielle, presion dinamica, "
        "presion diferencial, presion de velocidad, p1-p2, p12",
    "total": "total, total pressure, tp, ptot, p tot, impact pressure, stagnation pressure, gesamtdruck, pression totale, "
             "presion total",
    "temperature": "temperature, temp, t, ts, tstack, t stack, stack temp, stack temperature, gas temp, gas temperature, "
        "duct temp, duct temperature, air temp, air temperature, flue temp, tgas, t gas, dry bulb, dry bulb temperature, "
        "temperatur, gastemperatur, lufttemperatur, abgastemperatur, temperature du gaz, temperatura, temperatura del gas",
    "static": "static, static pressure, static press, sp, ps, pst, pstat, p stat, p static, duct static, stack static, "
              "statischer druck, statikdruck, pression statique, presion estatica",
    "yaw": "yaw, yaw angle, swirl, swirl angle, null angle, rotation angle, drall, drallwinkel, gierwinkel, "
           "angle de lacet, angulo de guinada",
    "pitch": "pitch, pitch angle, nickwinkel, angle de tangage, angulo de cabeceo",
    "pitch_pressure": "pitch pressure, pitch pressure difference, p4-p5, p45, dp45, delta p45",
    "velocity": "velocity, vel, v, speed, air velocity, air speed, gas velocity, airspeed, geschwindigkeit, "
        "luftgeschwindigkeit, stromungsgeschwindigkeit, vitesse, vitesse de l'air, velocidad, velocidad del aire",
    "status": "status, flag, zustand, etat, estado", "reason": "reason, remark, remarks, comment, comments, note, notes, "
        "bemerkung, grund, remarque, observaciones",
    "standard_error": "standard error", "mean_root_differential_pressure": "mean root differential pressure",
}
# Columns that `split` writes beside the canonical ones; known, and of no use to a reduction.
KNOWN_EXTRA = frozenset({"start", "end", "samples", "effectivesamples", "standarddeviation", "confidence"})
# Spellings that also head a counter of rows or the like: they give way to a plainer name of the same column.
_WEAK = frozenset({"no", "nr", "#", "num", "pos", "position", "row", "repeat", "distance", "code", "note", "notes"})
READING = frozenset({"differential_pressure", "velocity", "total"})
# Columns whose unit must be told: a wrong guess is a wrong flow that looks right.
NEED_UNIT = frozenset({"differential_pressure", "total", "temperature", "static", "velocity", "depth", "x", "y",
                       "standard_error", "pitch_pressure"})
_BARE = frozenset({"mm", "in", "cm", '"', "inch", "inches"})


@dataclass(frozen=True, slots=True)
class Head:
    """A recognised column: its place, canonical name, head as written and the unit text in it."""

    place: int
    name: str
    text: str
    unit: str = ""
    weak: bool = False


def fold(text: str) -> str:
    """Return a head without case, accents, spaces and punctuation; Δ in either code point is ``delta``."""
    flat = text.replace("\u2206", "delta").replace("\u0394", "delta").replace("\u03b4", "delta")
    flat = unicodedata.normalize("NFKD", flat)
    flat = "".join(character for character in flat if not unicodedata.combining(character))
    return re.sub(r"[\s_.\-:'\u2019*]+", "", flat).lower().replace("/", "")


@lru_cache(maxsize=1)
def _known() -> dict[str, str]:
    known: dict[str, str] = {}
    for name, text in _SYNONYMS.items():
        for spelling in (name, *text.split(",")):
            known[fold(spelling)] = name
    return known


def recognise(place: int, text: str) -> Head | None:
    """Return what a head says, None where it is no known column.

    >>> recognise(0, "ΔP [in. w.c.]")
    Head(place=0, name='differential_pressure', text='ΔP [in. w.c.]', unit='in. w.c.', weak=False)
    """
    for name, unit in _splits(text):
        folded = fold(name)
        if folded == "pt":
            # Pt is a total pressure with a unit of pressure and the abbreviation of 'point' without one.
            return Head(place, "total" if unit else "point", text, unit)
        found = _known().get(folded)
        if folded in {"pos", "position"} and unit:
            found = "depth"
        if found is None or not _fits(found, unit, name):
            continue
        return Head(place, found, text, unit, folded in _WEAK)
    return None


def _fits(canonical: str, unit: str, name: str) -> bool:
    """Refuse a head whose unit makes it something else, such as a time ``t [s]`` or ``Ts [s]``."""
    dimension, found = COLUMNS[canonical], lookup(unit) if unit else None
    if dimension == "number" and found is not None and found.symbol == "%":
        return True
    if not dimension:
        return not unit
    if found is None or found.dimension == dimension:
        return True
    return found.dimension != "time" and len(name.strip()) > 1


def _splits(text: str) -> Iterator[tuple[str, str]]:
    """Yield the ways a head may fall into a name and a unit, the surest first."""
    bare = text.strip().strip(":").strip()
    square = re.fullmatch(r"(.*?)\s*\[(.*)\]", bare, re.S)
    if square:
        yield square[1], square[2].strip()
        for name, unit in _splits(square[1]):
            if not unit:
                yield name, square[2].strip()
        return
    yield bare, ""
    round_ = re.fullmatch(r"(.*?)\s*\((.*)\)", bare, re.S)
    if round_:
        inner = round_[2].strip()
        if looks_like_unit(inner):
            yield round_[1], inner
            for name, unit in _splits(round_[1]):
                if not unit:
                    yield name, inner
        elif fold(inner) in _known() or fold(inner) in {"gauge", "stack", "gas", "duct", "dry", "drybulb", "flue"}:
            yield round_[1], ""
        return
    for mark in (r",", r"/", r"\sin\s", r"[\s_]"):
        for match in re.finditer(mark, bare):
            name, unit = bare[: match.start()].strip(), bare[match.end():].strip()
            if name and looks_like_unit(unit):
                yield name, unit


def looks_like_unit(text: str) -> bool:
    """Return whether a text is a unit, or one of the bare lengths that some write for a column of liquid."""
    return bool(text) and (lookup(text) is not None or text.strip(" .[]()").lower() in _BARE)
