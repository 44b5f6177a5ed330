"""A stack gas on its way into the chain: train, psychrometer, fuel, mixture; what was used is said, what cannot be is named."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from typing import Literal, cast

import numpy as np

from traverse.chain import Setting, StackSetting, collected, composition, resolved
from traverse.model import Array, Finding, Gas, Run
from traverse.physics import combustion
from traverse.physics.moist_air import RATIO
from traverse.physics.water import saturation_pressure

# Agreement in moisture below which two relations count as the same: a hundredth of a percentage point.
SAME = 1e-4


def stack_setting(gas: Gas) -> StackSetting | None:
    """Return which further equations a gas needs; None for one stated by analysis and one humidity."""
    if not (gas.psychrometer or gas.train or gas.fuel or gas.kind == "mixture"):
        return None
    return StackSetting(
        psychrometer=cast("Literal['', 'energy-balance', 'carrier', 'ferrel']", gas.psychrometer),
        train="" if gas.train is None else "volume" if gas.train.by_volume else "mass",
        approximation=gas.train is not None and gas.train.approximation,
        fuel=gas.fuel.atoms if gas.fuel else None,
        fuel_from="excess_air" if gas.fuel and gas.fuel.excess_air is not None else "oxygen",
        fuel_composition=gas.fuel is not None and not gas.fuel.measured,
        species=tuple(gas.composition) if gas.kind == "mixture" else (), rest=gas.rest,
    )


def stack_inputs(gas: Gas) -> dict[str, Array]:
    """Return the chain's inputs that only such a gas has, each of shape (1,)."""
    values: dict[str, float] = {name: stated.value for name, stated in gas.composition.items()}
    train, fuel = gas.train, gas.fuel
    if train is not None:
        values |= {
            "condensed": train.condensed.value, "silica_gel": train.silica_gel.value if train.silica_gel else 0.0,
            "meter_volume": train.meter_volume.value, "meter_temperature": train.meter_temperature.value,
            "meter_factor": train.meter_factor, "orifice_pressure": train.orifice_pressure.value if train.orifice_pressure else 0.0,
        }
        own = train.meter_pressure or train.barometric
        # Without a pressure of its own the meter stands at the run's barometer, and shares its error.
        values |= {} if own is None else {"meter_barometric": own.value}
    if fuel is not None:
        values["air_humidity_ratio"] = fuel.air_humidity_ratio.value if fuel.air_humidity_ratio else 0.0
        values |= {} if fuel.excess_air is None else {"excess_air": fuel.excess_air.value}
    return {name: np.array([value]) for name, value in values.items()}


def molar_mass(gas: Gas, temperature: Array, pressure: Array, barometric: Array) -> Array:
    """Return the wet molar mass of a stack gas by exact physics [g/mol], before any run; arrays of shape (1,)."""
    names = ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide")
    inputs = {name: np.array([gas.fraction(name)]) for name in names} | stack_inputs(gas) | {
        "water": np.array([gas.water.value if gas.water else 0.0]), "moisture_shift": np.zeros(1), "barometric": barometric,
    }
    setting = Setting(shape="round", gas_kind=gas.kind, humidity=gas.humidity, stack=stack_setting(gas))
    return composition(resolved(inputs, setting), setting, temperature, pressure)["molar_mass"]


def shown_water(gas: Gas) -> str:
    """Return what was stated of the water, for a message."""
    form = gas.humidity.replace("_", " ")
    if gas.humidity == "combustion":
        return "the water that the fuel gives"
    if gas.humidity == "moisture_train":
        return "the moisture of the sampling train"
    return f"{form} of {gas.water.text if gas.water else 'saturated gas'}"


