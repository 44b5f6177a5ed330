"""How much water a gas holds, from whichever humidity was measured."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.physics.gas import MOLAR_MASS
from traverse.physics.water import saturation_pressure

Array = npt.NDArray[np.float64]
# Partial pressure of water vapour at saturation, from temperature [K] and absolute pressure [Pa]. [Pa]
Saturation = Callable[[Array, Array], Array]
# Molar mass of water over that of dry air: humidity ratio to mole ratio.
RATIO = MOLAR_MASS["H2O"] / MOLAR_MASS["air"]
WET_BULB = {
    branch: {name: float(text) for name, text in values.items()}
    for branch, values in tables.load("psychrometrics")["wet_bulb"].items()
}
_CELSIUS = 273.15


def _pure(temperature: Array, _: Array) -> Array:
    return saturation_pressure(temperature)


def mole_fraction(
    form: str, value: npt.ArrayLike, temperature: npt.ArrayLike, pressure: npt.ArrayLike, saturated: Saturation | None = None
) -> Array:
    """Return the mole fraction of water vapour in the wet gas.

    Parameters
    ----------
    form : str
        ``relative_humidity`` (fraction), ``wet_bulb`` [K], ``dew_point`` [K], ``humidity_ratio`` [kg/kg dry],
        ``moisture`` (the mole fraction itself), ``saturated`` or ``dry`` (``value`` is not used).
    value : array_like, shape (...)
    temperature : array_like, shape (...)
        Of the gas. [K]
    pressure : array_like, shape (...)
        Absolute. [Pa]
    saturated : callable, optional
        Saturation in another way than as pure water, such as in real air (``humid_air.saturation``).

    Returns
    -------
    array, shape (...)
        NaN for what cannot be: more water than saturation, a wet bulb or dew point above the dry bulb, a negative
        humidity, a saturated gas at or above boiling; and for a relative humidity above 200 degC, where its saturation
        pressure ends.

    Notes
    -----
    Ideal gas; without ``saturated`` no enhancement factor (it raises the fraction by 0.4 to 0.6 % of itself near room temperature).
    Wet bulb: ASHRAE Fundamentals 2017, chapter 1, equations 33 (water) and 35 (ice).
    """
    t = np.asarray(temperature, dtype=np.float64)
    p = np.asarray(pressure, dtype=np.float64)
    v = np.asarray(value, dtype=np.float64)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        at = saturated or _pure
        here = at(t, p)
        x = _FORMS[form](v, t, p, here, at)
        limit = np.minimum(here / p, 1.0)
        possible = (x >= 0.0) & (x <= limit * (1.0 + 1e-9)) & (x < 1.0)
    return np.asarray(np.where(possible, x, np.nan))


def _relative(v: Array, _: Array, p: Array, here: Array, __: Saturation) -> Array:
    x = np.where(v == 0.0, 0.0, v * here / p)
    return np.where((v >= 0.0) & (v <= 1.0), x, np.nan)


def _dew_point(v: Array, t: Array, p: Array, _: Array, at: Saturation) -> Array:
    return np.where(v <= t, at(v, p) / p, np.nan)


def humidity_ratio_from_wet_bulb(wet_bulb: Array, temperature: Array, pressure: Array, at: Saturation = _pure) -> Array:
    """Return the humidity ratio from dry and wet bulb. [kg/kg]  NaN where the wet bulb is above the dry bulb."""
    td, tw = temperature - _CELSIUS, wet_bulb - _CELSIUS
    vapour = at(wet_bulb, pressure)
    ws = np.where(vapour < pressure, RATIO * vapour / (pressure - vapour), np.nan)

    def branch(c: dict[str, float]) -> Array:
        top = (c["latent"] - c["slope"] * tw) * ws - c["heat"] * (td - tw)
        return np.asarray(top / (c["latent"] + c["vapour"] * td - c["liquid"] * tw))

    w = np.where(wet_bulb < _CELSIUS, branch(WET_BULB["ice"]), branch(WET_BULB["water"]))
    return np.asarray(np.where(tw <= td, w, np.nan))


def _wet_bulb(v: Array, t: Array, p: Array, _: Array, at: Saturation) -> Array:
    w = humidity_ratio_from_wet_bulb(v, t, p, at)
    return w / (w + RATIO)


# Each takes the value, temperature, pressure, the partial pressure at saturation there, and saturation as a function.
_FORMS: dict[str, Callable[[Array, Array, Array, Array, Saturation], Array]] = {
    "relative_humidity": _relative,
    "wet_bulb": _wet_bulb,
    "dew_point": _dew_point,
    "humidity_ratio": lambda v, t, p, _, __: v / (v + RATIO) + 0.0 * (t + p),
    "moisture": lambda v, t, p, _, __: v + 0.0 * (t + p),
    "saturated": lambda v, _, p, here, __: here / p + 0.0 * v,
    "dry": lambda v, t, p, _, __: 0.0 * (v + t + p),
}
