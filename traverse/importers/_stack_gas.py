"""[gas] of a stack: the sampling train, the fuel, the psychrometer and the mixture of any gases."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from traverse import tables
from traverse.errors import JobError, nearest
from traverse.importers._schema import Key, Table, convert, quantity
from traverse.model import Finding, Fuel, Gas, MoistureTrain
from traverse.physics import combustion
from traverse.physics.mixture import LIGHT, SPECIES
from traverse.units import Stated

TRAIN: Mapping[str, Key] = {
    "condensed": Key(kind="any"), "silica_gel": Key(kind="quantity", dimension="mass"),
    "meter_volume": Key(kind="quantity", dimension="volume"), "meter_temperature": Key(kind="quantity", dimension="temperature"),
    "meter_pressure": Key(kind="quantity", dimension="pressure"), "orifice_pressure": Key(kind="quantity", dimension="pressure"),
    "barometric": Key(kind="quantity", dimension="pressure"), "meter_factor": Key(kind="number"), "approximation": Key(kind="flag"),
}
# The calibration factor of a gas meter lies near 1; beyond these it is a slip. Common practice, no source.
METER_FACTORS = (0.5, 2.0)
# A pressure at the meter below half an atmosphere or above two is a gauge pressure or another unit. Common practice, no source.
METER_PRESSURES = (50e3, 200e3)
ANALYSIS_SUM, MIXTURE_SUM = 0.005, 1e-4


def train(shown: str, values: object) -> MoistureTrain:
    """Return the sampling train of [gas.moisture_train].

    Raises
    ------
    JobError
        If an amount is missing, stated twice, or impossible.
    """
    table = convert(shown, "gas", _table(shown, values, "condensed, silica_gel, meter_volume, ..."), TRAIN)
    table.need("condensed", "the water from the impingers or the condenser", 'for example condensed = "85.3 ml" or "85.3 g"')
    condensed = _condensed(table)
    for key, how in (("meter_volume", '"1.102 m3"'), ("meter_temperature", '"24 degC"')):
        table.need(key, "what the gas meter showed", f"for example {key} = {how}")
    factor = table.number("meter_factor")
    if factor is None:
        raise JobError("no meter_factor", where=shown, expected="the calibration factor of the gas meter, 1.0 if it has none")
    if not METER_FACTORS[0] <= factor <= METER_FACTORS[1]:
        raise JobError(f"a meter factor of {factor:g}", where=table.where("meter_factor"), expected="a number near 1")
    approximation, gel = table.flag("approximation"), table.stated("silica_gel")
    if gel is None and not approximation:
        raise JobError(
            "no silica_gel", where=shown, expected="the water caught by the silica gel",
            how='silica_gel = "0 g" where it was weighed with the condensate; approximation = true for the approximation method',
        )
    for stated, key in ((condensed, "condensed"), (gel, "silica_gel")):
        if stated is not None and stated.value < 0:
            raise JobError(f"{stated.text!r}", where=table.where(key), expected="an amount of zero or more")
    for key in ("meter_volume", "meter_temperature", "barometric"):
        stated = table.stated(key)
        if stated is not None and not stated.value > 0:
            raise JobError(f"{stated.text!r}", where=table.where(key), expected="a value above zero")
    pressure, orifice = table.stated("meter_pressure"), table.stated("orifice_pressure")
    _meter_pressure(table, pressure, orifice)
    volume, temperature = table.stated("meter_volume"), table.stated("meter_temperature")
    assert volume is not None and temperature is not None, "needed above"
    return MoistureTrain(
        condensed=condensed, silica_gel=gel, meter_volume=volume, meter_temperature=temperature, meter_factor=factor,
        meter_pressure=pressure, orifice_pressure=orifice, barometric=table.stated("barometric"), approximation=approximation,
    )


def merged_train(base: object, over: object) -> object:
    """Return the train of one run: a pressure stated in another way replaces the default's."""
    if not isinstance(base, dict) or not isinstance(over, dict):
        return over
    kept = dict(base)
    if "meter_pressure" in over:
        kept = {key: value for key, value in kept.items() if key not in {"orifice_pressure", "barometric"}}
    if "orifice_pressure" in over or "barometric" in over:
        kept.pop("meter_pressure", None)
    return kept | over


