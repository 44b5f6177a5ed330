"""Recognition of depths. The lists to be recognised come from print or from the rules' definitions, never from the code under test."""

import math
import tomllib
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.errors import LayoutError
from traverse.layouts import rules
from traverse.layouts._recognise import recognise

TABLES = Path(__file__).parents[2] / "traverse" / "tables"
# Half of each diameter, fractions from the wall; the names of the rule where its positions are the same.
# Log-linear and log-Tchebycheff: the definitions' roots to five digits (ISO 3966 tables, from memory, and the same definition beyond them).
LOG_LINEAR = {
    4: [0.04285, 0.29049], 6: [0.03209, 0.13490, 0.32077], 8: [0.02086, 0.11721, 0.18375, 0.34484],
    10: [0.01889, 0.07651, 0.15255, 0.21694, 0.36142], 12: [0.01375, 0.07492, 0.11370, 0.18253, 0.24144, 0.37366],
    14: [0.01338, 0.05330, 0.10296, 0.14244, 0.20601, 0.26049, 0.38317],
    16: [0.01025, 0.05513, 0.08237, 0.12839, 0.16556, 0.22497, 0.27585, 0.39081],
    20: [0.00817, 0.04363, 0.06465, 0.09941, 0.12655, 0.16754, 0.20088, 0.25399, 0.29938, 0.40248],
}
LOG_TCHEBYCHEFF = {
    6: [0.03209, 0.13745, 0.31233], 8: [0.02377, 0.09995, 0.19381, 0.33429], 10: [0.01889, 0.07637, 0.15539, 0.21497, 0.35670],
    12: [(1 - r) / 2 for r in (0.96867, 0.87381, 0.75679, 0.64550, 0.51050, 0.26418)],
    14: [(1 - r) / 2 for r in (0.97323, 0.89433, 0.78080, 0.73678, 0.56062, 0.49749, 0.23942)],
    16: [(1 - r) / 2 for r in (0.97663, 0.90785, 0.81806, 0.76106, 0.66144, 0.54386, 0.45362, 0.22541)],
}
# Radii sqrt((2i - 1)/(2n)): the definition of equal areas, as a teaching page of IIT Kharagpur prints it (read).
EQUAL_AREA = {2 * n: [(1 - math.sqrt((2 * i - 1) / (2 * n))) / 2 for i in range(n, 0, -1)] for n in (1, 2, 3, 4, 5, 6, 7, 8, 10, 12)}
# EN 15259 Annex D and ISO 10780: the general method's values, computed from the definition by equal areas; diameters, points to the centre.
GENERAL = {
    (2, 3): [0.1127], (2, 5): [0.0590, 0.2113], (2, 7): [0.0401, 0.1331, 0.2598], (2, 9): [0.0303, 0.0978, 0.1792, 0.2900],
    (3, 5): [0.0615, 0.2226], (3, 7): [0.0412, 0.1373, 0.2706], (4, 5): [0.0628, 0.2288], (4, 7): [0.0417, 0.1394, 0.2764],
}
# Rectangular log-Tchebycheff, x/L of the definition: ISO 3966 for 5, 6 and 7 points, the same rule for the others.
SIDES = {
    4: [0.09197, 0.35566], 5: [0.07358, 0.28787], 6: [0.06131, 0.23512, 0.43747], 7: [0.05255, 0.20268, 0.36624],
    8: [0.04598, 0.17516, 0.34156, 0.40001], 9: [0.04088, 0.15628, 0.29402, 0.37403],
}


def whole(half, *, centre=False):
    half = np.sort(np.asarray(half, dtype=float))
    return np.concatenate([half, [0.5] if centre else [], 1.0 - half[::-1]])


def look(depths, length=1.0, shape="round", **options):
    return recognise(depths, length, rules(), shape=shape, **options)


def named(match):
    return {match.rule, *match.also}


def table(name):
    return tomllib.loads((TABLES / f"layout_{name}.toml").read_text(encoding="utf-8"))


# --- every printed table

