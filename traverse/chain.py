"""The equation chain: from pressures, temperatures and composition to a flow, on one page.

Every function takes numpy arrays whose *last axis is the traverse point* (length n, or 1 for what holds for the whole
run). Leading axes are free: runs, a batch of traverses, draws, or the perturbed inputs of an uncertainty budget.
Nothing here knows a record, a unit other than SI (a method's own arithmetic excepted), or a policy for bad readings:
those have been applied before. Impossible input gives NaN.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
import numpy.typing as npt

from traverse.methods import Constants
from traverse.physics import combustion, gas, humid_air, mixture, moist_air, pitot, sections, stack_moisture
from traverse.physics.probe import Calibrated, at_points
from traverse.units import convert

Array = npt.NDArray[np.float64]
Equation = Literal["ideal", "cipm-2007", "virial"]


@dataclass(frozen=True, slots=True, kw_only=True)
class StackSetting:
    """What selects the equations of a stack gas that is not stated by its dry analysis and one humidity.

    ``train`` is 'mass' or 'volume' (of the condensate); ``fuel_from`` is 'oxygen' or 'excess_air', and ``fuel_composition`` says
    that the dry composition follows from the fuel too; ``species`` are the stated gases of a mixture without water, ``rest`` the
    one that fills up.
    """

    psychrometer: Literal["", "energy-balance", "carrier", "ferrel"] = ""
    train: Literal["", "mass", "volume"] = ""
    approximation: bool = False
    fuel: combustion.Atoms | None = None
    fuel_from: Literal["oxygen", "excess_air"] = "oxygen"
    fuel_composition: bool = True
    species: tuple[str, ...] = ()
    rest: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Setting:
    """What selects the equations. None of it is uncertain, so none of it is an array.

    ``reference`` is ('conditions', temperature [K], pressure [Pa]), ('density', density [kg/m3], 0) or None. ``equation`` is that
    of humid air, for the density at every point and for saturation; a method with constants of its own takes the ideal gas.
    """

    shape: str
    gas_kind: Literal["air", "flue-gas", "given", "mixture"]
    humidity: str
    density_given: Literal["", "at plane", "at conditions"] = ""
    ratio_of_specific_heats: float | None = None
    arithmetic: Literal["pointwise", "root-mean"] = "pointwise"
    compressible: bool = True
    signed: bool = False
    constants: Constants | None = None
    reference: tuple[str, float, float] | None = None
    dimensions: tuple[str, ...] = field(default=("diameter",))
    stack: StackSetting | None = None
    probe: Calibrated | None = None
    equation: Equation = "ideal"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Flow:
    """What the chain gives. ``points`` keep the point axis; ``quantities`` have lost it."""

    points: dict[str, Array]
    quantities: dict[str, Array]


def evaluate(inputs: Mapping[str, Array], setting: Setting) -> Flow:
    """Run the whole chain.

    Parameters
    ----------
    inputs : mapping of str to array, shape (..., n) or (..., 1)
        ``differential_pressure`` [Pa], ``root_shift`` [Pa^0.5], ``temperature`` [K], ``static`` [Pa gauge],
        ``barometric`` [Pa], ``yaw`` [rad], ``weight``, ``coefficient``, ``water`` (in the form ``setting.humidity``),
        ``moisture_shift``, the dry fractions (wet ones of a mixture), ``density`` [kg/m3], ``density_temperature`` [K],
        ``density_pressure`` [Pa], ``molar_mass`` [g/mol], of a calibrated probe ``coefficient_shift``, ``pitch`` [rad] and
        ``pitch_pressure`` [Pa], ``point_factor``, ``wall_factor``, ``profile_factor``, and the dimensions of the
        section by name [m].
    setting : Setting
        Which equations.

    Returns
    -------
    Flow
        Quantities in SI; NaN where the inputs are impossible or a quantity does not exist.
    """
    inputs = resolved(inputs, setting)
    weight = inputs["weight"]
    pressure = inputs["barometric"] + inputs["static"]
    mean = {name: _mean(weight, inputs[name]) for name in ("temperature", "static")}
    mean["pressure"] = _mean(weight, pressure)
    matter = composition(inputs, setting, mean["temperature"], mean["pressure"])
    root = roots(inputs["differential_pressure"], signed=setting.signed) + inputs["root_shift"]
    step = _pointwise if setting.constants is None else _own_units
    flow = step(inputs, setting, matter, root, mean)
    size = {name: inputs[name] for name in setting.dimensions}
    return _totals(flow, inputs, setting, matter, root, mean, size)


def resolved(inputs: Mapping[str, Array], setting: Setting) -> Mapping[str, Array]:
    """Return the inputs with what follows from a fuel or a sampling train put where the rest of the chain looks for it.

    ``oxygen``, ``carbon_dioxide``, ``carbon_monoxide`` and ``sulfur_dioxide`` of a fuel's gas; ``water`` as the mole fraction
    that the fuel or the train gives, before any comparison with saturation. Without either the inputs are returned as they are.
    """
    stack = setting.stack
    if stack is None or (stack.fuel is None and not stack.train):
        return inputs
    found = dict(inputs)
    if stack.fuel is not None:
        balance = combustion.from_oxygen if stack.fuel_from == "oxygen" else combustion.from_excess_air
        burnt = balance(stack.fuel, inputs[stack.fuel_from], inputs["carbon_monoxide"], inputs["air_humidity_ratio"])
        if stack.fuel_composition:
            found |= {name: burnt[name] for name in ("oxygen", "carbon_dioxide", "sulfur_dioxide")}
        if setting.humidity == "combustion":
            found["water"] = burnt["moisture"]
    if stack.train:
        found["water"] = collected(inputs, setting)["moisture"]
    return found


def collected(inputs: Mapping[str, Array], setting: Setting) -> dict[str, Array]:
    """Return the water, the dry gas and the moisture of a sampling train, by the method's printed constants where it has them."""
    own, stack = setting.constants, setting.stack
    assert stack is not None and stack.train, "there is a train"
    system: stack_moisture.System = "modern" if own is None else "us" if own.temperature == "degF" else "si"
    metered = {**inputs, "meter_barometric": inputs.get("meter_barometric", inputs["barometric"])}
    return stack_moisture.train(metered, system, by_volume=stack.train == "volume", approximation=stack.approximation)


