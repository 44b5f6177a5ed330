"""The plan: marks, the profile that is expected, the gauge, the probe. Expected values from exact mathematics or print."""

import dataclasses
import itertools
import json
import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

import traverse
from tests.support import jobs
from traverse.importers import load_setup
from traverse.planning import gauge, marks
from traverse.planning.expected import density_of, expected, pressure, relative_velocity
from traverse.report import plan_figure, plan_json, plan_text
from traverse.units import UNITS, parse

INCH, WATER = UNITS["in"].factor, UNITS["inH2O"].factor
DESIGN = {"design": {"velocity": "10 m/s"}, "plane": {"port_depth": "50 mm"}}


def planned(folder, change=None):
    return traverse.plan(load_setup(jobs.write(folder, change)))


def graded(n, count=40):
    """Return wall distances from 0 to 1 and weights: Gauss in t with distance = t^n, which makes (distance)^(1/n) a polynomial."""
    place, weight = np.polynomial.legendre.leggauss(count)
    t = (place + 1.0) / 2.0
    return t**n, weight / 2.0 * n * t ** (n - 1)


# --- the profile

@pytest.mark.parametrize(("exponent", "ratio"), [(5, 25 / 33), (6, 72 / 91), (7, 49 / 60), (8, 128 / 153), (10, 200 / 231)])
def test_the_mean_over_the_maximum_is_that_of_the_power_law(exponent, ratio):
    """2 n^2 / ((n + 1)(2 n + 1)), the textbook ratio of mean to centre velocity in a pipe: 0.8167 for n = 7."""
    assert float(relative_velocity("round", {"diameter": 2.0}, exponent, 0.0, 0.0)) == pytest.approx(1 / ratio, rel=1e-12)
    # The velocity of the mean is met 0.242 radii from the wall (the 0.242 R rule of ISO 7145, from memory).
    if exponent == 7:
        assert float(relative_velocity("round", {"diameter": 2.0}, 7, 1 - 0.2423, 0.0)) == pytest.approx(1.0, abs=1e-4)


@pytest.mark.parametrize("exponent", [4, 7, 10])
@pytest.mark.parametrize("shape", ["round", "ellipse", "annulus", "rectangle", "flat-oval"])
def test_the_area_mean_of_the_profile_is_the_design_velocity(shape, exponent):
    """Integrated over the section by Gauss in coordinates of our own; the mean of the local over the mean velocity is 1."""
    y, w = graded(exponent)
    if shape in {"round", "ellipse"}:
        size, a, b = ({"diameter": 1.4}, 0.7, 0.7) if shape == "round" else ({"width": 1.4, "height": 0.6}, 0.7, 0.3)
        angle = (np.arange(16) + 0.5) * np.pi / 8
        local = relative_velocity(shape, size, exponent, np.outer(1 - y, a * np.cos(angle)), np.outer(1 - y, b * np.sin(angle)))
        mean = np.sum(local.mean(axis=1) * w * 2 * (1 - y))
    elif shape == "annulus":
        outer, inner = 0.5, 0.2
        half = (outer - inner) / 2
        radius = np.concatenate([outer - half * y, inner + half * y])
        local = relative_velocity(shape, {"diameter": 1.0, "core": 0.4}, exponent, radius, np.zeros_like(radius))
        mean = np.sum(local * np.concatenate([w, w]) * half * 2 * radius) / (outer**2 - inner**2)
    elif shape == "rectangle":
        local = relative_velocity(shape, {"width": 0.8, "height": 0.5}, exponent, 0.4 * (1 - y[:, None]), 0.25 * (1 - y[None, :]))
        mean = w @ local @ w
    else:
        size, radius = {"width": 1.0, "height": 0.4}, 0.2
        flat = relative_velocity(shape, size, exponent, np.full_like(y, 0.1), radius * (1 - y))
        end = relative_velocity(shape, size, exponent, 0.3 + radius * (1 - y), np.zeros_like(y))
        mean = (np.sum(flat * w) * 0.6 * 0.4 + np.sum(end * w * 2 * (1 - y)) * math.pi * radius**2) / (0.24 + math.pi * radius**2)
    assert mean == pytest.approx(1.0, abs=1e-9)


