"""The layout rules: printed tables, exact mathematics, placement."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse import layouts, tables
from traverse.errors import LayoutError
from traverse.layouts.log_tchebycheff import nodes

# --- printed tables -------------------------------------------------------------------------------------------------

METHOD_1 = tables.load("layout_equal_area")["percent_of_diameter"]


@pytest.mark.parametrize("points", [int(p) for p in METHOD_1])
def test_method_1_table_is_the_formula_rounded(points):
    """40 CFR 60 App. A Method 1 table 1-2 (from memory): all 156 entries, to 0.1 % of the diameter."""
    fraction, _ = layouts.rules()["equal-area"].fractions("round", points)
    printed = METHOD_1[str(points)]
    assert [f"{100 * f:.1f}" for f in fraction] == list(printed)


def test_all_entries_of_method_1_are_there():
    assert sum(len(row) for row in METHOD_1.values()) == 156


# Printed digits that the rule's own mathematics does not round to: the print truncates, or was made from rounded radii.
# Both numbers are on record: printed -> exact (five digits, from the definition of the rule).
LOG_LINEAR_DEPARTURES = {"0.3586": 0.35846, "0.2776": 0.27716, "0.5658": 0.56612, "0.6950": 0.69489,
                         "0.3207": 0.32077, "0.1525": 0.15255, "0.2171": 0.21694, "0.3612": 0.36142}
LOG_TCHEBYCHEFF_DEPARTURES = {"0.3754": 0.37534, "0.7252": 0.72511, "0.8000": 0.80010, "0.9524": 0.95245, "0.5700": 0.57006,
                              "0.8472": 0.84727, "0.1000": 0.09995}


def agrees(exact, text, departures):
    """Half a unit of the last printed digit, or a departure on record, never more than 0.0005."""
    half = 0.5 * 10.0 ** -len(text.partition(".")[2])
    if abs(exact - float(text)) <= half + 1e-9:
        return True
    return text in departures and abs(exact - departures[text]) < 0.6e-5 and abs(exact - float(text)) < 5e-4


@pytest.mark.parametrize(("table", "departures"), [("log_linear", LOG_LINEAR_DEPARTURES), ("log_tchebycheff", LOG_TCHEBYCHEFF_DEPARTURES)])
def test_radii_as_iso_3966_prints_them(table, departures):
    """ISO 3966 tables of r/R (from memory), four digits."""
    rule = layouts.rules()[table.replace("_", "-")]
    for per_radius, row in tables.load(f"layout_{table}")["fraction_of_radius"].items():
        fraction, _ = rule.fractions("round", 2 * int(per_radius))
        for exact, text in zip(np.sort(1 - 2 * fraction[: int(per_radius)]), row, strict=True):
            assert agrees(exact, text, departures), (per_radius, text, exact)


@pytest.mark.parametrize(("table", "section", "shape", "departures"), [
    ("log_linear", "fraction_of_diameter", "round", LOG_LINEAR_DEPARTURES), ("log_linear", "three_digits", "round", {}),
    ("log_tchebycheff", "fraction_of_diameter", "round", LOG_TCHEBYCHEFF_DEPARTURES), ("log_tchebycheff", "three_digits", "round", {}),
    ("log_tchebycheff", "fraction_of_side", "rectangle", {}),
])
def test_positions_as_printed(table, section, shape, departures):
    """GOST ISO 5802-2012 (read), ISO 3966 (from memory), trade tables (no source): see the tables' own source lines."""
    rule = layouts.rules()[table.replace("_", "-")]
    for points, row in tables.load(f"layout_{table}")[section].items():
        fraction, _ = rule.fractions(shape, int(points))
        for exact, text in zip(fraction, row, strict=False):
            assert agrees(exact, text, departures), (points, text, exact)


def test_offsets_from_the_centre():
    """ISO 3966 rectangular log-Tchebycheff, offsets from the centre (from memory), three digits."""
    for points, row in tables.load("layout_log_tchebycheff")["offset_from_centre"].items():
        fraction, _ = layouts.rules()["log-tchebycheff"].fractions("rectangle", int(points))
        offsets = np.sort(np.unique(np.round(np.abs(fraction - 0.5), 9)))
        np.testing.assert_allclose(offsets, [float(text) for text in row], atol=0.5e-3 + 1e-9)


