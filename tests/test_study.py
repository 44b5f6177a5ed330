"""What other layouts would have given: against exact mathematics where the duct is a formula, against the readings where it is not."""

import json

import numpy as np
import pytest

import traverse
from tests.support import jobs
from traverse import layouts, study
from traverse.errors import DomainError, JobError, LayoutError, ReadingError
from traverse.model import Layout
from traverse.physics import profiles, quadrature
from traverse.report import study_text
from traverse.study._candidates import candidates


def write(folder, rule="equal-area", lines=2, points=8, velocity=None, change=None, noise=0.0):
    """Write a job in a round duct of 1 m whose readings follow a velocity; gas of 1.2 kg/m3, C = 1."""
    at = layouts.place(rule, shape="round", width=1.0, height=1.0, lines=lines, points=points)
    speed = velocity(at.x, at.y) * (1 + noise * np.random.default_rng(2).normal(size=at.x.size))
    readings = "line,point,velocity [m/s]\n" + "".join(
        f"{line},{point},{value:.6f}\n" for line, point, value in zip(at.line, at.point, speed, strict=True))
    return jobs.write(folder, {"layout": {"rule": rule, "lines": lines, "points": points}, "readings": {"meter_density": "1.2 kg/m3"} | (change or {})}, readings)


def power(n):
    return lambda x, y: 12.0 * profiles.velocity("power", n, "round", {"diameter": 1.0}, x, y)


def one_sided(x, y):
    """12 times u = (1-r)^(1/7) + r (1-r)^(1/4) t^2 (2 pi - t)^2 / pi^4: our own constants."""
    r, t = np.hypot(x, y) / 0.5, np.mod(np.arctan2(y, x), 2 * np.pi)
    return 12.0 * ((1 - r) ** (1 / 7) + r * (1 - r) ** (1 / 4) * t**2 * (2 * np.pi - t) ** 2 / np.pi**4)


# Exact: 12 (98/120 + (4 4^3/(5 9 13)) (2 pi)^4/30/pi^4), the mean of r^2 (1-r)^(1/k) and of t^2 (2 pi - t)^2 over the circle.
ONE_SIDED_MEAN = 12.0 * (98 / 120 + 4 * 64 / (5 * 9 * 13) * 16 / 30)


def of(result, family, **wanted):
    rows = [row for row in result.of(family) if all(getattr(row, name) == value for name, value in wanted.items())]
    assert len(rows) == 1, (family, wanted)
    return rows[0]


# --- a formula in place of readings

# Errors of the layouts in percent of the exact mean, computed for the reference notes apart from this program (points per radius there).
@pytest.mark.parametrize(("profile", "expected"), [
    ("power:7", {("equal-area", 4): 1.39, ("equal-area", 6): 0.92, ("equal-area", 8): 0.68, ("equal-area", 10): 0.54, ("log-linear", 6): -0.27}),
    ("power:5", {("equal-area", 6): 1.04, ("log-linear", 4): -0.42, ("log-linear", 10): -0.25}),
    ("log:0.12", {("equal-area", 6): 1.50, ("log-linear", 4): 0.0, ("log-linear", 6): 0.0, ("log-linear", 10): 0.0}),
    ("parabola", {("equal-area", 4): 0.0, ("equal-area", 8): 0.0, ("log-linear", 6): -2.50, ("log-linear", 10): -0.94}),
])
def test_known_errors_of_layouts_in_a_circle(tmp_path, profile, expected):
    setup = traverse.load_setup(jobs.write(tmp_path, {"layout": {"rule": "equal-area", "lines": 2, "points": 6}}))
    result = study.of_formula(setup, profile)
    for (rule, points), percent in expected.items():
        assert 100 * of(result, "rules", rule=rule, points=points, lines=2).difference == pytest.approx(percent, abs=0.006)
    assert all(row.uncertainty is None for row in result.rows) and result.section_uncertainty is None


