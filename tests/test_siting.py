"""Straight lengths and numbers of points by every rule: both sides of every step, against the figures of the documents."""

import math

import pytest

from tests.support import jobs
from traverse.errors import LayoutError
from traverse.importers import load, load_setup
from traverse.siting import assess, points_wanted


def setup(tmp_path, **plane):
    return load_setup(jobs.write(tmp_path, {"plane": plane}))


def verdicts(tmp_path, before, after, diameter="1 m"):
    found = assess(setup(tmp_path, diameter=diameter, upstream=f"{before} m", downstream=f"{after} m"))
    return {one.rule: one.verdict for one in found}


@pytest.mark.parametrize(("before", "after", "verdict"), [
    (8, 2, "met"), (7.99, 2, "met with a condition"), (8, 1.99, "met with a condition"), (2, 0.5, "met with a condition"),
    (1.99, 2, "not met"), (8, 0.49, "not met"),
])
def test_method_1(tmp_path, before, after, verdict):
    """8 and 2 preferred, 2 and 0.5 least: 40 CFR 60 App. A-1 Method 1, 11.1 (read)."""
    assert verdicts(tmp_path, before, after)["epa-1"] == verdict


@pytest.mark.parametrize(("rule", "before", "after"), [
    ("en-15259", 5, 2), ("iso-3966", 20, 5), ("ashrae-111", 7.5, 3), ("jis-b-8330", 3, 1.5), ("as-4323", 6, 2), ("wa-1983", 2, 2),
])
def test_each_rule_on_both_sides_of_its_lengths(tmp_path, rule, before, after):
    assert verdicts(tmp_path, before, after)[rule] == "met"
    assert verdicts(tmp_path, before * 0.999, after)[rule] == "not met"
    assert verdicts(tmp_path, before, after * 0.999)[rule] == "not met"


def test_rules_that_ask_for_one_side_only_or_have_a_condition(tmp_path):
    assert verdicts(tmp_path, 1.5, 1.5)["jis-z-8808"] == "met" and verdicts(tmp_path, 1.49, 9)["jis-z-8808"] == "not met"
    assert [verdicts(tmp_path, b, 9)["ufgs"] for b in (7.5, 7.4, 5, 4.9)] == ["met", "met with a condition", "met with a condition", "not met"]
    assert [verdicts(tmp_path, b, a)["trade"] for b, a in ((10, 3), (5, 1), (4.9, 3))] == ["met", "met with a condition", "not met"]


def test_lengths_that_are_not_stated(tmp_path):
    found = {one.rule: one for one in assess(setup(tmp_path, upstream="30 m"))}
    assert found["iso-3966"].verdict == "not stated" and found["ufgs"].verdict == "met"
    short = {one.rule: one.verdict for one in assess(setup(tmp_path, upstream="1 m"))}
    assert short["epa-1"] == "not met"
    assert all(one.verdict != "met" for one in assess(setup(tmp_path)))


def test_small_ducts_have_a_rule_of_their_own(tmp_path):
    small, usual = verdicts(tmp_path, 8, 2, "0.2 m"), verdicts(tmp_path, 8, 2, "0.3 m")
    assert "epa-1a" in small and "epa-1" not in small and "epa-1a" not in usual and "epa-1" in usual


def test_en_15259_says_what_the_top_of_a_stack_needs(tmp_path):
    found = {one.rule: one for one in assess(setup(tmp_path, upstream="9 m", downstream="3 m"))}
    assert found["en-15259"].verdict == "met" and "top of a stack" in found["en-15259"].allowed


def test_the_length_behind_a_fan_goes_by_the_velocity(tmp_path):
    """AMCA 201, from memory: 2.5 diameters up to 2500 ft/min, one more for every 1000 ft/min."""
    area = math.pi / 4
    for speed, wanted in ((2000, "2.5 before"), (2500, "2.5 before"), (4500, "4.5 before")):
        job = load_setup(jobs.write(tmp_path, {"plane": {"upstream": "4.4 m"}, "design": {"actual_flow": f"{speed * 0.00508 * area} m3/s"}}))
        found = next(one for one in assess(job) if one.rule == "amca-201")
        assert found.wanted == wanted and found.verdict == ("not met" if speed == 4500 else "met")


