"""Which rule a list of measured depths follows, and how far off each mark is."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.errors import LayoutError
from traverse.layouts._base import Array, Frame, Rule, one_of

# A mark further from a point than this part of the line is no mark of that point; what a lost mark or point costs. Our own figure.
_REACH = 0.02
# Half a unit of the last of three printed digits, part of the line; and the step of marks to a sixteenth of an inch. [m]
_PRINTED, _SIXTEENTH = 0.0005, 0.0254 / 16
# Numbers of diameters for which the positions of a rule that depends on it are tried.
_DIAMETERS = (2.0, 3.0, 4.0)
# Distances from the wall to which standards move points: 0.5 and 1 in, 1.3 and 2.5 cm, 5 cm. [m]
_WALLS = (0.0127, 0.0254, 0.013, 0.025, 0.05)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Match:
    """A rule held against depths. Arrays have shape (depths,), in rising order.

    ``also`` names rules of the same places; ``points`` is their number on the whole line, of which the depths cover one half where
    ``one_sided``. ``fractions`` are the places as parts of the line and ``deviations`` the depths less ``offset`` less those [m], NaN
    for a reading beside the rule's points; ``largest`` is the greatest that is no slip. ``offset`` is what all depths have too much
    [m]; ``moved`` the wall distance points were moved to [m], 0 where none was; ``slips`` depths (from 0) that look like errors of
    writing; ``dropped`` points of the rule (from 1) without a depth. ``fits``: but for what these say, every depth lies within
    ``tolerance`` [m]; ``clean``: without offset, slip, dropped point or reading beside. ``position_tolerance`` is how far a point may
    lie from its place by the standard [m], NaN where none is known, ``within`` whether all do. ``ambiguous`` names what fits as well.
    """

    rule: str
    title: str
    also: tuple[str, ...]
    points: int
    diameters: float
    digits: Literal["exact", "printed"]
    fractions: Array
    deviations: Array
    largest: float
    one_sided: bool
    offset: float
    moved: float
    slips: tuple[int, ...]
    dropped: tuple[int, ...]
    fits: bool
    clean: bool
    tolerance: float
    position_tolerance: Array
    within: bool | None
    score: float
    missing: tuple[float, ...] = ()
    ambiguous: tuple[str, ...] = ()
    note: str = ""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Candidate:
    """Places of a rule as parts of the line, as far as the marks reach: all, or one half (near or far) of them."""

    names: tuple[str, ...]
    title: str
    points: int
    diameters: float
    one_sided: bool
    variants: tuple[tuple[Literal["exact", "printed"], Array], ...]
    first: int = 0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Line:
    """What was measured: marks in rising order. [m]"""

    marks: Array
    length: float
    tolerance: float
    shape: str


def recognise(
    depths: npt.ArrayLike, length: float, rules: Mapping[str, Rule], *, shape: str, claimed: str = "", rounding: float = _SIXTEENTH,
    most: int = 5,
) -> tuple[Match, ...]:
    """Return the rules that depths along one line may follow, the best first.

    A rule's cost is the sum of the deviations, none above 2 % of the line, with 1 % for a point without a mark and for a mark
    without a point: one wild mark does not hide the rule that the others follow. An offset costs 0.5 %, points moved off the wall
    0.25 %, so that neither is seen in the noise of the marks.

    Parameters
    ----------
    depths : array_like, shape (points,)
        From the inner wall at the port, in any order; of a whole line, or of either half of it. [m]
    length : float
        The diameter, or the side the probe travels along. [m]
    rules : mapping
        The rules to look among.
    shape : {'round', 'rectangle'}
        What kind of line it is.
    claimed : str
        The rule somebody says it is: named first among equals, and in the note where the depths say otherwise.
    rounding : float
        The step the depths were rounded to, a sixteenth of an inch if not said; 0 for digits out of a document. [m]
    most : int
        How many to return.

    Raises
    ------
    LayoutError
        If a depth is no number or lies before the wall, or the line has no length.
    """
    line = _line(depths, length, shape, rounding)
    best: dict[tuple[str, int, float, bool], Match] = {}
    tried = [match for candidate in _candidates(rules, line) for match in _matches(candidate, line)]
    for match in sorted(tried, key=_preference):
        best.setdefault((match.rule, match.points, match.diameters, match.one_sided), match)
    ranked = sorted(best.values(), key=lambda match: (match.score, match.rule))
    clean = [match for match in ranked if match.clean]
    # Which of two that fit was meant cannot be seen in the marks: the one that was claimed is shown first.
    ranked.sort(key=lambda match: not (match.clean and claimed in (match.rule, *match.also)))
    found = []
    for match in ranked[:most]:
        others = tuple(_name(other) for other in clean if other is not match) if match.clean else ()
        claim = _claim(match, line, claimed, rules) if match.fits or match is ranked[0] else ""
        found.append(replace(match, ambiguous=others, note=_note(match, others, line, claim)))
    return tuple(found)


def _preference(match: Match) -> tuple[bool, bool, float, bool]:
    """Return what decides between the ways a rule can be laid beside the marks: without excuse, then by the furthest mark."""
    return not match.clean, match.clean and match.moved > 0.0, match.largest if match.clean else match.score, match.digits == "exact"


def _line(depths: npt.ArrayLike, length: float, shape: str, rounding: float) -> _Line:
    marks = np.sort(np.asarray(depths, dtype=np.float64).ravel())
    one_of("shape", shape, ("round", "rectangle"), "[plane] shape")
    if not marks.size or not np.all(np.isfinite(marks)):
        raise LayoutError("a depth is no number", where="depths", expected="depths from the inner wall")
    if marks[0] < 0.0 or not 0.0 < length < math.inf or not 0.0 <= rounding < length:
        raise LayoutError(
            f"a depth of {marks[0]:g} m, to {rounding:g} m, in a line of {length:g} m", where="depths", expected="depths inside the line"
        )
    tolerance = (rounding / 2.0 + _PRINTED * length) * (1.0 + 1e-9)
    return _Line(marks=marks, length=length, tolerance=tolerance, shape=shape)


# --- the places to compare with

def _candidates(rules: Mapping[str, Rule], line: _Line) -> Iterator[_Candidate]:
    """Yield every set of places that could have these marks, once, under the most general of its names."""
    count = line.marks.size
    half = bool(line.marks[-1] <= line.length / 2.0 + line.tolerance or line.marks[0] >= line.length / 2.0 - line.tolerance)
    wanted = [(points, False) for points in (count, count + 1, count - 1) if points > 0]
    # With an offset in the marks half a line need not end at the centre.
    wanted += [(points, True) for points in (2 * count, 2 * count - 1) if (half or count > 2) and points > 1]
    for points, one_sided in wanted:
        groups: dict[bytes, list[tuple[Rule, float, Array]]] = {}
        for rule in rules.values():
            for diameters, exact in _places(rule, line.shape, points):
                groups.setdefault(np.round(exact, 9).tobytes(), []).append((rule, diameters, exact))
        for group in groups.values():
            group.sort(key=lambda entry: _speciality(entry[0]))
            chosen, diameters, exact = group[0]
            rows = [row for rule, _, _ in group if (row := _printed(rule, line.shape, points, diameters)) is not None]
            variants: tuple[tuple[Literal["exact", "printed"], Array], ...] = (("exact", exact), *(("printed", row) for row in rows[:1]))
            named = {"names": tuple(rule.name for rule, _, _ in group), "title": chosen.title, "points": points, "diameters": diameters}
            reach = (points + 1) // 2
            for first in (0, points - reach) if one_sided else (0,):
                cut = slice(first, first + reach) if one_sided else slice(None)
                yield _Candidate(
                    **named, one_sided=one_sided, variants=tuple((digits, row[cut]) for digits, row in variants), first=first  # type: ignore[arg-type]
                )


def _places(rule: Rule, shape: str, points: int) -> Iterator[tuple[float, Array]]:
    """Yield the exact places on a line, for every number of diameters that makes a difference."""
    by_lines = rule.round_by_lines is not None and shape == "round"
    for diameters in _DIAMETERS if by_lines else _DIAMETERS[:1]:
        try:
            yield diameters, rule.fractions(shape, points, "exact", diameters)[0]
        except LayoutError:
            break
    if shape in rule.schemes:
        try:
            lines = rule.schemes[shape](Frame(shape=shape, width=1.0, height=1.0, lines=0, points=0, along="height"))
        except LayoutError:
            return
        yield from ((2.0, depth) for depth in {line.depth.tobytes(): line.depth for line in lines}.values() if depth.size == points)


def _printed(rule: Rule, shape: str, points: int, diameters: float) -> Array | None:
    if (shape, points) not in rule.printed or (rule.round_by_lines is not None and diameters != 2.0):
        return None
    return rule.fractions(shape, points, "printed", diameters)[0]


def _speciality(rule: Rule) -> tuple[int, int, str]:
    """Return how special a rule is: of several names for the same places the most general leads."""
    demands = sum(map(bool, (rule.least, rule.multiple, rule.line_counts, rule.wall_distance)))
    return demands, -len(rule.printed), rule.name


# --- marks against places

def _matches(candidate: _Candidate, line: _Line) -> Iterator[Match]:
    """Yield a candidate as it is, moved off the wall, and offset; by exact and by printed digits."""
    middle, slack = line.length / 2.0, line.tolerance
    near = candidate.first == 0 and line.marks[-1] <= middle + slack
    far = candidate.first > 0 and line.marks[0] >= middle - slack
    for digits, fractions in candidate.variants:
        free = fractions * line.length
        for wall in _walls(line) if line.shape == "round" else (0.0,):
            places = np.clip(free, wall, line.length - wall) if wall else free
            if wall and (wall >= middle or np.max(np.abs(places - free)) <= slack):
                continue
            if not candidate.one_sided or near or far:
                yield _match(candidate, line, digits, places, wall, 0.0)
            offset = float(np.median(line.marks - places)) if places.size == line.marks.size else 0.0
            rest = float(np.max(np.abs(line.marks - offset - places))) if offset else math.inf
            # Only what stands well above what it leaves: else it is the noise of the marks.
            if line.marks.size > 2 and candidate.first == 0 and abs(offset) > 3.0 * max(rest, slack):
                yield _match(candidate, line, digits, places, wall, offset)


def _walls(line: _Line) -> tuple[float, ...]:
    """Return the wall distances to try: none, and those at which marks lie; two marks in one place have been moved there."""
    nearest = min(float(line.marks[0]), line.length - float(line.marks[-1]))
    at = [wall for wall in (*_WALLS, max(0.03 * line.length, 0.05)) if abs(nearest - wall) <= line.tolerance]
    doubled = line.marks.size > 1 and min(line.marks[1] - line.marks[0], line.marks[-1] - line.marks[-2]) <= 1e-9
    return (0.0, *dict.fromkeys(at), *((nearest,) if doubled and nearest > 0.0 else ()))


def _match(
    candidate: _Candidate, line: _Line, digits: Literal["exact", "printed"], places: Array, wall: float, offset: float
) -> Match:
    marks = line.marks - offset
    index, free, cost = _paired(marks, places, line)
    paired = index >= 0
    fractions = np.where(paired, places[index] / line.length, np.nan)
    deviations = marks - fractions * line.length
    off = np.flatnonzero(np.abs(deviations) > line.tolerance)
    good = int(paired.sum()) - off.size
    tenfold = off.size == 1 and good >= 2 and _decimal(float(marks[off[0]]), float(places[index[off[0]]]), line.tolerance)
    slips = off if off.size and (3 * off.size <= good or tenfold) else off[:0]
    beside = bool(np.all(np.abs(marks[~paired] - line.length / 2.0) <= line.tolerance))
    fits = off.size == slips.size and len(free) <= 1 and (not free or good >= 4) and beside and good > 0 and not (offset and slips.size)
    clean = fits and not off.size and not free and bool(paired.all()) and not offset
    limit = np.where(paired, _limits(candidate, line)[index], np.nan)
    regular = np.abs(np.delete(deviations, slips))
    return Match(
        rule=candidate.names[0], title=candidate.title, also=candidate.names[1:], points=candidate.points, digits=digits,
        diameters=candidate.diameters, one_sided=candidate.one_sided, fractions=fractions, deviations=deviations,
        largest=float(np.nanmax(regular)) if np.isfinite(regular).any() else math.nan, offset=offset, moved=wall,
        slips=tuple(slips.tolist()), dropped=tuple(candidate.first + j + 1 for j in free), fits=fits, clean=clean,
        tolerance=line.tolerance, position_tolerance=limit, missing=tuple(float(places[j]) for j in free),
        within=None if np.isnan(limit).any() else not free and not offset and bool(np.all(np.abs(deviations) <= limit)),
        score=cost / line.length + (_REACH / 4.0 if offset else 0.0) + (_REACH / 8.0 if wall else 0.0),
    )


def _decimal(mark: float, place: float, tolerance: float) -> bool:
    """Return whether a mark is a place with its decimal point shifted."""
    return any(abs(mark * factor - place) <= tolerance for factor in (0.1, 10.0))


def _paired(marks: Array, places: Array, line: _Line) -> tuple[npt.NDArray[np.intp], Sequence[int], float]:
    """Return each mark's place (-1: none), the places without a mark, and what that costs. [m]"""
    skip = _REACH / 2.0 * line.length
    index = np.array(_aligned(marks, places, skip), dtype=np.intp)
    free = sorted(set(range(places.size)) - set(index.tolist()))
    lost = np.flatnonzero(index < 0)
    cost = skip * (lost.size + len(free)) + float(np.sum(np.abs(marks - places[index])[index >= 0]))
    # A mark far from every point stands for the point that has none, unless it is a reading at the centre besides.
    for i in lost.tolist():
        if free and abs(marks[i] - line.length / 2.0) > line.tolerance:
            apart = [abs(float(places[j] - marks[i])) for j in free]
            index[i] = free.pop(int(np.argmin(apart)))
    return index, free, cost