def _moisture(inputs: Mapping[str, Array], setting: Setting, temperature: Array, pressure: Array) -> Array:
    """Return the mole fraction of water from whichever humidity was stated."""
    stack = setting.stack
    if stack is not None and stack.train:
        return stack_moisture.capped(inputs["water"], temperature, pressure)
    if stack is not None and stack.psychrometer:
        middle = (inputs["water"] + temperature) / 2.0
        found = stack_moisture.wet_bulb_fraction(
            stack.psychrometer, inputs["water"], temperature, pressure, mixture.heat_capacity(_dry_species(inputs, setting), middle)
        )
        return moist_air.mole_fraction("moisture", found, temperature, pressure)
    form = "moisture" if setting.humidity == "combustion" else setting.humidity
    return humid_air.mole_fraction(setting.equation, form, inputs["water"], temperature, pressure)


def roots(differential_pressure: Array, *, signed: bool) -> Array:
    """Return the roots of the differential pressures; a negative one counts as zero, or keeps its sign. [Pa^0.5]"""
    if signed:
        return np.sign(differential_pressure) * np.sqrt(np.abs(differential_pressure))
    return np.sqrt(np.maximum(differential_pressure, 0.0))


def composition(inputs: Mapping[str, Array], setting: Setting, temperature: Array, pressure: Array) -> dict[str, Array]:
    """Return moisture and molar masses of the run, at its mean temperature and absolute pressure.

    ``molar_mass`` is NaN for a gas given by its density at the plane; ``molar_mass_dry`` where moisture is unknown.
    """
    if setting.humidity == "none":
        moisture = np.full(np.shape(temperature), np.nan)
    else:
        moisture = _moisture(inputs, setting, temperature, pressure) + inputs["moisture_shift"]
    own = setting.constants
    water = own.molar_mass_water if own else gas.MOLAR_MASS["H2O"]
    parts = tuple(inputs[name] for name in ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide"))
    if setting.gas_kind == "given":
        wet = inputs["molar_mass"]
        if setting.density_given == "at conditions":
            wet = inputs["density"] * gas.R * inputs["density_temperature"] / inputs["density_pressure"] * 1e3
        elif setting.density_given == "at plane":
            wet = inputs["density"] * gas.R * temperature / pressure * 1e3
        return {"moisture": moisture, "molar_mass": wet, "molar_mass_dry": (wet - water * moisture) / (1.0 - moisture)}
    if setting.gas_kind == "air":
        dry = np.full(np.shape(temperature), own.molar_mass_air if own else gas.MOLAR_MASS["air"])
    elif setting.gas_kind == "mixture":
        dry = mixture.dry_molar_mass(_dry_species(inputs, setting))
    else:
        dry = gas.epa_dry_molar_mass(*parts) if own else gas.dry_molar_mass(*parts)
    wet = gas.wet_molar_mass(dry, moisture, water)
    return {"moisture": moisture, "molar_mass": wet, "molar_mass_dry": dry}


def _dry_species(inputs: Mapping[str, Array], setting: Setting) -> dict[str, Array]:
    """Return the mole fractions of the dry gas by symbol, for a mixture or a flue gas."""
    if setting.gas_kind == "mixture":
        assert setting.stack is not None, "a mixture names its species"
        return mixture.dry_fractions(inputs, setting.stack.species, setting.stack.rest, inputs["water"])
    parts = gas.wet_composition(
        inputs["oxygen"], inputs["carbon_dioxide"], inputs["carbon_monoxide"], inputs["sulfur_dioxide"], 0.0
    )
    return {name: part for name, part in parts.items() if name != "H2O"}


def _species(inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array]) -> dict[str, Array]:
    moisture = np.where(np.isfinite(matter["moisture"]), matter["moisture"], 0.0)
    if setting.gas_kind == "mixture":
        return mixture.wet(_dry_species(inputs, setting), moisture)
    if setting.gas_kind == "flue-gas":
        return gas.wet_composition(
            inputs["oxygen"], inputs["carbon_dioxide"], inputs["carbon_monoxide"], inputs["sulfur_dioxide"], moisture
        )
    return gas.air_composition(moisture)


