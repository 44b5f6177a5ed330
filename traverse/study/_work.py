"""A field fitted to the readings of a traverse, read again at the points of other layouts."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from traverse.errors import JobError, ReadingError, nearest
from traverse.model import Array, Job, Setup, frozen
from traverse.physics import field, profiles, quadrature
from traverse.reduction import reduce
from traverse.result import Reduction
from traverse.study._candidates import Candidate, candidates
from traverse.study._records import Comparison, Row, Study, size_of

LIMITS = (
    "The field is fitted to these readings alone. What the flow does between the points, where none of them saw it, is covered "
    "only as far as the fitted model allows for it: a jet or a wake that lies wholly between points or lines is not in these "
    "numbers, and their uncertainty does not cover it.",
    "The zone between the outermost points and the wall follows from wall laws that fit the readings, not from readings.",
    "The uncertainty is that of the layout alone: other readings would bring their own errors, and what is wrong with all "
    "readings alike (probe, gauge, density) moves every row by the same part.",
)
# The rule that the others are held against.
BASE = "equal-area"
FORMULA_LIMITS = ("The profile is a formula, not this duct: symmetrical, without swirl and without errors of reading.",)


def study(source: Job | Reduction, *, run: str | None = None) -> Study:
    """Return what other layouts would have given, from the readings of a job.

    Parameters
    ----------
    source : Job or Reduction
        A job is reduced first.
    run : str, optional
        The run whose readings are taken; the mean of all runs, point by point, by default.

    Raises
    ------
    ReadingError
        If there is no run of that name.
    DomainError
        If fewer than four points were read.
    """
    reduction = reduce(source) if isinstance(source, Job) else source
    job, names = reduction.job, [result.run.name for result in reduction.runs]
    if run is not None and run not in names:
        guess = nearest(run, names)
        raise ReadingError(
            f"no run {run!r}", where="--run", expected=f"one of {', '.join(names)}", how=f"perhaps {guess}" if guess else ""
        )
    chosen = [result for result in reduction.runs if run in {None, result.run.name}]
    counted = np.all([result.treated.counted for result in chosen], axis=0)
    velocity = np.mean([result.velocity for result in chosen], axis=0)
    basis = f"run {chosen[0].run.name}" if len(chosen) == 1 else f"mean of {len(chosen)} runs"
    return _measured(job, np.flatnonzero(counted), velocity[counted], basis)


def _measured(job: Job, counted: field.Index, velocity: Array, basis: str) -> Study:
    section, layout = job.plane.section, job.layout
    size = size_of(section)
    fitted = field.fit(section.shape, size, layout.x[counted], layout.y[counted], velocity)
    found, notes = candidates(section.shape, size, layout, counted)
    whole = quadrature.nodes(section.shape, size)
    long = [(one.x, one.y, one.weight) for one in found if one.long]
    mean, covariance = fitted.functional(*_stacked([one for one in found if not one.long]), also=[*long, whole])
    for i, one in enumerate(found):
        if one.index is not None:
            # Actual readings are known numbers; only what they are held against is uncertain.
            mean[i] = np.sum(one.weight * velocity[np.searchsorted(counted, one.index)])
            covariance[i], covariance[:, i] = 0.0, 0.0
    spread = math.sqrt(covariance[-1, -1])
    left_out = (f"{layout.size - counted.size} of {layout.size} points gave no reading that counts; they are in no row.",)
    return Study(
        title=job.title, source=job.source, units=job.units, section=section, layout=layout, basis=basis, formula=None,
        field=fitted, counted=tuple(counted.tolist()), velocity=frozen(velocity), section_mean=float(mean[-1]),
        section_uncertainty=spread, rows=_rows(found, mean, covariance), comparisons=_comparisons(found, mean, covariance),
        notes=LIMITS + notes + (left_out if counted.size < layout.size else ()),
    )


def of_formula(setup: Setup, text: str) -> Study:
    """Return what other layouts would give in a profile given by a formula; readings are not needed.

    Parameters
    ----------
    setup : Setup
        From :func:`traverse.load_setup`.
    text : str
        ``power:N``, ``log:K`` or ``parabola``, see :mod:`traverse.physics.profiles`.

    Raises
    ------
    JobError
        If the text names no profile.
    """
    kind, number = parse_profile(text)
    section, layout, size = setup.plane.section, setup.layout, size_of(setup.plane.section)
    every = np.arange(layout.size)
    found, notes = candidates(section.shape, size, layout, every)
    exact = profiles.mean(kind, number, section.shape, size)
    values = [profiles.velocity(kind, number, section.shape, size, one.x, one.y) @ one.weight for one in found]
    mean = np.array([*values, exact])
    return Study(
        title=setup.title, source=setup.sources[0], units=setup.units, section=section, layout=layout,
        basis=f"profile {text}", formula=(kind, number), field=None, counted=tuple(every.tolist()),
        velocity=frozen(profiles.velocity(kind, number, section.shape, size, layout.x, layout.y)), section_mean=exact,
        section_uncertainty=None, rows=_rows(found, mean, None), comparisons=_comparisons(found, mean, None),
        notes=FORMULA_LIMITS + notes,
    )


def parse_profile(text: str) -> tuple[str, float]:
    """Return the kind and the number of a profile such as ``power:7``.

    Raises
    ------
    JobError
        If the text names no profile.
    """
    kind, _, rest = text.strip().partition(":")
    try:
        number = float(rest) if rest else math.nan
    except ValueError:
        number = math.inf
    limits = {"power": (1.0, 1000.0), "log": (0.0, 0.6)}
    fine = not rest if kind == "parabola" else kind in limits and limits[kind][0] <= number <= limits[kind][1]
    if not fine:
        raise JobError(
            repr(text), where="--profile",
            expected="power:N with N from 1 to 1000, log:K with K from 0 to 0.6, or parabola", how="for example power:7 or log:0.12",
        )
    return kind, number


def _stacked(found: Sequence[Candidate]) -> tuple[Array, Array, Array]:
    """Return x, y and weights of all layouts, each filled up with its own first point at weight 0."""
    longest = max(len(candidate.weight) for candidate in found)
    x, y, weight = (np.zeros((len(found), longest)) for _ in range(3))
    for i, one in enumerate(found):
        count = len(one.weight)
        x[i], y[i] = one.x[0], one.y[0]
        x[i, :count], y[i, :count], weight[i, :count] = one.x, one.y, one.weight
    return x, y, weight


def _rows(found: Sequence[Candidate], mean: Array, covariance: Array | None) -> tuple[Row, ...]:
    whole, used = float(mean[-1]), float(mean[0])
    rows = []
    for i, one in enumerate(found):
        value = float(mean[i])
        spread = own = None
        if covariance is not None:
            spread = _relative(covariance, [i, len(found)], [1.0, -value / whole]) / whole
            own = math.sqrt(max(float(covariance[i, i]), 0.0)) / abs(used)
        rows.append(Row(
            family=one.family, name=one.name, rule=one.rule, also=one.also, lines=one.lines, points=one.points,
            total=one.total, rotation=one.rotation, read=one.index is not None, value=value,
            difference=value / whole - 1.0, uncertainty=spread, from_used=value / used - 1.0, from_used_uncertainty=own,
        ))
    return tuple(rows)


def _relative(covariance: Array, index: Sequence[int], factor: Sequence[float]) -> float:
    """Return the standard uncertainty of a sum of functionals, each times its factor."""
    factors = np.array(factor)
    return math.sqrt(max(float(factors @ covariance[np.ix_(index, index)] @ factors), 0.0))


def _comparisons(found: Sequence[Candidate], mean: Array, covariance: Array | None) -> tuple[Comparison, ...]:
    """Return equal area against each other rule that was tried with the same number of lines and points."""
    tried = [(i, one, (one.rule, *one.also)) for i, one in enumerate(found) if one.family == "rules"]
    return tuple(
        _compared(i, j, rule, one, mean, covariance)
        for i, one, names in tried if BASE in names
        for j, other, rules in tried if BASE not in rules and (one.lines, one.points) == (other.lines, other.points)
        for rule in rules
    )


def _compared(i: int, j: int, second: str, one: Candidate, mean: Array, covariance: Array | None) -> Comparison:
    whole = float(mean[-1])
    apart = together = None
    if covariance is not None:
        apart = _relative(covariance, [i, j], [1.0, -1.0]) / whole
        together = _relative(covariance, [i, j, len(mean) - 1], [1.0, 1.0, -float(mean[i] + mean[j]) / whole]) / whole
    return Comparison(
        first=BASE, second=second, lines=one.lines, points=one.points, first_difference=float(mean[i]) / whole - 1.0,
        second_difference=float(mean[j]) / whole - 1.0, difference=float(mean[i] - mean[j]) / whole, uncertainty=apart,
        sum_uncertainty=together,
    )
