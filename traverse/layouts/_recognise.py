"""Which rule a list of measured depths follows, and how far off each mark is."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.layouts._base import Array, Rule

# Rules with more points on a line are not looked for.
MOST = 40
# Marks of one layout: print with three digits, and marks to a sixteenth of an inch, may be that far off together.
DIGITS, MARKS = 0.0006, 0.0008
# Rules of the same places are named after the first of these.
FIRST = ("equal-area", "log-linear", "log-tchebycheff", "general")
# Distances from the wall to which standards move points: 0.5 and 1 in, 1.3 and 2.5 cm, 5 cm. [m]
WALLS = (0.0127, 0.0254, 0.013, 0.025, 0.05)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Match:
    """A rule that depths may follow. Arrays have one entry a depth, in rising order.

    ``fractions`` are the rule's places as parts of the line, ``deviations`` how far the depths lie from them [m],
    ``largest`` the greatest of those that are no slips. ``also`` names rules of the same places. ``offset`` is what all depths have
    too much [m]; ``moved`` the wall distance the outermost were moved to [m], 0 where none was; ``slips`` the depths
    (from 0) that look like errors of writing; ``dropped`` the points of the rule (from 1) that no depth stands for.
    """

    rule: str
    title: str
    also: tuple[str, ...]
    points: int
    diameters: float
    digits: str
    fractions: Array
    deviations: Array
    largest: float
    one_sided: bool
    offset: float = 0.0
    moved: float = 0.0
    slips: tuple[int, ...] = ()
    dropped: tuple[int, ...] = ()
    fits: bool = False
    note: str = ""

    @property
    def rank(self) -> tuple[bool, int, float]:
        """What is compared: fitting, then with the fewest excuses, then nearest."""
        excuses = 2 * len(self.slips) + 2 * len(self.dropped) + 2 * (self.offset != 0.0) + (self.moved != 0.0) + self.one_sided
        return not self.fits, excuses, self.largest


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Candidate:
    rule: Rule
    points: int
    diameters: float
    digits: str
    fractions: Array
    one_sided: bool


def recognise(
    depths: npt.ArrayLike, length: float, rules: Mapping[str, Rule], *, shape: str, claimed: str = ""
) -> tuple[Match, ...]:
    """Return the rules that depths along one line may follow, the best first.

    Parameters
    ----------
    depths : array_like, shape (points,)
        From the inner wall at the port, in any order; of a whole line, or of a radius from the wall to the centre. [m]
    length : float
        The diameter, or the side the probe travels along. [m]
    rules : mapping
        The rules to look among.
    shape : {'round', 'rectangle'}
        What kind of line it is.
    claimed : str
        The rule somebody says it is: named in the note where the depths say otherwise.

    Returns
    -------
    tuple of Match
        Those that fit, and the nearest of the others, at most five in all. A rule fits when every depth but a slip lies within
        0.06 % of the line and 0.8 mm of its place.

    Raises
    ------
    LayoutError
        If a depth is no number or lies outside the line.
    """
    given = np.sort(np.asarray(depths, dtype=np.float64).ravel())
    if not given.size or not np.all(np.isfinite(given)):
        raise LayoutError("a depth is no number", where="depths", expected="depths from the inner wall")
    if given[0] < 0.0 or not length > 0.0:
        raise LayoutError(f"a depth of {given[0]:g} m in a line of {length:g} m", where="depths", expected="depths inside the line")
    tolerance = DIGITS * length + MARKS
    found: list[Match] = []
    for candidate in _candidates(rules, shape, given.size):
        found += _tried(candidate, given, length, tolerance)
    best = _grouped(sorted(found, key=lambda match: match.rank), tolerance)
    return tuple(replace(match, note=_note(match, best, claimed, length)) for match in best[:5])


def _candidates(rules: Mapping[str, Rule], shape: str, count: int) -> Iterator[_Candidate]:
    """Yield every layout that has as many points on a line or on half of it, or one more."""
    ordered = [rules[name] for name in FIRST if name in rules] + [rule for name, rule in rules.items() if name not in FIRST]
    for rule in ordered:
        known = rule.round_points if shape == "round" else rule.side_points
        for points in range(2, MOST + 1):
            if points not in known:
                continue
            for diameters in (2.0, 3.0, 4.0) if shape == "round" and rule.round_by_lines is not None else (2.0,):
                exact, _ = rule.fractions(shape, points, "exact", diameters)
                yield from _sized(rule, points, diameters, "exact", exact, count)
                if (shape, points) in rule.printed and diameters == 2.0:
                    yield from _sized(rule, points, diameters, "printed", rule.fractions(shape, points, "printed")[0], count)


def _sized(rule: Rule, points: int, diameters: float, digits: str, fractions: Array, count: int) -> Iterator[_Candidate]:
    if points in (count, count + 1):
        yield _Candidate(rule=rule, points=points, diameters=diameters, digits=digits, fractions=fractions, one_sided=False)
    half = fractions[: (points + 1) // 2]
    if len(half) == count and points > 2:
        yield _Candidate(rule=rule, points=points, diameters=diameters, digits=digits, fractions=half, one_sided=True)


def _tried(candidate: _Candidate, given: Array, length: float, tolerance: float) -> Iterator[Match]:
    """Yield a candidate as it stands, and with each excuse under which it fits."""
    places = candidate.fractions
    if len(places) == given.size + 1:
        yield from _one_dropped(candidate, given, length, tolerance)
        return
    plain = _match(candidate, given, places, length, tolerance)
    yield plain
    if plain.fits:
        return
    for wall in WALLS:
        clipped = np.clip(places, wall / length, 1.0 - wall / length)
        if wall < length / 2.0 and np.any(clipped != places):
            moved = replace(_match(candidate, given, clipped, length, tolerance), moved=wall)
            if moved.fits:
                yield moved
    apart = given - places * length
    shift = float(np.median(apart))
    if given.size > 2 and abs(shift) > tolerance:
        shifted = replace(_match(candidate, given - shift, places, length, tolerance), offset=shift)
        if shifted.fits:
            yield shifted
    wrong = np.flatnonzero(np.abs(apart) > tolerance)
    if given.size > 3 and len(wrong) == 1:
        kept = np.abs(apart) <= tolerance
        yield replace(plain, slips=(int(wrong[0]),), largest=float(np.max(np.abs(apart[kept]))), fits=True)
    # A slip by the power of ten comes out of its order: 0.32 for 0.032.
    yield from _out_of_order(candidate, given, length, tolerance)


def _out_of_order(candidate: _Candidate, given: Array, length: float, tolerance: float) -> Iterator[Match]:
    places = candidate.fractions * length
    if given.size < 5:
        return
    for slip in range(given.size):
        rest = np.delete(given, slip)
        for lost in range(given.size):
            apart = rest - np.delete(places, lost)
            if lost != slip and np.all(np.abs(apart) <= tolerance):
                deviations = np.insert(apart, slip, given[slip] - places[lost])
                fractions = np.insert(np.delete(places, lost), slip, places[lost]) / length
                yield replace(
                    _match(candidate, given, candidate.fractions, length, tolerance), deviations=deviations, fractions=fractions,
                    slips=(slip,), largest=float(np.max(np.abs(apart))), fits=True,
                )


def _one_dropped(candidate: _Candidate, given: Array, length: float, tolerance: float) -> Iterator[Match]:
    if given.size < 5:
        return
    for lost in range(given.size + 1):
        places = np.delete(candidate.fractions, lost)
        match = _match(candidate, given, places, length, tolerance)
        if match.fits:
            yield replace(match, dropped=(lost + 1,))


def _match(candidate: _Candidate, given: Array, places: Array, length: float, tolerance: float) -> Match:
    apart = given - places * length
    largest = float(np.max(np.abs(apart)))
    return Match(
        rule=candidate.rule.name, title=candidate.rule.title, also=(), points=candidate.points, diameters=candidate.diameters,
        digits=candidate.digits, fractions=places, deviations=apart, largest=largest, one_sided=candidate.one_sided,
        fits=largest <= tolerance,
    )


def _grouped(found: Sequence[Match], tolerance: float) -> list[Match]:
    """Put rules of the same places under the first of them, exact and printed digits under the nearer."""
    groups: list[Match] = []
    for match in found:
        same = next((k for k, other in enumerate(groups) if other.points == match.points and other.one_sided == match.one_sided
                     and other.dropped == match.dropped and np.allclose(other.fractions, match.fractions, atol=2 * DIGITS)), None)
        if same is None:
            groups.append(match)
        elif match.rule != groups[same].rule and match.rule not in groups[same].also:
            groups[same] = replace(groups[same], also=(*groups[same].also, match.rule))
    fitting = [match for match in groups if match.fits]
    return fitting + [match for match in groups if not match.fits and match.largest < 20 * tolerance]


def _note(match: Match, best: Sequence[Match], claimed: str, length: float) -> str:
    """Return what is remarkable about a match, in words."""
    said = []
    if match.fits:
        rivals = [other for other in best if other.fits and other is not match and other.rank[1] == match.rank[1]]
        if rivals:
            said.append(f"ambiguous: {', '.join(f'{other.title}, {other.points} points' for other in rivals)} fits as well")
        if claimed and claimed not in (match.rule, *match.also):
            said.append(f"called {claimed}, but these are the places of {match.title}")
            if (claimed, match.rule) == ("log-tchebycheff", "log-linear"):
                said.append("trade tables often head log-linear places of round ducts with that name")
    if match.one_sided:
        said.append("one half of the line, from one side")
    if match.moved:
        said.append(f"the outermost moved to {match.moved * 1000:.1f} mm from the wall")
    if match.offset:
        said.append(f"all depths {abs(match.offset) * 1000:.1f} mm too {'deep: port depth included?' if match.offset > 0 else 'shallow'}")
    for k in match.slips:
        depth = match.fractions[k] * length + match.deviations[k]
        said.append(f"looks like a slip: {depth / length:.3f} of the line where the rule has {match.fractions[k]:.3f}")
    if match.dropped:
        said.append(f"point {match.dropped[0]} of the rule is missing")
    return "; ".join(said)
