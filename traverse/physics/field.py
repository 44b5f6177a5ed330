"""A velocity field over a section from the points of a traverse: what the readings say between them, and how surely.

The field is v = w (c + g + q ln d): w a wall law in d, a measure of the distance to the wall; c a constant; g a Gaussian
process with a Matern-5/2 kernel; q a second, smoother one, by which the steepness of the wall law varies along the wall.
Both are written as cosine series. Wall law, length, amplitude and noise are not chosen but averaged over a grid with
their marginal likelihood, so that not knowing them widens the result. All else is linear and Gaussian: any weighted sum
of the field, and any number of them together, has a mean and a covariance.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse.errors import DomainError
from traverse.physics import quadrature, sections
from traverse.physics.sections import Size

Array = npt.NDArray[np.float64]
Index = npt.NDArray[np.intp]
Block = tuple[npt.ArrayLike, npt.ArrayLike, npt.ArrayLike]

FEWEST = 4
# The wall law: d^(1/m) or 1 + ln(d)/m. Lengths of g in half extents; its amplitude and the noise of a reading in parts of
# the velocity. All are judgements about ducts, with no source; the coverage tests hold them to account.
EXPONENTS = np.array([4.0, 4.7, 5.4, 6.2, 7.0, 8.0, 9.5, 11.5, 14.0])
LENGTHS = np.array([0.35, 0.55, 0.85, 1.3])
AMPLITUDES = np.geomspace(0.02, 0.6, 8)
NOISES = np.array([0.002, 0.005, 0.012, 0.03, 0.07])
# However smooth the readings, this part of the variance of g has the shortest length: lines leave wide gaps between them.
ROUGH = 0.15
# Amplitude of q in parts of that of g, its length, its cosines in each direction.
STEEP, STEEP_LENGTH, STEEP_TERMS = 0.3, 0.85, 6
# Cosines of g in each direction, on a box half as large again as the section: the ends of the series stay off the wall.
TERMS, BOX = 18, 1.5
# Readings said to be exact still need a figure to divide by. Models this much less likely than the best are left out.
EXACT, LEAST = 1e-6, 1e-4


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class WallLaws:
    """The wall laws that are tried, each brought to a section mean of 1. All of shape (laws,).

    ``measure`` is the place in :func:`wall_measures`; ``logarithmic`` tells 1 + ln(d)/m from d^(1/m).
    """

    measure: Index
    logarithmic: npt.NDArray[np.bool_]
    exponent: Array
    norm: Array

    def at(self, measures: Array, which: Index | None = None) -> Array:
        """Return the laws (or those asked for) at places given by their measures, shape (laws, ...). 0 at the wall."""
        chosen = np.arange(len(self.measure)) if which is None else which
        base = measures[self.measure[chosen]]
        tail = (-1,) + (1,) * (base.ndim - 1)
        exponent, norm = self.exponent[chosen].reshape(tail), self.norm[chosen].reshape(tail)
        steep = logarithm(base) / exponent
        found = np.where(self.logarithmic[chosen].reshape(tail), np.maximum(1.0 + steep, 0.0), np.exp(steep))
        return np.asarray(np.where(base > 0.0, found / norm, 0.0))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Field:
    """A fitted velocity field. A group is a kept pair of a wall law and a length of g.

    ``probability`` (groups, amplitudes, noises) sums to 1. Along the eigenvectors of each group's covariance of readings
    stand ``reading`` and ``level``, the readings and the wall law (groups, points), ``spread``, the variances (groups,
    amplitudes, noises, points), and ``projection``, the terms of the series (groups, points, terms), whose prior variances
    are ``density`` (groups, terms).
    """

    shape: str
    size: Size
    laws: WallLaws
    law: Index
    density: Array
    probability: Array
    amplitude: Array
    projection: Array
    spread: Array
    reading: Array
    level: Array

    def at(self, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
        """Return the mean of the field at points; 0 at the wall, NaN outside. [m/s]"""
        across, up = np.broadcast_arrays(np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64))
        places = _places(self.shape, self.size, across.ravel(), up.ravel())
        constant, series = self._coefficients()
        total = np.zeros(across.size)
        used, index = np.unique(self.law, return_inverse=True)
        for wall, which in zip(self.laws.at(places.measures, used), range(len(used)), strict=True):
            own = index == which
            log = logarithm(places.measures[self.laws.measure[used[which]]])
            smooth, steep = _split(series[own].sum(axis=0))
            inner = np.sum((places.first @ smooth) * places.second, axis=-1)
            outer = np.sum((places.first[:, :STEEP_TERMS] @ steep) * places.second[:, :STEEP_TERMS], axis=-1)
            total += wall * (constant[own].sum() + inner + log * outer)
        inside = sections.wall_distance(self.shape, self.size, across.ravel(), up.ravel()) >= 0.0
        return np.asarray(np.where(inside, total, np.nan).reshape(across.shape))

    def functional(
        self, x: npt.ArrayLike, y: npt.ArrayLike, weight: npt.ArrayLike, *, also: Sequence[Block] = ()
    ) -> tuple[Array, Array]:
        """Return weighted sums of the field over points, all of them together.

        Parameters
        ----------
        x, y, weight : array_like, shape (functionals, points) or (points,)
            Points and their weights. [m], [1]  Rows of fewer points are filled up with weight 0 at any place.
        also : sequence of (x, y, weight)
            More of them, of other lengths, such as the nodes of the section mean.

        Returns
        -------
        tuple of array
            Means, shape (functionals,), and covariance, shape (functionals, functionals). [m/s], [m2/s2]  Rasmussen and
            Williams, Gaussian Processes for Machine Learning, section 2.7 (from memory), the constant with a flat prior;
            the mixture of models by the law of total covariance.
        """
        return self._moments([_rows(self.shape, self.size, *block) for block in ((x, y, weight), *also)])

    def section_mean(self) -> tuple[float, float]:
        """Return the mean over the section and its standard uncertainty. [m/s]"""
        mean, covariance = self._moments([_rows(self.shape, self.size, *quadrature.nodes(self.shape, self.size))])
        return float(mean[0]), float(np.sqrt(covariance[0, 0]))

    def _constant(self) -> tuple[Array, Array]:
        """Return the generalised least-squares constant of every model, and its precision."""
        precision = np.sum(self.level[:, None, None, :] ** 2 / self.spread, axis=-1)
        crossed = np.sum((self.level * self.reading)[:, None, None, :] / self.spread, axis=-1)
        return crossed / precision, precision

    def _coefficients(self) -> tuple[Array, Array]:
        """Return the constant and the coefficients of the series of each group, weighted with its probability."""
        constant, _ = self._constant()
        rest = self.reading[:, None, None, :] - constant[..., None] * self.level[:, None, None, :]
        pull = np.einsum("gat,a,gatn->gn", self.probability, self.amplitude**2, rest / self.spread)
        series = self.density * np.einsum("gn,gnk->gk", pull, self.projection)
        return np.asarray(np.sum(self.probability * constant, axis=(1, 2))), np.asarray(series)

    def _moments(self, rows: list[_Rows]) -> tuple[Array, Array]:
        constant, precision = self._constant()
        projected = {int(law): _project(rows, self.laws, int(law)) for law in np.unique(self.law)}
        count = sum(len(row.weight) for row in rows)
        mean, square = np.zeros(count), np.zeros((count, count))
        for g, law in enumerate(self.law.tolist()):
            own, spread = self._of_group(g, *projected[law], constant[g].ravel(), precision[g].ravel())
            share = self.probability[g].ravel()
            mean += share @ own
            square += spread + (share[:, None] * own).T @ own
        return mean, square - np.outer(mean, mean)

    def _of_group(self, g: int, level: Array, terms: Array, constant: Array, precision: Array) -> tuple[Array, Array]:
        """Return the means of a group's models, and the sum of their covariances times their probability."""
        weighted = terms * self.density[g]
        reach = weighted @ self.projection[g].T
        share, spread = self.probability[g].ravel(), self.spread[g].reshape(-1, reach.shape[-1])
        square = np.repeat(self.amplitude**2, self.probability.shape[-1])
        own = constant[:, None] * level + square[:, None] * (
            ((self.reading[g] - constant[:, None] * self.level[g]) / spread) @ reach.T
        )
        left = level - square[:, None] * ((self.level[g] / spread) @ reach.T)
        prior = float(share @ square) * (weighted @ terms.T)
        known = (reach * ((share * square**2) @ (1.0 / spread))) @ reach.T
        return own, prior - known + (left * (share / precision)[:, None]).T @ left


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Places:
    """What the model needs to know of places: measures of the wall distance, cosines in both directions."""

    measures: Array
    first: Array
    second: Array


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Rows:
    """Functionals: weights (functionals, points) and their places."""

    weight: Array
    places: _Places