def test_a_polygon_with_an_inscribed_circle_has_the_mean_of_a_circle():
    """Its parallel curves shrink like it: the mean of (distance / radius of the inscribed circle)^(1/n) is that of a pipe."""
    size = {"x1": 0.0, "y1": 0.0, "x2": 4.0, "y2": 0.0, "x3": 0.0, "y3": 3.0}  # inscribed radius 1, centre (1, 1)
    for n in (5, 7, 9):
        ratio = 2 * n * n / ((n + 1) * (2 * n + 1))
        assert float(relative_velocity("polygon", size, n, 1.0, 1.0)) == pytest.approx(1 / ratio, rel=2e-3)


def test_there_is_no_velocity_at_the_wall_and_none_outside():
    assert float(relative_velocity("round", {"diameter": 1.0}, 7, 0.5, 0.0)) == 0.0
    assert math.isnan(relative_velocity("round", {"diameter": 1.0}, 7, 0.6, 0.0))
    assert math.isnan(relative_velocity("rectangle", {"width": 1.0, "height": 1.0}, 7, 0.7, 0.8)), "two negative factors are no velocity"


def test_the_pressure_of_a_velocity():
    # The trade's 4005 ft/min at 1 inch of water (of 68 degF) in standard air of 0.075 lb/ft3: common practice, no source.
    speed, air, inch = parse("4005 ft/min", "velocity").value, parse("0.075 lb/ft3", "density").value, UNITS["inH2O@68F"].factor
    assert float(pressure(speed, air, 1.0)) / inch == pytest.approx(1.0, abs=1e-4)
    assert float(pressure(speed, air, 0.84)) / inch == pytest.approx(1 / 0.84**2, rel=1e-4)


def test_expected_pressures_at_every_point(tmp_path):
    """Closed form: v = mean 60/49 (y/R)^(1/7), dp = 1.2 v^2 / 2; equal areas put 4 points at y/R = 1 -/+ sqrt(3/4), sqrt(1/4)."""
    plan = planned(tmp_path, DESIGN)
    y = np.array([1 - math.sqrt(0.75), 0.5, 0.5, 1 - math.sqrt(0.75)])
    dp = 0.6 * (10 * 60 / 49 * y ** (1 / 7)) ** 2
    assert plan.profile.pressure == pytest.approx(np.tile(dp, 2), rel=1e-12)
    assert plan.expected == pytest.approx(60.0) and plan.mean_velocity == pytest.approx(10.0)
    assert plan.gauge.lowest == pytest.approx(dp.min()) and plan.gauge.highest == pytest.approx(dp.max())
    assert plan.gauge.mean_root == pytest.approx(np.sqrt(dp).mean())


@pytest.mark.parametrize("change", [{"profile": 5}, {"profile": 10}])
def test_the_exponent_is_a_setting(tmp_path, change):
    n = change["profile"]
    plan = planned(tmp_path, {**DESIGN, "design": {"velocity": "10 m/s", **change}})
    wall = 10 * (n + 1) * (2 * n + 1) / (2 * n * n) * (1 - math.sqrt(0.75)) ** (1 / n)
    assert plan.profile.velocity[0] == pytest.approx(wall, rel=1e-12)
    assert plan.profile.source == "[design] profile"


def test_a_design_flow_and_the_velocity_it_is_give_the_same_plan(tmp_path):
    flow = planned(tmp_path, {"design": {"actual_flow": f"{10 * math.pi / 4!r} m3/s"}})
    assert flow.profile.pressure == pytest.approx(planned(tmp_path, DESIGN).profile.pressure, rel=1e-12)


@pytest.mark.parametrize(("change", "words"), [
    ({}, ["design"]), ({"design": {"velocity": "3 m/s"}, "gas": {"kind": "air", "density": None, "dry": True}, "conditions": {"temperature": None}},
                       ["[conditions] temperature"]),
    ({"design": {"velocity": "3 m/s"}, "gas": None}, ["[gas]"]),
    ({"pitot": {"type": "s-type", "coefficient": None}, "gas": None}, ["[design]", "[gas]", "[pitot] coefficient"]),
])
def test_what_is_lacking_is_said_and_nothing_is_invented(tmp_path, change, words):
    plan = planned(tmp_path, change)
    assert plan.expected is None and plan.gauge is None and plan.profile.pressure is None
    assert all(word in plan.profile.reason for word in words)
    assert plan.profile.reason in " ".join(plan_text.plan(plan).split())
    data = plan_json.to_dict(plan)
    assert data["notes"]["expected_differential_pressure"] == plan.profile.reason
    assert data["gauge"] is None and all(point["expected_differential_pressure"] is None for point in data["points"])