def test_the_diameters_are_named(tmp_path):
    """48 x 30 in: hydraulic 36.923 in (Method 1 equation 1-1), mean of the sides 39 in."""
    job = load_setup(jobs.write(tmp_path, {
        "plane": {"shape": "rectangle", "diameter": None, "width": "48 in", "height": "30 in", "upstream": "100 in", "downstream": "80 in"},
        "layout": {"lines": 4, "points": 3}}))
    found = {one.rule: one for one in assess(job)}
    assert found["epa-1"].diameter / 0.0254 == pytest.approx(36.923, abs=5e-4) and found["epa-1"].diameter_name == "hydraulic diameter"
    assert found["wa-1983"].diameter / 0.0254 == pytest.approx(39.0) and found["wa-1983"].diameter_name == "mean of width and height"
    assert found["epa-1"].before == pytest.approx(100 / 36.923, rel=1e-4)


def counts(tmp_path, diameter=None, width=None, height=None, before=20, after=5):
    if diameter is not None:
        change = {"plane": {"diameter": f"{diameter} m", "upstream": f"{before * diameter} m", "downstream": f"{after * diameter} m"}}
    else:
        d = 2 * width * height / (width + height)
        change = {"plane": {"shape": "rectangle", "diameter": None, "width": f"{width} m", "height": f"{height} m", "upstream": f"{before * d} m",
                            "downstream": f"{after * d} m"}, "layout": {"lines": 2, "points": 2}}
    found = points_wanted(load_setup(jobs.write(tmp_path, change)))
    return {(one.rule, one.title): one.least for one in found} | {one.rule: one.least for one in reversed(found)}


@pytest.mark.parametrize(("before", "after", "velocity", "particulate"), [
    (8, 2, 12, 12), (7, 1.75, 12, 12), (6.99, 1.75, 12, 16), (6, 1.5, 12, 16), (5.99, 1.5, 16, 20), (5, 1.25, 16, 20), (4.99, 1.25, 16, 24),
    (2, 0.5, 16, 24), (8, 0.6, 16, 24), (1.99, 0.5, 40, 40),
])
def test_points_of_method_1_by_distance(tmp_path, before, after, velocity, particulate):
    found = counts(tmp_path, 1.0, before=before, after=after)
    assert found["epa-1", "EPA Method 1, velocity"] == velocity and found["epa-1", "EPA Method 1, particulate"] == particulate


def test_points_of_method_1_by_size(tmp_path):
    assert [counts(tmp_path, d)["epa-1"] for d in (0.31, 0.61, 0.62)] == [8, 8, 12]
    assert counts(tmp_path, width=0.5, height=0.5)["epa-1"] == 9 and counts(tmp_path, width=1.0, height=1.0)["epa-1"] == 12
    assert counts(tmp_path, 0.29)["epa-1a"] == 8 and counts(tmp_path, width=0.2, height=0.2)["epa-1a"] == 9
    assert counts(tmp_path, 0.2, before=3, after=1)["epa-1a"] == 16 and counts(tmp_path, 0.09)["epa-1a"] is None
    us = load_setup(jobs.write(tmp_path, {"job": {"units": "us"}, "plane": {"diameter": "24.01 in", "upstream": "20 m", "downstream": "5 m"}}))
    assert points_wanted(us)[0].least == 12
    assert counts(tmp_path, 0.5, before=1, after=1)["epa-1"] is None  # neither the simplified nor the alternative procedure
    assert counts(tmp_path, width=1.0, height=1.0, before=1, after=1)["epa-1"] == 42


def across(area):
    return 2 * math.sqrt(area / math.pi)