def _table(shown: str, values: object, expected: str) -> dict[str, Any]:
    if not isinstance(values, dict):
        raise JobError(f"{values!r}", where=shown, expected=f"a table with {expected}")
    return values


def _condensed(table: Table) -> Stated:
    """Return the condensate, a mass or a volume: the unit says which."""
    text, where = table.get("condensed"), table.where("condensed")
    last = str(text).strip().rpartition(" ")[2] if isinstance(text, str) else ""
    return quantity(text, "mass" if last.lower().rstrip("s.") in {"g", "kg", "gram"} else "volume", where)


def _meter_pressure(table: Table, pressure: Stated | None, orifice: Stated | None) -> None:
    """Refuse a pressure at the meter that is stated twice, not at all, or as a gauge pressure."""
    if (pressure is None) == (orifice is None):
        raise JobError(
            "both meter_pressure and orifice_pressure" if pressure else "no pressure at the gas meter", where=table.name,
            expected="exactly one of meter_pressure (absolute) | orifice_pressure (gauge, added to the barometric pressure)",
            how='' if pressure else 'orifice_pressure = "0 mmH2O" for a meter at the pressure of the air',
        )
    if pressure is not None and "barometric" in table:
        raise JobError(
            "barometric beside meter_pressure", where=table.name, expected="barometric only with orifice_pressure"
        )
    if pressure is not None and not METER_PRESSURES[0] <= pressure.value <= METER_PRESSURES[1]:
        raise JobError(
            f"{pressure.text!r}", where=table.where("meter_pressure"), expected="the absolute pressure at the meter, near that of the air",
            how="a gauge pressure is orifice_pressure",
        )


def fuel(table: Table) -> tuple[Fuel, tuple[Finding, ...]]:
    """Return the fuel of [gas], with what was taken for granted.

    Raises
    ------
    JobError
        If the fuel is unknown, its analysis does not sum to 100 %, or the air is stated twice or not at all.
    """
    value, shown = table.get("fuel"), f"{table.name[:-1]}.fuel]" if table.name.endswith("]") else f"{table.name} fuel"
    named = value if isinstance(value, str) else value.get("type") if isinstance(value, dict) else None
    findings: tuple[Finding, ...] = ()
    if isinstance(value, str) or (isinstance(value, dict) and "type" in value):
        own = {} if isinstance(value, str) else {key: text for key, text in value.items() if key != "type"}
        name, basis, parts, texts, source, findings = _typical(shown, named, own)
    else:
        basis, parts, texts = _analysis(shown, _table(shown, value, "an analysis of the fuel"))
        name, source = "the stated fuel", "as stated"
    atoms = combustion.by_mass(parts) if basis == "mass" else combustion.by_volume(parts)
    if not atoms.oxygen_need > 0.0:
        raise JobError("a fuel that needs no air to burn", where=shown, expected="a fuel with carbon or hydrogen")
    excess = table.stated("excess_air")
    if (excess is None) == ("oxygen" not in table):
        raise JobError(
            "both oxygen and excess_air" if excess else "neither oxygen nor excess_air", where=table.name,
            expected="exactly one of oxygen (dry, measured) | excess_air with a fuel",
        )
    if excess is not None and not 0.0 <= excess.value <= 100.0:
        raise JobError(f"{excess.text!r}", where=table.where("excess_air"), expected="a percentage of zero or more")
    measured = "carbon_dioxide" in table
    for key in ("carbon_dioxide", "sulfur_dioxide"):
        if key in table and (excess is not None or not measured):
            raise JobError(
                f"{key} beside {'excess_air' if excess is not None else 'a fuel'}", where=table.where(key),
                expected="oxygen and carbon_dioxide both, as measured; else the composition follows from the fuel",
            )
    found = Fuel(
        name=name, basis=basis, parts=parts, texts=texts, atoms=atoms, source=source, excess_air=excess,
        air_humidity_ratio=_air(table), measured=measured,
    )
    return found, findings