@pytest.mark.parametrize(("gas", "density"), [
    # Standard atmosphere at sea level (ISO 2533): 1.225 kg/m3 at 15 degC and 1013.25 hPa.
    ({"kind": "air", "density": None, "dry": True}, 1.225),
    # The ideal gas: twice the absolute temperature, half the density.
    ({"density": "2.45 kg/m3", "temperature": "144.075 K", "pressure": "1013.25 hPa"}, 1.225),
    ({"density": "0.9 kg/m3"}, 0.9),
    ({"density": None, "molar_mass": "28.9644 g/mol"}, 1.225),
])
def test_the_density_is_that_of_the_job(tmp_path, gas, density):
    setup = load_setup(jobs.write(tmp_path, {"gas": gas, "conditions": {"temperature": "15 degC"}}))
    assert density_of(setup) == (pytest.approx(density, abs=1.5e-4), "")


def test_flue_gas_has_the_density_of_its_reduction(tmp_path):
    gas = {"kind": "flue-gas", "density": None, "oxygen": "6 %", "carbon_dioxide": "9 %", "moisture": "12 %"}
    path = jobs.write(tmp_path, {"gas": gas, "conditions": {"static": "-300 Pa", "temperature": "150 degC"}})
    reduced = traverse.reduce(traverse.load(path)).summary["density"].measured.value
    assert density_of(load_setup(path))[0] == pytest.approx(reduced, rel=1e-12)


# --- marks

def test_marks_are_depth_port_and_offset_line_by_line(tmp_path):
    plan = planned(tmp_path, {"plane": {"port_depth": ["40 mm", "2 1/2 in"]}, "pitot": {"head_offset": "6 mm"}})
    depth = 0.5 * np.array([1 - math.sqrt(0.75), 0.5, 1.5, 1 + math.sqrt(0.75)])
    assert plan.mark == pytest.approx(np.concatenate([depth + 0.046, depth + 0.0695]), abs=1e-12)
    assert plan.nipple == pytest.approx(np.repeat([0.040, 0.0635], 4))
    assert plan.rounded == pytest.approx(plan.rounding["si"].mark)
    text = plan_text.plan(plan)
    assert "A 40 mm, B 2 1/2 in" in text and "head offset" in text


def test_a_list_of_equal_ports_is_one_port_depth(tmp_path):
    setup = load_setup(jobs.write(tmp_path, {"plane": {"port_depth": ["40 mm", "40 mm"]}}))
    assert setup.plane.port_depth.value == pytest.approx(0.04)
    assert marks.nipples(setup) == pytest.approx(np.full(8, 0.04))


def test_points_that_fall_together_share_a_mark(tmp_path):
    """26 in stack, 24 points: 0.274, 0.840, 1.433 in become 1.00, 1.00, 1.433 in (EPA Method 1, 11.3.2 and 11.3.3, computed)."""
    plan = planned(tmp_path, {
        "job": {"method": "epa-2", "units": "us"}, "plane": {"diameter": "26 in", "port_depth": "4 in"}, "layout": {"points": 24},
    })
    assert plan.mark[:3] / INCH == pytest.approx([5.0, 5.0, 5.433], abs=6e-4)
    assert [plan_text.sixteenths(value) for value in plan.rounding["us"].mark[:3]] == ["5", "5", "5 7/16"]
    assert plan.probe.wall.met is True and plan.probe.wall.needed == pytest.approx(INCH)
    assert plan_figure.mark_labels(plan, np.arange(24), inch_first=True)[0][1] == "1, 2: 5 in (127 mm)"