# Product of two power laws in a rectangle, percent; computed for the reference notes apart from this program.
@pytest.mark.parametrize(("profile", "expected"), [
    ("power:7", {("log-tchebycheff", 5): -0.26, ("log-tchebycheff", 6): -0.39, ("equal-area", 4): 3.47, ("equal-area", 5): 3.39, ("equal-area", 6): 2.24}),
    ("power:10", {("log-tchebycheff", 4): -0.82, ("log-tchebycheff", 7): -0.03, ("equal-area", 6): 1.74}),
])
def test_known_errors_of_layouts_in_a_rectangle(examples, profile, expected):
    (examples / "supply_duct.csv").unlink()
    result = study.of_formula(traverse.load_setup(examples / "supply_duct.toml"), profile)
    for (rule, count), percent in expected.items():
        assert 100 * of(result, "rules", rule=rule, points=count, lines=count).difference == pytest.approx(percent, abs=0.006)


def test_turning_does_nothing_to_a_symmetrical_formula(tmp_path):
    result = study.of_formula(traverse.load_setup(jobs.write(tmp_path)), "power:7")
    assert len(result.of("rotated")) == 5, "a quarter turn brings two diameters onto themselves"
    assert all(row.from_used == pytest.approx(0.0, abs=1e-12) for row in result.of("rotated"))


@pytest.mark.parametrize("text", ["", "power", "power:x", "power:0.5", "power:nan", "log:-1", "log:2", "parabola:2", "wake:3", "log:inf"])
def test_no_profile_is_refused_with_advice(text):
    with pytest.raises(JobError, match="power:7"):
        study.parse_profile(text)


def test_profiles_are_parsed():
    assert study.parse_profile("power:7") == ("power", 7.0) and study.parse_profile(" log:0.12") == ("log", 0.12)
    assert study.parse_profile("parabola")[0] == "parabola"


# --- readings

@pytest.fixture
def job(tmp_path):
    return traverse.load(write(tmp_path, velocity=one_sided, noise=0.003))


def exact_of(rule, lines, points, velocity, mean):
    at = layouts.place(rule, shape="round", width=1.0, height=1.0, lines=lines, points=points)
    return at.weight @ velocity(at.x, at.y) / mean - 1.0


def test_what_other_rules_would_have_given_is_told_within_its_uncertainty(job):
    """The field sees 16 noisy readings; every rule's true error in this profile is known."""
    result = study.study(job)
    assert result.section_mean == pytest.approx(ONE_SIDED_MEAN, abs=2 * result.section_uncertainty)
    rows = [row for row in result.of("rules") if row.lines == 2 and row.rule in {"equal-area", "log-linear", "log-tchebycheff"}]
    assert len(rows) == 12
    off = [abs(row.difference - exact_of(row.rule, 2, row.points, one_sided, ONE_SIDED_MEAN)) / row.uncertainty for row in rows]
    assert max(off) < 3 and np.mean(np.array(off) < 2) > 0.9
    assert max(row.uncertainty for row in rows) < 0.03


def test_equal_area_against_log_linear_is_settled(tmp_path):
    """In a power law of 1/7 equal areas with six points a diameter read 0.92 + 0.27 = 1.19 % more than log-linear, which is nearer."""
    result = study.study(traverse.load(write(tmp_path, lines=4, points=6, velocity=power(7), noise=0.002)))
    one = next(one for one in result.comparisons if (one.second, one.lines, one.points) == ("log-linear", 4, 6))
    assert one.difference == pytest.approx(0.0119, abs=2 * one.uncertainty) and one.uncertainty < 0.003
    assert one.told_apart and one.nearer == "log-linear"
    assert "Log-linear would have been nearer to the section mean" in study_text.verdict(result)


def test_a_wild_field_does_not_settle_it(tmp_path):
    def wild(x, y):
        return 8 + 3 * np.sin(9 * x) + 2 * np.cos(11 * y) + np.random.default_rng(0).normal(size=np.shape(x))
    result = study.study(traverse.load(write(tmp_path, velocity=wild)))
    one = next(one for one in result.comparisons if (one.second, one.points) == ("log-linear", 8))
    assert one.nearer == "" and study_text.verdict(result).count("tell") + study_text.verdict(result).count("told apart") >= 1


