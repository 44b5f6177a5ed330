"""Velocity-area integration: cubic arcs between the points, a power law to the wall (ISO 3966, numerical integration).

All weights are linear in the velocities: the mean velocity is the sum of weight times velocity. They sum to less than 1,
because the power law carries less than a uniform velocity would.
"""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

Array = npt.NDArray[np.float64]
# The exponent of the wall law: 4 on a rough wall, 14 on a smooth one. ISO 3966, from memory with high confidence.
MILDEST, STEEPEST = 4.0, 14.0
# Points nearer to each other than this part of the radius or line are one place. The slope between two readings a rounding
# error apart would be without meaning, and its weights without bound.
SAME_PLACE = 1e-9


def wall_exponent(outer: npt.ArrayLike, next_one: npt.ArrayLike, velocity: npt.ArrayLike, next_velocity: npt.ArrayLike) -> Array:
    """Return the exponent m of v = v_n (y/y_n)^(1/m) through the two outermost points, as it comes, not held to any limits.

    Parameters
    ----------
    outer, next_one : array_like
        Wall distances of the outermost point and of its neighbour.
    velocity, next_velocity : array_like
        Velocities there.

    Returns
    -------
    array
        ln(y2/y1)/ln(v2/v1); infinite for equal velocities. NaN where a velocity or a distance is not positive and finite, the
        neighbour is not farther from the wall, or the velocity falls towards the axis.
    """
    y1, y2, v1, v2 = (np.asarray(value, dtype=np.float64) for value in (outer, next_one, velocity, next_velocity))
    good = (y1 > 0.0) & (y2 > y1) & np.isfinite(y2) & (v1 > 0.0) & (v2 >= v1) & np.isfinite(v2)
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.asarray(np.where(good, np.log(y2 / y1) / np.log(v2 / v1), np.nan))


def radius_weights(radius: npt.ArrayLike, exponent: float) -> Array:
    """Return the weights of points on one radius of a circle, shape (points,); NaN for all where a figure is impossible.

    Parameters
    ----------
    radius : array_like, shape (points,)
        r/R from 0 to below 1, in any order. Points in one place share its weight. Without a point on the axis the parabola in
        (r/R)^2 through the three innermost points, symmetrical about the axis, is carried on to it; with two points the
        straight line through them; a single one stands for all within it.
    exponent : float
        m of the power law between the outermost point and the wall, above 0.

    Notes
    -----
    Between points the mean over the area is integrated in s = (r/R)^2 by cubics whose end slopes are those of the parabola
    through three neighbours: h (v_i + v_(i+1))/2 + h^2/12 (d_i - d_(i+1)). The outer zone gives
    2 v_n y (m/(m+1) - y m/(2m+1)) with y = 1 - r_n/R. Very uneven spacing gives negative weights, which magnify the scatter of
    the readings.
    """
    r = np.asarray(radius, dtype=np.float64)
    if not r.size or not np.all((r >= 0.0) & (r < 1.0)) or not 0.0 < exponent < np.inf:
        return np.full(r.shape, np.nan)
    places, owner, count = _places(r)
    weight = _arcs(np.square(places)) + _to_axis(np.square(places))
    y = 1.0 - places[-1]
    weight[-1] += 2.0 * y * (exponent / (exponent + 1.0) - y * exponent / (2.0 * exponent + 1.0))
    return np.asarray((weight / count)[owner])


def side_weights(position: npt.ArrayLike, exponent: float) -> Array:
    """Return the weights of points on a line between two walls, shape (points,); NaN for all where a figure is impossible.

    Parameters
    ----------
    position : array_like, shape (points,)
        The fraction of the line, strictly between 0 and 1, in any order. Points in one place share its weight.
    exponent : float
        m of the power law to either wall, above 0: at each end the strip of width y carries v y m/(m+1).
    """
    x = np.asarray(position, dtype=np.float64)
    if not x.size or not np.all((x > 0.0) & (x < 1.0)) or not 0.0 < exponent < np.inf:
        return np.full(x.shape, np.nan)
    places, owner, count = _places(x)
    weight = _arcs(places)
    carried = exponent / (exponent + 1.0)
    weight[0] += carried * places[0]
    weight[-1] += carried * (1.0 - places[-1])
    return np.asarray((weight / count)[owner])


def _places(fraction: Array) -> tuple[Array, npt.NDArray[np.intp], npt.NDArray[np.intp]]:
    """Return the different places in rising order, which of them each point is at, and how many points each has."""
    order = np.argsort(fraction, kind="stable")
    rising = fraction[order]
    number = np.concatenate([[0], np.cumsum(np.diff(rising) > SAME_PLACE)])
    owner = np.empty(len(fraction), dtype=np.intp)
    owner[order] = number
    count = np.bincount(number)
    return np.bincount(number, weights=rising) / count, owner, count


def _arcs(s: Array) -> Array:
    """Return the weights of cubic arcs through points in rising order, from the first to the last."""
    n = len(s)
    weight = np.zeros(n)
    slope = _slopes(s)
    for i in range(n - 1):
        h = s[i + 1] - s[i]
        weight[i] += h / 2.0
        weight[i + 1] += h / 2.0
        weight += h * h / 12.0 * (slope[i] - slope[i + 1])
    return weight


def _slopes(s: Array) -> Array:
    """Return the matrix that gives the slope at each point: of the parabola through it and its neighbours, (n, n)."""
    n = len(s)
    found = np.zeros((n, n))
    if n == 2:
        found[:] = np.array([-1.0, 1.0]) / (s[1] - s[0])
        return found
    for i in range(n if n > 2 else 0):
        first = min(max(i - 1, 0), n - 3)
        found[i, first: first + 3] = _parabola(s[first: first + 3], s[i])
    return found


def _parabola(s: Array, at: float) -> Array:
    """Return the slope at a place of the parabola through three points, as weights of their values."""
    a, b, c = s
    return np.array([
        (2.0 * at - b - c) / ((a - b) * (a - c)), (2.0 * at - a - c) / ((b - a) * (b - c)), (2.0 * at - a - b) / ((c - a) * (c - b)),
    ])


def _to_axis(s: Array) -> Array:
    """Return the weights of the stretch from the axis to the innermost point: the curve of the innermost points, carried on."""
    weight = np.zeros(len(s))
    low = s[0]
    if len(s) == 1:
        weight[0] = low
        return weight
    if len(s) == 2:
        # The straight line at the middle of the stretch.
        beyond = low / 2.0 / (s[1] - low)
        weight[:] = low * (1.0 + beyond), -low * beyond
        return weight
    a, b, c = s[:3]
    # Integral from 0 to the first point of the three basis parabolas of Lagrange.
    for k, (own, p, q) in enumerate(((a, b, c), (b, a, c), (c, a, b))):
        scale = (own - p) * (own - q)
        weight[k] = (low**3 / 3.0 - (p + q) * low**2 / 2.0 + p * q * low) / scale
    return weight