def test_printed_digits_are_used_when_asked():
    placed = layouts.place("log-linear", shape="round", width=1.0, height=1.0, lines=1, points=6, digits="printed")
    np.testing.assert_allclose(placed.depth, [0.0321, 0.1349, 0.3207, 0.6793, 0.8651, 0.9679], atol=1e-12)
    placed = layouts.place("equal-area", shape="round", width=1.0, height=1.0, lines=1, points=12, digits="printed")
    np.testing.assert_allclose(placed.depth[:3], [0.021, 0.067, 0.118], atol=1e-12)
    with pytest.raises(LayoutError, match="no digits are printed"):
        layouts.place("log-linear", shape="round", width=1.0, height=1.0, lines=1, points=12, digits="printed")


def test_positions_beyond_the_standard_tables():
    """Computed independently with 30 digits (quadrature of the zone means); y/D from the wall."""
    log_linear = layouts.rules()["log-linear"]
    np.testing.assert_allclose(log_linear.fractions("round", 12)[0][:6],
                               [0.01375, 0.07492, 0.11370, 0.18253, 0.24144, 0.37366], atol=0.6e-5)
    np.testing.assert_allclose(log_linear.fractions("round", 20)[0][:10],
                               [0.00817, 0.04363, 0.06465, 0.09941, 0.12655, 0.16754, 0.20088, 0.25399, 0.29938, 0.40248], atol=0.6e-5)
    tchebycheff = layouts.rules()["log-tchebycheff"]
    np.testing.assert_allclose(np.sort(1 - 2 * tchebycheff.fractions("round", 16)[0][:8]),
                               [0.22541, 0.45362, 0.54386, 0.66144, 0.76106, 0.81806, 0.90785, 0.97663], atol=0.6e-5)
    # n = 2 closed form: sum of the wall distances 2/3, product exp(-3).
    y = 2 * log_linear.fractions("round", 4)[0][:2]
    assert y.sum() == pytest.approx(2 / 3, abs=1e-14) and y.prod() == pytest.approx(math.exp(-3), abs=1e-14)


def test_the_naming_trap():
    """Trade tables headed log-Tchebycheff print log-linear positions; at 6 per diameter 0.321/0.135 against 0.312/0.137."""
    linear = layouts.rules()["log-linear"].fractions("round", 6)[0]
    tchebycheff = layouts.rules()["log-tchebycheff"].fractions("round", 6)[0]
    assert [f"{f:.3f}" for f in linear[1:3]] == ["0.135", "0.321"]
    assert [f"{f:.3f}" for f in tchebycheff[1:3]] == ["0.137", "0.312"]


# --- exact mathematics ----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("count", [1, 2, 3, 4, 5, 6, 7, 9])
def test_tchebycheff_nodes_integrate_their_order(count):
    """The mean of t^k over the nodes equals its mean over [-1, 1] for every k up to the number of nodes."""
    t = np.array(nodes(count))
    for k in range(1, count + 1):
        assert np.mean(t**k) == pytest.approx(0.0 if k % 2 else 1 / (k + 1), abs=1e-13)


@pytest.mark.parametrize("count", [8, 10, 12])
def test_complex_nodes_are_refused(count):
    with pytest.raises(LayoutError, match="complex"):
        nodes(count)


@given(b=st.floats(-0.3, 0.3), c=st.floats(-0.5, 0.5), half=st.integers(1, 5))
def test_log_linear_is_exact_for_its_family(b, c, half):
    """1 + b ln y + c y over a circle has the mean 1 - 1.5 b + c/3; even numbers per radius give it exactly."""
    fraction, weight = layouts.rules()["log-linear"].fractions("round", 4 * half)
    y = 2 * np.minimum(fraction, 1 - fraction)
    assert float(np.sum(weight * (1 + b * np.log(y) + c * y))) == pytest.approx(1 - 1.5 * b + c / 3, abs=1e-12)


@given(k=st.floats(0.0, 0.3))
def test_odd_log_linear_is_exact_for_the_logarithm(k):
    for per_radius in (3, 5, 7, 9):
        fraction, weight = layouts.rules()["log-linear"].fractions("round", 2 * per_radius)
        y = 2 * np.minimum(fraction, 1 - fraction)
        assert float(np.sum(weight * (1 + k * np.log(y)))) == pytest.approx(1 - 1.5 * k, abs=1e-12)


# --- placement ------------------------------------------------------------------------------------------------------