@pytest.mark.parametrize(("first", "second", "apart", "together", "nearer"), [
    (0.03, 0.001, 0.001, 0.002, "equal-area loses"), (0.001, -0.03, 0.001, 0.002, "equal-area"), (0.03, 0.001, 0.02, 0.002, ""),
    (0.03, 0.001, 0.001, 0.02, ""), (0.02, -0.02, 0.001, 0.001, ""), (-0.03, 0.01, None, None, "equal-area loses"),
])
def test_nearer_needs_both_signs(first, second, apart, together, nearer):
    one = study.Comparison(first="equal-area", second="equal-area loses", lines=2, points=4, first_difference=first, second_difference=second,
                           difference=first - second, uncertainty=apart, sum_uncertainty=together)
    assert one.nearer == nearer


def test_the_used_layout_and_single_lines_are_the_readings(job):
    result = study.study(job)
    speed = traverse.reduce(job).runs[0].velocity
    assert result.used.value == pytest.approx(speed.mean()) and result.used.read and result.used.from_used == 0.0
    assert [row.value for row in result.of("single")] == pytest.approx([speed[:8].mean(), speed[8:].mean()])
    inner = of(result, "wall", read=True)
    assert inner.total == 12 and inner.value == pytest.approx(np.delete(speed, [0, 7, 8, 15]).mean())
    for row in result.rows:
        assert row.difference == pytest.approx(row.value / result.section_mean - 1)
        assert row.from_used == pytest.approx(row.value / result.used.value - 1)


def test_the_used_rule_read_from_the_field_agrees_with_its_readings(job):
    result = study.study(job)
    row = of(result, "rules", rule="equal-area", points=8, lines=2)
    assert abs(row.from_used) < 2 * row.from_used_uncertainty + 1e-4
    assert row.from_used_uncertainty < 0.003, "there the field was read"


def test_rows_are_the_field_read_at_their_points(job):
    result = study.study(job)
    angle = np.radians(30.0)
    at = job.layout
    x, y = at.x * np.cos(angle) - at.y * np.sin(angle), at.x * np.sin(angle) + at.y * np.cos(angle)
    assert of(result, "rotated", rotation=pytest.approx(angle)).value == pytest.approx(at.weight @ result.field.at(x, y), rel=1e-9)
    deeper = of(result, "shifted", name="Deeper by 1 % of the diameter")
    # Line A runs from (0.5, 0) to the left, line B from (0, 0.5) downwards.
    moved = at.weight @ result.field.at(np.where(np.arange(16) < 8, at.x - 0.01, at.x), np.where(np.arange(16) < 8, at.y, at.y - 0.01))
    assert deeper.value == pytest.approx(moved, rel=1e-9)


def test_uncertainties_are_those_of_the_joint_covariance(job):
    result = study.study(job)
    row = of(result, "rules", rule="log-linear", points=6, lines=2)
    at = layouts.place("log-linear", shape="round", width=1.0, height=1.0, lines=2, points=6)
    mean, covariance = result.field.functional(at.x, at.y, at.weight, also=[quadrature.nodes("round", {"diameter": 1.0})])
    # The ratio of two functionals, to first order: JCGM 100, 5.2.2.
    slope = np.array([1 / mean[1], -mean[0] / mean[1] ** 2])
    assert row.uncertainty == pytest.approx(np.sqrt(slope @ covariance @ slope), rel=1e-6)
    assert row.from_used_uncertainty == pytest.approx(np.sqrt(covariance[0, 0]) / result.used.value, rel=1e-6)


def test_the_wall_layer(tmp_path):
    """Power law 1/7, outermost point at r = sqrt(7/8): carried on flat to the wall the mean would be larger by a known integral."""
    r = np.sqrt(7 / 8)
    flat = 0.0
    # Of 2 r (1-r)^(1/7) dr from 0 to r, and the rest of the area at the velocity there; Gauss quadrature of a smooth integrand.
    node, weight = np.polynomial.legendre.leggauss(60)
    inner = (node + 1) / 2 * r
    flat = np.sum(weight * r / 2 * 2 * inner * (1 - inner) ** (1 / 7)) + (1 - r**2) * (1 - r) ** (1 / 7)
    result = study.study(traverse.load(write(tmp_path, velocity=power(7))))
    row = of(result, "wall", total=0)
    assert row.difference == pytest.approx(flat / (98 / 120) - 1, abs=2 * row.uncertainty) and row.uncertainty < 0.004
    # The job's own rule at the nearest whole distance: one point of each end lies 32 mm from the wall, so none moves out to an inch.
    assert [row for row in result.of("wall") if "25.4" in row.name] == []