@given(st.floats(-3.0, 50.0))
def test_sixteenths_are_the_nearest_and_read_back(value):
    text = plan_text.sixteenths(value)
    back = math.copysign(parse(f"{text.lstrip('-')} in", "length").value, -1.0 if text.startswith("-") else 1.0)
    assert abs(back - value) <= INCH / 32 * (1 + 1e-9)
    assert (back / INCH * 16) == pytest.approx(round(back / INCH * 16), abs=1e-6)
    assert "/" not in text or math.gcd(*(int(part) for part in text.split()[-1].lstrip("-").split("/"))) == 1


@given(port=st.floats(0.0, 0.4), diameter=st.floats(0.2, 6.0))
def test_rounding_moves_no_mark_by_more_than_half_a_step(setup_of_three, port, diameter):
    scaled = dataclasses.replace(setup_of_three.layout, **{
        name: getattr(setup_of_three.layout, name) * diameter for name in ("x", "y", "depth")
    })
    stated = parse(f"{diameter!r} m", "length")
    section = dataclasses.replace(setup_of_three.plane.section, dimensions={"diameter": stated})
    setup = dataclasses.replace(
        setup_of_three, layout=scaled,
        plane=dataclasses.replace(setup_of_three.plane, section=section, port_depth=parse(f"{port!r} m", "length")),
    )
    plan = traverse.plan(setup)
    for name, step in (("si", 0.001), ("us", INCH / 16)):
        rounding = plan.rounding[name]
        assert np.max(np.abs(rounding.residual)) <= step / 2 * (1 + 1e-6)
        assert rounding.mark == pytest.approx(plan.mark + rounding.residual, abs=1e-12)
        assert rounding.mark / step == pytest.approx(np.round(rounding.mark / step), abs=1e-6)


@pytest.fixture(scope="module")
def setup_of_three(tmp_path_factory):
    return load_setup(jobs.write(tmp_path_factory.mktemp("plan"), {"layout": {"lines": 3, "points": 6}}))


@pytest.mark.parametrize("system", ["si", "us"])
def test_the_error_of_rounding_is_that_of_the_profile(tmp_path, system):
    """A head that stands r too deep sees (y'/y)^(1/7) of the velocity, y the distance to the nearer wall; near it r / (7 y)."""
    plan = planned(tmp_path, {"plane": {"port_depth": "50.3 mm"}, "layout": {"points": 8}})
    rounding, depth = plan.rounding[system], plan.layout.depth
    wall, moved = np.minimum(depth, 1 - depth), np.minimum(depth + rounding.residual, 1 - depth - rounding.residual)
    assert rounding.velocity_error == pytest.approx((moved / wall) ** (1 / 7) - 1, abs=1e-12)
    sign = np.where(depth < 0.5, 1.0, -1.0)
    assert rounding.velocity_error == pytest.approx(sign * rounding.residual / (7 * wall), rel=0.02)
    local = wall ** (1 / 7)
    flow = np.sum(plan.layout.weight * moved ** (1 / 7)) / np.sum(plan.layout.weight * local) - 1
    assert rounding.flow_error == pytest.approx(flow, abs=1e-12)


def test_a_rectangle_is_rounded_along_the_probe(tmp_path):
    change = {"plane": {"shape": "rectangle", "diameter": None, "width": "800 mm", "height": "500 mm", "port_depth": "0 mm"}}
    plan = planned(tmp_path, change | {"layout": {"lines": 4, "points": 4, "along": "width"}})
    assert plan.direction == pytest.approx(np.tile([1.0, 0.0], (16, 1)), abs=1e-12)
    inch, x = plan.rounding["us"], plan.layout.x
    near = lambda value: 1 - np.abs(value) / 0.4  # noqa: E731
    assert inch.velocity_error == pytest.approx((near(x + inch.residual) / near(x)) ** (1 / 7) - 1, abs=1e-12)


def test_one_point_on_a_line_has_a_direction_too(tmp_path):
    points = [{"line": "A", "point": 1, "depth": "0.2 m", "weight": 0.5}, {"line": "B", "point": 1, "depth": "0.7 m", "weight": 0.5}]
    plan = planned(tmp_path, {"layout": {"rule": "custom", "points": points, "lines": None}})
    assert plan.direction == pytest.approx(np.array([[-1.0, 0.0], [0.0, -1.0]]), abs=1e-9)
    assert plan.probe.ahead.distance == pytest.approx(0.3, abs=1e-6)