def test_round_coordinates():
    """Lines counter-clockwise from +x, the port at the angle, point 1 nearest to it."""
    placed = layouts.place("equal-area", shape="round", width=2.0, height=2.0, lines=2, points=4)
    assert placed.line == ("A",) * 4 + ("B",) * 4 and placed.point == (1, 2, 3, 4) * 2
    np.testing.assert_allclose(placed.x[:4], 1 - placed.depth[:4], atol=1e-14)
    np.testing.assert_allclose(placed.y[4:], 1 - placed.depth[4:], atol=1e-14)
    np.testing.assert_allclose([*placed.y[:4], *placed.x[4:]], 0.0, atol=1e-14)
    assert placed.depth[0] == pytest.approx(2 * 0.06699, abs=1e-5)
    turned = layouts.place("equal-area", shape="round", width=2.0, height=2.0, lines=1, points=2, angles=[math.pi / 2])
    np.testing.assert_allclose(turned.y, [math.sqrt(0.5), -math.sqrt(0.5)], atol=1e-14)


def test_rectangle_coordinates():
    down = layouts.place("equal-area", shape="rectangle", width=0.8, height=0.4, lines=4, points=2)
    np.testing.assert_allclose(down.x[::2], [-0.3, -0.1, 0.1, 0.3], atol=1e-14)
    np.testing.assert_allclose(down.y[:2], [0.1, -0.1], atol=1e-14)
    np.testing.assert_allclose(down.depth[:2], [0.1, 0.3], atol=1e-14)
    across = layouts.place("equal-area", shape="rectangle", width=0.8, height=0.4, lines=2, points=4, along="width", names=["top", "low"])
    np.testing.assert_allclose(across.x[:4], [-0.3, -0.1, 0.1, 0.3], atol=1e-14)
    np.testing.assert_allclose(across.y[::4], [0.1, -0.1], atol=1e-14)
    assert across.line[0] == "top"


@pytest.mark.parametrize(("inches", "points", "expected"), [
    (26, 24, [1.00, 1.00, 1.433]), (30, 12, [1.00, 2.010]), (14, 8, [0.50, 1.466]), (11, 4, [0.737, 2.75]),
])
def test_adjusted_points(inches, points, expected):
    """40 CFR 60 App. A Method 1, 11.3.1.4 to 11.3.3 (read): depths after moving, computed to 0.001 in."""
    least = 1.0 if inches > 24 else 0.5
    placed = layouts.place("equal-area", shape="round", width=float(inches), height=float(inches), lines=1, points=points, wall_distance=least)
    np.testing.assert_allclose(placed.depth[: len(expected)], expected, atol=6e-4)
    assert sum(placed.moved) == 2 * sum(1 for value in expected if value == least)
    assert len(placed.depth) == points, "points that fall together stay two"


def test_custom_points():
    placed = layouts.place_custom(shape="round", width=1.0, height=1.0, line=["A", "A", "B"], point=[1, 2, 1], depth=[0.1, 0.5, 0.25], weight=[1, 2, 1])
    np.testing.assert_allclose(placed.weight, [0.25, 0.5, 0.25])
    np.testing.assert_allclose(placed.x, [0.4, 0.0, 0.0], atol=1e-15)
    np.testing.assert_allclose(placed.y, [0.0, 0.0, 0.25], atol=1e-15)
    assert placed.notes and "sum of 1" in placed.notes[0]
    flat = layouts.place_custom(shape="rectangle", width=1.0, height=0.5, line=["A"], point=[1], x=[0.2], y=[-0.1], weight=[1.0])
    assert flat.depth[0] == pytest.approx(0.35) and not flat.notes


@pytest.mark.parametrize(("change", "message"), [
    ({"depth": [1.2, 0.5]}, "outside"), ({"depth": [0.5, 0.5]}, "one place"), ({"weight": [1, -1]}, "weight"), ({"weight": [1]}, "weight"),
    ({"depth": None}, "no places"), ({"point": [1, 1]}, "twice"), ({"weight": [1, math.nan]}, "weight"),
])
def test_custom_points_that_cannot_be(change, message):
    given_points = {"shape": "round", "width": 1.0, "height": 1.0, "line": ["A", "A"], "point": [1, 2], "depth": [0.1, 0.5], "weight": [1, 1]}
    with pytest.raises(LayoutError, match=message):
        layouts.place_custom(**(given_points | change))


