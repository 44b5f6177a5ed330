"""The wet bulb that a humidity belongs to: the inverse of the psychrometric equation, for whole arrays at once."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.physics import water
from traverse.physics.moist_air import RATIO, WET_BULB

Array = npt.NDArray[np.float64]
# Kelvin: where the equation of the bulb changes, and where that of saturation does, a hundredth above.
_FREEZING, _TRIPLE = 273.15, water.TRIPLE_POINT
_COLDEST, _HOTTEST = 173.15, 473.15
# Kelvin per unit of ln p of a boiling point, over its square: a first guess that lies a little high.
_BOILING = (373.15, 101325.0, 8.314 / 40.0e3, 3.0)
# Steps of third order: five are the most ever needed, for hot dry air. After one of 1e-5 K the next would be rounding.
_STEPS, _STILL = 8, 1e-5


def wet_bulb_temperature(moisture: npt.ArrayLike, temperature: npt.ArrayLike, pressure: npt.ArrayLike) -> Array:
    """Return the temperature of the wet bulb in moist air. [K]

    Parameters
    ----------
    moisture : array_like, shape (...)
        Mole fraction of water. [1]
    temperature : array_like, shape (...)
        Dry bulb. [K]
    pressure : array_like, shape (...)
        Absolute. [Pa]

    Returns
    -------
    array, shape (...)
        At saturation the dry bulb. NaN for a negative moisture, one above saturation, a dry bulb outside 173.15 to 2000 K, a wet
        bulb outside 173.15 to 473.15 K, and a pressure that is not positive.

    Notes
    -----
    Inverse of ASHRAE Fundamentals 2017, chapter 1, equation 33 (water) and 35 (ice, below 0 degC), with the saturation pressure of
    pure water, as ``moist_air.mole_fraction("wet_bulb", ...)`` has them. Near 0 degC a humidity can belong to a bulb of water and
    to one of ice a little below: the water counts.
    """
    given = [np.asarray(value, dtype=np.float64) for value in (moisture, temperature, pressure)]
    shape = np.broadcast_shapes(*(value.shape for value in given))
    x, t, p = (np.broadcast_to(value, shape).ravel() for value in given)
    found = np.full(x.shape, np.nan)
    with np.errstate(all="ignore"):
        limit = np.minimum(water.saturation_pressure(t) / p, 1.0)
        possible = (x >= 0.0) & (x < 1.0) & (x <= limit * (1.0 + 1e-9)) & (p > 0.0)
        ratio = RATIO * x / (1.0 - x)
        # The equations change in two places; what stands between the places is known from the excess there.
        ice = (t < _FREEZING) | (_excess_at(_FREEZING, ratio, t, p) > 0.0)
        thaw = ~ice & ((t < _TRIPLE) | (_excess_at(_TRIPLE, ratio, t, p) > 0.0))
        for chosen, kind, branch in ((possible & ice, "ice", water.ICE), (possible & thaw, "water", water.ICE),
                                     (possible & ~ice & ~thaw, "water", water.WATER)):
            if chosen.any():
                found[chosen] = _root(kind, branch, ratio[chosen], t[chosen], p[chosen])
    return np.asarray(np.minimum(found, t).reshape(shape))


def _excess_at(wet: float, ratio: Array, temperature: Array, pressure: Array) -> Array:
    """Return the excess of a bulb of water at one temperature."""
    vapour = float(water.saturation_pressure(wet))
    c, bulb = WET_BULB["water"], wet - _FREEZING
    taken = c["heat"] * (temperature - wet) + ratio * (c["latent"] + c["vapour"] * (temperature - _FREEZING) - c["liquid"] * bulb)
    return np.asarray(RATIO * (c["latent"] - c["slope"] * bulb) * vapour - (pressure - vapour) * taken)


def _root(kind: str, branch: tuple[float, ...], ratio: Array, temperature: Array, pressure: Array) -> Array:
    """Return the wet bulb by Halley's steps from the highest it could be.

    The excess is the heat that a bulb takes up by evaporation beyond what the air gives it, times the pressure of the dry air:
    with saturation pressure s it is latent s - (p - s) given, free of the pole at the boiling point, and rises ever more steeply.
    """
    c, dry_bulb = WET_BULB[kind], temperature - _FREEZING
    normal, at, per, above = _BOILING
    highest = 1.0 / (1.0 / normal - per * np.log(pressure / at)) + above if branch is water.WATER else _TRIPLE
    wet = np.minimum(temperature, np.minimum(highest, _HOTTEST))
    fixed, per_kelvin = c["heat"] * dry_bulb + ratio * (c["latent"] + c["vapour"] * dry_bulb), c["heat"] + c["liquid"] * ratio
    step = np.zeros_like(wet)
    for _ in range(_STEPS):
        bulb = wet - _FREEZING
        vapour, logarithmic = water.saturation_branch(wet, branch)
        given, air = fixed - per_kelvin * bulb, pressure - vapour
        latent, per_degree = RATIO * (c["latent"] - c["slope"] * bulb), RATIO * c["slope"]
        rise = (latent + given) * vapour * logarithmic
        value = latent * vapour - air * given
        slope = rise - per_degree * vapour + air * per_kelvin
        step = value * slope / (slope * slope - 0.5 * value * rise * logarithmic)
        wet = np.clip(wet - step, _COLDEST, _HOTTEST)
        if np.max(np.abs(step)) < _STILL:
            break
    return np.asarray(np.where(np.abs(step) < _STILL, wet, np.nan))