def _rows(shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike, weight: npt.ArrayLike) -> _Rows:
    first, second, third = (np.atleast_2d(np.asarray(values, dtype=np.float64)) for values in (x, y, weight))
    return _Rows(weight=third, places=_places(shape, size, first, second))


def _places(shape: str, size: Size, x: Array, y: Array) -> _Places:
    across, up = _scaled(shape, size, x, y)
    order = np.arange(TERMS) * np.pi / (2.0 * BOX)
    scale = np.where(np.arange(TERMS) == 0, 1.0, np.sqrt(2.0))
    return _Places(
        measures=wall_measures(shape, size, x, y), first=np.cos((across + BOX)[..., None] * order) * scale,
        second=np.cos((up + BOX)[..., None] * order) * scale,
    )


def _scaled(shape: str, size: Size, x: Array, y: Array) -> tuple[Array, Array]:
    """Return the coordinates from the middle in half extents."""
    middle_x, middle_y = quadrature.centre(shape, size)
    width, height = sections.extent(shape, size)
    return (x - middle_x) / (width / 2.0), (y - middle_y) / (height / 2.0)


def _split(series: Array) -> tuple[Array, Array]:
    """Return the coefficients of g and of q, each as a square."""
    return series[: TERMS**2].reshape(TERMS, TERMS), series[TERMS**2 :].reshape(STEEP_TERMS, STEEP_TERMS)


