"""Moisture of stack gas: from the water and the gas of a sampling train, and from wet and dry bulb by the relations in use."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.physics.gas import MOLAR_MASS, R
from traverse.physics.moist_air import WET_BULB
from traverse.physics.water import saturation_pressure
from traverse.units import UNITS

Array = npt.NDArray[np.float64]
System = Literal["us", "si", "modern"]
Relation = Literal["energy-balance", "carrier", "ferrel"]
_TABLE = tables.load("stack_moisture")
PRINTED: dict[str, dict[str, float]] = {
    system: {name: float(text) for name, text in _TABLE["train"][system].items()} for system in ("us", "si")
}
RESIDUAL = float(_TABLE["approximation"]["residual"])
WATER_DENSITY = float(_TABLE["water"]["density"])
FERREL = {name: float(text) for name, text in _TABLE["ferrel"].items() if name != "source"}
CARRIER = {name: float(text) for name, text in _TABLE["carrier"].items() if name != "source"}
# The units of each system, for the method's own arithmetic: temperature, its offset, pressure, head, volume.
OWN = {"us": ("degF", 460.0, "inHg", "inH2O", "ft3"), "si": ("degC", 273.0, "mmHg", "mmH2O", "m3")}
WATER_OVER_MERCURY = float(tables.load("epa_method_2")["common"]["water_over_mercury"])
_FREEZING = 273.15


def train(collected: Mapping[str, Array], system: System, *, by_volume: bool, approximation: bool = False) -> dict[str, Array]:
    """Return the moisture from what a sampling train collected, before any comparison with saturation.

    Parameters
    ----------
    collected : mapping of str to array, shape (...)
        ``condensed`` [kg, or m3 of liquid], ``silica_gel`` [kg], ``meter_volume`` [m3], ``meter_factor``,
        ``meter_temperature`` [K], ``meter_barometric`` [Pa] and ``orifice_pressure`` [Pa, gauge].
    system : {'us', 'si', 'modern'}
        The printed constants of Method 4 in one of its unit systems, or the gas law with modern constants.
    by_volume : bool
        Whether the condensate was measured as a volume.
    approximation : bool
        Whether the residual of the approximation method is added.

    Returns
    -------
    dict of str to array, shape (...)
        ``water`` and ``gas`` (volumes at standard conditions in the method's unit; moles for 'modern') and ``moisture``.
        NaN where an amount is negative, or no gas was metered.

    Notes
    -----
    EPA Method 4, equations 4-1 to 4-4, constants as printed, with 460 or 273 for the temperature and 13.6 for the orifice.
    """
    condensed, gel = collected["condensed"], collected["silica_gel"]
    volume = collected["meter_factor"] * collected["meter_volume"]
    if system == "modern":
        mass = condensed * WATER_DENSITY if by_volume else condensed
        water = (mass + gel) / (1e-3 * MOLAR_MASS["H2O"])
        gas = volume * (collected["meter_barometric"] + collected["orifice_pressure"]) / (R * collected["meter_temperature"])
    else:
        k = PRINTED[system]
        scale, offset, mercury, head, size = OWN[system]
        pressure = collected["meter_barometric"] / UNITS[mercury].factor
        pressure = pressure + collected["orifice_pressure"] / UNITS[head].factor / WATER_OVER_MERCURY
        unit = UNITS[scale]
        absolute = (collected["meter_temperature"] - unit.offset) / unit.factor + offset
        water = condensed * 1e6 * k["water_by_volume"] if by_volume else condensed * 1e3 * k["water_by_mass"]
        water = water + gel * 1e3 * k["water_by_mass"]
        gas = k["dry_gas"] * (volume / UNITS[size].factor) * pressure / absolute
    possible = (condensed >= 0.0) & (gel >= 0.0) & (gas > 0.0)
    moisture = np.where(possible, water / np.where(possible, water + gas, 1.0), np.nan)
    return {"water": water, "gas": gas, "moisture": moisture + (RESIDUAL if approximation else 0.0)}


def capped(moisture: npt.ArrayLike, temperature: npt.ArrayLike, pressure: npt.ArrayLike) -> Array:
    """Return the lower of a moisture and saturation at the temperature [K] and absolute pressure [Pa] (EPA Method 4)."""
    x = np.asarray(moisture, dtype=np.float64)
    limit = saturation_pressure(temperature) / np.asarray(pressure, dtype=np.float64)
    return np.asarray(np.where((x >= 0.0) & (x < 1.0), np.minimum(x, limit), np.nan))


def wet_bulb_fraction(
    relation: Relation, wet_bulb: npt.ArrayLike, temperature: npt.ArrayLike, pressure: npt.ArrayLike, heat: npt.ArrayLike = np.nan
) -> Array:
    """Return the mole fraction of water from wet and dry bulb.

    Parameters
    ----------
    relation : {'energy-balance', 'carrier', 'ferrel'}
        Adiabatic saturation with the gas's own heat capacity, or one of the two older formulas.
    wet_bulb, temperature : array_like, shape (...)
        [K]
    pressure : array_like, shape (...)
        Absolute. [Pa]
    heat : array_like, shape (...)
        Molar heat capacity of the dry gas between wet and dry bulb, for the energy balance. [J/(mol K)]

    Returns
    -------
    array, shape (...)
        NaN for a wet bulb above the dry bulb or at boiling, and where the relation gives less than no water.

    Notes
    -----
    Energy balance per mole of dry gas: X = (Xs L - c (t - tw))/(L + cv (t - tw)), with the heat of evaporation L and the
    heat of vapour of ASHRAE Fundamentals 2017, chapter 1, equations 33 and 35. Ferrel's formula leaves out the vapour that
    is there already and reads hot stacks too dry: by 0.013 at 150/60 degC, 0.07 at 300/80 degC.
    """
    tw, t = np.asarray(wet_bulb, dtype=np.float64), np.asarray(temperature, dtype=np.float64)
    p = np.asarray(pressure, dtype=np.float64)
    saturated = saturation_pressure(tw)
    with np.errstate(divide="ignore", invalid="ignore"):
        if relation == "energy-balance":
            x = _energy_balance(tw, t, saturated / (p - saturated), np.asarray(heat, dtype=np.float64))
        elif relation == "carrier":
            fall = fahrenheit(t) - fahrenheit(tw)
            x = (saturated - (p - saturated) * fall / (CARRIER["first"] - CARRIER["slope"] * fahrenheit(tw))) / p
        else:
            fall = fahrenheit(t) - fahrenheit(tw)
            x = (saturated - FERREL["rate"] * p * fall * (1.0 + (fahrenheit(tw) - FERREL["freezing"]) / FERREL["span"])) / p
    return np.asarray(np.where((tw <= t) & (saturated < p) & (x >= 0.0), x, np.nan))


def _energy_balance(wet_bulb: Array, temperature: Array, ratio: Array, heat: Array) -> Array:
    """Return the mole fraction from the mole ratio of saturated gas at the wet bulb."""

    def branch(c: Mapping[str, float]) -> Array:
        evaporation = MOLAR_MASS["H2O"] * (c["latent"] - c["slope"] * (wet_bulb - _FREEZING))
        fall = temperature - wet_bulb
        moles = (ratio * evaporation - heat * fall) / (evaporation + MOLAR_MASS["H2O"] * c["vapour"] * fall)
        return np.asarray(moles / (1.0 + moles))

    return np.where(wet_bulb < _FREEZING, branch(WET_BULB["ice"]), branch(WET_BULB["water"]))


def fahrenheit(temperature: npt.ArrayLike) -> Array:
    """Return a temperature [K] in degrees Fahrenheit."""
    return np.asarray((np.asarray(temperature, dtype=np.float64) - 273.15) * 1.8 + 32.0)
