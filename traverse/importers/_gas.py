"""[gas]: composition and humidity, in exactly one form."""

from __future__ import annotations

from dataclasses import replace
from typing import Literal, cast

from traverse.errors import JobError
from traverse.importers import _stack_gas
from traverse.importers._schema import Table
from traverse.model import COMPONENTS, Equation, Finding, Gas, Humidity
from traverse.units import Stated

HUMIDITY: dict[str, tuple[str, ...]] = {
    "air": ("relative_humidity", "wet_bulb", "dew_point", "humidity_ratio", "moisture", "dry"),
    "flue-gas": ("moisture", "wet_bulb", "dew_point", "saturated", "dry", "moisture_train"),
    "given": ("moisture",), "mixture": (),
}
_ALL_FORMS = tuple(dict.fromkeys(form for forms in HUMIDITY.values() for form in forms))
_FLAGS = ("dry", "saturated")
_OWN: dict[str, tuple[str, ...]] = {
    "air": ("equation",), "flue-gas": (*COMPONENTS, "psychrometer", "fuel", "excess_air", "air_humidity_ratio"),
    "given": ("density", "temperature", "pressure", "molar_mass"), "mixture": ("components", "rest"),
}
Kind = Literal["air", "flue-gas", "given", "mixture"]


def merge(base: Table, over: Table | None) -> Table:
    """Return the gas of one run: a [[run]] key that states another humidity form replaces the default's."""
    if over is None:
        return base
    kept = dict(base.values)
    if "kind" in over and over.text("kind") != base.text("kind"):
        kept = {}
    if any(form in over for form in _ALL_FORMS):
        kept = {key: value for key, value in kept.items() if key not in _ALL_FORMS and (key != "psychrometer" or "wet_bulb" in over)}
    for one, other in (("density", "molar_mass"), ("molar_mass", "density"), ("oxygen", "excess_air"), ("excess_air", "oxygen")):
        if one in over and other not in over:
            kept.pop(other, None)
    own = dict(over.values)
    if "moisture_train" in base and "moisture_train" in over:
        own["moisture_train"] = _stack_gas.merged_train(base.get("moisture_train"), over.get("moisture_train"))
    if isinstance(kept.get("components"), dict) and isinstance(own.get("components"), dict):
        own["components"] = kept["components"] | own["components"]
    return Table(over.name, {**kept, **own})


def build(table: Table) -> tuple[Gas, tuple[Finding, ...]]:
    """Return the gas of a [gas] table, and what was taken for granted.

    Raises
    ------
    JobError
        If the kind, the humidity or the analysis is missing, stated twice, or impossible.
    """
    table.need("kind", '"air", "flue-gas", "given" or "mixture"', 'for example kind = "air" with relative_humidity = "45 %"')
    kind = cast("Kind", table.text("kind"))
    for key in table.values:
        if key not in (*HUMIDITY[kind], *_OWN[kind], "kind", "ratio_of_specific_heats"):
            raise JobError(
                f'{key} has no meaning for kind = "{kind}"', where=table.where(key),
                expected=f"one of {', '.join((*_OWN[kind], *HUMIDITY[kind], 'ratio_of_specific_heats'))}",
            )
    humidity, water = _humidity(table, kind)
    ratio = table.number("ratio_of_specific_heats")
    if ratio is not None and not 1.0 < ratio <= 5.0 / 3.0 + 1e-9:
        raise JobError(
            f"a ratio of {ratio:g}", where=table.where("ratio_of_specific_heats"), expected="a number between 1 and 1.667"
        )
    gas = Gas(kind=kind, humidity=humidity, water=water, ratio_of_specific_heats=ratio)
    if kind == "air":
        return replace(gas, equation=cast("Equation", table.text("equation") or "ideal")), ()
    if kind == "mixture":
        return _stack_gas.mixture(table, gas)
    return _stack(table, gas) if kind == "flue-gas" else _given(table, gas)


def _stack(table: Table, gas: Gas) -> tuple[Gas, tuple[Finding, ...]]:
    """Return a flue gas with what was measured in place of its moisture and its composition: train, psychrometer, fuel."""
    if gas.humidity == "moisture_train":
        gas = replace(gas, train=_stack_gas.train(f"{table.name} moisture_train", table.get("moisture_train")))
    if "psychrometer" in table:
        if gas.humidity != "wet_bulb":
            raise JobError("psychrometer without wet_bulb", where=table.where("psychrometer"), expected="a wet_bulb that it reads")
        gas = replace(gas, psychrometer=table.text("psychrometer") or "")
    if "fuel" not in table:
        for key in ("excess_air", "air_humidity_ratio"):
            if key in table:
                raise JobError(f"{key} without a fuel", where=table.where(key), expected='a fuel, such as fuel = "natural-gas"')
        return _flue_gas(table, gas)
    fuel, findings = _stack_gas.fuel(table)
    gas = replace(gas, fuel=fuel)
    if fuel.measured or "oxygen" in table:
        gas, more = _flue_gas(table, gas)
        findings += more if fuel.measured else ()
    elif "carbon_monoxide" in table:
        gas = _flue_gas(table, gas)[0]
    _stack_gas.refuse_no_combustion(table, gas)
    return gas, findings


