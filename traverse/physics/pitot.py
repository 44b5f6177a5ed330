"""From the differential pressure of a pitot tube to a velocity."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]


def compressibility_factor(
    impact_pressure: npt.ArrayLike, static_pressure: npt.ArrayLike, ratio_of_specific_heats: npt.ArrayLike
) -> Array:
    """Return the isentropic factor k on the incompressible velocity.

    Parameters
    ----------
    impact_pressure : array_like, shape (..., n)
        Stagnation minus static pressure. [Pa]
    static_pressure : array_like, shape (..., n)
        Absolute static pressure. [Pa]
    ratio_of_specific_heats : array_like, shape (..., n)

    Returns
    -------
    array, shape (..., n)
        1 at zero impact pressure; NaN where it is negative, the static pressure is not positive, or the ratio not above 1.

    Notes
    -----
    k^2 = ((1 + x)^a - 1) / (a x), x = impact over static pressure, a = (ratio - 1) / ratio: the energy equation of
    isentropic flow of an ideal gas, exact. Evaluated through log1p and expm1, so that small x keeps all digits.
    """
    static = np.asarray(static_pressure, dtype=np.float64)
    gamma = np.asarray(ratio_of_specific_heats, dtype=np.float64)
    with np.errstate(divide="ignore", invalid="ignore"):
        x = np.asarray(impact_pressure, dtype=np.float64) / static
        x = np.where((x >= 0.0) & (static > 0.0), x, np.nan)
        a = np.where(gamma > 1.0, (gamma - 1.0) / gamma, np.nan)
        square = np.expm1(a * np.log1p(x)) / (a * np.where(x == 0.0, 1.0, x))
    return np.asarray(np.where((x == 0.0) & (a > 0.0), 1.0, np.sqrt(square)))


def velocity(
    differential_pressure: npt.ArrayLike, density: npt.ArrayLike, coefficient: npt.ArrayLike, *,
    static_pressure: npt.ArrayLike | None = None, ratio_of_specific_heats: npt.ArrayLike = 1.4,
) -> Array:
    """Return the velocity: v = C sqrt(2 dp / density), times the isentropic factor when a static pressure is given.

    Parameters
    ----------
    differential_pressure : array_like, shape (..., n)
        As the probe reads it. [Pa]
    density : array_like, shape (..., n)
        At the local static state. [kg/m3]
    coefficient : array_like, shape (..., n)
        Pitot coefficient C.
    static_pressure : array_like, shape (..., n), optional
        Absolute; switches the isentropic form on, with the impact pressure C^2 dp. [Pa]
    ratio_of_specific_heats : array_like

    Returns
    -------
    array, shape (..., n)
        [m/s]; NaN for a negative differential pressure or a density that is not positive.
    """
    pressure = np.asarray(differential_pressure, dtype=np.float64)
    factor = np.asarray(coefficient, dtype=np.float64)
    heavy = np.asarray(density, dtype=np.float64)
    with np.errstate(invalid="ignore"):
        # Where both signs are wrong the quotient would look right.
        speed = factor * np.sqrt(2.0 * pressure / np.where(heavy > 0.0, heavy, np.nan))
    if static_pressure is None:
        return np.asarray(speed)
    impact = np.square(factor) * pressure
    return np.asarray(speed * compressibility_factor(impact, static_pressure, ratio_of_specific_heats))