def _aligned(marks: Array, places: Array, skip: float) -> list[int]:
    """Return each mark's place, -1 for none: both rising, the least sum of distances and of ``skip`` for what is left over."""
    m, n = marks.size, places.size
    cost = np.zeros((m + 1, n + 1))
    cost[:, 0], cost[0, :] = skip * np.arange(m + 1), skip * np.arange(n + 1)
    apart = np.abs(marks[:, None] - places[None, :])
    for i in range(1, m + 1):
        for j in range(1, n + 1):
            cost[i, j] = min(cost[i - 1, j - 1] + apart[i - 1, j - 1], cost[i - 1, j] + skip, cost[i, j - 1] + skip)
    found, i, j = [-1] * m, m, n
    while i and j:
        if cost[i, j] == cost[i - 1, j - 1] + apart[i - 1, j - 1]:
            i, j = i - 1, j - 1
            found[i] = j
        elif cost[i, j] == cost[i - 1, j] + skip:
            i -= 1
        else:
            j -= 1
    return found


def _limits(candidate: _Candidate, line: _Line) -> Array:
    """Return how far each point may lie from its place by the standard, NaN where that is not known. [m]"""
    table, points = tables.load("layout_tolerances"), str(candidate.points)
    row = next((table[name][points] for name in candidate.names if name in table and points in table[name]), None)
    count = candidate.variants[0][1].size
    if row is None or line.shape != "round":
        return np.full(count, np.nan)
    half = np.array([float(text) for text in row]) * line.length / 2.0
    return np.concatenate([half, half[::-1]])[candidate.first:candidate.first + count]