def refuse_no_combustion(table: Table, gas: Gas) -> None:
    """Raise where the stated oxygen or excess air cannot come from burning the fuel.

    Raises
    ------
    JobError
        For an oxygen at or above that of air, or more carbon monoxide than the fuel has carbon for.
    """
    fuel = gas.fuel
    assert fuel is not None, "a gas with a fuel"
    monoxide = gas.fraction("carbon_monoxide")
    if fuel.excess_air is not None:
        found, key = combustion.from_excess_air(fuel.atoms, fuel.excess_air.value, monoxide), "excess_air"
    else:
        found, key = combustion.from_oxygen(fuel.atoms, gas.fraction("oxygen"), monoxide), "oxygen"
    if not math.isfinite(float(found["moisture"])):
        stated = fuel.excess_air or gas.composition["oxygen"]
        raise JobError(
            f"{stated.text!r} cannot be the flue gas of a fuel", where=table.where(key),
            expected="less oxygen than the air has (20.9 %), and no more carbon monoxide than the fuel can give",
        )


def _air(table: Table) -> Stated | None:
    stated = table.stated("air_humidity_ratio")
    if stated is not None and not 0.0 <= stated.value <= 0.2:
        raise JobError(f"{stated.text!r}", where=table.where("air_humidity_ratio"), expected="a humidity ratio from 0 to 200 g/kg")
    return stated


_Typical = tuple[str, str, dict[str, float], dict[str, str], str, tuple[Finding, ...]]


def _typical(shown: str, named: object, own: Mapping[str, Any]) -> _Typical:
    """Return a typical fuel, with its water as stated where that was."""
    known = tables.load("fuels")["fuel"]
    if not isinstance(named, str) or named not in known:
        guess = nearest(str(named), known)
        raise JobError(
            f"unknown fuel {named!r}", where=shown, expected=f"one of {', '.join(known)}, or an analysis under [gas.fuel]",
            how=f'perhaps "{guess}"' if guess else "",
        )
    entry = known[named]
    basis, texts = str(entry["basis"]), {name: f"{text} %" for name, text in entry["parts"].items()}
    parts = {name: float(text) / 100.0 for name, text in entry["parts"].items()}
    if own:
        if set(own) != {"water"} or basis != "mass":
            allowed = "type and water" if basis == "mass" else "type alone"
            raise JobError(
                f"{', '.join(own)} beside type = {named!r}", where=shown, expected=f"{allowed}, or a whole analysis without type"
            )
        water = quantity(own["water"], "fraction", f"{shown} water")
        if not 0.0 <= water.value < 1.0:
            raise JobError(f"{water.text!r}", where=f"{shown} water", expected="a percentage from 0 to below 100 %")
        share = (1.0 - water.value) / (1.0 - parts.get("water", 0.0))
        parts = {name: part * share for name, part in parts.items() if name != "water"} | {"water": water.value}
        texts = {name: f"{100 * part:.4g} %" for name, part in parts.items()} | {"water": water.text}
    shares = ", ".join(f"{name.replace('_', ' ')} {text}" for name, text in texts.items())
    caution = "with the water as stated" if own else str(entry["varies"])
    finding = Finding(
        level="attention", topic="fuel", setting="[gas.fuel]",
        message=f"{named}: {shares} by {basis} ({entry['source']}) was taken; {caution}.",
    )
    return named, basis, parts, texts, str(entry["source"]), (finding,)


def _analysis(shown: str, values: dict[str, Any]) -> tuple[str, dict[str, float], dict[str, str]]:
    """Return basis, fractions and texts of a stated analysis; it must sum to 100 % within half a per cent."""
    basis = values.get("basis")
    texts = {name: text for name, text in values.items() if name != "basis"}
    known = {"mass": combustion.BY_MASS, "volume": tuple(combustion.MOLECULES)}
    if basis is not None and basis not in known:
        raise JobError(f"{basis!r}", where=f"{shown} basis", expected='"mass" (ultimate analysis) or "volume" (gas)')
    possible = [name for name in known if basis in {None, name} and set(texts) <= set(known[name])]
    if not texts or not possible:
        odd = next((name for name in texts if not any(name in known[b] for b in known if basis in {None, b})), "")
        guess = nearest(odd, {name for b in known if basis in {None, b} for name in known[b]}) if odd else ""
        raise JobError(
            f"unknown part {odd!r}" if odd else "no analysis, or one that mixes elements by mass with gases by volume", where=shown,
            expected=f"by mass {', '.join(known['mass'])}; or by volume {', '.join(known['volume'])}",
            how=f"perhaps {guess}" if guess else "",
        )
    if len(possible) > 1 and set(texts) != {"hydrogen"}:
        raise JobError(
            f"{' and '.join(texts)} may be by mass or by volume", where=shown, expected="the basis of the analysis",
            how='basis = "mass" or basis = "volume"',
        )
    parts = {name: _part(shown, name, text).value for name, text in texts.items()}
    total = sum(parts.values())
    if abs(total - 1.0) > ANALYSIS_SUM + 1e-12:
        raise JobError(
            f"{' + '.join(parts)} = {100 * total:.6g} %", where=shown, expected="an analysis that sums to 100 % within 0.5 %",
            how="ash, water and inert gas belong to it" if total < 1.0 else "",
        )
    return possible[0], parts, {name: str(text) for name, text in texts.items()}