@pytest.mark.parametrize(("rule", "sizes"), [
    ("en-15259", {across(0.096): 1, 0.352: 4, across(0.101): 4, across(0.949): 4, across(0.999): 8, across(1.5): 8, across(1.999): 8, across(2.1): 12, across(4.0): 16, across(9.0): 20}),
    ("iso-10780", {0.349: 1, 0.35: 5, 0.70: 5, 0.71: 9, 1.0: 9, 1.01: 13, 2.0: 13, 2.01: 17}),
    ("jis-z-8808", {1.0: 4, 1.01: 8, 2.0: 8, 2.01: 12, 4.0: 12, 4.01: 16, 4.5: 16, 4.51: 20}),
    ("gb-16157", {0.29: 1, 0.3: 2, 0.61: 4, 1.01: 6, 2.01: 8, 4.01: 10}),
    ("wa-1983", {across(0.19): 4, across(0.2): 8, across(2.0): 8, across(2.5): 10}),
    ("acgih", {0.15: 12, 0.16: 20, 1.2: 20, 1.23: 40}), ("amca-203", {2.4: 24, 2.5: 36, 3.7: 48}), ("ashrae-111", {0.25: 12, 0.26: 16}),
    ("iso-3966", {0.5: 12}),
])
def test_points_by_size_in_a_round_duct(tmp_path, rule, sizes):
    for diameter, least in sizes.items():
        assert counts(tmp_path, diameter)[rule] == least, diameter


@pytest.mark.parametrize(("rule", "sizes"), [
    ("en-15259", {(0.3, 0.3): 1, (0.5, 0.5): 4, (1.2, 1.2): 9, (1.5, 1.5): 12, (2.0, 2.0): 16, (3.0, 3.0): 20}),
    ("iso-10780", {(0.29, 0.3): 1, (0.3, 0.3): 4, (0.7, 0.6): 9, (1.3, 1.2): 16, (3.0, 0.5): 27}),
    ("jis-z-8808", {(0.5, 0.5): 1, (1.0, 0.25): 1, (1.0, 1.0): 4, (2.0, 1.0): 6, (4.0, 1.0): 12, (4.0, 2.0): 8, (7.0, 3.0): 20}),
    ("gb-16157", {(0.3, 0.3): 1, (3.0, 0.3): 7, (2.0, 1.0): 6, (5.0, 4.0): 20}),
    ("ashrae-111", {(0.7, 0.7): 25, (0.8, 0.8): 36, (1.0, 0.5): 35}), ("amca-203", {(1.0, 1.0): 24, (4.0, 2.0): 29}),
    ("wa-1983", {(0.3, 0.3): 4, (1.0, 1.0): 8, (2.0, 2.0): 16}), ("iso-3966", {(1.0, 1.0): 25}), ("acgih", {(0.3, 0.3): 16, (0.8, 0.7): 30}),
])
def test_points_by_size_in_a_rectangle(tmp_path, rule, sizes):
    for (width, height), least in sizes.items():
        assert counts(tmp_path, width=width, height=height)[rule] == least, (width, height)


def test_a_shared_centre_is_one_point(tmp_path):
    job = load_setup(jobs.write(tmp_path, {"plane": {"diameter": "4.6 m"}, "layout": {"rule": "general", "lines": 4, "points": 5}}))
    found = {one.rule: one for one in points_wanted(job)}
    assert job.layout.size == 20 and found["jis-z-8808"].ours == 17 and found["jis-z-8808"].met is False
    assert found["en-15259"].ours == 16


@pytest.mark.parametrize("plane", [{"shape": "annulus", "core": "0.3 m"}, {"shape": "flat-oval", "diameter": None, "width": "1 m", "height": "0.7 m"}])
def test_shapes_the_documents_do_not_treat_have_no_count(tmp_path, plane):
    found = points_wanted(load_setup(jobs.write(tmp_path, {"plane": {**plane, "upstream": "20 m", "downstream": "20 m"}})))
    assert all(one.least is None and one.note for one in found)


