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
