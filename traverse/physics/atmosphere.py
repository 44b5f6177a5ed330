"""The standard atmosphere."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt


def pressure_at_altitude(altitude: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """Return the pressure of the standard atmosphere at an altitude. [Pa]

    Parameters
    ----------
    altitude : array_like, shape (...)
        Above sea level. [m]; NaN outside -500 m to 11 000 m.

    Notes
    -----
    p = 101325 (1 - 2.25577e-5 h)^5.25588. A model, not a barometer: weather moves the truth by up to 3 %.
    """
    h = np.asarray(altitude, dtype=np.float64)
    inside = (h >= -500.0) & (h <= 11000.0)
    return np.asarray(np.where(inside, 101325.0 * (1.0 - 2.25577e-5 * np.where(inside, h, 0.0)) ** 5.25588, np.nan))


def station_pressure(sea_level_pressure: npt.ArrayLike, altitude: npt.ArrayLike, temperature: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """Return the pressure at a station from the weather report's, which is reduced to sea level. [Pa]

    Parameters
    ----------
    sea_level_pressure, altitude, temperature : array_like
        [Pa], above sea level [m], of the air at the station [K]. NaN outside -500 m to 5000 m.

    Notes
    -----
    p = p_SL exp(-h/H), H = 287.055 (T + 0.0065 h/2)/9.807 (Hess; as psychrometric libraries code it).
    """
    h = np.asarray(altitude, dtype=np.float64)
    inside = (h >= -500.0) & (h <= 5000.0)
    scale = 287.055 * (np.asarray(temperature, dtype=np.float64) + 0.0065 * h / 2.0) / 9.807
    return np.asarray(np.where(inside, np.asarray(sea_level_pressure, dtype=np.float64) * np.exp(-h / scale), np.nan))


def altimeter_pressure(setting: npt.ArrayLike, altitude: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """Return the pressure at a station from an airfield's altimeter setting. [Pa]  NaN outside -500 m to 5000 m.

    p = (q^n - 8.417286e-5 h)^(1/n) in hPa, n = 0.190263; from memory, it gives the standard atmosphere at 1013.25 hPa.
    """
    h, n = np.asarray(altitude, dtype=np.float64), 0.190263
    inside = (h >= -500.0) & (h <= 5000.0)
    base = np.power(np.asarray(setting, dtype=np.float64) / 100.0, n) - 8.417286e-5 * np.where(inside, h, 0.0)
    return np.asarray(np.where(inside, 100.0 * np.power(base, 1.0 / n), np.nan))


def raised_pressure(pressure: npt.ArrayLike, height: npt.ArrayLike, temperature: npt.ArrayLike) -> npt.NDArray[np.float64]:
    """Return the pressure of the outside air a height above where a barometer reads it: p exp(-g h/(287.055 T)). [Pa]"""
    height_, warm = np.asarray(height, dtype=np.float64), np.asarray(temperature, dtype=np.float64)
    return np.asarray(np.asarray(pressure, dtype=np.float64) * np.exp(-9.80665 * height_ / (287.055 * warm)))