@pytest.mark.parametrize(("arguments", "message"), [
    ({"name": "equal-area", "points": 5}, "even"), ({"name": "log-linear", "points": 22}, "4 to 20"), ({"name": "log-liner", "points": 6}, "log-linear"),
    ({"name": "log-tchebycheff", "points": 18}, "6 to 16"), ({"name": "equal-area", "points": 4, "angles": [0.0]}, "angles"),
    ({"name": "equal-area", "points": 4, "angles": [0.0, math.pi]}, "same angle"), ({"name": "equal-area", "points": 4, "names": ["A", "A"]}, "names"),
    ({"name": "equal-area", "points": 4, "wall_distance": 0.6}, "wide enough"), ({"name": "log-linear", "points": 6, "shape": "rectangle"}, "no rule"),
])
def test_impossible_layouts(arguments, message):
    full = {"shape": "round", "width": 1.0, "height": 1.0, "lines": 2} | arguments
    with pytest.raises(LayoutError, match=message):
        layouts.place(full.pop("name"), **full)


@pytest.mark.parametrize("points", [2, 10, 11])
def test_rectangular_log_tchebycheff_that_does_not_exist(points):
    with pytest.raises(LayoutError, match="3 to 9"):
        layouts.place("log-tchebycheff", shape="rectangle", width=1.0, height=1.0, lines=5, points=points)


@pytest.mark.parametrize(("change", "message"), [
    ({"digits": "printd"}, "exact, printed"), ({"shape": "oval"}, "round, ellipse, rectangle"), ({"along": "heigth"}, "height, width"),
    ({"lines": 0}, "at least 1"), ({"width": 0.0}, "diameter"), ({"width": math.nan}, "diameter"), ({"width": math.inf}, "diameter"),
    ({"shape": "rectangle", "height": -1.0}, "a height of"), ({"wall_distance": math.nan}, "wide enough"), ({"wall_distance": -0.01}, "wide enough"),
    ({"wall_distance": 0.5}, "wide enough"), ({"angles": [0.0, 3.1415926]}, "same angle"), ({"angles": [0.0, math.nan]}, "no number"),
    ({"angles": [0.0]}, "2 angles"),
])
def test_words_and_sizes_that_would_give_wrong_places(change, message):
    full = {"shape": "round", "width": 1.0, "height": 1.0, "lines": 2, "points": 6} | change
    with pytest.raises(LayoutError, match=message):
        layouts.place("equal-area", **full)


def test_names_go_on_after_z():
    placed = layouts.place("equal-area", shape="rectangle", width=1.0, height=1.0, lines=703, points=1)
    assert [placed.line[i] for i in (0, 25, 26, 27, 51, 52, 701, 702)] == ["A", "Z", "AA", "AB", "AZ", "BA", "ZZ", "AAA"]


def test_default_angles_and_given_ones():
    """Three diameters: 0, 60 and 120 degrees; a port on the far side turns its line round."""
    placed = layouts.place("equal-area", shape="round", width=2.0, height=2.0, lines=3, points=2)
    np.testing.assert_allclose(np.degrees(np.arctan2(placed.y, placed.x)[::2]), [0, 60, 120], atol=1e-12)
    far = layouts.place("equal-area", shape="round", width=2.0, height=2.0, lines=2, points=2, angles=[math.pi, math.pi / 2])
    np.testing.assert_allclose(far.x[:2], [-math.sqrt(0.5), math.sqrt(0.5)], atol=1e-14)


def test_moved_points_are_told():
    placed = layouts.place("equal-area", shape="round", width=26.0, height=26.0, lines=2, points=24, wall_distance=1.0)
    assert placed.notes == ("4 points on each line moved out to 1000.0 mm from the wall; where two fall together both are read and both count",)
    assert placed.weight.sum() == pytest.approx(1.0) and len(set(placed.weight.tolist())) == 1
    assert placed.depth[22] == placed.depth[23] == 25.0
    assert placed.moved == ((True, True) + (False,) * 20 + (True, True)) * 2
    still = layouts.place("equal-area", shape="round", width=11.0, height=11.0, lines=2, points=4, wall_distance=0.5)
    assert not any(still.moved) and not still.notes


def test_a_rectangle_is_left_alone_by_the_wall_distance():
    placed = layouts.place("equal-area", shape="rectangle", width=1.0, height=1.0, lines=2, points=10, wall_distance=0.2)
    assert placed.depth[0] == pytest.approx(0.05) and not any(placed.moved)