PRINTED = [
    *(("log-linear", int(n), whole([float(t) for t in row])) for key in ("fraction_of_diameter", "three_digits")
      for n, row in table("log_linear")[key].items()),
    *(("log-linear", 2 * int(n), whole([(1 - float(t)) / 2 for t in row])) for n, row in table("log_linear")["fraction_of_radius"].items()),
    *(("log-tchebycheff", int(n), whole([float(t) for t in row])) for key in ("fraction_of_diameter", "three_digits")
      for n, row in table("log_tchebycheff")[key].items()),
    *(("log-tchebycheff", 2 * int(n), whole([(1 - float(t)) / 2 for t in row]))
      for n, row in table("log_tchebycheff")["fraction_of_radius"].items()),
    *(("equal-area", int(n), np.array([float(t) / 100 for t in row])) for n, row in table("equal_area")["percent_of_diameter"].items()),
    *(("general", int(n), whole([float(t) for t in row[:-1]], centre=True)) for n, row in table("general")["fraction_of_diameter"].items()),
    # AMCA 210 and ISO 5801 (from memory), JIS B 8330 (second-hand), JIS Z 8808 (from memory).
    ("fan-test", 8, whole([0.021, 0.117, 0.184, 0.345])),
    ("equal-area", 10, whole([(1 - r) / 2 for r in (0.316, 0.548, 0.707, 0.837, 0.949)])),
    *(("jis-z-8808", 2 * len(radii), whole([(1 - r) / 2 for r in radii])) for radii in (
        (0.707,), (0.500, 0.866), (0.408, 0.707, 0.913), (0.354, 0.612, 0.791, 0.935), (0.316, 0.548, 0.707, 0.837, 0.949))),
]


@pytest.mark.parametrize(("rule", "points", "fractions"), PRINTED)
@pytest.mark.parametrize("length", [0.3, 1.0, 4.0])
def test_printed_positions_are_recognised(rule, points, fractions, length):
    """To the last digit that is printed, without any rounding of depths."""
    first = look(fractions * length, length, rounding=0.0)[0]
    assert rule in named(first) and first.points == points and not first.one_sided
    assert first.fits and first.clean and not first.ambiguous and not first.offset and not first.slips and not first.missing
    assert first.largest <= 0.0005 * length * (1 + 1e-9)


@pytest.mark.parametrize(("rule", "points", "half"), [
    *(("log-linear", n, half) for n, half in LOG_LINEAR.items()), *(("log-tchebycheff", n, half) for n, half in LOG_TCHEBYCHEFF.items()),
    *(("equal-area", n, half) for n, half in EQUAL_AREA.items()),
])
def test_half_a_diameter_is_enough(rule, points, half):
    for depths in (half, half[::-1], 1.0 - np.array(half)):
        first = look(np.array(depths) * 0.8, 0.8)[0]
        assert rule in named(first) and first.points == points and first.one_sided and first.fits
        assert first.deviations.shape == (len(half),) and first.largest < 2e-5
    both = look(whole(half) * 0.8, 0.8)[0]
    assert rule in named(both) and both.points == points and not both.one_sided and both.fits


@pytest.mark.parametrize(("key", "half"), GENERAL.items())
def test_the_general_method_with_its_number_of_diameters(key, half):
    diameters, points = key
    first = look(whole(half, centre=True), rounding=0.0)[0]
    assert {"general", "iso-10780"} <= named(first) and (first.points, first.diameters) == (points, diameters) and first.fits
    if points > 3:
        radius = look([*half, 0.5], rounding=0.0)[0]
        assert "general" in named(radius) and (radius.points, radius.diameters, radius.one_sided) == (points, diameters, True)


@pytest.mark.parametrize(("points", "half"), SIDES.items())
def test_sides_of_a_rectangle(points, half):
    first = look(whole(half, centre=points % 2 == 1) * 1.2, 1.2, "rectangle")[0]
    assert (first.rule, first.points, first.fits) == ("log-tchebycheff", points, True)
    assert first.position_tolerance.shape == (points,) and np.isnan(first.position_tolerance).all() and first.within is None


@pytest.mark.parametrize("digits", [
    *(whole([float(t) for t in row if t != "0.500"], centre="0.500" in row) for row in table("log_tchebycheff")["fraction_of_side"].values()),
    *(np.unique([0.5 - float(t) for t in row] + [0.5 + float(t) for t in row]) for row in table("log_tchebycheff")["offset_from_centre"].values()),
])
def test_printed_sides(digits):
    first = look(digits, shape="rectangle", rounding=0.0)[0]
    assert (first.rule, first.points, first.fits) == ("log-tchebycheff", len(digits), True)


@pytest.mark.parametrize("count", [2, 4, 7, 10])
def test_centres_of_equal_parts(count):
    first = look((2 * np.arange(1, count + 1) - 1) / (2 * count) * 0.5, 0.5, "rectangle")[0]
    assert {"equal-area", "tangential", "en-15259"} <= named(first) and first.points == count and first.largest < 1e-12