def _humidity(table: Table, kind: Kind) -> tuple[Humidity, Stated | None]:
    forms = [form for form in HUMIDITY[kind] if form in table]
    for form in forms:
        if form in _FLAGS and not table.flag(form):
            raise JobError(
                f"{form} = false", where=table.where(form), expected=f"{form} = true, or the humidity in another form"
            )
    shown = " | ".join(HUMIDITY[kind])
    if len(forms) > 1:
        raise JobError(f"{' and '.join(forms)}", where=table.name, expected=f"exactly one of {shown}")
    if not forms:
        if kind == "given":
            return "none", None
        if kind == "mixture":
            return "dry", None
        if kind == "flue-gas" and "fuel" in table:
            return "combustion", None
        raise JobError(
            "the humidity of the gas is not stated", where=table.name, expected=f"exactly one of {shown}",
            how="dry = true says that there is no water in it",
        )
    form = forms[0]
    if form in _FLAGS or form == "moisture_train":
        return cast("Humidity", form), None
    water = table.stated(form)
    assert water is not None
    if form == "moisture":
        _between(table, form, water, 0.0, 1.0, "a percentage from 0 to below 100 %", open_end=True)
    if form == "relative_humidity":
        _between(table, form, water, 0.0, 1.0, "a percentage from 0 to 100 %")
    if form == "humidity_ratio" and water.value < 0:
        raise JobError(f"{water.text!r}", where=table.where(form), expected="a humidity ratio of zero or more")
    return cast("Humidity", form), water


def _between(
    table: Table, key: str, stated: Stated, low: float, high: float, expected: str, *, open_end: bool = False
) -> None:
    if not low <= stated.value <= high or (open_end and stated.value >= high):
        raise JobError(f"{stated.text!r}", where=table.where(key), expected=expected)


def _flue_gas(table: Table, gas: Gas) -> tuple[Gas, tuple[Finding, ...]]:
    composition = {name: table.stated(name) for name in COMPONENTS if name in table}
    stated = {name: value for name, value in composition.items() if value is not None}
    if not stated:
        raise JobError(
            "no analysis of the flue gas", where=table.name,
            expected="oxygen and carbon_dioxide, dry, by volume",
            how='for example oxygen = "7.2 %" and carbon_dioxide = "11.8 %"; air-like gas is kind = "air"',
        )
    for name, value in stated.items():
        _between(table, name, value, 0.0, 1.0, "a percentage from 0 to 100 %")
    total = sum(value.value for value in stated.values())
    if total > 1.0 + 1e-9:
        raise JobError(
            f"{' + '.join(stated)} = {100 * total:g} %", where=table.name, expected="dry fractions that sum to at most 100 %"
        )
    absent = [name for name in ("oxygen", "carbon_dioxide") if name not in stated]
    findings = tuple(Finding(
        level="attention", topic="gas", setting=f"[gas] {name}", message=f"{name} is not stated and was taken as 0 %.",
    ) for name in absent)
    return replace(gas, composition=stated), findings


def _given(table: Table, gas: Gas) -> tuple[Gas, tuple[Finding, ...]]:
    density, molar_mass = table.stated("density"), table.stated("molar_mass")
    temperature, pressure = table.stated("temperature"), table.stated("pressure")
    if (density is None) == (molar_mass is None):
        raise JobError(
            "both density and molar_mass" if density else "neither density nor molar_mass", where=table.name,
            expected="exactly one of density | molar_mass for a given gas",
        )
    for key, stated in (("density", density), ("molar_mass", molar_mass), ("pressure", pressure), ("temperature", temperature)):
        if stated is not None and not stated.value > 0:
            raise JobError(f"{stated.text!r}", where=table.where(key), expected="a value above zero")
    if (temperature is None) != (pressure is None):
        lacking = "temperature" if temperature is None else "pressure"
        raise JobError(
            f"the conditions of the density lack the {lacking}", where=table.name,
            expected="both temperature and pressure, or neither when the density holds at the plane",
        )
    if molar_mass is not None and (temperature is not None or pressure is not None):
        raise JobError(
            "temperature and pressure beside a molar mass", where=table.name,
            expected="conditions only with a density; those at the plane stand in [conditions]",
        )
    findings: tuple[Finding, ...] = ()
    if density is not None and temperature is None:
        findings = (Finding(
            level="note", topic="gas", setting="[gas] temperature, pressure",
            message=f"The given density {density.text} is taken to hold at the plane.",
        ),)
    return replace(
        gas, density=density, molar_mass=molar_mass, density_temperature=temperature, density_pressure=pressure
    ), findings
