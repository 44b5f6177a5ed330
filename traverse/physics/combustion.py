"""Flue gas of a fuel by the balance of its elements: complete combustion, but for the carbon monoxide that was measured."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.physics.gas import DRY_AIR
from traverse.physics.moist_air import RATIO

Array = npt.NDArray[np.float64]
_TABLE = tables.load("fuels")
ELEMENTS = ("carbon", "hydrogen", "oxygen", "nitrogen", "sulfur")
ATOMIC_MASS: dict[str, float] = {name: float(_TABLE["atomic_mass"][name]) for name in ELEMENTS}
WATER_MASS = 2.0 * ATOMIC_MASS["hydrogen"] + ATOMIC_MASS["oxygen"]
MOLECULES: dict[str, tuple[int, ...]] = {name: tuple(row) for name, row in _TABLE["molecule"].items() if name != "source"}
BY_MASS = (*ELEMENTS, "water", "ash")
# What is not oxygen in a mole of dry air: nitrogen, argon, carbon dioxide.
_OTHERS = DRY_AIR["N2"] + DRY_AIR["Ar"] + DRY_AIR["CO2"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Atoms:
    """Moles of each element, and of water held as such, in one unit of a fuel (a gram, or a mole)."""

    carbon: float
    hydrogen: float
    oxygen: float
    nitrogen: float
    sulfur: float
    water: float = 0.0

    @property
    def oxygen_need(self) -> float:
        """Moles of oxygen for complete combustion: C + H/4 + S - O/2."""
        return self.carbon + self.hydrogen / 4.0 + self.sulfur - self.oxygen / 2.0

    @property
    def dry_products(self) -> float:
        """Moles of dry gas that the fuel itself gives: C + S + N/2."""
        return self.carbon + self.sulfur + self.nitrogen / 2.0


def by_mass(parts: Mapping[str, float]) -> Atoms:
    """Return the atoms in a gram of a fuel from its ultimate analysis, mass fractions; ash is inert."""
    return Atoms(
        **{name: parts.get(name, 0.0) / mass for name, mass in ATOMIC_MASS.items()}, water=parts.get("water", 0.0) / WATER_MASS
    )


def by_volume(parts: Mapping[str, float]) -> Atoms:
    """Return the atoms in a mole of a gas from the mole fractions of its components."""
    totals = [sum(parts[name] * MOLECULES[name][place] for name in parts) for place in range(len(ELEMENTS))]
    return Atoms(**dict(zip(ELEMENTS, totals, strict=True)))


def from_oxygen(
    fuel: Atoms, oxygen: npt.ArrayLike, carbon_monoxide: npt.ArrayLike = 0.0, humidity_ratio: npt.ArrayLike = 0.0
) -> dict[str, Array]:
    """Return the flue gas of a fuel at a measured oxygen.

    Parameters
    ----------
    fuel : Atoms
        The fuel.
    oxygen, carbon_monoxide : array_like, shape (...)
        Dry mole fractions, as measured.
    humidity_ratio : array_like, shape (...)
        Of the combustion air. [kg/kg dry]

    Returns
    -------
    dict of str to array, shape (...)
        Dry mole fractions ``oxygen``, ``carbon_dioxide``, ``carbon_monoxide``, ``sulfur_dioxide``; the wet mole fraction
        ``moisture``; ``excess_air``; per unit of fuel the moles of ``dry_air`` and of ``dry_gas``. NaN where the oxygen is
        that of air or more, or a fraction is negative.

    Notes
    -----
    Dry gas n = K + b a + y n with oxygen y n = 0.20939 a - o + z n/2, which is linear in n: K from the fuel, a the dry
    air, b its share that is not oxygen, o the oxygen need, z the carbon monoxide.
    """
    y, z = np.asarray(oxygen, dtype=np.float64), np.asarray(carbon_monoxide, dtype=np.float64)
    air = DRY_AIR["O2"]
    left = 1.0 - y - _OTHERS / air * (y - 0.5 * z)
    with np.errstate(divide="ignore", invalid="ignore"):
        gas = (fuel.dry_products + _OTHERS / air * fuel.oxygen_need) / np.where(left > 0.0, left, np.nan)
    return _products(fuel, gas, ((y - 0.5 * z) * gas + fuel.oxygen_need) / air, y, z, humidity_ratio)


def from_excess_air(
    fuel: Atoms, excess_air: npt.ArrayLike, carbon_monoxide: npt.ArrayLike = 0.0, humidity_ratio: npt.ArrayLike = 0.0
) -> dict[str, Array]:
    """Return the flue gas of a fuel at a stated excess air (0.2: 20 % more than complete combustion needs).

    Parameters and result as for :func:`from_oxygen`; NaN where the air does not suffice for the carbon monoxide stated.
    """
    z = np.asarray(carbon_monoxide, dtype=np.float64)
    dry_air = fuel.oxygen_need * (1.0 + np.asarray(excess_air, dtype=np.float64)) / DRY_AIR["O2"]
    surplus = DRY_AIR["O2"] * dry_air - fuel.oxygen_need
    gas = (fuel.dry_products + _OTHERS * dry_air + surplus) / (1.0 - 0.5 * z)
    return _products(fuel, gas, dry_air, surplus / gas + 0.5 * z, z, humidity_ratio)


def _products(
    fuel: Atoms, gas: Array, dry_air: Array, oxygen: Array, carbon_monoxide: Array, humidity_ratio: npt.ArrayLike
) -> dict[str, Array]:
    """Return the composition from the moles of dry gas and of dry air."""
    carbon_dioxide = (fuel.carbon + DRY_AIR["CO2"] * dry_air) / gas - carbon_monoxide
    water = fuel.hydrogen / 2.0 + fuel.water + dry_air * np.asarray(humidity_ratio, dtype=np.float64) / RATIO
    # An oxygen that rounding leaves below nothing is nothing.
    possible = (oxygen >= -1e-12) & (carbon_monoxide >= 0.0) & (carbon_dioxide >= 0.0) & (dry_air >= 0.0)
    found = {
        "oxygen": np.maximum(oxygen, 0.0), "carbon_dioxide": carbon_dioxide, "carbon_monoxide": carbon_monoxide,
        "sulfur_dioxide": fuel.sulfur / gas, "moisture": water / (water + gas),
        "excess_air": dry_air * DRY_AIR["O2"] / fuel.oxygen_need - 1.0, "dry_air": dry_air, "dry_gas": gas,
    }
    return {name: np.asarray(np.where(possible, value, np.nan)) for name, value in found.items()}


def greatest_carbon_dioxide(fuel: Atoms) -> float:
    """Return the dry carbon dioxide of complete combustion without excess air, the greatest a fuel can give."""
    return float(from_excess_air(fuel, 0.0)["carbon_dioxide"])


def fuel_factor(oxygen: float, carbon_dioxide: float, carbon_monoxide: float = 0.0) -> float:
    """Return the fuel factor Fo of EPA Method 3B from dry fractions: (20.9 - %O2)/%CO2; NaN without carbon dioxide.

    Carbon monoxide counts as burnt: it adds to the carbon dioxide and takes half of itself off the oxygen.
    """
    burnt = carbon_dioxide + carbon_monoxide
    air = float(_TABLE["fuel_factor"]["oxygen_of_air"])
    return (air - 100.0 * (oxygen - 0.5 * carbon_monoxide)) / (100.0 * burnt) if burnt > 0.0 else float("nan")