@pytest.mark.parametrize("line", ["outer", "inner"])
def test_lines_of_the_scheme_of_26_points(line):
    depths = [float(row[0]) for row in table("log_linear_26")[line]]
    first = look(depths, shape="rectangle")[0]
    assert (first.rule, first.points, first.fits) == ("log-linear-26", len(depths), True)


# --- the naming trap

@pytest.mark.parametrize("half", [(0.032, 0.135, 0.321), (0.021, 0.117, 0.184, 0.345), (0.019, 0.077, 0.153, 0.217, 0.361)])
def test_log_linear_sold_as_log_tchebycheff(half):
    """The digits of trade tables so headed (common practice, no source) are the log-linear column of GOST ISO 5802-2012, tables 2 and 3 (read)."""
    first = look(whole(half) * 0.5, 0.5, claimed="log-tchebycheff")[0]
    assert first.rule == "log-linear" and first.fits
    assert "called log-tchebycheff, but these are the places of Log-linear" in first.note and "trade tables" in first.note
    assert not look(whole(half) * 0.5, 0.5, claimed="log-linear")[0].note.count("called")
    assert "called" not in look(whole(half) * 0.5, 0.5)[0].note


def test_the_note_says_where_the_two_differ():
    """GOST ISO 5802-2012 table 2: 0.321 and 0.312 of the diameter."""
    assert look(whole([0.032, 0.135, 0.321]), claimed="log-tchebycheff")[0].note.endswith("0.321 where log-tchebycheff has 0.312")
    back = look(whole([0.032, 0.137, 0.312]), claimed="log-linear")[0]
    assert back.rule == "log-tchebycheff" and back.note.endswith("0.312 where log-linear has 0.321") and "trade" not in back.note
    for claimed in ("log-tchebycheff", "spiral"):  # no four points on a diameter; no rule of that name
        said = look(whole([0.043, 0.290]), claimed=claimed)[0].note
        assert f"called {claimed}, but these are the places of Log-linear" in said and "where" not in said


def test_a_claim_that_names_an_equal_is_no_error():
    first = look(whole(EQUAL_AREA[6]), claimed="jis-z-8808")[0]
    assert "jis-z-8808" in named(first) and "called" not in first.note


def test_what_the_rounding_cannot_tell_apart_is_said():
    """Five per radius: the rules differ by 0.0047 of the diameter at most, 1.4 mm of 300 mm; to 5 mm both fit."""
    marks = whole(LOG_LINEAR[10]) * 0.3
    sharp = look(marks, 0.3, rounding=0.0005)
    assert sharp[0].fits and not sharp[0].ambiguous and not sharp[1].fits
    coarse = look(marks, 0.3, rounding=0.005)
    assert {coarse[0].rule, coarse[1].rule} == {"log-linear", "log-tchebycheff"} and coarse[0].fits and coarse[1].fits
    assert coarse[0].ambiguous == ("Log-Tchebycheff, 10 points",) and coarse[1].ambiguous == ("Log-linear, 10 points",)
    assert "fits as well within the rounding" in coarse[0].note
    assert look(marks, 0.3, rounding=0.005, claimed="log-tchebycheff")[0].rule == "log-tchebycheff"
    assert look(marks, 0.3, rounding=0.0005, claimed="log-tchebycheff")[0].rule == "log-linear"


# --- misprints and slips

@pytest.mark.parametrize(("depths", "wrong", "said"), [
    ([0.021, 0.117, 0.184, 0.345, 0.655, 0.816, 0.883, 0.981], 7, "0.981 of the line where the rule has 0.979"),
    ([0.32, 0.135, 0.321, 0.679, 0.865, 0.968], 1, "0.320 of the line where the rule has 0.032, a shifted decimal point"),
    ([0.32, 0.135, 0.321], 1, "0.320 of the line where the rule has 0.032, a shifted decimal point"),
])
def test_slips_of_trade_tables(depths, wrong, said):
    """Met in trade tables: 0.981 for 0.979, 0.32 for 0.032 (common practice, no source)."""
    first = look(depths, rounding=0.0, claimed="log-tchebycheff")[0]
    assert first.rule == "log-linear" and first.points in (6, 8) and first.fits and not first.clean
    assert first.slips == (wrong,) and f"looks like a slip: {said}" in first.note and "these are the places of Log-linear" in first.note