def _pointwise(
    inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array], root: Array,
    mean: Mapping[str, Array],
) -> dict[str, Array]:
    """Velocity at each point with the density there; docs/method.md gives the equations."""
    pressure = inputs["barometric"] + inputs["static"]
    if setting.density_given == "at plane":
        density = inputs["density"] + 0.0 * inputs["temperature"]
    else:
        density = gas.density(pressure, matter["molar_mass"], inputs["temperature"])
    real = compressibility(inputs, setting, matter)
    if real is not None:
        density = density * (gas.R / humid_air.GAS_CONSTANT[setting.equation]) / real
    impact = np.square(root)
    ratio = ratio_of_specific_heats(inputs, setting, matter, mean["temperature"]) if setting.compressible else 1.4

    def speed(coefficient: Array) -> Array:
        if not setting.compressible:
            return pitot.velocity(impact, density, coefficient)
        return pitot.velocity(impact, density, coefficient, static_pressure=pressure, ratio_of_specific_heats=ratio)

    own = at_points(inputs, setting.probe, speed, exact=not setting.compressible)
    velocity = np.copysign(own["speed"], root) * np.cos(inputs["yaw"]) * np.cos(own["pitch"]) * inputs["point_factor"]
    weighted = inputs["weight"] * velocity
    flow = {"velocity": velocity, "density": density, "mean_velocity": _sum(weighted), "flux": _sum(weighted * density), **own}
    if setting.reference is not None:
        kind, first, second = setting.reference
        standard = density / first if kind == "density" else pressure / second * (first / inputs["temperature"])
        # An amount of gas stands for its volume as an ideal gas at the standard conditions.
        flow["standard"] = _sum(weighted * (standard if real is None or kind == "density" else standard / real))
    return flow


def compressibility(inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array]) -> Array | None:
    """Return the compressibility factor of humid air at every point, None for an ideal gas. [1]"""
    if setting.equation == "ideal":
        return None
    pressure = inputs["barometric"] + inputs["static"]
    return humid_air.compressibility(setting.equation, inputs["temperature"], pressure, matter["moisture"])


def _own_units(
    inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array], root: Array,
    mean: Mapping[str, Array],
) -> dict[str, Array]:
    """Velocities in the units and constants of the method.

    Mean root with mean temperature (Method 2, eqs. 2-7 and 2-8), or each point with its own temperature inside the root
    (Method 2G, eq. 2G-6; flows with the mean temperature, eqs. 2G-9 and 2G-10).
    """
    own = setting.constants
    assert own is not None, "only for a method with constants of its own"
    temperature = _own_temperature(mean["temperature"], own)
    local = temperature if setting.arithmetic == "root-mean" else _own_temperature(inputs["temperature"], own)
    absolute = _own(inputs["barometric"], own.pressure) + _own(mean["static"], own.head) / own.water_over_mercury
    head = root * np.sqrt(convert(1.0, own.head))

    def speed(coefficient: Array) -> Array:
        factor = own.velocity_constant * coefficient * np.sqrt(local / (absolute * matter["molar_mass"]))
        return np.asarray(factor * head / convert(1.0, own.velocity))

    turned = at_points(inputs, setting.probe, speed, exact=True)
    velocity = turned["speed"] * np.cos(inputs["yaw"]) * np.cos(turned["pitch"]) * inputs["point_factor"]
    density = gas.density(mean["pressure"], matter["molar_mass"], mean["temperature"])
    mean_velocity = _sum(inputs["weight"] * velocity)
    flow = {"velocity": velocity, "density": density + 0.0 * velocity, "mean_velocity": mean_velocity, **turned}
    flow["flux"] = mean_velocity * density[..., 0]
    if setting.reference is not None:
        kind, first, second = setting.reference
        if kind == "density":
            flow["standard"] = flow["flux"] / first
        else:
            standard = _own_temperature(np.float64(first), own)
            flow["standard"] = mean_velocity * (
                (standard / temperature) * (absolute / _own(np.float64(second), own.pressure))
            )[..., 0]
    return flow


