"""Shapes, layouts, weights and points that were not read, through a whole job: against exact means and stated rules."""

import math

import numpy as np
import pytest

from tests.support import jobs
from traverse.errors import ReadingError, TraverseError

HEAD = "line,point,differential_pressure [Pa]\n"


def profile_readings(depths, lines, n=7.0, top=100.0, skip=()):
    """Readings of a power-law profile on diameters of a 1 m duct: dp goes with the square of the velocity."""
    rows = [(line, k, top * (2 * min(d, 1 - d)) ** (2 / n)) for line in lines for k, d in enumerate(depths, 1)]
    return HEAD + "".join(f"{line},{k},{'obstructed' if (line, k) in skip else repr(dp)}\n" for line, k, dp in rows)



def depths(rule, points):
    from traverse import layouts

    return layouts.fractions(rule, "round", points)[0].tolist()


def value(result, name="mean_velocity"):
    return result["runs"][0]["quantities"][name]["value"]


EXACT = math.sqrt(2 * 100.0 / 1.2) * 2 * 49 / (8 * 15)  # mean of a 1/7 power law of 100 Pa at the centre, density 1.2


def test_integration_comes_nearer_to_the_mean_than_averaging(tmp_path):
    readings = profile_readings(depths("equal-area", 10), "AB")
    layout = {"points": 10}
    averaged = value(jobs.reduced(tmp_path, {"layout": layout}, readings))
    integrated = jobs.reduced(tmp_path, {"layout": layout | {"weights": "velocity-area"}}, readings)
    stated = jobs.reduced(tmp_path, {"layout": layout | {"weights": "velocity-area", "wall_exponent": 7}}, readings)
    assert 100 * (averaged / EXACT - 1) == pytest.approx(0.54, abs=0.02)  # the known error of five rings of equal area
    assert abs(value(stated) / EXACT - 1) < 2e-3 < abs(averaged / EXACT - 1)
    # Compressibility moves the local velocities by parts in ten thousand, and the exponent fitted to their roots is 7.
    assert value(integrated) == pytest.approx(value(stated), rel=1e-6)
    weights = [point["weight"] for point in integrated["runs"][0]["points"]]
    assert sum(weights) == pytest.approx(1.0, abs=1e-12) and len(set(np.round(weights, 9))) > 1


def test_an_omitted_point_leaves_an_integral_over_the_others(tmp_path):
    layout = {"points": 10, "rule": "log-linear", "weights": "velocity-area", "wall_exponent": 7}
    readings = profile_readings(depths("log-linear", 10), "AB", skip={("A", 3)})
    found = jobs.reduced(tmp_path, {"layout": layout, "readings": {"missing": "omit"}}, readings)
    assert value(found) == pytest.approx(EXACT, rel=3e-3)


@pytest.mark.parametrize("policy", ["neighbour", "field", "omit"])
def test_a_missing_point_and_the_spread_between_the_rules(tmp_path, policy):
    readings = profile_readings(depths("log-linear", 10), "AB", skip={("A", 1)})
    change = {"layout": {"points": 10, "rule": "log-linear"}, "readings": {"missing": policy}}
    found = jobs.reduced(tmp_path, change, readings)
    spread = found["runs"][0]["missing_treatments"]
    assert set(spread) == {"neighbour", "field", "omit"}
    assert value(found) == spread[policy]["mean_velocity"]
    # A wall point from its inner neighbour, or left out, reads high; the field knows that it is at the wall.
    assert spread["field"]["mean_velocity"] == pytest.approx(EXACT, rel=4e-3)
    assert spread["omit"]["mean_velocity"] > spread["neighbour"]["mean_velocity"] > EXACT * 1.004
    said = [f for f in found["findings"] if f["topic"] == "missing readings"]
    assert said and all(f"'{other}' would give" in said[0]["message"] for other in spread if other != policy)


def test_no_field_from_three_readings(tmp_path):
    readings = HEAD + "A,1,50\nA,2,obstructed\nB,1,51\nB,2,52\n"
    with pytest.raises(ReadingError, match='missing = "neighbour" or "omit"'):
        jobs.reduced(tmp_path, {"layout": {"points": 2}, "readings": {"missing": "field"}}, readings)


def test_custom_points_without_weights_have_the_area_nearest_to_them(tmp_path):
    change = {"plane": {"shape": "rectangle", "diameter": None, "width": "2 m", "height": "1 m"},
              "layout": {"rule": "custom", "lines": 2, "points": None, "depths": ["250 mm", "750 mm"]}}
    found = jobs.reduced(tmp_path, change, HEAD + "A,1,50\nA,2,50\nB,1,72\nB,2,72\n")
    assert [point["weight"] for point in found["runs"][0]["points"]] == pytest.approx([0.25] * 4, abs=1e-12)
    assert [(point["x"], point["y"]) for point in found["runs"][0]["points"]] == [(-0.5, 0.25), (-0.5, -0.25), (0.5, 0.25), (0.5, -0.25)]
    assert any("nearest to it" in finding["message"] for finding in found["findings"])