@pytest.mark.parametrize(("rule", "plane", "lines", "points"), [
    ("en-15259", {"diameter": "1 m"}, 2, 2), ("en-15259", {"diameter": "1.5 m"}, 2, 4), ("en-15259", {"diameter": "3 m"}, 2, 10),
    ("iso-10780", {"diameter": "0.5 m"}, 2, 3), ("iso-10780", {"diameter": "3 m"}, 2, 9), ("jis-z-8808", {"diameter": "3 m"}, 2, 6),
    ("small-duct", {"diameter": "0.2 m"}, 2, 4), ("alternative-site", {"diameter": "1 m"}, 2, 20),
    ("iso-10780", {"shape": "rectangle", "diameter": None, "width": "1 m", "height": "1 m"}, 3, 3),
    ("en-15259", {"shape": "rectangle", "diameter": None, "width": "4 m", "height": "1 m"}, 6, 3),
    ("iso-10780", {"shape": "rectangle", "diameter": None, "width": "3 m", "height": "0.5 m"}, 9, 3),
    ("jis-z-8808", {"shape": "rectangle", "diameter": None, "width": "2 m", "height": "1 m"}, 3, 2),
    ("jis-z-8808", {"shape": "rectangle", "diameter": None, "width": "7 m", "height": "3 m"}, 5, 4),
    ("small-duct", {"shape": "rectangle", "diameter": None, "width": "0.2 m", "height": "0.2 m"}, 3, 3),
    ("alternative-site", {"shape": "rectangle", "diameter": None, "width": "1.2 m", "height": "1 m"}, 7, 6),
    ("en-15259", {"shape": "rectangle", "diameter": None, "width": "0.8 m", "height": "0.8 m"}, 2, 2),
    ("en-15259", {"shape": "rectangle", "diameter": None, "width": "3 m", "height": "3 m"}, 4, 5),
    ("iso-10780", {"shape": "rectangle", "diameter": None, "width": "0.5 m", "height": "3 m"}, 3, 9),
])
def test_a_rule_sets_lines_and_points_where_the_job_leaves_them_to_it(tmp_path, rule, plane, lines, points):
    job = load_setup(jobs.write(tmp_path, {"plane": plane, "layout": {"rule": rule, "lines": None, "points": None}}))
    assert (len(job.layout.lines), job.layout.size) == (lines, lines * points)
    assert any("by the rule" in finding.message for finding in job.layout.findings)


def test_a_single_point_is_not_set_silently(tmp_path):
    with pytest.raises(LayoutError, match="single point"):
        load_setup(jobs.write(tmp_path, {"plane": {"diameter": "0.3 m"}, "layout": {"rule": "iso-10780", "lines": None, "points": None}}))


def test_depths_of_another_rule_are_found_in_the_readings(tmp_path):
    """The plan says log-Tchebycheff, the marks are the log-linear ones that trade tables print under that name."""
    readings = "line,depth [mm],differential_pressure [Pa]\n" + "".join(
        f"{line},{depth},50\n" for line in "AB" for depth in (32, 135, 321, 679, 865, 968))
    job = load(jobs.write(tmp_path, {"layout": {"rule": "log-tchebycheff", "points": 6}}, readings))
    said = [finding.message for finding in job.findings if finding.topic == "depths"]
    assert any("are those of Log-linear, 6 points" in text and "log-tchebycheff" in text for text in said)
    right = load(jobs.write(tmp_path, {"layout": {"rule": "log-linear", "points": 6}}, readings))
    assert not [finding for finding in right.findings if finding.topic == "depths"]


def test_marks_off_the_outside_of_the_port_are_explained(tmp_path):
    readings = "line,depth [mm],differential_pressure [Pa]\n" + "".join(
        f"{line},{depth + 102},50\n" for line in "AB" for depth in (32, 135, 321, 679, 865, 968))
    with pytest.raises(Exception, match="port depth included"):
        load(jobs.write(tmp_path, {"layout": {"rule": "equal-area", "points": 6}}, readings))
