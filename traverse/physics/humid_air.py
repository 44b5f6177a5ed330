"""Humid air as a real gas: CIPM-2007 near room conditions, second virial coefficients elsewhere, saturation in air."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.physics import gas, moist_air, water

Array = npt.NDArray[np.float64]
Flags = npt.NDArray[np.bool_]
_TABLE = tables.load("humid_air")


def _numbers(entry: str, key: str, scale: float = 1.0) -> tuple[float, ...]:
    return tuple(scale * float(text) for text in _TABLE[entry][key])


SATURATION = _numbers("cipm", "saturation")
ENHANCEMENT = _numbers("cipm", "enhancement")
A, B, C = (_numbers("cipm", f"compressibility_{name}") for name in "abc")
D, E = (float(_TABLE["cipm"][f"compressibility_{name}"]) for name in "de")
CARBON_DIOXIDE = float(_TABLE["cipm"]["carbon_dioxide"])
PER_CARBON_DIOXIDE = float(_TABLE["cipm"]["per_carbon_dioxide"])
# cm3/mol to m3/mol.
AIR_AIR = _numbers("air_air", "coefficients", 1e-6)
AIR_WATER = tuple(zip(_numbers("air_water", "coefficients", 1e-6), _numbers("air_water", "exponents"), strict=True))
WATER_WATER = tuple(zip(_numbers("water_water", "coefficients", 1e-6), _numbers("water_water", "exponents"), strict=True))
LIQUID, ICE = (1e-6 * float(_TABLE["condensed"][name]) for name in ("water", "ice"))
# Each equation's own gas constant [J/(mol K)] and its range: lowest and highest temperature [degC] and pressure [Pa].
GAS_CONSTANT = {"cipm-2007": float(_TABLE["cipm"]["gas_constant"]), "virial": gas.R}
RANGE = {
    "cipm-2007": (*_numbers("cipm", "temperature"), *_numbers("cipm", "pressure")),
    "virial": (*_numbers("virial_range", "temperature"), *_numbers("virial_range", "pressure")),
}
# Each step of the enhancement factor brings its logarithm at least 30 times nearer; four leave less than 1e-7.
STEPS = 4
_CELSIUS = 273.15
_ROUNDING = 1e-9


def inside(equation: str, temperature: npt.ArrayLike, pressure: npt.ArrayLike) -> Flags:
    """Return where an equation is valid, shape (...).

    Parameters
    ----------
    equation : str
        ``cipm-2007`` (15 to 27 degC, 600 to 1100 hPa), ``virial`` (-20 to 345 degC, 200 to 2000 hPa) or ``real`` (either).
    temperature : array_like, shape (...)
        [K]
    pressure : array_like, shape (...)
        Absolute. [Pa]
    """
    if equation == "real":
        return inside("cipm-2007", temperature, pressure) | inside("virial", temperature, pressure)
    cold, hot, low, high = RANGE[equation]
    t, p = np.asarray(temperature, dtype=np.float64), np.asarray(pressure, dtype=np.float64)
    # The limits belong to the range in whatever unit they were stated.
    within = (t >= cold + _CELSIUS - _ROUNDING) & (t <= hot + _CELSIUS + _ROUNDING)
    return np.asarray(within & (p >= low - _ROUNDING) & (p <= high + _ROUNDING))


def density(
    equation: str, temperature: npt.ArrayLike, pressure: npt.ArrayLike, moisture: npt.ArrayLike, carbon_dioxide: float = CARBON_DIOXIDE
) -> Array:
    """Return the density of humid air, p M/(Z R T). [kg/m3]

    Parameters
    ----------
    equation : str
        ``cipm-2007``, ``virial``, or ``real``: CIPM-2007 inside its range, the virial equation elsewhere, element by element.
    temperature : array_like, shape (...)
        [K]
    pressure : array_like, shape (...)
        Absolute. [Pa]
    moisture : array_like, shape (...)
        Mole fraction of water; see :func:`mole_fraction`. [1]
    carbon_dioxide : float
        Mole fraction in the dry air. [1]

    Returns
    -------
    array, shape (...)
        NaN outside the range of the equation (:func:`inside`) and for a moisture outside 0 to 1.

    Notes
    -----
    CIPM-2007 states 22e-6 relative for itself. The virial equation lies within 1e-4 of CoolProp's HumidAir up to 1200 hPa where at
    most a tenth of the gas is water, within 2e-4 up to a half, 5e-4 up to saturation, 8e-4 up to saturation at 2000 hPa.
    """
    t, p, x = (np.asarray(value, dtype=np.float64) for value in (temperature, pressure, moisture))
    dry = gas.MOLAR_MASS["air"] + PER_CARBON_DIOXIDE * (carbon_dioxide - CARBON_DIOXIDE)
    possible = (x >= 0.0) & (x <= 1.0)
    mass = np.where(possible, 1e-3 * p * (dry - x * (dry - gas.MOLAR_MASS["H2O"])) / t, np.nan)

    def of(name: str) -> Array:
        # Far outside there is no number to divide by; those are NaN in any case.
        with np.errstate(all="ignore"):
            value = mass / (GAS_CONSTANT[name] * compressibility(name, t, p, x))
        return np.asarray(np.where(inside(name, t, p), value, np.nan))

    if equation != "real":
        return of(equation)
    near = inside("cipm-2007", t, p)
    return of("cipm-2007") if near.all() else np.asarray(np.where(near, of("cipm-2007"), of("virial")))


def compressibility(equation: str, temperature: Array, pressure: Array, moisture: Array) -> Array:
    """Return the compressibility factor Z of humid air. [1]

    Parameters
    ----------
    equation : str
        ``cipm-2007`` or ``virial``.
    temperature : array, shape (...)
        [K]
    pressure : array, shape (...)
        Absolute. [Pa]
    moisture : array, shape (...)
        Mole fraction of water. [1]

    Returns
    -------
    array, shape (...)
        Also beyond the range of validity, so that a small step over its edge gives a number: ask :func:`inside` before. NaN
        where the virial equation has no gas of that pressure.

    Notes
    -----
    CIPM-2007: Metrologia 45 (2008) 149. Virial: Z = 1 + B rho with B over the mixture, hence Z = (1 + sqrt(1 + 4 B p/(R T)))/2.
    """
    if equation == "virial":
        whole = mixed(second_virials(temperature), moisture)
        return np.asarray(0.5 + np.sqrt(0.25 + whole * (pressure / (gas.R * temperature))))
    t, x, ratio = temperature - _CELSIUS, moisture, pressure / temperature
    linear = A[0] + t * (A[1] + t * A[2]) + x * (B[0] + t * B[1] + x * (C[0] + t * C[1]))
    return np.asarray(1.0 - ratio * (linear - ratio * (D + E * (x * x))))


def second_virials(temperature: Array) -> tuple[Array, Array, Array]:
    """Return the second virial coefficients air-air, air-water and water-water. [m3/mol]

    Hyland and Wexler 1983, Harvey and Huang 2007, Harvey and Lemmon 2004, all from memory and checked (tables/humid_air.toml).
    NaN where the temperature is not positive.
    """
    t = np.where(temperature > 0.0, temperature, np.nan)
    inverse = 1.0 / t
    air = AIR_AIR[0] + inverse * (AIR_AIR[1] + inverse * (AIR_AIR[2] + inverse * AIR_AIR[3]))
    logarithm = np.log(t / 100.0)
    cross, steam = (sum(c * np.exp(k * logarithm) for c, k in terms) for terms in (AIR_WATER, WATER_WATER))
    return np.asarray(air), np.asarray(cross), np.asarray(steam)


def mixed(virials: tuple[Array, Array, Array], moisture: Array) -> Array:
    """Return the second virial coefficient of a mixture of air and water. [m3/mol]"""
    air, cross, steam = virials
    dry = 1.0 - moisture
    return np.asarray(dry * (dry * air + 2.0 * moisture * cross) + moisture * moisture * steam)


def enhancement_factor(equation: str, temperature: Array, pressure: Array) -> Array:
    """Return by how much air raises the partial pressure of water vapour at saturation. [1], shape (...)

    ``cipm-2007``: alpha + beta p + gamma t^2, over water. ``virial``: equality of the fugacities of the vapour in the mixture and
    of the compressed water or ice, from the second virial coefficients; air dissolved in the water (1e-5) is left out. 1 where
    the saturation pressure reaches the pressure. Within 3e-4 of CoolProp's HumidAir from -20 to 95 degC at 600 to 1200 hPa.
    """
    if equation == "cipm-2007":
        t = temperature - _CELSIUS
        return np.asarray(ENHANCEMENT[0] + ENHANCEMENT[1] * pressure + ENHANCEMENT[2] * (t * t))
    pure = water.saturation_pressure(temperature)
    below = pure < pressure
    # Where all is vapour there is no enhancement: any pressure below serves as a stand-in.
    vapour = np.where(below, pure, 0.5 * pressure)
    air, cross, steam = second_virials(temperature)
    excess = 2.0 * cross - steam - air
    volume = np.where(temperature < water.TRIPLE_POINT, ICE, LIQUID)
    per = 1.0 / (gas.R * temperature)
    fixed = per * (volume - steam) * (pressure - vapour)
    factor = np.ones(np.broadcast(temperature, pressure).shape)
    for _ in range(STEPS):
        dry = 1.0 - np.minimum(factor * (vapour / pressure), 1.0)
        factor = np.exp(fixed - per * pressure * excess * (dry * dry))
    return np.asarray(np.where(below, factor, 1.0))


def saturation(equation: str, temperature: Array, pressure: Array) -> Array:
    """Return the partial pressure of water vapour at saturation in air: enhancement factor times saturation pressure. [Pa]

    ``cipm-2007`` takes its own saturation pressure, over water; below the triple point, where ice is meant, both equations take
    ASHRAE's over ice with the enhancement factor of the virial coefficients. Shape (...); NaN and infinity as
    :func:`traverse.physics.water.saturation_pressure` has them.
    """
    t, p = np.broadcast_arrays(temperature, pressure)
    with np.errstate(all="ignore"):
        liquid = (t >= water.TRIPLE_POINT) & (t < np.inf) & (equation == "cipm-2007")
        own = np.exp(SATURATION[2] + SATURATION[3] / t + t * (SATURATION[1] + SATURATION[0] * t)) * enhancement_factor("cipm-2007", t, p)
        if liquid.all():
            return np.asarray(own)
        return np.asarray(np.where(liquid, own, enhancement_factor("virial", t, p) * water.saturation_pressure(t)))


def mole_fraction(
    equation: str, form: str, value: npt.ArrayLike, temperature: npt.ArrayLike, pressure: npt.ArrayLike
) -> Array:
    """Return the mole fraction of water vapour, saturation being that in air. [1]

    Parameters, results and forms as :func:`traverse.physics.moist_air.mole_fraction`, with ``equation`` ``ideal`` (pure water's
    saturation), ``cipm-2007`` or ``virial``. Relative humidity is the part of the mole fraction at saturation (CIPM-2007).
    """
    saturated: Callable[[Array, Array], Array] | None = None if equation == "ideal" else partial(saturation, equation)
    return moist_air.mole_fraction(form, value, temperature, pressure, saturated)
