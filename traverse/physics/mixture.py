"""Mixtures of any gases: names of the species, their constants, and the dry part of a mixture."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

import numpy as np
import numpy.typing as npt

from traverse.physics import gas

Array = npt.NDArray[np.float64]
# Name in the job file -> symbol of the tables. Dry air counts as one gas.
SPECIES: dict[str, str] = {
    "nitrogen": "N2", "oxygen": "O2", "argon": "Ar", "carbon_dioxide": "CO2", "carbon_monoxide": "CO", "sulfur_dioxide": "SO2",
    "water": "H2O", "air": "air", "methane": "CH4", "ethane": "C2H6", "propane": "C3H8", "hydrogen": "H2", "helium": "He",
    "ammonia": "NH3", "nitric_oxide": "NO", "nitrous_oxide": "N2O", "hydrogen_sulfide": "H2S",
}
# Gases so light that the mixing rule of the viscosity is far off beside heavier ones.
LIGHT = ("hydrogen", "helium")


def dry_fractions(parts: Mapping[str, npt.ArrayLike], species: Sequence[str], rest: str, water: npt.ArrayLike) -> dict[str, Array]:
    """Return the mole fractions of the dry part of a mixture by symbol; they sum to 1.

    Parameters
    ----------
    parts : mapping of str to array_like, shape (...)
        Wet mole fractions by name; read for the names of ``species``.
    species : sequence of str
        Names of the stated gases, without water and without the rest.
    rest : str
        Name of the gas that is all the others leave; empty where all are stated.
    water : array_like, shape (...)
        Wet mole fraction of water, as stated.

    Returns
    -------
    dict of str to array, shape (...)
        NaN where a fraction is negative, or more is stated than there can be.
    """
    found = {name: np.asarray(parts[name], dtype=np.float64) for name in species}
    total = sum(found.values(), np.zeros(()))
    if rest:
        left = 1.0 - np.asarray(water, dtype=np.float64) - total
        found[rest] = np.where(left > -1e-12, np.maximum(left, 0.0), np.nan)
        total = total + found[rest]
    possible = (total > 0.0) & np.all([np.broadcast_to(part, np.shape(total)) >= 0.0 for part in found.values()], axis=0)
    return {SPECIES[name]: np.asarray(np.where(possible, part / np.where(possible, total, 1.0), np.nan)) for name, part in found.items()}


def dry_molar_mass(fractions: Mapping[str, Array]) -> Array:
    """Return the molar mass of the dry part from its fractions by symbol. [g/mol]"""
    return np.asarray(sum((gas.MOLAR_MASS[name] * part for name, part in fractions.items()), np.zeros(())))


def wet(fractions: Mapping[str, Array], moisture: npt.ArrayLike) -> dict[str, Array]:
    """Return the wet mole fractions by symbol from those of the dry part and the moisture."""
    x = np.asarray(moisture, dtype=np.float64)
    return {name: np.asarray(part * (1.0 - x)) for name, part in fractions.items()} | {"H2O": x}


def heat_capacity(fractions: Mapping[str, Array], temperature: npt.ArrayLike) -> Array:
    """Return the ideal-gas heat capacity of a mixture from its fractions by symbol. [J/(mol K)]

    NaN outside the range of the polynomials, 200 to 1600 K.
    """
    t = np.asarray(temperature, dtype=np.float64)
    t = np.where((t >= gas.COLDEST) & (t <= gas.HOTTEST), t, np.nan)
    total = np.zeros(())
    for name, part in fractions.items():
        a = gas.HEAT_CAPACITY[name]
        total = total + part * (a[0] + t * (a[1] + t * (a[2] + t * (a[3] + t * a[4]))))
    return np.asarray(gas.R * total)
