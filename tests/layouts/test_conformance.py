"""What every rule found by the scan must keep, so that a new rule is one new file: the counts and the profiles it claims."""

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy.integrate import quad

from traverse import layouts
from traverse.errors import LayoutError

MOST = 40
RULES = layouts.rules()
SHAPES = ("round", "rectangle")


def claimed(rule, shape):
    """The numbers of points up to 40 that a rule says it supports."""
    return [points for points in range(MOST + 1) if points in (rule.round_points if shape == "round" else rule.side_points)]


def enough(rule, shape, points, least=3):
    """A number of lines which the rule allows with that many points on each, and for which it has enough in all."""
    allowed = rule.line_counts.get(shape)
    if allowed:
        return allowed[0]
    lines = least if shape == "round" else max(points, 3)
    while lines * points < rule.least.get(shape, 1) or lines * points % rule.multiple.get(shape, 1) or (
        shape == "rectangle" and lines not in rule.side_points
    ):
        lines += 1
    return lines


CLAIMED = [(name, shape, points) for name in RULES for shape in SHAPES for points in claimed(RULES[name], shape)]
REFUSED = [(name, shape, points) for name in RULES for shape in SHAPES for points in range(-1, MOST + 1)
           if (name, shape, points) not in set(CLAIMED)]


def test_the_scan_finds_something_to_hold():
    assert all(claimed(rule, "round") or claimed(rule, "rectangle") or rule.schemes for rule in RULES.values())
    assert CLAIMED and REFUSED


@pytest.mark.parametrize("name", RULES)
def test_a_rule_says_what_it_is(name):
    rule = RULES[name]
    assert rule.name == name and rule.title and rule.source and rule.exact_for
    assert rule.printed_source or not rule.printed
    assert (rule.round is None) == (not rule.round_points) and (rule.rectangle is None) == (not rule.side_points)


@pytest.mark.parametrize(("name", "shape", "points"), CLAIMED)
def test_a_claimed_count_works(name, shape, points):
    fraction, weight = layouts.fractions(name, shape, points)
    assert fraction.shape == weight.shape == (points,)
    assert weight.sum() == pytest.approx(1.0, abs=1e-13) and np.all(weight > 0)
    assert fraction[0] > 0 and fraction[-1] < 1 and np.all(np.diff(fraction) > 0)
    np.testing.assert_allclose(fraction + fraction[::-1], 1.0, atol=1e-13)
    np.testing.assert_allclose(weight, weight[::-1], atol=1e-15)


@pytest.mark.parametrize(("name", "shape"), [(name, shape) for name in RULES for shape in SHAPES])
def test_every_other_count_is_refused(name, shape):
    for points in [points for rule, kind, points in REFUSED if (rule, kind) == (name, shape)]:
        with pytest.raises(LayoutError) as refusal:
            layouts.fractions(name, shape, points)
        assert refusal.value.where and refusal.value.expected, points


@pytest.mark.parametrize(("name", "shape", "points"), CLAIMED)
def test_the_claimed_profiles_are_integrated_exactly(name, shape, points):
    """Each term over its zone: the weighted sum against quadrature of the area mean (round: 2 u du; rectangle: du)."""
    fraction, weight = layouts.fractions(name, shape, points)
    terms = RULES[name].exact(shape, points)
    place = np.abs(1 - 2 * fraction) if shape == "round" else fraction
    area = place**2 if shape == "round" else place
    for term in terms:
        inside = (area > term.zone[0]) & (area < term.zone[1]) | (area == 0.0) & (term.zone[0] == 0.0)
        found = float(np.sum(weight[inside] * term.value(place[inside])))
        low, high = (math.sqrt(s) for s in term.zone) if shape == "round" else term.zone
        expected, _ = quad(lambda u, term=term: float(term.value(np.float64(u))) * (2 * u if shape == "round" else 1.0), low, high, epsabs=1e-13)
        assert found == pytest.approx(expected, abs=1e-11), term.words


@pytest.mark.parametrize(("name", "shape", "points"), CLAIMED)
def test_the_zones_of_the_claim_cover_the_section(name, shape, points):
    """A constant is among the claims of every zone, and the zones leave no gap: uniform flow is exact."""
    zones = sorted({term.zone for term in RULES[name].exact(shape, points)})
    constants = {term.zone for term in RULES[name].exact(shape, points) if np.all(term.value(np.array([0.25, 0.75])) == 1.0)}
    assert constants == set(zones)
    assert zones[0][0] == 0.0 and zones[-1][1] == 1.0
    assert all(abs(before[1] - after[0]) < 1e-15 for before, after in pairwise(zones))


@pytest.mark.parametrize(("name", "shape", "points"), CLAIMED)
def test_placed_points_lie_inside_and_mirror(name, shape, points):
    lines = enough(RULES[name], shape, points)
    placed = layouts.place(name, shape=shape, width=1.3, height=1.3 if shape == "round" else 0.7, lines=lines, points=points)
    assert len(placed.x) == lines * points == len({(line, point) for line, point in zip(placed.line, placed.point, strict=True)})
    assert placed.weight.sum() == pytest.approx(1.0, abs=1e-12) and placed.source == RULES[name].source
    if shape == "round":
        assert np.all(np.hypot(placed.x, placed.y) < 0.65)
    else:
        assert np.all(np.abs(placed.x) < 0.65) and np.all(np.abs(placed.y) < 0.35)
    assert float(placed.weight @ placed.x) == pytest.approx(0.0, abs=1e-13)
    assert float(placed.weight @ placed.y) == pytest.approx(0.0, abs=1e-13)
    for line in dict.fromkeys(placed.line):
        depth = placed.depth[[name == line for name in placed.line]]
        assert np.all(np.diff(depth) > 0)


@pytest.mark.parametrize(("name", "shape", "points"), [(name, *key) for name, rule in RULES.items() for key in rule.printed])
def test_printed_digits_belong_to_a_claimed_count(name, shape, points):
    """Print and mathematics differ by less than 0.0005 of the line: they are the same layout.

    The 9-point row of the general method is known to be printed 0.178 0.288 where the formula gives 0.179 0.290.
    """
    assert points in (RULES[name].round_points if shape == "round" else RULES[name].side_points)
    printed, _ = layouts.fractions(name, shape, points, "printed")
    exact, _ = layouts.fractions(name, shape, points)
    assert len(printed) == points
    np.testing.assert_allclose(printed, exact, atol=2.1e-3 if (name, points) == ("general", 9) else 0.51e-3)
    lines = enough(RULES[name], shape, points, least=2)
    placed = layouts.place(name, shape=shape, width=1.0, height=1.0, lines=lines, points=points, digits="printed")
    assert placed.source == RULES[name].printed_source


@pytest.mark.parametrize("name", RULES)
def test_where_nothing_is_printed_the_printed_counts_are_named(name):
    rule = RULES[name]
    for shape in SHAPES:
        counts = sorted(points for kind, points in rule.printed if kind == shape)
        for points in set(claimed(rule, shape)) - set(counts):
            with pytest.raises(LayoutError) as refusal:
                layouts.fractions(name, shape, points, "printed")
            assert all(str(count) in refusal.value.expected for count in counts)
            assert counts or "exact" in refusal.value.expected