def test_a_point_beside_its_line_gets_no_error_but_a_warning(tmp_path):
    points = [
        {"line": "A", "point": 1, "x": "0.3 m", "y": "0.1 m", "weight": 0.5}, {"line": "A", "point": 2, "x": "-0.3 m", "y": "0 m", "weight": 0.5},
    ]
    plan = planned(tmp_path, {"layout": {"rule": "custom", "points": points, "lines": None}})
    assert np.isnan(plan.direction).all() and plan.rounding["si"].flow_error is None
    assert any("A1, A2 do not lie" in finding.message for finding in plan.findings)
    assert plan_json.to_dict(plan)["points"][0]["rounding"]["mm"]["velocity_error"] is None
    assert "not known" in plan_text.plan(plan)


# --- the probe

def test_the_probe_is_the_deepest_mark_and_the_grip(tmp_path):
    plan = planned(tmp_path, {"plane": {"diameter": "3 m", "port_depth": "100 mm"}, "pitot": {"stem": "25 mm"}})
    deepest = 1.5 * (1 + math.sqrt(0.75)) + 0.1
    assert plan.probe.length == pytest.approx(deepest + 0.30)
    # Reached from both ends the deepest point is the one a quarter in.
    assert plan.probe.half_length == pytest.approx(0.75 + 0.1 + 0.30)
    assert plan.probe.platform_depth == pytest.approx(deepest + 0.30 + 1.0), "longer than the least 2 m"
    assert plan.probe.wall.distance == pytest.approx(1.5 * (1 - math.sqrt(0.75)))
    assert plan.probe.ahead.distance == pytest.approx(1.5 * (1 - math.sqrt(0.75)), abs=1e-8)
    assert plan.probe.ahead.needed == pytest.approx(0.0125) and plan.probe.ahead.met is True
    # A length that is needed is never rounded down: 3.1990 m and 4.1990 m.
    assert "at least 3.20 m" in plan_text.plan(plan) and "4.20 m clear" in plan_text.plan(plan)


@pytest.mark.parametrize(("deepest", "fits"), [("0.985 m", True), ("0.9851 m", False)])
def test_the_probe_must_fit_before_the_far_wall(tmp_path, deepest, fits):
    """Deepest depth at most the diameter less the radius of the stem: 1 m less 15 mm."""
    points = [{"line": "A", "point": 1, "depth": "0.3 m", "weight": 0.5}, {"line": "A", "point": 2, "depth": deepest, "weight": 0.5}]
    plan = planned(tmp_path, {"layout": {"rule": "custom", "points": points, "lines": None}, "pitot": {"stem": "30 mm"}})
    assert plan.probe.ahead.met is fits
    assert any(finding.topic == "reach" for finding in plan.findings) is not fits
    assert ("DOES NOT FIT" in plan_text.plan(plan)) is not fits
    # The head is 30 mm thick and its axis 15 mm from the wall: nearer than one diameter.
    assert plan.probe.head.met is False


def test_points_nearer_than_the_method_allows_are_named(tmp_path):
    """EPA Method 1, 11.3.2: 1.00 in above a diameter of 24 in."""
    points = [{"line": "A", "point": 1, "depth": "0.9 in", "weight": 0.5}, {"line": "A", "point": 2, "depth": "20 in", "weight": 0.5}]
    plan = planned(tmp_path, {
        "job": {"method": "epa-2", "units": "us"}, "plane": {"diameter": "40 in"}, "layout": {"rule": "custom", "points": points, "lines": None},
    })
    assert plan.probe.wall.met is False and plan.probe.wall.needed == pytest.approx(INCH)
    assert any(finding.topic == "wall distance" and "0.90 in" in finding.message for finding in plan.findings)