def test_impossible_shifts_are_said(tmp_path):
    result = study.study(traverse.load(write(tmp_path, points=20, velocity=power(7))))
    assert {row.name for row in result.of("shifted")} == {f"{way} by {step}" for way in ("Deeper", "Less deep") for step in ("1 % of the diameter", "5 mm")}
    assert sum("would lie in the wall" in note for note in result.notes) == 2


def test_runs(examples):
    loaded = traverse.load(examples / "boiler_stack.toml")
    every, second = study.study(loaded), study.study(traverse.reduce(loaded), run="2")
    reduction = traverse.reduce(loaded)
    assert every.basis == "mean of 3 runs" and second.basis == "run 2"
    assert second.used.value == pytest.approx(reduction.runs[1].velocity @ loaded.layout.weight)
    assert every.used.value == pytest.approx(np.mean([result.velocity @ loaded.layout.weight for result in reduction.runs]))
    with pytest.raises(ReadingError, match=r"no run '4'.*one of 1, 2, 3"):
        study.study(loaded, run="4")


def test_points_without_a_reading_are_in_no_row(tmp_path):
    path = write(tmp_path, velocity=power(7), change={"missing": "omit"})
    lines = (tmp_path / "readings.csv").read_text().splitlines()
    (tmp_path / "readings.csv").write_text("\n".join(line if not line.startswith("B,3") else "B,3,missing" for line in lines) + "\n")
    result = study.study(traverse.load(path))
    assert len(result.counted) == 15 and result.used.total == 15 and any("1 of 16 points" in note for note in result.notes)
    speed = power(7)(*(lambda at: (at.x, at.y))(traverse.load(path).layout))
    assert of(result, "single", name="Line B alone").value == pytest.approx(np.delete(speed[8:], 2).mean(), rel=3e-4)


def test_too_few_readings_are_refused(tmp_path):
    with pytest.raises(DomainError, match="at least 4 points"):
        study.study(traverse.load(write(tmp_path, lines=1, points=2, velocity=power(7))))


def test_the_same_job_gives_the_same_study(job):
    first, second = study.study(job), study.study(job)
    assert json.dumps(first.to_dict(), allow_nan=False) == json.dumps(second.to_dict(), allow_nan=False)
    data = first.to_dict()
    assert data["format"] == "traverse study" and data["version"] == 1 and data["job"]["sha256"] == job.source.sha256
    assert {row["family"] for row in data["rows"]} <= set(data["families"])


def test_the_limits_are_said(job):
    text = study_text.study(study.study(job))
    assert "between the points" in text and "does not cover" in text and "wall laws" in text


# --- which layouts are tried

def layout_of(placed, rule):
    return Layout(rule=rule, title=placed.title, source=placed.source, x=placed.x, y=placed.y, depth=placed.depth, weight=placed.weight,
                  line=placed.line, point=placed.point)


def tried(shape, size, rule, *, lines, points, **more):
    box = {"width": size.get("diameter", size.get("width")), "height": size.get("diameter", size.get("height"))}
    placed = layout_of(layouts.place(rule, shape=shape, **box, lines=lines, points=points, **more), rule)
    return placed, candidates(shape, size, placed, np.arange(placed.size))[0]


def test_every_rule_of_the_shape_is_tried():
    _, found = tried("round", {"diameter": 0.5}, "equal-area", lines=2, points=6)
    names = {rule for one in found if one.family == "rules" for rule in (one.rule, *one.also)}
    assert names == {name for name, rule in layouts.rules().items() if rule.round is not None}
    for name in ("equal-area", "log-linear", "log-tchebycheff"):
        assert 2 <= sum(one.family == "rules" and name in (one.rule, *one.also) for one in found) <= 5


def test_rules_with_the_same_points_are_one_row():
    _, found = tried("rectangle", {"width": 0.8, "height": 0.5}, "log-tchebycheff", lines=5, points=5)
    rows = [one for one in found if one.family == "rules"]
    for i, one in enumerate(rows):
        for other in rows[i + 1:]:
            if len(one.x) == len(other.x):
                assert not np.allclose(np.sort(one.x + 7 * one.y), np.sort(other.x + 7 * other.y), atol=1e-9)
    assert len({(one.rule, one.lines, one.points) for one in rows}) == len(rows)


