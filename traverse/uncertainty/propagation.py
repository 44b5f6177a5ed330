"""The law of propagation of uncertainty (JCGM 100:2008, clause 5), with sensitivities from the chain itself.

All directions of all rows are evaluated in one call of the chain, stacked on a leading axis.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import ndtri, stdtrit

from traverse.chain import Setting, evaluate
from traverse.model import Array
from traverse.result import BudgetRow
from traverse.uncertainty.directions import Row

# Part of one sigma that the central difference steps; small enough that its own error (step squared) is below 1e-6.
STEP = 1e-3
# A reading nearer to zero than this many of its own sigmas is stepped by a whole sigma: the root is not linear there.
NEAR_ZERO = 2.0
# What two evaluations of one quantity may differ by without meaning anything, in parts of it.
ROUNDING = 32.0 * float(np.finfo(np.float64).eps)


@dataclass(frozen=True, slots=True, kw_only=True)
class Combined:
    """A combined standard uncertainty with its coverage: u, U = k u, k, and the effective degrees of freedom."""

    standard: float
    expanded: float
    factor: float
    degrees_of_freedom: float


def deviations(rows: Sequence[Row], inputs: Mapping[str, Array], setting: Setting) -> list[dict[str, Array]]:
    """Return, per row and quantity, the signed deviation of the result for one sigma of each of its directions.

    Parameters
    ----------
    rows : sequence of Row
        What is uncertain.
    inputs : mapping of str to array, shape (points,) or (1,)
        The chain's inputs.
    setting : Setting
        The chain's equations.

    Returns
    -------
    list of dict of str to array
        One dict per row; arrays have shape (directions of the row,). For a row with ``second_order`` the value is the
        root of the squared first-order term and half the squared second-order term (JCGM 100 5.1.2, note).
    """
    flat = [(row, direction) for row in rows for direction in row.directions]
    if not flat:
        return []
    steps = np.array([_step(row, direction.target, direction.deviation, inputs) for row, direction in flat])
    moved: dict[str, Array] = {}
    for name, base in inputs.items():
        touching = [i for i, (_, direction) in enumerate(flat) if direction.target == name]
        if not touching:
            moved[name] = base
            continue
        width = max(np.size(flat[i][1].deviation) for i in touching)
        delta = np.zeros((len(flat), max(width, base.shape[-1])))
        for i in touching:
            delta[i] = steps[i] * flat[i][1].deviation
        moved[name] = np.stack([base + delta, base - delta])
    shifted = evaluate(moved, setting).quantities
    centre = evaluate(inputs, setting).quantities
    result: list[dict[str, Array]] = []
    start = 0
    for row in rows:
        part = slice(start, start + len(row.directions))
        result.append({
            name: _deviation(np.broadcast_to(value, (2, len(flat)))[:, part], float(centre[name]), steps[part], row)
            for name, value in shifted.items()
        })
        start = part.stop
    return result


def _step(row: Row, target: str, deviation: Array, inputs: Mapping[str, Array]) -> float:
    if row.second_order:
        return 1.0
    if target == "differential_pressure":
        moved = deviation > 0
        if np.any(np.broadcast_to(inputs[target], deviation.shape)[moved] < NEAR_ZERO * deviation[moved]):
            return 1.0
    return STEP


def _deviation(pair: Array, centre: float, steps: Array, row: Row) -> Array:
    # A quantity that does not depend on the input still moves by the rounding of its last digits: that is no effect.
    apart = pair[0] - pair[1]
    first: Array = np.where(np.abs(apart) <= ROUNDING * abs(centre), 0.0, apart) / (2.0 * steps)
    if not row.second_order:
        return first
    second = (pair[0] - 2.0 * centre + pair[1]) / steps**2
    sign = np.where(first < 0, -1.0, 1.0)
    return np.asarray(sign * np.sqrt(first**2 + 0.5 * second**2))


def budget(rows: Sequence[Row], moved: Sequence[Mapping[str, Array]], name: str) -> tuple[BudgetRow, ...]:
    """Return the budget of one quantity, largest contribution first; rows without effect are left out."""
    parts = [np.asarray(deviation[name], dtype=np.float64) for deviation in moved]
    variances = [float(np.sum(part**2)) for part in parts]
    total = sum(variances)
    if not total > 0:
        return ()
    found = []
    for row, part, variance in zip(rows, parts, variances, strict=True):
        if not variance > 0:
            continue
        contribution = math.sqrt(variance)
        signed = float(part[0]) if row.shared else contribution
        found.append(BudgetRow(
            input=row.input, kind=row.kind, shared=row.shared, standard_uncertainty=row.standard_uncertainty,
            unit=row.unit, sensitivity=signed / row.standard_uncertainty if row.standard_uncertainty else 0.0,
            contribution=contribution, share=variance / total,
            degrees_of_freedom=_row_freedom(row, part), stated=row.stated,
        ))
    return tuple(sorted(found, key=lambda row: (-row.contribution, row.input, row.kind)))


def _row_freedom(row: Row, part: Array) -> float:
    """Effective degrees of freedom of a row: those stated, or Welch-Satterthwaite over its independent points."""
    if not math.isfinite(row.degrees_of_freedom):
        return math.inf
    return float(row.degrees_of_freedom * np.sum(part**2) ** 2 / np.sum(part**4))


def combine(contributions: Sequence[tuple[float, float]], coverage: float) -> Combined:
    """Combine independent contributions (standard uncertainty, degrees of freedom) at a level of confidence.

    Welch-Satterthwaite (JCGM 100 equation G.2b), truncated to the next lower integer; Student's t, or the normal
    quantile when no contribution has finite degrees of freedom.
    """
    standard = math.sqrt(sum(u * u for u, _ in contributions))
    below = sum(u**4 / nu for u, nu in contributions if math.isfinite(nu))
    freedom = math.inf if below == 0.0 else max(1.0, math.floor(standard**4 / below + 1e-9))
    quantile = 0.5 + coverage / 2.0
    factor = float(ndtri(quantile) if math.isinf(freedom) else stdtrit(freedom, quantile))
    return Combined(standard=standard, expanded=factor * standard, factor=factor, degrees_of_freedom=freedom)