def _part(shown: str, name: str, text: object) -> Stated:
    stated = quantity(text, "fraction", f"{shown} {name}")
    if not 0.0 <= stated.value <= 1.0:
        raise JobError(f"{stated.text!r}", where=f"{shown} {name}", expected="a percentage from 0 to 100 %")
    return stated


def mixture(table: Table, gas: Gas) -> tuple[Gas, tuple[Finding, ...]]:
    """Return the gas of [gas.components].

    Raises
    ------
    JobError
        If a species is unknown, or the wet fractions do not sum to 100 %.
    """
    shown = "[gas.components]"
    table.need("components", "the wet mole fractions by species", 'for example [gas.components] nitrogen = "70 %"')
    values = dict(_table(shown, table.get("components"), "the wet mole fractions by species"))
    inner, rest = values.pop("rest", None), table.text("rest")
    if inner is not None and rest is not None:
        raise JobError("rest is stated twice", where=shown, expected="rest once")
    rest = rest if inner is None else inner
    for name in (*values, *([] if rest is None else [rest])):
        if name not in SPECIES:
            guess = nearest(str(name), SPECIES)
            raise JobError(
                f"unknown species {name!r}", where=shown, expected=f"one of {', '.join(SPECIES)}", how=f"perhaps {guess}" if guess else ""
            )
    parts = {name: _part(shown, name, text) for name, text in values.items()}
    if rest is not None and (rest in parts or rest == "water"):
        raise JobError(f"rest = {rest!r}", where=shown, expected="a species that is not stated beside it, and not water")
    total = sum(part.value for part in parts.values())
    if total > 1.0 + MIXTURE_SUM + 1e-12 or (rest is None and total < 1.0 - MIXTURE_SUM - 1e-12):
        raise JobError(
            f"{' + '.join(parts) or 'nothing'} = {100 * total:.7g} %", where=shown,
            expected="wet mole fractions that sum to 100 % within 0.01 %",
            how='rest = "nitrogen" fills up with nitrogen' if total < 1.0 else "",
        )
    water = parts.pop("water", None)
    if water is not None and water.value >= 1.0 - MIXTURE_SUM:
        raise JobError(f"water {water.text!r}", where=shown, expected='a gas that is not steam alone; steam is kind = "given"')
    found = replace(gas, composition=parts, rest=rest or "", water=water, humidity="dry" if water is None else "moisture")
    return found, _about(found)


def _about(gas: Gas) -> tuple[Finding, ...]:
    """Say what a mixture was taken to be."""
    stated = ", ".join(f"{name.replace('_', ' ')} {part.text}" for name, part in gas.composition.items())
    rest = f", the rest {gas.rest.replace('_', ' ')}" if gas.rest else ""
    water = f"water {gas.water.text}, " if gas.water else "no water, "
    light = sum(gas.composition[name].value for name in LIGHT if name in gas.composition) + (1.0 if gas.rest in LIGHT else 0.0)
    return (
        Finding(
            level="note", topic="gas", setting="[gas.components]",
            message=f"Mixture, wet: {water}{stated}{rest}. Molar mass with modern constants, viscosity by Herning and Zipperer, ratio of "
            "specific heats from the composition unless stated.",
        ),
        *((Finding(
            level="attention", topic="gas", setting="[gas.components]",
            message="Hydrogen or helium above 10 %: the mixing rule of the viscosity, and with it the Reynolds number, is a rough figure.",
        ),) if light > 0.1 else ()),
    )
