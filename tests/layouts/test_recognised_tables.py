"""Depths are recognised: every printed table, the known misprints, marks off the port, moved points, noise."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from traverse import layouts, tables
from traverse.errors import LayoutError

D = 1.0


def best(fractions, length=D, shape="round", **more):
    return layouts.recognise(np.asarray(fractions) * length, length, shape=shape, **more)[0]


def whole(half):
    """Both sides of a diameter from the digits of one."""
    half = [float(text) for text in half]
    return half + [1 - value for value in half if value != 0.5][::-1]


PRINTED = [
    *(("equal-area", int(n), [float(text) / 100 for text in row]) for n, row in tables.load("layout_equal_area")["percent_of_diameter"].items()),
    *(("log-linear", int(n), whole(row)) for key in ("fraction_of_diameter", "three_digits") for n, row in tables.load("layout_log_linear")[key].items()),
    *(("log-linear", 2 * int(n), sorted([(1 - float(r)) / 2 for r in row] + [(1 + float(r)) / 2 for r in row]))
      for n, row in tables.load("layout_log_linear")["fraction_of_radius"].items()),
    *(("log-tchebycheff", int(n), whole(row)) for n, row in tables.load("layout_log_tchebycheff")["fraction_of_diameter"].items()),
    *(("general", int(n), whole(row)) for n, row in tables.load("layout_general")["fraction_of_diameter"].items() if n != "9"),
]


@pytest.mark.parametrize(("rule", "points", "fractions"), PRINTED)
def test_every_printed_table_of_a_round_duct(rule, points, fractions):
    found = best(fractions)
    assert found.fits and rule in (found.rule, *found.also) and found.points == points
    assert not found.slips and not found.dropped and not found.offset and not found.one_sided
    assert found.largest <= 0.0014


@pytest.mark.parametrize(("points", "half"), tables.load("layout_log_tchebycheff")["fraction_of_side"].items())
def test_every_printed_table_of_a_side(points, half):
    row = [float(text) for text in half]
    fractions = sorted({*row, *(1 - value for value in row)})
    found = best(fractions, shape="rectangle")
    assert found.fits and found.rule == "log-tchebycheff" and found.points == int(points)


def test_the_printed_row_of_the_general_method_that_departs_from_its_formula():
    """EN 15259 annex D as printed (from memory): 0.178 and 0.288 for 0.179 and 0.290."""
    found = best(whole(["0.030", "0.098", "0.178", "0.288", "0.5"]), length=0.5)
    assert found.rule == "general" and found.points == 9


def test_log_linear_called_log_tchebycheff():
    """0.032 0.135 0.321 under the other name, as trade tables print it (common practice, no source); by value it is log-linear."""
    found = best(whole(["0.032", "0.135", "0.321"]), claimed="log-tchebycheff")
    assert found.rule == "log-linear" and "called log-tchebycheff" in found.note and "trade tables" in found.note
    other = best(whole(["0.032", "0.137", "0.312"]), claimed="log-tchebycheff")
    assert other.rule == "log-tchebycheff" and not other.note


@pytest.mark.parametrize(("fractions", "rule", "points", "slip", "right"), [
    # Slips met in trade tables (common practice, no source): last 8-point value 0.981 for 0.979, first 6-point value 0.32 for 0.032.
    ([0.021, 0.117, 0.184, 0.345, 0.655, 0.816, 0.883, 0.981], "log-linear", 8, "0.981", "0.979"),
    ([0.32, 0.135, 0.321, 0.679, 0.865, 0.968], "log-linear", 6, "0.320", "0.032"),
])
def test_known_misprints(fractions, rule, points, slip, right):
    found = best(fractions, length=3.0)
    assert (found.rule, found.points, len(found.slips)) == (rule, points, 1)
    assert f"looks like a slip: {slip} of the line where the rule has {right}" in found.note


def test_a_dropped_point():
    """A teaching page prints nine of ten equal-area places, 0.658 left out and 0.975 for 0.974 (IIT Kharagpur, read)."""
    found = best([0.026, 0.082, 0.146, 0.226, 0.342, 0.774, 0.854, 0.919, 0.975])
    assert found.rule == "equal-area" and found.points == 10 and found.dropped == (6,) and "point 6" in found.note


def test_marks_that_include_the_port():
    fractions, _ = layouts.fractions("equal-area", "round", 12)
    found = layouts.recognise(fractions * 1.2 + 0.102, 1.2, shape="round")[0]
    assert found.rule == "equal-area" and found.offset == pytest.approx(0.102, abs=1e-4) and "port depth included?" in found.note


@pytest.mark.parametrize(("inches", "points", "depths"), [
    # EPA Method 1, 11.3: 26 in with 24 points, 30 in with 12, 14 in with 8.
    (26, 24, {0: 1.0, 1: 1.0, 2: 1.433}), (30, 12, {0: 1.0, 1: 2.010}), (14, 8, {0: 0.5, 1: 1.466}),
])
def test_adjusted_points(inches, points, depths):
    placed = layouts.place("equal-area", shape="round", width=inches * 0.0254, height=inches * 0.0254, lines=1, points=points,
                           wall_distance=0.0254 if inches > 24 else 0.0127)
    for k, inch in depths.items():
        assert placed.depth[k] / 0.0254 == pytest.approx(inch, abs=5.1e-4)
    found = layouts.recognise(placed.depth, inches * 0.0254, shape="round")[0]
    assert found.rule == "equal-area" and found.points == points and found.moved in (0.0254, 0.0127)


@pytest.mark.parametrize(("rule", "points"), [("log-linear", 6), ("log-linear", 10), ("log-tchebycheff", 8), ("equal-area", 12), ("general", 7)])
def test_half_a_diameter(rule, points):
    fractions, _ = layouts.fractions(rule, "round", points)
    found = best(fractions[: (points + 1) // 2])
    assert rule in (found.rule, *found.also) and found.points == points and found.one_sided and "from one side" in found.note


def test_nothing_fits():
    found = layouts.recognise([0.1, 0.15, 0.2, 0.9], 1.0, shape="round")
    assert not found or not found[0].fits


@pytest.mark.parametrize("depths", [[], [0.1, float("nan")], [-0.1, 0.5]])
def test_depths_that_cannot_be(depths):
    with pytest.raises(LayoutError):
        layouts.recognise(depths, 1.0, shape="round")


@settings(max_examples=60, deadline=None)
@given(st.sampled_from([("log-linear", 6), ("log-tchebycheff", 6), ("log-linear", 10), ("log-tchebycheff", 10), ("equal-area", 8), ("general", 7)]),
       st.floats(0.5, 3.0), st.integers(0, 1000))
def test_marks_rounded_to_a_sixteenth_are_recognised(layout, width, number):
    """In ducts of 0.5 m and more the marks to 1/16 in (0.8 mm off at most) leave no doubt between these rules."""
    rule, points = layout
    fractions, _ = layouts.fractions(rule, "round", points)
    step = 0.0254 / 16
    depths = np.random.default_rng(number).permutation(np.round(fractions * width / step) * step)
    found = layouts.recognise(depths, width, shape="round")[0]
    assert rule in (found.rule, *found.also) and found.points == points and found.largest <= step / 2 + 1e-12