def test_custom_lines_of_a_rectangle():
    """Centres of equal parts, or stated positions from the left or from the top, in the order of the names."""
    points = {"shape": "rectangle", "width": 0.9, "height": 0.6, "line": ["B", "A"], "point": [1, 1], "depth": [0.1, 0.2], "weight": [0.5, 0.5]}
    placed = layouts.place_custom(**points)
    np.testing.assert_allclose(placed.x, [-0.225, 0.225], atol=1e-15)
    np.testing.assert_allclose(placed.y, [0.2, 0.1], atol=1e-15)
    stated = layouts.place_custom(**points, positions=[0.1, 0.7], names=["A", "B"])
    np.testing.assert_allclose(stated.x, [0.25, -0.35], atol=1e-15)
    across = layouts.place_custom(**points, positions=[0.1, 0.5], along="width")
    np.testing.assert_allclose(across.x, [-0.35, -0.25], atol=1e-15)
    np.testing.assert_allclose(across.y, [0.2, -0.2], atol=1e-15)
    place = layouts.place_custom(**(points | {"depth": None}), x=across.x, y=across.y, along="width")
    np.testing.assert_allclose(place.depth, [0.1, 0.2], atol=1e-15)


def test_custom_angles_belong_to_the_named_lines():
    points = {"shape": "round", "width": 2.0, "height": 2.0, "line": ["B", "A"], "point": [1, 1], "depth": [0.5, 0.5], "weight": [0.5, 0.5]}
    first = layouts.place_custom(**points)
    np.testing.assert_allclose([*first.x, *first.y], [0.5, 0.0, 0.0, 0.5], atol=1e-15)
    named = layouts.place_custom(**points, angles=[0.0, math.pi / 2], names=["A", "B"])
    np.testing.assert_allclose([*named.x, *named.y], [0.0, 0.5, 0.5, 0.0], atol=1e-15)
    with pytest.raises(LayoutError, match="each line of the points once"):
        layouts.place_custom(**points, names=["A", "C"])


def test_custom_points_beside_their_diameter_have_no_mark():
    """A depth that no probe can be marked with must not stand there without a word."""
    points = {"shape": "round", "width": 2.0, "height": 2.0, "line": ["A", "A"], "point": [1, 2], "weight": [0.5, 0.5]}
    placed = layouts.place_custom(**points, x=[0.5, 0.2], y=[0.0, 0.3])
    assert placed.depth[0] == pytest.approx(0.5)
    assert len(placed.notes) == 1 and placed.notes[0].startswith("A2 not on the diameter") and "no mark" in placed.notes[0]
    turned = layouts.place_custom(**points, x=[0.5, 0.2], y=[0.5, 0.2], angles=[math.pi / 4])
    assert not turned.notes
    np.testing.assert_allclose(turned.depth, [1 - math.sqrt(0.5), 1 - math.sqrt(0.08)], atol=1e-14)


@pytest.mark.parametrize(("change", "message"), [
    ({"line": [], "point": [], "depth": [], "weight": []}, "no points"), ({"depth": [0.1, 0.2, 0.3]}, "3 of depth for 2 points"),
    ({"weight": [1]}, "1 of weight"), ({"point": [1]}, "1 of point"), ({"x": [0.0, 0.1], "y": [0.0, 0.1]}, "both a depth"),
    ({"positions": [0.5]}, "positions in a round section"), ({"shape": "rectangle", "angles": [0.0]}, "angles for a rectangle"),
    ({"shape": "rectangle", "positions": [0.2, 0.4]}, "2 positions"), ({"depth": [0.1, math.nan]}, "outside"), ({"along": "depth"}, "height, width"),
    ({"width": -1.0}, "diameter"), ({"depth": None, "x": [0.0, 0.1]}, "no places"),
    ({"depth": None, "x": [0.0, 0.1], "y": [0.0]}, "1 of y"),
])
def test_custom_points_that_do_not_fit_together(change, message):
    given_points = {"shape": "round", "width": 1.0, "height": 1.0, "line": ["A", "A"], "point": [1, 2], "depth": [0.1, 0.5], "weight": [1, 1]}
    with pytest.raises(LayoutError, match=message):
        layouts.place_custom(**(given_points | change))