def why_no_water(gas: Gas, temperature: float, pressure: float) -> tuple[str, str]:
    """Return what would be right, and how to say so, where the water of a gas cannot be."""
    limit = min(1.0, float(saturation_pressure(np.float64(temperature))) / pressure)
    saturation = f"at most saturation, {100 * limit:.3g} % by volume"
    if gas.humidity in {"moisture", "combustion"} and limit < 1.0:
        return saturation, "for a gas with droplets say saturated = true"
    if gas.humidity != "wet_bulb" or gas.water is None:
        return saturation, ""
    wet = gas.water.value
    if wet > temperature:
        return f"a wet bulb at or below the dry bulb, {temperature - 273.15:.1f} degC", ""
    if float(saturation_pressure(np.float64(wet))) >= pressure:
        return "a wet bulb below the boiling point of water at this pressure", ""
    return f"{saturation}, and no less than none: so low a wet bulb belongs to no gas of this temperature", "read the wick again"


def matter_findings(run: Run, inputs: Mapping[str, Array], setting: Setting) -> tuple[Finding, ...]:
    """Say which formula gave water and composition of a stack gas, what it gave, and what others would have."""
    if setting.stack is None:
        return ()
    weight = inputs["weight"]
    temperature = np.array([float(np.sum(weight * inputs["temperature"]))])
    pressure = np.array([float(np.sum(weight * (inputs["barometric"] + inputs["static"])))])
    found = [*_train(run, inputs, setting, temperature, pressure), *_psychrometer(inputs, setting, temperature, pressure),
             *_fuel(run, inputs, setting)]
    if run.gas.kind == "mixture" and setting.constants is not None:
        found.append(("note", "gas", "[gas.components]",
                      "the method's own analysis knows no such gases: the dry mixture is weighed with modern molar masses, its water with "
                      f"{setting.constants.molar_mass_water:g}"))
    return tuple(
        Finding(level=cast("Literal['note', 'attention']", level), topic=topic, setting=key, message=f"run {run.name}: {message}.")
        for level, topic, key, message in found
    )


def derived_gas(run: Run, inputs: Mapping[str, Array], setting: Setting) -> dict[str, float]:
    """Return what follows from a fuel or a sampling train, by name: dry fractions, excess air, moisture before saturation."""
    stack, found = setting.stack, dict[str, Array]()
    if stack is None:
        return {}
    if stack.fuel is not None:
        names = ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide", "excess_air")
        burnt = _burnt(stack, inputs)
        found |= {f"{name}_of_fuel" if name != "excess_air" else name: burnt[name] for name in (*names, "moisture")}
    if run.gas.train is not None:
        found["moisture_of_train"] = collected(inputs, setting)["moisture"]
    return {name: float(value[0]) for name, value in found.items()}


def _burnt(stack: StackSetting, inputs: Mapping[str, Array]) -> dict[str, Array]:
    """Return the flue gas that the fuel gives."""
    assert stack.fuel is not None, "there is a fuel"
    balance = combustion.from_oxygen if stack.fuel_from == "oxygen" else combustion.from_excess_air
    return balance(stack.fuel, inputs[stack.fuel_from], inputs["carbon_monoxide"], inputs["air_humidity_ratio"])


_Said = Iterator[tuple[str, str, str, str]]


def _train(run: Run, inputs: Mapping[str, Array], setting: Setting, temperature: Array, pressure: Array) -> _Said:
    train = run.gas.train
    if train is None:
        return
    key, own = "[gas.moisture_train]", collected(inputs, setting)
    moisture = float(own["moisture"][0])
    residual = ", with the residual of the approximation method" if train.approximation else ""
    if setting.constants is None:
        amounts = f"{float(own['water'][0]):.4g} mol of water, {float(own['gas'][0]):.4g} mol of dry gas"
        yield ("note", "moisture", key,
               f"sampling train: {amounts} by the gas law with modern constants: {100 * moisture:.3f} %{residual}")
    else:
        unit = "ft3" if setting.constants.temperature == "degF" else "m3"
        modern = float(collected(inputs, replace(setting, constants=None))["moisture"][0])
        amounts = f"{float(own['water'][0]):.4g} {unit} of vapour and {float(own['gas'][0]):.4g} {unit} of dry gas"
        yield ("note", "moisture", key, f"sampling train: {amounts} at standard conditions by Method 4, constants as printed: "
               f"{100 * moisture:.3f} %{residual}; modern constants would give {100 * modern:.3f} %")
    limit = float(saturation_pressure(temperature)[0] / pressure[0])
    if moisture > limit:
        yield ("attention", "moisture", key, f"the sampling train gives {100 * moisture:.2f} %, more than saturation at "
               f"{float(temperature[0]) - 273.15:.1f} degC and {float(pressure[0]):.0f} Pa: droplets were drawn in, and the lower, "
               f"{100 * limit:.2f} %, was used (Method 4)")
    if train.approximation and setting.constants is not None:
        yield ("attention", "moisture", key, "the approximation method serves to plan a test; final figures need the reference method "
               "(Method 4, 2.2.2), or proof that they agree within 1 % of water")