# --- in words

def _name(match: Match) -> str:
    return f"{match.title}, {match.points} points" + (f" on each of {match.diameters:g} diameters" if match.diameters != 2.0 else "")


def _note(match: Match, ambiguous: tuple[str, ...], line: _Line, claim: str) -> str:
    """Return what is remarkable about a match, in words."""
    said = [f"ambiguous: {', '.join(ambiguous)} fits as well within the rounding"] if ambiguous else []
    said += [claim] if claim else []
    said += ["one half of the line, from one side"] if match.one_sided else []
    said += [f"the outermost moved to {match.moved * 1000:.1f} mm from the wall"] if match.moved else []
    if match.offset:
        way = "deep: port depth included?" if match.offset > 0 else "shallow: counted from another place?"
        said.append(f"all depths {abs(match.offset) * 1000:.1f} mm too {way}")
    for k in match.slips:
        mark, place = (line.marks[k] - match.offset) / line.length, float(match.fractions[k])
        tenfold = ", a shifted decimal point" if _decimal(mark, place, match.tolerance / line.length) else ""
        said.append(f"looks like a slip: {mark:.3f} of the line where the rule has {place:.3f}{tenfold}")
    said += [f"point {number} of the rule is missing, at {place / line.length:.3f} of the line"
             for number, place in zip(match.dropped, match.missing, strict=True)]
    for mark in (line.marks - match.offset)[np.isnan(match.deviations)].tolist():
        centre = ", an extra reading at the centre" if abs(mark - line.length / 2.0) <= match.tolerance else ""
        said.append(f"{mark / line.length:.3f} of the line stands beside the rule's points{centre}")
    if not match.fits and match.within:
        said.append("all within the standard's tolerance of position (ISO 3966, from memory)")
    return "; ".join(said)


def _claim(match: Match, line: _Line, claimed: str, rules: Mapping[str, Rule]) -> str:
    """Say that the depths are not those of the name they were given under, and where the two differ most."""
    if not claimed or claimed in (match.rule, *match.also):
        return ""
    said = f"called {claimed}, but {'these are' if match.fits else 'nearer to'} the places of {match.title}"
    if (claimed, match.rule, line.shape) == ("log-tchebycheff", "log-linear", "round"):
        said += " (trade tables often head log-linear places of round ducts with that name)"
    own = next((places for _, places in _places(rules[claimed], line.shape, match.points)), None) if claimed in rules else None
    if own is None:
        return said
    here = match.fractions[np.isfinite(match.fractions)]
    worst = float(here[np.argmax(np.min(np.abs(here[:, None] - own), axis=1))])
    return f"{said}, {worst:.3f} where {claimed} has {own[np.argmin(np.abs(own - worst))]:.3f}"