@pytest.mark.parametrize("extra", [[], [0.5]])
def test_a_page_with_a_point_dropped(extra):
    """IIT Kharagpur (read): five rings; 0.658 is dropped, 0.975 stands for 0.974 and 0.919 for 0.918; a centre reading besides."""
    depths = [0.026, 0.082, 0.146, 0.226, 0.342, 0.774, 0.854, 0.919, 0.975, *extra]
    first = look(depths, rounding=0.0)[0]
    assert first.rule == "equal-area" and first.points == 10 and first.fits and not first.clean
    assert first.missing == pytest.approx([0.658], abs=5e-4) and first.dropped == (6,)
    assert first.slips == (7 + len(extra), 8 + len(extra)), "0.919 and 0.975, the centre reading lying before them"
    assert "0.975 of the line where the rule has 0.974" in first.note and "point 6 of the rule is missing, at 0.658" in first.note
    assert ("extra reading at the centre" in first.note) == bool(extra) and np.isnan(first.deviations).sum() == len(extra)


@pytest.mark.parametrize("rule", ["log-linear", "log-tchebycheff", "equal-area"])
@pytest.mark.parametrize("wrong", range(8))
def test_any_single_slip_is_named(rule, wrong):
    half = {"log-linear": LOG_LINEAR, "log-tchebycheff": LOG_TCHEBYCHEFF, "equal-area": EQUAL_AREA}[rule][8]
    depths = whole(half) * 0.6
    right = depths[wrong]
    for value in (right + 0.005, right - 0.005, right / 10, 0.29):
        marks = depths.copy()
        marks[wrong] = value
        first = look(marks, 0.6)[0]
        assert rule in named(first) and len(first.slips) == 1 and first.fits and not first.clean
        slip = first.slips[0]
        assert np.sort(marks)[slip] == value and first.largest <= first.tolerance
        assert first.fractions[slip] * 0.6 == pytest.approx(right, abs=3e-4), "the digit the rule prints, or the exact place"


# --- offsets and walls

@pytest.mark.parametrize(("rule", "half"), [("log-linear", LOG_LINEAR[6]), ("log-tchebycheff", LOG_TCHEBYCHEFF[8]), ("equal-area", EQUAL_AREA[12])])
@pytest.mark.parametrize("nipple", [0.102, 0.0254, -0.012])
def test_a_port_depth_in_the_marks_is_seen(rule, half, nipple):
    for fractions in (whole(half), np.array(half)):
        depths = fractions * 1.5 + nipple
        if depths.min() < 0:
            continue
        first = look(depths, 1.5)[0]
        assert rule in named(first) and first.offset == pytest.approx(nipple, abs=5e-4) and first.fits and not first.clean and first.largest < 1e-3
        assert first.note.count(f"{abs(first.offset) * 1000:.1f} mm too ") == 1
        assert ("deep" in first.note) == (nipple > 0) and ("shallow" in first.note) == (nipple < 0)


# EPA Method 1, 11.3 (read): depths of the first points, inches, for the diameter and the number of points on it.
@pytest.mark.parametrize(("diameter", "points", "first", "moved"), [
    (26, 24, [1.00, 1.00, 1.433], 2), (30, 12, [1.00, 2.010], 1), (14, 8, [0.50, 1.466], 1), (11, 4, [0.737, 2.75], 0),
])
def test_adjusted_points_are_recognised(diameter, points, first, moved):
    inch = 0.0254
    half = np.array(EQUAL_AREA[points]) * diameter
    half[: len(first)] = first
    for depths in (half, np.concatenate([half, diameter - half[::-1]])):
        match = look(depths * inch, diameter * inch, rounding=0.0005)[0]
        assert "equal-area" in named(match) and match.points == points and match.fits
        assert match.moved == pytest.approx(first[0] * inch if moved else 0.0, abs=1e-12)
        assert (f"moved to {match.moved * 1000:.1f} mm" in match.note) == bool(moved)
        np.testing.assert_allclose(match.deviations, 0.0, atol=5e-5)


def test_a_mark_that_lies_at_an_inch_by_itself_has_not_been_moved():
    """0.01889 of 1.32 m is 24.9 mm."""
    assert look(np.round(whole(LOG_LINEAR[10]) * 1.32, 3), 1.32)[0].moved == 0.0