def _project(rows: list[_Rows], laws: WallLaws, law: int) -> tuple[Array, Array]:
    """Return the functionals of the wall law alone, and of the wall law times each term of the series."""
    levels, terms = [], []
    for row in rows:
        places, count = row.places, len(row.weight)
        weighted = row.weight * laws.at(places.measures, np.array([law]))[0]
        log = logarithm(places.measures[laws.measure[law]])
        levels.append(np.sum(weighted, axis=-1))
        smooth = np.swapaxes(places.first * weighted[..., None], -1, -2) @ places.second
        few = places.first[..., :STEEP_TERMS] * (weighted * log)[..., None]
        steep = np.swapaxes(few, -1, -2) @ places.second[..., :STEEP_TERMS]
        terms.append(np.concatenate([smooth.reshape(count, -1), steep.reshape(count, -1)], axis=-1))
    return np.concatenate(levels), np.concatenate(terms)


def wall_measures(shape: str, size: Size, x: Array, y: Array) -> Array:
    """Return measures of the distance to the wall, shape (measures, ...): 0 at the wall and outside, near 1 in the middle.

    First the distance to the nearest wall over the mean half extent. Where the shape has one, also a smooth measure
    without a crease inside, 1 - r^2 (round, ellipse) or (1 - x^2)(1 - y^2) (rectangle), and for a rectangle the product
    (1 - |x|)(1 - |y|); x, y and r in half extents.
    """
    across, up = (np.abs(values) for values in _scaled(shape, size, x, y))
    half = 0.25 * float(sum(sections.extent(shape, size)))
    distance = np.maximum(sections.wall_distance(shape, size, x, y), 0.0) / half
    if shape in {"round", "ellipse"}:
        return np.stack([distance, np.maximum(1.0 - across**2 - up**2, 0.0)])
    if shape == "rectangle":
        product = np.maximum(1.0 - across, 0.0) * np.maximum(1.0 - up, 0.0)
        return np.stack([distance, product * (1.0 + across) * (1.0 + up), product])
    return np.asarray(distance[None])


