"""Molar mass, density, heat capacity ratio and viscosity of air and flue gas."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
import numpy.typing as npt

from traverse import tables

Array = npt.NDArray[np.float64]
_TABLE = tables.load("gases")
R = float(_TABLE["constants"]["gas_constant"])
MOLAR_MASS: dict[str, float] = {name: float(text) for name, text in _TABLE["molar_mass"].items() if name != "source"}
DRY_AIR: dict[str, float] = {name: float(text) for name, text in _TABLE["dry_air"].items() if name != "source"}
DRY_AIR["N2"] = 1.0 - sum(DRY_AIR.values())
HEAT_CAPACITY: dict[str, tuple[float, ...]] = {
    name: tuple(float(c) for c in row) for name, row in _TABLE["heat_capacity"].items() if name != "source"
}
VISCOSITY_T0 = float(_TABLE["viscosity"]["T0"])
VISCOSITY: dict[str, tuple[float, float]] = {
    name: (float(row[0]), float(row[1])) for name, row in _TABLE["viscosity"].items() if name not in {"source", "T0"}
}
AIR_BETA = float(_TABLE["air_viscosity"]["beta"])
AIR_SUTHERLAND = float(_TABLE["air_viscosity"]["sutherland"])
for _name, _text in _TABLE["more_molar_mass"].items():
    if _name != "source":
        MOLAR_MASS[_name] = float(_text)
        HEAT_CAPACITY[_name] = tuple(float(c) for c in _TABLE["more_heat_capacity"][_name])
        VISCOSITY[_name] = (float(_TABLE["more_viscosity"][_name][0]), float(_TABLE["more_viscosity"][_name][1]))
# Dry air as one gas of a mixture.
HEAT_CAPACITY["air"] = tuple(sum(share * HEAT_CAPACITY[name][k] for name, share in DRY_AIR.items()) for k in range(5))
VISCOSITY["air"] = (AIR_BETA * VISCOSITY_T0**1.5 / (VISCOSITY_T0 + AIR_SUTHERLAND), AIR_SUTHERLAND)
# Kelvin. The heat-capacity polynomials are fitted to 1000 K and run away further up: at 1600 K they put the ratio 0.08
# too high, which is less than 0.01 % of a velocity at 500 Pa; beyond that they are refused.
COLDEST, HOTTEST = 200.0, 1600.0
# The unanalysed rest of a dry flue gas: nitrogen with argon in the proportion of air.
ARGON_SHARE = DRY_AIR["Ar"] / (DRY_AIR["Ar"] + DRY_AIR["N2"])
REST = (1.0 - ARGON_SHARE) * MOLAR_MASS["N2"] + ARGON_SHARE * MOLAR_MASS["Ar"]
EPA = {name: float(tables.load("epa_method_2")["common"][name]) for name in ("carbon_dioxide", "oxygen", "remainder")}


def dry_molar_mass(
    oxygen: npt.ArrayLike, carbon_dioxide: npt.ArrayLike, carbon_monoxide: npt.ArrayLike = 0.0,
    sulfur_dioxide: npt.ArrayLike = 0.0,
) -> Array:
    """Return the molar mass of dry flue gas from its dry mole fractions. [g/mol]

    The rest is nitrogen with argon in the proportion of air. NaN where the fractions exceed 1 or are negative.
    """
    parts = _parts(oxygen, carbon_dioxide, carbon_monoxide, sulfur_dioxide)
    o2, co2, co, so2, rest = parts
    m = MOLAR_MASS
    return np.asarray(m["O2"] * o2 + m["CO2"] * co2 + m["CO"] * co + m["SO2"] * so2 + REST * rest)


def epa_dry_molar_mass(
    oxygen: npt.ArrayLike, carbon_dioxide: npt.ArrayLike, carbon_monoxide: npt.ArrayLike = 0.0,
    sulfur_dioxide: npt.ArrayLike = 0.0,
) -> Array:
    """Return the dry molar mass by EPA Method 3, equation 3-1: 0.440 %CO2 + 0.320 %O2 + 0.280 (%N2 + %CO). [g/mol]

    Everything but carbon dioxide and oxygen counts as nitrogen, sulfur dioxide too. NaN as for ``dry_molar_mass``.
    """
    o2, co2, co, so2, rest = _parts(oxygen, carbon_dioxide, carbon_monoxide, sulfur_dioxide)
    return np.asarray(100.0 * (EPA["carbon_dioxide"] * co2 + EPA["oxygen"] * o2 + EPA["remainder"] * (rest + co + so2)))


def _parts(*fractions: npt.ArrayLike) -> tuple[Array, ...]:
    arrays = [np.asarray(f, dtype=np.float64) for f in fractions]
    rest = 1.0 - sum(arrays)
    possible = (rest >= -1e-12) & np.all([np.broadcast_to(a, np.shape(rest)) >= 0.0 for a in arrays], axis=0)
    return (*arrays, np.asarray(np.where(possible, rest, np.nan)))


def wet_molar_mass(dry: npt.ArrayLike, moisture: npt.ArrayLike, water: float = MOLAR_MASS["H2O"]) -> Array:
    """Return the molar mass of the wet gas: dry (1 - x) + water x. [g/mol]  NaN for a moisture outside 0 to 1."""
    x = _share(moisture)
    return np.asarray(np.asarray(dry, dtype=np.float64) * (1.0 - x) + water * x)


def _share(fraction: npt.ArrayLike) -> Array:
    x = np.asarray(fraction, dtype=np.float64)
    return np.asarray(np.where((x >= 0.0) & (x <= 1.0), x, np.nan))


def density(pressure: npt.ArrayLike, molar_mass: npt.ArrayLike, temperature: npt.ArrayLike) -> Array:
    """Return the ideal-gas density p M / (R T). [kg/m3]  Pressure absolute [Pa], molar mass [g/mol], temperature [K].

    NaN where pressure, molar mass or temperature is not positive. Real air departs by 0.05 % at room temperature, flue
    gas by less than 0.12 % between 55 and 450 degC.
    """
    p, t = np.asarray(pressure, dtype=np.float64), np.asarray(temperature, dtype=np.float64)
    value = p * (np.asarray(molar_mass, dtype=np.float64) * (1e-3 / R)) / np.where(t > 0.0, t, np.nan)
    return np.asarray(np.where((p > 0.0) & (value > 0.0), value, np.nan))


def wet_composition(
    oxygen: npt.ArrayLike, carbon_dioxide: npt.ArrayLike, carbon_monoxide: npt.ArrayLike, sulfur_dioxide: npt.ArrayLike,
    moisture: npt.ArrayLike,
) -> dict[str, Array]:
    """Return the wet mole fractions of a flue gas by species, from dry fractions and the moisture.

    NaN for a moisture outside 0 to 1; nitrogen and argon are NaN where the dry fractions exceed 1 or are negative.
    """
    o2, co2, co, so2, rest = _parts(oxygen, carbon_dioxide, carbon_monoxide, sulfur_dioxide)
    x = _share(moisture)
    dry = 1.0 - x
    return {
        "N2": rest * (1.0 - ARGON_SHARE) * dry, "O2": o2 * dry, "Ar": rest * ARGON_SHARE * dry, "CO2": co2 * dry,
        "CO": co * dry, "SO2": so2 * dry, "H2O": x,
    }


def air_composition(moisture: npt.ArrayLike) -> dict[str, Array]:
    """Return the wet mole fractions of moist air by species. NaN for a moisture outside 0 to 1."""
    x = _share(moisture)
    return {name: share * (1.0 - x) for name, share in DRY_AIR.items()} | {"H2O": x}


def ratio_of_specific_heats(composition: Mapping[str, Array], temperature: npt.ArrayLike) -> Array:
    """Return cp/cv of an ideal-gas mixture: cp/R over cp/R - 1, with cp/R summed over the mole fractions.

    Within 0.0005 of reference equations of state from 250 to 1000 K, within 0.025 to 1400 K. NaN below 200 K and above
    1600 K.
    """
    t = np.asarray(temperature, dtype=np.float64)
    t = np.where((t >= COLDEST) & (t <= HOTTEST), t, np.nan)
    heat = np.zeros(())
    for name, fraction in composition.items():
        a = HEAT_CAPACITY[name]
        heat = heat + fraction * (a[0] + t * (a[1] + t * (a[2] + t * (a[3] + t * a[4]))))
    return np.asarray(heat / (heat - 1.0))


def viscosity(composition: Mapping[str, Array], temperature: npt.ArrayLike) -> Array:
    """Return the viscosity of a mixture by Herning and Zipperer from Sutherland viscosities of its gases. [Pa s]

    Sum of x mu sqrt(M) over sum of x sqrt(M). For the Reynolds number only: within 2.5 % of Wilke's mixing of reference
    viscosities for boiler, kiln and turbine gas at 60 to 450 degC, within 1 % of another library's transport model; 6 %
    too high in air that is half steam. NaN where the temperature is not positive.
    """
    t = np.asarray(temperature, dtype=np.float64)
    t = np.where(t > 0.0, t, np.nan)
    reduced = t / VISCOSITY_T0
    power = reduced * np.sqrt(reduced)
    top, bottom = np.zeros(()), np.zeros(())
    for name, fraction in composition.items():
        mu0, s = VISCOSITY[name]
        root = np.sqrt(MOLAR_MASS[name])
        top = top + fraction * ((root * mu0 * (VISCOSITY_T0 + s)) * power / (t + s))
        bottom = bottom + fraction * root
    return np.asarray(top / bottom)


def air_viscosity(temperature: npt.ArrayLike) -> Array:
    """Return the viscosity of air by Sutherland's law, US Standard Atmosphere 1976. [Pa s]

    Below reference values by 0.4 % at 20 degC, 1.3 % at 200 degC, 2.4 % at 400 degC. NaN where the temperature is not
    positive.
    """
    t = np.asarray(temperature, dtype=np.float64)
    t = np.where(t > 0.0, t, np.nan)
    return np.asarray(AIR_BETA * t * np.sqrt(t) / (t + AIR_SUTHERLAND))