def _psychrometer(inputs: Mapping[str, Array], setting: Setting, temperature: Array, pressure: Array) -> _Said:
    stack = setting.stack
    if stack is None or not stack.psychrometer:
        return
    resolved_inputs = resolved(inputs, setting)

    def moisture(relation: str) -> float:
        other = replace(setting, stack=replace(stack, psychrometer=cast("Literal['', 'energy-balance', 'carrier', 'ferrel']", relation)))
        return float(composition(resolved_inputs, other, temperature, pressure)["moisture"][0])

    used, balance, air = moisture(stack.psychrometer), moisture("energy-balance"), moisture("")
    name = {"energy-balance": "the energy balance with the heat capacity of this gas", "carrier": "Carrier's equation",
            "ferrel": "Ferrel's linear formula"}[stack.psychrometer]
    text = f"wet bulb by {name}: moisture {100 * used:.3f} %"
    if stack.psychrometer == "energy-balance":
        yield "note", "moisture", "[gas] psychrometer", f"{text}; the relation of air would give {_percent(air)}"
        return
    text += f"; the energy balance with the heat capacity of this gas would give {_percent(balance)}"
    if np.isfinite(balance):
        text += f", so that the formula stands {100 * (used - balance):+.3f} points off"
    if stack.psychrometer == "ferrel":
        text += "; it leaves out the heat of the vapour that is there already, and reads hot gas too dry"
    yield ("note" if abs(used - balance) <= SAME else "attention"), "moisture", "[gas] psychrometer", text


def _percent(fraction: float) -> str:
    return f"{100 * fraction:.3f} %" if np.isfinite(fraction) else "no value that can be"


def _fuel(run: Run, inputs: Mapping[str, Array], setting: Setting) -> _Said:
    fuel, stack = run.gas.fuel, setting.stack
    if fuel is None or stack is None:
        return
    burnt = {name: float(value[0]) for name, value in _burnt(stack, inputs).items()}
    air = f"air of {fuel.air_humidity_ratio.text}" if fuel.air_humidity_ratio else "air taken as dry"
    text = (
        f"complete combustion of {fuel.name} at {100 * burnt['oxygen']:.2f} % oxygen (excess air {100 * burnt['excess_air']:.1f} %, "
        f"{air}): carbon dioxide {100 * burnt['carbon_dioxide']:.3f} %, sulfur dioxide {1e6 * burnt['sulfur_dioxide']:.0f} ppm, dry; "
        f"moisture {100 * burnt['moisture']:.2f} %, by the balance of the elements"
    )
    if not stack.fuel_composition:
        text += f"; the measured carbon dioxide, {100 * float(inputs['carbon_dioxide'][0]):.3f} %, counts for the molar mass"
    if setting.humidity != "combustion":
        text += "; the moisture stated otherwise counts"
    yield "note", "fuel", "[gas] fuel", text
    if fuel.air_humidity_ratio is None and setting.humidity == "combustion":
        yield ("attention", "fuel", "[gas] air_humidity_ratio", "the water of the combustion air is not stated and was left out; each "
               f"1 g/kg adds {100 * _per_gram(burnt):.2f} points of moisture")


def _per_gram(burnt: Mapping[str, float]) -> float:
    """Return what 1 g/kg in the combustion air adds to the moisture."""
    water = 1e-3 * burnt["dry_air"] / RATIO
    return water / burnt["dry_gas"] * (1.0 - burnt["moisture"]) ** 2