def logarithm(base: Array) -> Array:
    """Return ln of a measure of the wall distance; 0 at the wall, where every wall law is 0."""
    return np.asarray(np.log(np.where(base > 0.0, base, 1.0)))


def spectral(length: npt.ArrayLike, count: int = TERMS) -> Array:
    """Return the prior variances of the terms of a series, shape (lengths, terms); they sum to 1.

    Spectral density of the Matern-5/2 kernel in the plane, proportional to (5/l^2 + |omega|^2)^(-7/2) (Rasmussen and
    Williams, equation 4.15, from memory), at the wave numbers of the series.
    """
    omega = np.arange(count) * np.pi / (2.0 * BOX)
    squared = (omega[:, None] ** 2 + omega[None, :] ** 2).ravel()
    density = (5.0 / np.atleast_1d(np.asarray(length, dtype=np.float64))[:, None] ** 2 + squared) ** -3.5
    return np.asarray(density / density.sum(axis=-1, keepdims=True))


def fit(
    shape: str, size: Size, x: npt.ArrayLike, y: npt.ArrayLike, velocity: npt.ArrayLike, noise: npt.ArrayLike | None = None
) -> Field:
    """Return the velocity field that the readings of a traverse leave possible.

    Parameters
    ----------
    shape, size
        The section, see :mod:`traverse.physics.sections`. [m]
    x, y, velocity : array_like, shape (points,)
        Points and velocities. [m], [m/s]
    noise : array_like, shape (points,) or (), optional
        Standard uncertainty of each velocity; found from the readings by default. [m/s]

    Raises
    ------
    DomainError
        For fewer than four points, points outside, and velocities that are no numbers or all 0.
    """
    across, up, speed = (np.asarray(values, dtype=np.float64) for values in (x, y, velocity))
    _refuse(shape, size, across, up, speed)
    reference = float(np.sqrt(np.mean(speed**2)))
    pattern, noises = _noise(noise, reference, speed.size)
    places, laws = _places(shape, size, across, up), _laws(shape, size)
    level, terms, density = laws.at(places.measures) / pattern, _products(places)[laws.measure], _densities()
    value, vector = _eigen(level, terms, density)
    law, length = (axis.ravel() for axis in np.indices(value.shape[:2]))
    value, vector = value.reshape(-1, speed.size), vector.reshape(-1, speed.size, speed.size)
    reading, along = (speed / pattern) @ vector, (level[law][:, None, :] @ vector)[:, 0]
    amplitude = AMPLITUDES * reference
    spread = (amplitude**2)[:, None, None] * value[:, None, None, :] + (noises**2)[:, None]
    probability = _probability(spread, reading, along)
    kept = np.flatnonzero(probability.sum(axis=(1, 2)) > 0.0)
    projection = np.swapaxes(vector[kept] * level[law[kept]][:, :, None], -1, -2) @ terms[law[kept]]
    return Field(
        shape=shape, size=dict(size), laws=laws, law=law[kept], density=density[length[kept]], probability=probability[kept],
        amplitude=amplitude, projection=projection, spread=spread[kept], reading=reading[kept], level=along[kept],
    )


def _laws(shape: str, size: Size) -> WallLaws:
    x, y, weight = quadrature.nodes(shape, size)
    measures = wall_measures(shape, size, x, y)
    which = np.indices((len(measures), 2, len(EXPONENTS))).reshape(3, -1)
    plain = WallLaws(
        measure=which[0], logarithmic=which[1] == 1, exponent=EXPONENTS[which[2]], norm=np.ones(which.shape[1])
    )
    return WallLaws(
        measure=plain.measure, logarithmic=plain.logarithmic, exponent=plain.exponent, norm=plain.at(measures) @ weight
    )