@pytest.mark.parametrize("angles", [(0.0, np.pi / 2), (np.pi / 4, 3 * np.pi / 4), (np.pi, np.pi / 3)])
def test_other_rules_stand_on_the_same_lines(angles):
    _, found = tried("round", {"diameter": 0.5}, "equal-area", lines=2, points=6, angles=angles)
    one = next(one for one in found if one.family == "rules" and one.rule == "log-linear" and one.points == 6)
    expected = layouts.place("log-linear", shape="round", width=0.5, height=0.5, lines=2, points=6, angles=angles)
    assert (one.x, one.y) == (pytest.approx(expected.x), pytest.approx(expected.y))


@pytest.mark.parametrize("along", ["height", "width"])
def test_deeper_is_away_from_the_port(along):
    placed, found = tried("rectangle", {"width": 0.8, "height": 0.5}, "equal-area", lines=4, points=3, along=along)
    one = next(one for one in found if one.name == "Deeper by 5 mm")
    assert one.x - placed.x == pytest.approx(0.005 if along == "width" else 0.0) and one.y - placed.y == pytest.approx(-0.005 if along == "height" else 0.0)
    assert [other for other in found if other.family == "rotated"] == []


def test_a_line_of_one_point_has_a_direction():
    placed, found = tried("rectangle", {"width": 0.8, "height": 0.5}, "equal-area", lines=6, points=1, along="width")
    one = next(one for one in found if one.name == "Deeper by 5 mm")
    assert one.x - placed.x == pytest.approx(0.005) and one.y == pytest.approx(placed.y)


def test_weights_sum_to_one_everywhere():
    for shape, size in (("round", {"diameter": 0.5}), ("rectangle", {"width": 0.8, "height": 0.5})):
        _, found = tried(shape, size, "equal-area", lines=2, points=6)
        assert all(one.weight.sum() == pytest.approx(1.0) for one in found)
        assert found[0].family == "used" and {one.long for one in found[:-1]} == {False}


def test_lines_beside_the_centre_turn_and_move_but_are_no_diameters():
    """Custom points on two parallel chords: other rules take their own lines from 0 degrees."""
    x, y = np.array([-0.1, -0.1, -0.1, 0.1, 0.1, 0.1]), np.array([0.15, 0.0, -0.15] * 2)
    placed = layouts.place_custom(shape="round", width=0.5, height=0.5, line=list("AAABBB"), point=[1, 2, 3] * 2, weight=np.full(6, 1 / 6), x=x, y=y)
    found, _ = candidates("round", {"diameter": 0.5}, layout_of(placed, "custom"), np.arange(6))
    one = next(one for one in found if one.family == "rules" and one.rule == "log-linear" and one.points == 4)
    expected = layouts.place("log-linear", shape="round", width=0.5, height=0.5, lines=2, points=4)
    assert one.x == pytest.approx(expected.x)
    assert not [other for other in found if other.family == "fewer"] and [other for other in found if other.family == "rotated"]


@pytest.mark.parametrize(("shape", "size"), [
    ("ellipse", {"width": 1.2, "height": 0.6}), ("annulus", {"diameter": 1.0, "core": 0.4}), ("flat-oval", {"width": 1.4, "height": 0.5}),
])
def test_other_shapes(shape, size):
    box = {"width": size.get("diameter", size.get("width")), "height": size.get("diameter", size.get("height"))}
    extra = {"core": size["core"]} if shape == "annulus" else {}
    for rule in layouts.rules():
        for lines, points in ((2, 6), (4, 3), (3, 3), (0, 0)):
            try:
                placed = layout_of(layouts.place(rule, shape=shape, **box, lines=lines, points=points, **extra), rule)
            except LayoutError:
                continue
            found, _ = candidates(shape, size, placed, np.arange(placed.size))
            assert any(one.family == "rules" and rule in (one.rule, *one.also) for one in found)
            assert {"used", "shifted"} <= {one.family for one in found}
            return
    pytest.skip(f"no rule for a {shape}")