@pytest.mark.parametrize(("shape", "size"), [
    ("ellipse", {"width": 1.2, "height": 0.8}), ("flat-oval", {"width": 1.2, "height": 0.5}), ("round", {"diameter": 1.2}),
])
def test_the_way_to_the_far_wall(tmp_path, shape, size):
    setup = load_setup(jobs.write(tmp_path))
    stated = {name: parse(f"{value} m", "length") for name, value in size.items()}
    section = dataclasses.replace(setup.plane.section, shape=shape, dimensions=stated)
    assert marks.room_ahead(section, np.array([0.1, 0.0]), np.array([-1.0, 0.0])) == pytest.approx(0.7, abs=1e-6)


# --- the gauge

@pytest.mark.parametrize(("head", "ratio"), [(0.05, 1.04881), (0.045, 1.05409), (0.03, math.sqrt(1 + 0.005 / 0.03))])
def test_the_sensitivity_ratio_of_equal_readings(head, ratio):
    """sqrt(1 + K / dp), EPA Method 2 equation 2-1 with K = 0.005 in: 1.04881 at 0.05 in, 1.05409 at 0.045 in (computed)."""
    assert gauge.sensitivity_ratio(np.full(12, head), 0.005) == pytest.approx(ratio, abs=6e-6)


@pytest.mark.parametrize(("head", "status"), [(0.0501, "pass"), (0.0488, "pass"), (0.0487, "fail"), (0.045, "fail"), (0.03, "fail")])
def test_the_sensitivity_of_the_gauge_is_foreseen(tmp_path, head, status):
    """Equal readings pass down to 0.04878 in, where T is 1.05 (computed from Method 2, 6.2 and equation 2-1)."""
    setup = load_setup(jobs.write(tmp_path, DESIGN | {"job": {"method": "epa-2", "units": "us"}}))
    even = dataclasses.replace(expected(setup), pressure=np.full(8, head * WATER))
    outcome = next(one for one in gauge.advice(setup, even).outcomes if one.id == "gauge-sensitivity")
    assert outcome.status == status and outcome.demanded


@pytest.mark.parametrize(("heads", "status"), [
    # Fewer than 12 readings may have one below 0.05 in, more of them a tenth; otherwise T decides: 0.4663 / 0.4414 = 1.056.
    ([0.02] * 1 + [0.06] * 7, "pass"), ([0.02] * 4 + [0.09] * 4, "fail"), ([0.02] * 2 + [0.06] * 18, "pass"), ([0.02] * 8 + [0.09] * 8, "fail"),
])
def test_a_few_low_readings_are_allowed(tmp_path, heads, status):
    setup = load_setup(jobs.write(tmp_path, DESIGN | {"job": {"method": "epa-2", "units": "us"}}))
    outcome = gauge._sensitivity(setup, np.array(heads) * WATER)
    assert np.mean(heads) >= 0.05 and outcome.status == status


@pytest.mark.parametrize("speed", ["2.2 m/s", "3.1 m/s", "5 m/s", "5.7 m/s", "6 m/s", "12 m/s"])
def test_what_is_foreseen_is_what_the_checks_find(tmp_path, speed):
    """Readings that are exactly the expected pressures must get the verdicts of the plan."""
    change = {"job": {"method": "epa-2", "units": "us"}, "design": {"velocity": speed}, "layout": {"points": 6}}
    plan = planned(tmp_path, change)
    rows = [f"{line},{point},{dp!r}" for line, point, dp in zip(plan.layout.line, plan.layout.point, plan.profile.pressure.tolist(), strict=True)]
    path = jobs.write(tmp_path, change, "line,point,differential_pressure [Pa]\n" + "\n".join(rows) + "\n")
    found = {check.id: check for check in traverse.reduce(traverse.load(path)).runs[0].checks}
    for outcome in plan.gauge.outcomes:
        if outcome.id in found:
            assert (outcome.id, outcome.status, outcome.source) == (outcome.id, found[outcome.id].status, found[outcome.id].source)
    assert {"gauge-sensitivity", "lowest-pressure"} <= {outcome.id for outcome in plan.gauge.outcomes} & set(found)


