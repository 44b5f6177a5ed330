"""Calibrated probes: a coefficient that depends on the velocity, pitch angles from a five-hole head, an S-type tube's runs."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
# Sweeps after which an iteration that still moves is given up: each gains two digits or more in any flow a pitot tube is for.
SWEEPS = 60
# A sweep that moves the coefficient by less than this part of it has nothing left to give.
SETTLED = 4.0 * float(np.finfo(np.float64).eps)


@dataclass(frozen=True, slots=True, kw_only=True)
class Calibrated:
    """A probe whose coefficient differs from point to point: a curve over velocity [m/s], or over the pitch angle [rad].

    ``at`` are the velocities or angles of the curve. The pitch was read, or follows from the pressures P4 - P5 by F1 (``ratio``).
    """

    kind: Literal["curve", "pitch", "pitch-pressure"]
    at: tuple[float, ...]
    coefficient: tuple[float, ...]
    ratio: tuple[float, ...] = ()


def interpolate(at: npt.ArrayLike, nodes: npt.ArrayLike, values: npt.ArrayLike) -> Array:
    """Return the piecewise-linear curve through the nodes; beyond them the last segment is continued.

    Parameters
    ----------
    at : array_like, shape (...)
    nodes, values : array_like, shape (m,)
        At least two nodes, increasing.

    Returns
    -------
    array, shape (...)
        NaN where ``at`` is.
    """
    x, y = np.asarray(nodes, dtype=np.float64), np.asarray(values, dtype=np.float64)
    place = np.asarray(at, dtype=np.float64)
    index = np.clip(np.searchsorted(x, place, side="right") - 1, 0, x.size - 2)
    slope = (y[1:] - y[:-1]) / (x[1:] - x[:-1])
    return np.asarray(y[index] + slope[index] * (place - x[index]))


def pitch_angle(
    differential_pressure: npt.ArrayLike, pitch_pressure: npt.ArrayLike, angles: npt.ArrayLike, ratios: npt.ArrayLike
) -> Array:
    """Return the pitch angle whose calibrated F1 is the measured one: F1 = (P4 - P5)/(P1 - P2). [rad]

    Parameters
    ----------
    differential_pressure, pitch_pressure : array_like, shape (..., n)
        P1 - P2 and P4 - P5. [Pa]
    angles, ratios : array_like, shape (m,)
        The curve: increasing pitch angles [rad] and F1, which rises or falls throughout.

    Returns
    -------
    array, shape (..., n)
        0 where the differential pressure is not positive: there is no flow to have an angle. Beyond the curve its last segment is
        continued; whether that is allowed is decided elsewhere.

    Notes
    -----
    EPA Method 2F, equation 2F-1 and section 12.2 (from memory).
    """
    across = np.asarray(differential_pressure, dtype=np.float64)
    angle, ratio = np.asarray(angles, dtype=np.float64), np.asarray(ratios, dtype=np.float64)
    if ratio[0] > ratio[-1]:
        angle, ratio = angle[::-1], ratio[::-1]
    flows = across > 0.0
    measured = np.asarray(pitch_pressure, dtype=np.float64) / np.where(flows, across, 1.0)
    return np.asarray(np.where(flows, interpolate(measured, ratio, angle), 0.0))


def coefficient_at(
    reach: npt.ArrayLike, velocities: npt.ArrayLike, coefficients: npt.ArrayLike, shift: npt.ArrayLike = 0.0
) -> Array:
    """Return the coefficient C that a curve C(v) has at the velocity which C itself gives, v = C reach.

    Parameters
    ----------
    reach : array_like, shape (..., n)
        The velocity that a coefficient of 1 would give. [m/s]
    velocities, coefficients : array_like, shape (m,)
        The curve, linear between its points. Velocity over coefficient increases throughout, so that there is one solution.
    shift : array_like, shape (..., n)
        Added to every coefficient of the curve.

    Returns
    -------
    array, shape (..., n)
        Beyond the curve the coefficient of its end; whether that is allowed is decided elsewhere.

    Notes
    -----
    Exact: on a segment C = a + b v, so that C = a/(1 - b reach).
    """
    v, c = np.asarray(velocities, dtype=np.float64), np.asarray(coefficients, dtype=np.float64)
    far = np.asarray(reach, dtype=np.float64)
    moved = np.asarray(shift, dtype=np.float64)
    slope = (c[1:] - c[:-1]) / (v[1:] - v[:-1])
    start = c[:-1] - slope * v[:-1]
    # The reach at each node of the curve, on a last axis of its own.
    edge = v / (c + moved[..., np.newaxis])
    index = np.clip(np.sum(far[..., np.newaxis] >= edge, axis=-1) - 1, 0, v.size - 2)
    inside = (start[index] + moved) / (1.0 - slope[index] * far)
    below, above = far < edge[..., 0], far > edge[..., -1]
    return np.asarray(np.where(below, c[0] + moved, np.where(above, c[-1] + moved, inside)))


def sweeps(
    reach: npt.ArrayLike, velocities: npt.ArrayLike, coefficients: npt.ArrayLike, shift: npt.ArrayLike = 0.0,
    factor: Callable[[Array], Array] | None = None,
) -> list[Array]:
    """Return the coefficients of a curve sweep by sweep, the last being consistent with the velocity that it gives.

    Parameters
    ----------
    reach, velocities, coefficients, shift
        As for :func:`coefficient_at`.
    factor : callable, optional
        The factor on the velocity that itself depends on the coefficient, such as the isentropic one; without it one sweep is exact.

    Returns
    -------
    list of array
        Each of shape (..., n); NaN where the factor is.
    """
    found = [coefficient_at(reach, velocities, coefficients, shift)]
    if factor is None:
        return found
    for _ in range(SWEEPS):
        found.append(coefficient_at(np.asarray(reach) * factor(found[-1]), velocities, coefficients, shift))
        if not np.any(np.abs(found[-1] - found[-2]) > SETTLED * np.abs(found[-1])):
            break
    return found


def s_type_coefficient(standard_coefficient: float, standard_pressure: npt.ArrayLike, s_type_pressure: npt.ArrayLike) -> Array:
    """Return the coefficients of an S-type tube from pairs of readings: Cp(std) sqrt(dp_std/dp_s).

    Parameters
    ----------
    standard_coefficient : float
    standard_pressure, s_type_pressure : array_like, shape (k,)
        Differential pressures in one flow. [Pa]

    Returns
    -------
    array, shape (k,)
        NaN where a pressure is not positive.

    Notes
    -----
    EPA Method 2, equation 2-3 (from memory).
    """
    over, under = np.asarray(standard_pressure, dtype=np.float64), np.asarray(s_type_pressure, dtype=np.float64)
    ratio = np.where((over > 0.0) & (under > 0.0), over / np.where(under > 0.0, under, 1.0), np.nan)
    return np.asarray(standard_coefficient * np.sqrt(ratio))


def mean_deviation(values: npt.ArrayLike) -> float:
    """Return the mean of the absolute deviations from the mean (EPA Method 2, equations 2-4 and 2-5, from memory)."""
    found = np.asarray(values, dtype=np.float64)
    return float(np.mean(np.abs(found - np.mean(found))))


def at_points(
    inputs: Mapping[str, Array], calibrated: Calibrated | None, speed: Callable[[Array], Array], *, exact: bool
) -> dict[str, Array]:
    """Return the coefficient, the pitch angle [rad] and the velocity along the probe's direction [m/s] at every point.

    Parameters
    ----------
    inputs : mapping of str to array, shape (..., n) or (..., 1)
        ``coefficient`` without a calibration; with one ``coefficient_shift``, and for pitch ``pitch`` [rad],
        ``differential_pressure`` and ``pitch_pressure`` [Pa].
    calibrated : Calibrated, optional
    speed : callable
        The velocity that a coefficient gives; it may be negative where the root is signed.
    exact : bool
        Whether that velocity is proportional to the coefficient.
    """
    if calibrated is None:
        return {"coefficient": inputs["coefficient"], "pitch": np.zeros(1), "speed": speed(inputs["coefficient"])}
    pitch = np.zeros(1)
    if calibrated.kind == "curve":
        found = curve_sweeps(inputs, calibrated, speed, exact=exact)[-1]
    else:
        pitch = inputs["pitch"]
        if calibrated.kind == "pitch-pressure":
            pressures = inputs["differential_pressure"], inputs["pitch_pressure"]
            pitch = pitch + pitch_angle(*pressures, calibrated.at, calibrated.ratio)
        found = interpolate(pitch, calibrated.at, calibrated.coefficient) + inputs["coefficient_shift"]
    return {"coefficient": found, "pitch": pitch, "speed": speed(found)}


def curve_sweeps(
    inputs: Mapping[str, Array], calibrated: Calibrated, speed: Callable[[Array], Array], *, exact: bool
) -> list[Array]:
    """Return the coefficients of a curve over velocity, sweep by sweep; see :func:`at_points` and :func:`sweeps`."""
    reach = np.abs(speed(np.ones(1)))
    still = reach == 0.0

    def change(coefficient: Array) -> Array:
        # What compressibility makes of the velocity at this coefficient against the one at a coefficient of 1.
        return np.asarray(np.where(still, 1.0, np.abs(speed(coefficient)) / np.where(still, 1.0, coefficient * reach)))

    return sweeps(reach, calibrated.at, calibrated.coefficient, inputs["coefficient_shift"], None if exact else change)
