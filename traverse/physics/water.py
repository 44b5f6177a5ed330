"""Water vapour at saturation."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse import tables

Array = npt.NDArray[np.float64]
_TABLE = tables.load("psychrometrics")
ICE: tuple[float, ...] = tuple(float(c) for c in _TABLE["ice"])
WATER: tuple[float, ...] = tuple(float(c) for c in _TABLE["water"])
TRIPLE_POINT = float(_TABLE["triple_point"])


def _branch(temperature: Array, c: tuple[float, ...]) -> Array:
    t = temperature
    return np.asarray(np.exp(c[0] / t + c[1] + t * (c[2] + t * (c[3] + t * (c[4] + t * c[5]))) + c[6] * np.log(t)))


def saturation_pressure(temperature: npt.ArrayLike) -> Array:
    """Return the saturation pressure, over ice below the triple point and over water above it. [Pa]

    Parameters
    ----------
    temperature : array_like, shape (...)
        [K]; NaN outside 173.15 K to 473.15 K, the range of the equations, except that hot gas up to 2000 K gives
        infinity: nothing a duct holds can saturate there.

    Notes
    -----
    ASHRAE Fundamentals 2017, chapter 1, equations 5 (ice) and 6 (water).
    """
    t = np.asarray(temperature, dtype=np.float64)
    inside = (t >= 173.15) & (t <= 473.15)
    safe = np.where(inside, t, 300.0)
    value = np.where(safe < TRIPLE_POINT, _branch(safe, ICE), _branch(safe, WATER))
    return np.asarray(np.where(inside, value, np.where((t > 473.15) & (t < 2000.0), np.inf, np.nan)))


def saturation_branch(temperature: Array, branch: tuple[float, ...]) -> tuple[Array, Array]:
    """Return the saturation pressure [Pa] by one branch, ``ICE`` or ``WATER``, and the slope of its logarithm [1/K].

    Temperature in K, shape (...); meaningless outside the range of the branch.
    """
    c, t = branch, temperature
    slope = c[2] + t * (2.0 * c[3] + t * (3.0 * c[4] + t * (4.0 * c[5]))) + (c[6] - c[0] / t) / t
    return _branch(t, c), np.asarray(slope)