def _densities() -> Array:
    """Return the prior variances of all terms for every length of g, shape (lengths, terms), for an amplitude of 1."""
    smooth = (1.0 - ROUGH) * spectral(LENGTHS) + ROUGH * spectral(LENGTHS[0])
    steep = STEEP**2 * spectral(STEEP_LENGTH, STEEP_TERMS)
    return np.concatenate([smooth, np.tile(steep, (len(LENGTHS), 1))], axis=-1)


def _products(places: _Places) -> Array:
    """Return the terms at points, shape (measures, points, terms): those of g, then those of q times ln d."""
    count = len(places.first)
    smooth = (places.first[:, :, None] * places.second[:, None, :]).reshape(count, -1)
    steep = (places.first[:, :STEEP_TERMS, None] * places.second[:, None, :STEEP_TERMS]).reshape(count, -1)
    return np.stack([np.concatenate([smooth, steep * log[:, None]], axis=-1) for log in logarithm(places.measures)])


def _eigen(level: Array, terms: Array, density: Array) -> tuple[Array, Array]:
    """Return values and vectors of the covariances of the readings for every wall law and length."""
    kernel = (terms[:, None] * density[:, None, :]) @ np.swapaxes(terms, -1, -2)[:, None]
    value, vector = np.linalg.eigh(level[:, None, :, None] * level[:, None, None, :] * kernel)
    return np.maximum(value, 0.0), np.asarray(vector)


def _noise(noise: npt.ArrayLike | None, reference: float, count: int) -> tuple[Array, Array]:
    """Return the pattern of the noise over the points, and the sizes to be tried."""
    if noise is None:
        return np.ones(count), NOISES * reference
    stated = np.maximum(np.broadcast_to(np.asarray(noise, dtype=np.float64), (count,)), EXACT * reference)
    return np.asarray(stated), np.ones(1)


def _probability(spread: Array, reading: Array, level: Array) -> Array:
    """Return the probability of every model, all alike before the readings; those far behind the best get 0.

    The marginal likelihood with the constant integrated out (Rasmussen and Williams, section 2.7, from memory).
    """
    precision = np.sum(level[:, None, None, :] ** 2 / spread, axis=-1)
    crossed = np.sum((level * reading)[:, None, None, :] / spread, axis=-1)
    # A logarithmic law may be 0 at all points, where they all lie close to the wall: then it says nothing about them.
    usable = precision > 0.0
    known = np.where(usable, precision, 1.0)
    misfit = np.sum(reading[:, None, None, :] ** 2 / spread, axis=-1) - crossed**2 / known
    likelihood = np.where(usable, -0.5 * (np.sum(np.log(spread), axis=-1) + np.log(known) + misfit), -np.inf)
    found = np.exp(likelihood - likelihood.max())
    found = np.where(found < LEAST, 0.0, found)
    return np.asarray(found / found.sum())


def _refuse(shape: str, size: Size, x: Array, y: Array, velocity: Array) -> None:
    where = "velocity field"
    if velocity.ndim != 1 or not x.shape == y.shape == velocity.shape:
        raise DomainError("x, y and velocity differ in length", where=where, expected="one list of points")
    if velocity.size < FEWEST:
        raise DomainError(f"{velocity.size} points", where=where, expected=f"at least {FEWEST} points to fit a velocity field to")
    if not (np.all(np.isfinite(velocity)) and np.any(velocity != 0.0)):
        raise DomainError("velocities that are no numbers, or all 0", where=where, expected="a velocity at every point")
    distance = sections.wall_distance(shape, size, x, y)
    if not (np.all(distance > -1e-9 * float(sum(sections.extent(shape, size)))) and np.any(distance > 0.0)):
        raise DomainError("a point outside the section, or all at the wall", where=where, expected="points inside")