def _totals(
    flow: Mapping[str, Array], inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array], root: Array,
    mean: Mapping[str, Array], size: Mapping[str, Array],
) -> Flow:
    """Multiply by the area and gather the quantities."""
    area = sections.area(setting.shape, size)[..., 0]
    factor = (inputs["profile_factor"] * inputs["wall_factor"])[..., 0]
    mean_velocity = flow["mean_velocity"] * factor
    actual, mass = area * mean_velocity, area * flow["flux"] * factor
    moisture = matter["moisture"][..., 0]
    still = _sum(inputs["weight"] * flow["density"])
    density = np.where(actual == 0.0, still, mass / np.where(actual == 0.0, 1.0, actual))
    temperature = mean["temperature"]
    species = _species(inputs, setting, matter)
    viscosity = gas.viscosity(species, temperature) if setting.gas_kind in {"flue-gas", "mixture"} else gas.air_viscosity(temperature)
    quantities = {
        "area": area,
        "barometric_pressure": inputs["barometric"][..., 0],
        "static_pressure": mean["static"][..., 0],
        "absolute_pressure": mean["pressure"][..., 0],
        "temperature": temperature[..., 0],
        "moisture": moisture,
        "molar_mass_dry": matter["molar_mass_dry"][..., 0],
        "molar_mass": matter["molar_mass"][..., 0],
        "density": density,
        "mean_root_differential_pressure": _sum(inputs["weight"] * root),
        "mean_velocity": mean_velocity,
        "actual_flow": actual,
        "mass_flow": mass,
        "reynolds_number": np.abs(density * mean_velocity) * sections.hydraulic_diameter(setting.shape, size)[..., 0]
        / viscosity[..., 0],
        "wall_factor": inputs["wall_factor"][..., 0],
    }
    if "standard" in flow:
        standard = area * flow["standard"] * factor
        quantities["standard_flow"] = standard
        dry = 1.0 - moisture
        if setting.reference is not None and setting.reference[0] == "density":
            dry = dry * quantities["molar_mass_dry"] / quantities["molar_mass"]
        quantities["dry_standard_flow"] = standard * dry
    points = {"velocity": flow["velocity"], "density": flow["density"], "root": root}
    if setting.probe is not None:
        points |= {name: flow[name] for name in ("coefficient", "pitch", "speed")}
    return Flow(points=points, quantities=quantities)


def ratio_of_specific_heats(
    inputs: Mapping[str, Array], setting: Setting, matter: Mapping[str, Array], temperature: Array
) -> Array | float:
    """Return the ratio of specific heats of the run: as stated, 1.4 for air and given gas, else from the composition."""
    if setting.ratio_of_specific_heats is not None:
        return setting.ratio_of_specific_heats
    if setting.gas_kind not in {"flue-gas", "mixture"}:
        return 1.4
    return gas.ratio_of_specific_heats(_species(inputs, setting, matter), temperature)


def _mean(weight: Array, values: Array) -> Array:
    """Area-weighted mean, keeping the point axis with length 1 (weights sum to 1)."""
    if values.shape[-1] == 1 and weight.shape[-1] != 1:
        return values
    return np.asarray(np.sum(weight * values, axis=-1, keepdims=True))


def _sum(values: Array) -> Array:
    return np.asarray(np.sum(values, axis=-1))


def _own(value: Array | np.float64, symbol: str) -> Array:
    return np.asarray(value * convert(1.0, symbol))


def _own_temperature(temperature: Array | np.float64, own: Constants) -> Array:
    """Absolute temperature with the method's rounded offset: 460 + degF or 273 + degC."""
    if own.temperature == "degF":
        return np.asarray(temperature * 1.8 - 459.67 + own.temperature_offset)
    return np.asarray(temperature - 273.15 + own.temperature_offset)