@pytest.mark.parametrize(("division", "part", "head"), [
    (0.001, 0.01, 0.025), (0.005, 0.02, 0.0625), (0.01, 0.05, 0.05), (0.02, 0.05, 0.1), (0.01, 0.01, 0.25),
])
def test_half_a_division_makes_that_part_of_the_velocity(division, part, head):
    assert gauge.coarsest_division(head, part) == pytest.approx(division)
    # To first order of the root, both ways: sqrt(1 +/- x) - 1 is x / 2 to within x^2 / 6.
    exact = (math.sqrt(1 + division / 2 / head) - math.sqrt(1 - division / 2 / head)) / 2
    assert float(gauge.velocity_error(head, division / 2)) == pytest.approx(exact, rel=0.01)


def test_the_gauge_of_the_job_is_held_against_the_pressures(tmp_path):
    plan = planned(tmp_path, DESIGN | {"gauge": {"range": "70 Pa", "division": "10 Pa"}})
    status = {outcome.id: outcome.status for outcome in plan.gauge.outcomes}
    top = 0.6 * (600 / 49 * 0.5 ** (1 / 7)) ** 2  # 73.8 Pa
    assert top > 70 and status["over-range"] == "fail" and status["headroom"] == "fail"
    low = 0.6 * (600 / 49 * (1 - math.sqrt(0.75)) ** (1 / 7)) ** 2  # 50.7 Pa: half of 10 Pa is 4.9 % of velocity
    assert status["resolution"] == "pass" and plan.gauge.own_error.max() == pytest.approx(5 / (2 * low))
    assert status["lowest-pressure"] == "pass" and status["low-velocity"] == "pass" and "gauge-sensitivity" not in status
    over = next(outcome for outcome in plan.gauge.outcomes if outcome.id == "over-range")
    assert "A2, A3, B2, B3" in over.observed
    text = " ".join(plan_text.plan(plan).split())
    assert "2 of 5 checks expected to fail" in text and "Expected to fail: points over the range" in text


@pytest.mark.parametrize(("velocity", "nominal"), [("10 m/s", 200.0), ("6 m/s", 50.0), ("15 m/s", 250.0), ("3 m/s", 10.0)])
def test_the_range_is_a_round_figure_above_one_and_a_half_times_the_highest(tmp_path, velocity, nominal):
    plan = planned(tmp_path, {"design": {"velocity": velocity}})
    assert plan.gauge.range == pytest.approx(1.5 * plan.profile.pressure.max())
    assert plan.gauge.nominal == pytest.approx(nominal)


def test_slow_flow_is_named(tmp_path):
    """Above 5 Pa and 3 m/s or not: 0.6 v^2 is 5 Pa at 2.887 m/s."""
    plan = planned(tmp_path, {"design": {"velocity": "3 m/s"}})
    failed = {outcome.id for outcome in plan.gauge.failed()}
    velocity = plan.profile.velocity
    assert ("low-velocity" in failed) == bool(velocity.min() < 3.0) and "low-velocity" in failed
    assert ("lowest-pressure" in failed) == bool(velocity.min() <= math.sqrt(5 / 0.6)) and "lowest-pressure" in failed


def test_a_point_on_the_wall_gives_no_gauge(tmp_path):
    points = [{"line": "A", "point": 1, "depth": "0 m", "weight": 0.5}, {"line": "A", "point": 2, "depth": "0.5 m", "weight": 0.5}]
    plan = planned(tmp_path, DESIGN | {"layout": {"rule": "custom", "points": points, "lines": None}})
    assert plan.gauge is None and plan.profile.pressure[0] == 0.0
    assert "a point lies on the wall" in plan_text.plan(plan)


# --- the three forms

def test_json_holds_every_point_in_si(tmp_path):
    plan = planned(tmp_path, DESIGN | {"gauge": {"range": "0.5 inH2O"}})
    data = json.loads(plan_json.text(plan))
    assert (data["format"], data["version"]) == ("traverse plan", 1)
    assert len(data["points"]) == plan.layout.size == 8
    for i, point in enumerate(data["points"]):
        assert point["mark"] == pytest.approx(point["depth"] + 0.05)
        assert point["mark_mm"] == round(point["mark"] * 1000)
        assert parse(f"{point['mark_inch']} in", "length").value == pytest.approx(point["mark"] + point["rounding"]["inch"]["residual"])
        assert point["expected_differential_pressure"] == pytest.approx(0.6 * point["expected_velocity"] ** 2)
        assert math.hypot(point["x"], point["y"]) == pytest.approx(abs(0.5 - point["depth"]))
        assert (point["line"], point["point"]) == (plan.layout.line[i], plan.layout.point[i])
    assert sum(point["weight"] for point in data["points"]) == pytest.approx(1.0)
    assert data["gauge"]["own"]["range"] == pytest.approx(0.5 * WATER)
    assert data["layout"]["lines"] == [{"line": name, "points": 4, "port_depth": 0.05} for name in "AB"]
    assert {entry["id"] for entry in data["checklists"]} == {"take", "leak-check", "zero", "before", "end"}
    assert all(check["source"] for check in data["checks"])