def test_tolerances_of_position():
    """ISO 3966, from memory: of the radius 0.0032 and 0.0100 (3 points), 0.0018, 0.0076, 0.0100 (5), 0.0024 (4, log-Tchebycheff)."""
    for rule, expected in (
        (LOG_LINEAR[6], [0.0016, 0.005, 0.005]), (LOG_TCHEBYCHEFF[8], [0.0012, 0.005, 0.005, 0.005]),
        (LOG_TCHEBYCHEFF[10], [0.0009, 0.0038, 0.005, 0.005, 0.005]), (LOG_LINEAR[10], [0.0009, 0.0038, 0.005, 0.005, 0.005]),
    ):
        first = look(np.array(rule) * 2.0, 2.0)[0]
        np.testing.assert_allclose(first.position_tolerance, np.array(expected) * 2.0, rtol=1e-12)
        far = look(2.0 - np.array(rule) * 2.0, 2.0)[0]
        np.testing.assert_allclose(far.position_tolerance, np.array(expected[::-1]) * 2.0, rtol=1e-12)
    marks = np.array(whole(LOG_LINEAR[6])) * 2.0
    for slip, within in ((0.0098, True), (0.0102, False)):
        moved = marks.copy()
        moved[2] += slip
        match = look(moved, 2.0, rounding=0.0)[0]
        assert match.rule == "log-linear" and match.within is within and match.slips == (2,)
    assert look(np.array(EQUAL_AREA[6]))[0].within is None and np.isnan(look(np.array(EQUAL_AREA[6]))[0].position_tolerance).all()


# --- noise, order, names

FAMILIES = [
    *(("log-linear", n, LOG_LINEAR[n]) for n in (6, 8, 10, 12)), *(("log-tchebycheff", n, LOG_TCHEBYCHEFF[n]) for n in (6, 8, 10, 12)),
    *(("equal-area", n, EQUAL_AREA[n]) for n in (4, 6, 8, 10, 12, 16, 20, 24)),
]


@given(st.sampled_from(FAMILIES), st.integers(0, 2**32 - 1), st.floats(0.1, 8.0))
def test_noise_does_not_change_the_rule(family, seed, length):
    """Of the rules here the nearest two with equal numbers differ by 0.0019 a mark on average: noise below half of that decides nothing."""
    rule, points, half = family
    random = np.random.default_rng(seed)
    exact = whole(half) * length
    noise = random.uniform(-0.0009, 0.0009, points) * length
    order = random.permutation(points)
    first = look((exact + noise)[order], length, rounding=0.0)[0]
    assert rule in named(first) and first.points == points and not first.offset
    np.testing.assert_allclose(first.deviations, noise, atol=0.0006 * length)
    assert first.clean == bool(np.all(np.abs(first.deviations) <= 0.0005 * length))


@given(st.lists(st.floats(0.0, 1.0), min_size=1, max_size=13), st.floats(0.1, 5.0), st.sampled_from(["round", "rectangle"]))
def test_any_list_gets_an_honest_answer(fractions, length, shape):
    depths = np.array(fractions) * length
    for match in look(depths, length, shape):
        known = np.isfinite(match.fractions)
        np.testing.assert_allclose(match.deviations[known], (np.sort(depths) - match.offset - match.fractions * length)[known], atol=1e-12)
        assert match.deviations.shape == depths.shape == match.position_tolerance.shape
        assert match.tolerance == pytest.approx(0.0254 / 32 + 0.0005 * length)
        if match.clean:
            assert match.fits and known.all() and np.all(np.abs(match.deviations) <= match.tolerance)
            assert not match.dropped and not match.slips and not match.offset
        if match.fits:
            assert match.largest <= match.tolerance and len(match.dropped) <= 1
            assert match.clean or match.note


def test_what_follows_no_rule_fits_none():
    assert not any(match.fits for match in look([0.1, 0.2, 0.3, 0.45, 0.6, 0.9]))
    random = np.random.default_rng(20261201)
    lists = [random.uniform(0, 1, random.integers(3, 10)) for _ in range(60)]
    assert not any(match.clean for depths in lists for match in look(depths))


@pytest.mark.parametrize(("depths", "length", "shape", "message"), [
    ([], 1.0, "round", "no number"), ([0.1, math.nan], 1.0, "round", "no number"), ([-0.1, 0.2], 1.0, "round", "inside the line"),
    ([0.1], 0.0, "round", "inside the line"), ([0.1], math.inf, "round", "inside the line"), ([0.1], 1.0, "annulus", "one of round, rectangle"),
])
def test_what_cannot_be_recognised_is_refused(depths, length, shape, message):
    with pytest.raises(LayoutError, match=message):
        look(depths, length, shape)


def test_a_rounding_wider_than_the_line_is_refused():
    with pytest.raises(LayoutError, match="inside the line"):
        look([0.1], 1.0, rounding=1.0)