POLYGON = {"shape": "polygon", "diameter": None, "vertices": [["0 m", "0 m"], ["3 m", "0 m"], ["3 m", "1 m"], ["1 m", "1 m"], ["1 m", "2 m"], ["0 m", "2 m"]]}


def test_a_polygon_of_corners(tmp_path):
    readings = "line,point,x [m],y [m],differential_pressure [Pa]\nA,1,0.5,0.5,50\nA,2,2.0,0.5,50\nA,3,0.5,1.5,50\n"
    found = jobs.reduced(tmp_path, {"plane": POLYGON, "layout": {"rule": "custom", "lines": None, "points": None}}, readings)
    assert value(found, "area") == pytest.approx(4.0, rel=1e-14)
    assert [point["weight"] for point in found["runs"][0]["points"]] == pytest.approx([1.25 / 4, 1.75 / 4, 1.0 / 4], rel=1e-12)
    assert value(found, "actual_flow") == pytest.approx(4.0 * math.sqrt(2 * 50 / 1.2), rel=3e-4)


def test_a_point_outside_a_polygon_is_named(tmp_path):
    readings = "line,point,x [m],y [m],differential_pressure [Pa]\nA,1,0.5,0.5,50\nA,2,2.0,1.5,50\n"
    with pytest.raises(TraverseError, match=r"point A2 at x = 2000\.0 mm, y = 1500\.0 mm lies outside"):
        jobs.reduced(tmp_path, {"plane": POLYGON, "layout": {"rule": "custom", "lines": None, "points": None}}, readings)


@pytest.mark.parametrize(("plane", "area"), [
    ({"shape": "flat-oval", "width": "1 m", "height": "0.6 m"}, math.pi * 0.09 + 0.4 * 0.6),
    ({"shape": "annulus", "core": "0.4 m", "diameter": "1 m"}, math.pi / 4 * (1 - 0.16)),
    ({"shape": "ellipse", "width": "1 m", "height": "0.6 m"}, math.pi / 4 * 0.6),
    ({"shape": "round", "diameter": ["1 m", "1.002 m", "1.001 m", "1.001 m"]}, math.pi / 4 * 1.001**2),
    ({"shape": "round", "diameter": "1 m", "lining": "20 mm", "deposit": "5 mm"}, math.pi / 4 * 0.95**2),
])
def test_areas(tmp_path, plane, area):
    found = jobs.reduced(tmp_path, {"plane": {"diameter": None} | plane})
    assert value(found, "area") == pytest.approx(area, rel=1e-13)


def test_several_diameters_are_averaged_and_judged(tmp_path):
    found = jobs.reduced(tmp_path, {"plane": {"diameter": ["1 m", "1.02 m"]}})
    said = [finding for finding in found["findings"] if finding["topic"] == "section"]
    assert "1.01 m" in said[0]["message"] and "1.98 %" in said[0]["message"]
    assert said[1]["level"] == "attention" and "twice as many" in said[1]["message"]


def test_each_dimension_is_uncertain_by_itself(tmp_path):
    """An annulus: dA = pi/2 (D dD - d dd), the two independent."""
    found = jobs.reduced(tmp_path, {"plane": {"shape": "annulus", "core": "0.4 m"}, "uncertainty": {"dimensions": "2 mm", "layout": "none"}})
    assert found["runs"][0]["quantities"]["area"]["standard_uncertainty"] == pytest.approx(math.pi / 2 * 0.002 * math.hypot(1.0, 0.4), rel=1e-3)
    assert {row["input"] for row in found["runs"][0]["budget"]["actual_flow"]} >= {"diameter", "core"}


def test_radii_and_a_stated_wall_distance(tmp_path):
    found = jobs.reduced(tmp_path, {"layout": {"lines": 2, "points": 4, "radii": True, "wall_distance": "40 mm"}})
    points = found["runs"][0]["points"]
    assert all(point["depth"] < 0.5 for point in points) and points[0]["depth"] == pytest.approx(0.04)
    assert points[4]["x"] == pytest.approx(-points[0]["x"])


def test_equal_area_moves_points_only_for_a_method_that_says_so(tmp_path):
    plane, layout = {"plane": {"diameter": "14 in"}}, {"layout": {"points": 8}}
    readings = HEAD + "".join(f"{line},{k},50\n" for line in "AB" for k in range(1, 9))
    plain = jobs.reduced(tmp_path, plane | layout, readings)
    # EPA Method 1, 11.3.1.4: no point nearer than 0.5 in where the diameter is at most 24 in; 0.452 in becomes 0.50 in.
    small = jobs.reduced(tmp_path, plane | {"job": {"units": "us"}, "layout": {"points": 8, "rule": "small-duct"}}, readings)
    assert plain["runs"][0]["points"][0]["depth"] == pytest.approx(0.452 * 0.0254, abs=0.0005 * 0.0254)
    assert small["runs"][0]["points"][0]["depth"] == pytest.approx(0.0127, rel=1e-12)
    assert small["runs"][0]["points"][1]["depth"] == pytest.approx(1.466 * 0.0254, abs=0.0005 * 0.0254)