def test_a_port_depth_that_is_not_stated_is_null_and_said(tmp_path):
    plan = planned(tmp_path, {"plane": {"port_depth": None}})
    assert all(line["port_depth"] is None for line in plan_json.to_dict(plan)["layout"]["lines"])
    assert any("No port depth" in finding.message for finding in plan.findings)


@pytest.mark.parametrize("units", ["si", "us"])
def test_the_text_is_aligned_and_narrow(tmp_path, units):
    lines = plan_text.plan(planned(tmp_path, DESIGN | {"job": {"units": units}})).splitlines()
    start = next(i for i, line in enumerate(lines) if line.startswith("point "))
    rows = [line for line in lines[start : start + 10] if line]
    ends = {len(row) for row in rows}
    assert len(ends) == 1, "the last column is aligned to the right in every row"
    assert max(len(line) for line in lines) <= 130
    assert start < 45, "the marks begin before the second screen"


def test_the_leak_check_is_the_methods(tmp_path):
    """Method 2, 8.1: 3.0 inH2O (7.6 cm), within 0.10 in (2.5 mm) for 15 s; 8.3: mandatory after the traverse."""
    text = plan_text.plan(planned(tmp_path, {"job": {"method": "epa-2", "units": "us"}}))
    assert "3.0 inH2O" in text and "0.10 inH2O for 15 s" in text and "mandatory after" in text
    metric = plan_text.plan(planned(tmp_path, {"job": {"method": "iso-3966"}}))
    assert "7.6 cmH2O" in metric and "2.5 mmH2O" in metric and "mandatory" not in metric


def test_section_and_probe_are_drawn_to_one_scale(tmp_path):
    plan = planned(tmp_path, {"plane": {"port_depth": ["50 mm", "80 mm"]}})
    figure = plan_figure.plan(plan)
    axes = figure.axes[0]
    width, height = figure.get_size_inches()
    assert (axes.get_xlim(), axes.get_ylim()) == ((0.0, width), (0.0, height)), "one unit of the axes is one inch"
    wall = axes.patches[0].get_xy()
    scale = np.ptp(wall[:, 0])  # inches for 1 m of diameter
    assert np.ptp(wall[:, 1]) == pytest.approx(scale, rel=1e-3)
    ticks = sorted({line.get_xdata()[0] for line in axes.lines if len(line.get_xdata()) == 2 and line.get_linewidth() == pytest.approx(1.1)})
    marked = sorted({round(float(mark), 6) for mark in plan.mark})
    assert np.array(ticks) - plan_figure.MARGIN == pytest.approx(np.array(marked) * scale, rel=1e-3)
    assert any(f"1 : {1 / 0.0254 / scale:.3g}" in text.get_text() for text in axes.texts)
    assert len(plan_figure.alike(plan)) == 2 and plan_figure.alike(planned(tmp_path)) == [("A", "B")]


@given(st.lists(st.floats(1.0, 7.0), min_size=1, max_size=30))
def test_labels_keep_apart_and_on_the_page(places):
    places = sorted(places)
    moved = plan_figure.spread(places, 0.15, 0.5, 7.5)
    assert all(b - a >= 0.15 - 1e-9 for a, b in itertools.pairwise(moved))
    assert min(moved) >= 0.5 - 1e-9 and max(moved) <= 7.5 + 1e-9
    if all(b - a >= 0.15 for a, b in itertools.pairwise(places)):
        assert moved == pytest.approx(places), "labels that have room stay where they are"
