"""[pitot] through the whole program: legs, calibrations, directional probes, corrections by the size of the probe."""

import math

import numpy as np
import pytest
from scipy.optimize import brentq

import traverse
from tests.support import jobs
from traverse.errors import TraverseError

FLUE = {"kind": "flue-gas", "oxygen": "7 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None}
CURVE = "velocity [m/s],coefficient\n5,0.80\n10,0.84\n20,0.85\n"
PITCH = "pitch [deg],F1,F2\n" + "".join(f"{p},{0.03 * p + 0.01},{0.95 - 0.0001 * p * p}\n" for p in range(-30, 31, 5))
PAIRS = "side,standard_pressure [inH2O],s_type_pressure [inH2O]\n" + "".join(
    f"{side},0.5,{p}\n" for side, row in (("A", (0.692, 0.690, 0.694)), ("B", (0.680, 0.682, 0.684))) for p in row)
POINTS = [(f"{n}", k, 150 + 10 * k + (n == "B") * 7, 0.03 * p + 0.01, p, 3 * k - 5, 270 + 10 * k) for n in "AB"
          for k, p in zip((1, 2, 3, 4), (-12, -3, 0, 9), strict=True)]
BY_PRESSURE = "line,point,P1-P2 [Pa],P4-P5 [Pa],yaw [deg],temperature [degF]\n" + "".join(
    f"{n},{k},{dp},{f1 * dp!r},{yaw},{t}\n" for n, k, dp, f1, _, yaw, t in POINTS)
BY_ANGLE = "line,point,P1-P2 [Pa],pitch [deg],yaw [deg],temperature [degF]\n" + "".join(
    f"{n},{k},{dp},{p},{yaw},{t}\n" for n, k, dp, _, p, yaw, t in POINTS)


def load(folder, change, readings=jobs.READINGS, calibration=None):
    if calibration is not None:
        (folder / "probe.csv").write_text(calibration, encoding="utf-8")
    return traverse.load(jobs.write(folder, change, readings))


def reduced(folder, change, readings=jobs.READINGS, calibration=None):
    return traverse.reduce(load(folder, change, readings, calibration)).to_dict()


def calibrated(kind="pitot-static", **more):
    return {"pitot": {"type": kind, "coefficient": None, "calibration": "probe.csv", **more}}


def said(result, topic):
    return " | ".join(f"{f['level']}: {f['message']}" for f in result["findings"] if f["topic"] == topic)


def outcome(result, name):
    return next(check for check in result["runs"][0]["checks"] if check["id"] == name)


# --- legs and pairs of an S-type tube

@pytest.mark.parametrize(("leg", "value"), [("A", 0.838), ("B", 0.842), ("mean", 0.840)])
def test_legs(tmp_path, leg, value):
    result = reduced(tmp_path, {"pitot": {"type": "s-type", "coefficient": None, "legs": {"A": 0.838, "B": 0.842}, "leg": leg}})
    plain = reduced(tmp_path, {"pitot": {"type": "s-type", "coefficient": value}})
    assert jobs.value(result, "actual_flow") == pytest.approx(jobs.value(plain, "actual_flow"), rel=1e-14)
    assert f"{value:.4f}" in said(result, "pitot")
    assert outcome(result, "pitot-calibration")["status"] == "pass"


def test_legs_too_far_apart_fail_the_check(tmp_path):
    """|A - B| at most 0.01, Method 2, 10.1.3 (read)."""
    change = {"pitot": {"type": "s-type", "coefficient": None, "legs": {"A": 0.830, "B": 0.841}, "leg": "mean"}}
    found = outcome(reduced(tmp_path, change), "pitot-calibration")
    assert found["status"] == "fail" and "0.0110" in found["observed"]
    one = {"pitot": {"type": "s-type", "coefficient": None, "legs": {"A": 0.84}}}
    assert outcome(reduced(tmp_path, one), "pitot-calibration")["status"] == "not evaluated"


def test_each_run_has_its_own_leg(tmp_path):
    readings = jobs.READINGS.replace("line,", "run,line,").replace("\nA", "\n1,A").replace("\nB", "\n1,B")
    readings += "".join("2" + row[1:] + "\n" for row in readings.splitlines()[1:])
    change = {"pitot": {"type": "s-type", "coefficient": None, "legs": {"A": 0.80, "B": 0.84}, "leg": "A"}, "run": [{"name": "2", "leg": "B"}]}
    result = reduced(tmp_path, change, readings)
    first, second = (jobs.value(result, "mean_root_differential_pressure", run) for run in (0, 1))
    assert first == second
    # x of the order of 1e-4: compressibility moves the ratio by some 1e-5.
    assert jobs.value(result, "actual_flow", 1) / jobs.value(result, "actual_flow", 0) == pytest.approx(0.84 / 0.80, rel=1e-4)
    change["run"] = [{"name": "2", "coefficient": 0.84}]
    assert jobs.value(reduced(tmp_path, change, readings), "actual_flow", 1) == jobs.value(result, "actual_flow", 1), "replaces the legs"


@pytest.mark.parametrize("leg", ["A", "B", "mean"])
def test_pairs(tmp_path, leg):
    """Cp(s) = Cp(std) sqrt(dp_std/dp_s), eq. 2-3; means of the sides; deviations eq. 2-5."""
    sides = {side: [0.985 * math.sqrt(0.5 / p) for p in row] for side, row in (("A", (0.692, 0.690, 0.694)), ("B", (0.680, 0.682, 0.684)))}
    mean = {side: sum(row) / 3 for side, row in sides.items()}
    value = (mean["A"] + mean["B"]) / 2 if leg == "mean" else mean[leg]
    job = load(tmp_path, calibrated("s-type", leg=leg, standard_coefficient=0.985), calibration=PAIRS)
    assert job.runs[0].pitot.coefficient == pytest.approx(value, rel=1e-14)
    deviation = sum(abs(c - mean["A"]) for c in sides["A"]) / 3
    assert job.runs[0].pitot.calibration.sides["A"].deviation == pytest.approx(deviation, rel=1e-10)
    assert [source.name for source in job.sources] == ["job.toml", "readings.csv", "probe.csv"]
    found = outcome(traverse.reduce(job).to_dict(), "pitot-calibration")
    assert found["status"] == "pass" and f"mean deviation A {deviation:.4f}" in found["observed"]


def test_pairs_that_scatter_fail_the_check(tmp_path):
    spread = PAIRS.replace("A,0.5,0.692", "A,0.5,0.64").replace("A,0.5,0.69\n", "A,0.5,0.74\n")
    found = outcome(reduced(tmp_path, calibrated("s-type", leg="B"), calibration=spread), "pitot-calibration")
    assert found["status"] == "fail" and "side a scatters" in found["message"].lower()


def test_the_standard_tube_is_taken_as_099_with_a_word(tmp_path):
    result = reduced(tmp_path, calibrated("s-type", leg="A"), calibration=PAIRS)
    assert "0.99 (Method 2, 10.2)" in said(result, "pitot")


# --- a coefficient over velocity

@pytest.mark.parametrize("method", ["exact", "ashrae-111"])
def test_curve(tmp_path, method):
    """Each point's velocity v = C(v) sqrt(2 dp/rho) k, solved by bisection on the interpolated curve."""
    result = reduced(tmp_path, calibrated() | {"job": {"method": method}, "gas": {"density": "1.2 kg/m3"}}, calibration=CURVE)
    pressures = (50, 60, 62, 48, 49, 61, 63, 52)
    for point, dp in zip(result["runs"][0]["points"], pressures, strict=True):
        def speed(c, dp=dp):
            if method == "ashrae-111":
                return c * math.sqrt(2 * dp / 1.2)
            x = c * c * dp / 101325
            return math.sqrt(2 * 3.5 * 101325 / 1.2 * ((1 + x) ** (1 / 3.5) - 1))
        wanted = brentq(lambda v, speed=speed: v - speed(np.interp(v, [5, 10, 20], [0.80, 0.84, 0.85])), 1, 30, xtol=1e-13, rtol=1e-14)
        assert point["velocity"] == pytest.approx(wanted, rel=1e-11)
        assert point["coefficient"] == pytest.approx(np.interp(wanted, [5, 10, 20], [0.80, 0.84, 0.85]), rel=1e-11)
    assert "curve at each point's own velocity" in said(result, "pitot")


def test_a_flat_curve_is_a_number(tmp_path):
    flat = "velocity [ft/min],coefficient\n500,0.84\n3000,0.84\n"
    hot = {"gas": FLUE, "conditions": {"temperature": "150 degC"}}
    for change in ({}, {"job": {"method": "epa-2", "units": "us"}} | hot, {"job": {"method": "epa-2g"}} | hot):
        plain = reduced(tmp_path, change | {"pitot": {"type": "s-type", "coefficient": 0.84}})
        result = reduced(tmp_path, change | calibrated("s-type"), calibration=flat)
        assert jobs.value(result, "actual_flow") == pytest.approx(jobs.value(plain, "actual_flow"), rel=1e-14)
        if change:
            assert jobs.value(result, "dry_standard_flow") == pytest.approx(jobs.value(plain, "dry_standard_flow"), rel=1e-14)


def test_up_to_a_tenth_beyond_is_a_finding_farther_an_error(tmp_path):
    """Velocities are 7.5 to 8.6 m/s."""
    near = "velocity [m/s],coefficient\n8.2,0.84\n20,0.86\n"
    result = reduced(tmp_path, calibrated(), calibration=near)
    assert "attention: run 1: A1, A4, B1" in said(result, "pitot")
    low = next(point for point in result["runs"][0]["points"] if (point["line"], point["point"]) == ("A", 4))
    assert low["coefficient"] == 0.84 and low["velocity"] < 8.2
    with pytest.raises(TraverseError, match=r"run 1, calibration probe.csv.*velocity beyond the calibration: A4 7\.51 m/s, B1 7"):
        reduced(tmp_path, calibrated(), calibration="velocity [m/s],coefficient\n8.5,0.84\n20,0.86\n")
    with pytest.raises(TraverseError, match="B3"):
        reduced(tmp_path, calibrated(), calibration="velocity [m/s],coefficient\n1,0.84\n7,0.86\n")


def test_a_point_without_flow_needs_no_calibration(tmp_path):
    readings = jobs.READINGS.replace("A,1,50", "A,1,0").replace("B,4,52", "B,4,-3")
    points = reduced(tmp_path, calibrated(), readings, CURVE)["runs"][0]["points"]
    assert points[0]["velocity"] == 0.0 and points[-1]["velocity"] == 0.0


def test_uncertainty_of_a_curve(tmp_path):
    """A percentage moves the whole curve. A gain of the gauge acts through C(v) too: dv/v = dp/(2 p) / (1 - dlnC/dlnv)."""
    steep = "velocity [m/s],coefficient\n4,0.70\n20,0.90\n"
    result = reduced(tmp_path, calibrated() | {"job": {"method": "ashrae-111"}, "uncertainty": {"differential_pressure": {"calibration": "1 %"}}},
                     calibration=steep)
    points, weight = result["runs"][0]["points"], 1 / 8
    slope = 0.2 / 16
    expected = sum(weight * p["velocity"] * 0.005 / (1 - slope * p["velocity"] / p["coefficient"]) for p in points)
    assert result["runs"][0]["quantities"]["mean_velocity"]["standard_uncertainty"] == pytest.approx(expected, rel=1e-6)
    result = reduced(tmp_path, calibrated() | {"job": {"method": "ashrae-111"}, "uncertainty": {"coefficient": "1 %"}}, calibration=steep)
    expected = sum(weight * p["velocity"] * 0.01 / (1 - slope * p["velocity"] / p["coefficient"]) for p in points)
    assert result["runs"][0]["quantities"]["mean_velocity"]["standard_uncertainty"] == pytest.approx(expected, rel=1e-6)


def test_a_plan_expects_the_coefficient_of_the_design_velocity(tmp_path):
    (tmp_path / "probe.csv").write_text(CURVE, encoding="utf-8")
    path = jobs.write(tmp_path, calibrated() | {"design": {"velocity": "12 m/s"}})
    assert traverse.plan(traverse.load_setup(path)).profile.coefficient == pytest.approx(0.842, rel=1e-12)


# --- directional probes

def three(method="epa-2f", units="us", **more):
    return calibrated("three-dimensional", **more) | {"job": {"method": method, "units": units}, "gas": FLUE, "plane": {"diameter": "60 in"}}


@pytest.mark.parametrize("units", ["us", "si"])
@pytest.mark.parametrize("readings", [BY_PRESSURE, BY_ANGLE])
def test_method_2f_point_by_point(tmp_path, units, readings):
    """va = Kp F2 sqrt((P1-P2) T/(Ps Ms)) cos(yaw) cos(pitch), eq. 2F-9; Qsw 2F-10, Qsd 2F-11. Constants as printed, from memory."""
    found = reduced(tmp_path, three(units=units), readings, PITCH)["runs"][0]["quantities"]
    kp, zero, standard, std_pressure = (85.49, 460.0, 528.0, 29.92) if units == "us" else (34.97, 273.0, 293.0, 760.0)
    mercury, water, speed = (3386.389, 249.08891, 0.3048) if units == "us" else (133.322387, 9.80665, 1.0)
    ps = 101325 / mercury
    ms = (0.44 * 12 + 0.32 * 7 + 0.28 * 81) * 0.9 + 18.0 * 0.1
    velocities, warm = [], []
    for _, _, dp, _, pitch, yaw, t in POINTS:
        own = t + zero if units == "us" else (t - 32) / 1.8 + zero
        warm.append(own)
        f2 = np.interp(pitch, range(-30, 31, 5), [0.95 - 0.0001 * p * p for p in range(-30, 31, 5)])
        velocities.append(kp * f2 * math.sqrt(dp / water * own / (ps * ms)) * math.cos(math.radians(yaw)) * math.cos(math.radians(pitch)))
    mean = sum(velocities) / 8
    assert found["mean_velocity"]["value"] == pytest.approx(mean * speed, rel=2e-6)
    wet = found["actual_flow"]["value"] * (standard / (sum(warm) / 8)) * (ps / std_pressure)
    assert found["standard_flow"]["value"] == pytest.approx(wet, rel=2e-6)
    assert found["dry_standard_flow"]["value"] == pytest.approx(0.9 * wet, rel=2e-6)


def test_pitch_from_pressures_and_pitch_read_agree(tmp_path):
    """F1 is linear here, so that the pitch comes back to rounding; the exact physics beside has it too."""
    one = reduced(tmp_path, three(), BY_PRESSURE, PITCH)
    two = reduced(tmp_path, three(), BY_ANGLE, PITCH)
    assert jobs.value(one, "actual_flow") == pytest.approx(jobs.value(two, "actual_flow"), rel=1e-12)
    assert [math.degrees(p["pitch"]) for p in one["runs"][0]["points"]] == pytest.approx([p for *_, p, _, _ in POINTS], abs=1e-10)
    assert one["runs"][0]["exact_physics"]["actual_flow"] == pytest.approx(jobs.value(one, "actual_flow"), rel=5e-3)


def test_falling_f1_is_the_same_probe_held_the_other_way_round(tmp_path):
    turned = "pitch [deg],F1,F2\n" + "".join(f"{p},{-0.03 * p - 0.01},{0.95 - 0.0001 * p * p}\n" for p in range(-30, 31, 5))
    swapped = "line,point,P1-P2 [Pa],P4-P5 [Pa],yaw [deg],temperature [degF]\n" + "".join(
        f"{n},{k},{dp},{-f1 * dp!r},{yaw},{t}\n" for n, k, dp, f1, _, yaw, t in POINTS)
    assert jobs.value(reduced(tmp_path, three(), swapped, turned), "actual_flow") == pytest.approx(
        jobs.value(reduced(tmp_path, three(), BY_PRESSURE, PITCH), "actual_flow"), rel=1e-12)


def test_a_three_dimensional_probe_under_2g_leaves_pitch_out(tmp_path):
    """F2 at 0 deg pitch in place of Cp, eq. 2G-7."""
    found = reduced(tmp_path, three("epa-2g"), BY_PRESSURE, PITCH)
    plain = reduced(tmp_path, three("epa-2g") | {"pitot": {"type": "two-dimensional", "coefficient": 0.95}}, BY_PRESSURE)
    assert jobs.value(found, "actual_flow") == pytest.approx(jobs.value(plain, "actual_flow"), rel=1e-13)
    assert "2G-7" in said(found, "pitot") and "does not act" in said(found, "pitot")
    two = reduced(tmp_path, calibrated("two-dimensional") | {k: v for k, v in three("epa-2g").items() if k != "pitot"}, BY_PRESSURE, PITCH)
    assert jobs.value(two, "actual_flow") == jobs.value(found, "actual_flow")


@pytest.mark.parametrize("method", ["epa-2g", "exact"])
def test_yaw_offsets(tmp_path, method):
    """Yaw = reading - R_SLO - R_ADO (2G, 8.9.4.2): readings turned by 1.5 - 0.5 deg are the same angles."""
    change = {"job": {"method": method}, "gas": FLUE, "pitot": {"type": "two-dimensional", "coefficient": 0.84}}
    plain = reduced(tmp_path, change, BY_ANGLE)
    turned = BY_ANGLE
    for *_, p, yaw, t in POINTS[:4]:
        turned = turned.replace(f",{p},{yaw},{t}\n", f",{p},{yaw + 1},{t}\n")
    change["pitot"] = change["pitot"] | {"yaw_offset": ["1.5 deg", "-0.5 deg"]}
    result = reduced(tmp_path, change, turned)
    assert jobs.value(result, "actual_flow") == pytest.approx(jobs.value(plain, "actual_flow"), rel=1e-13)
    assert "1.5 deg and -0.5 deg taken off" in said(result, "yaw")


def test_angles_that_were_not_read_are_said(tmp_path):
    result = reduced(tmp_path, {"pitot": {"type": "two-dimensional", "coefficient": 0.84}})
    assert "attention: run 1: a two-dimensional probe and no yaw angles" in said(result, "pitot")


def test_a_calibration_with_decimal_commas(tmp_path):
    """Semicolons and decimal commas, a comment above, a column that means nothing."""
    text = "# laboratory\nNr;v [m/s];Cp\n1;5,0;0,80\n2;10,0;0,84\n3;20,0;0,85\n"
    result = reduced(tmp_path, calibrated(), calibration=text)
    assert jobs.value(result, "actual_flow") == jobs.value(reduced(tmp_path, calibrated(), calibration=CURVE), "actual_flow")
    assert 'columns not used: "Nr"' in said(result, "calibration")


def test_checks_of_the_directional_methods(tmp_path):
    result = reduced(tmp_path, three(), BY_PRESSURE, PITCH)
    assert outcome(result, "calibrated-angles")["status"] == "pass"
    assert outcome(result, "directional-velocity")["status"] == "pass"
    assert outcome(result, "swirl")["status"] == "not applicable"
    short = "\n".join(row for row in PITCH.splitlines() if row.split(",")[0] in {"pitch [deg]", "-15", "-10", "-5", "0", "5", "10", "15"}) + "\n"
    found = outcome(reduced(tmp_path, three(), BY_PRESSURE, short), "calibrated-angles")
    assert found["status"] == "fail" and "3.0 deg beyond" in found["message"]
    slow = BY_PRESSURE.splitlines()
    slow = "\n".join([slow[0], *(",".join([*row.split(",")[:2], "5", "0.05", *row.split(",")[4:]]) for row in slow[1:])]) + "\n"
    assert outcome(reduced(tmp_path, three(), slow, PITCH), "directional-velocity")["status"] == "fail"


def test_uncertainty_of_pitch(tmp_path):
    """cos(pitch) with u at zero pitch has no slope: u^2 = f''^2 u^4/2 for a flat F2."""
    flat = "pitch [deg],F1,F2\n" + "".join(f"{p},{0.03 * p},0.95\n" for p in range(-30, 31, 5))
    level = "line,point,P1-P2 [Pa],P4-P5 [Pa],yaw [deg],temperature [degF]\n" + "".join(f"{n},{k},200,0,0,300\n" for n in "AB" for k in (1, 2, 3, 4))
    result = reduced(tmp_path, three() | {"uncertainty": {"pitch": "3 deg"}}, level, flat)["runs"][0]["quantities"]["mean_velocity"]
    # The whole sigma is stepped: the second difference of the cosine, 2 (1 - cos u).
    expected = 2 * (1 - math.cos(math.radians(3))) * math.sqrt(0.5)
    assert result["standard_uncertainty"] / result["value"] == pytest.approx(expected, rel=1e-6)
    gain = reduced(tmp_path, three() | {"uncertainty": {"pitch_pressure": "1 %"}}, BY_PRESSURE, PITCH)["runs"][0]
    assert gain["budget"]["actual_flow"][0]["input"] == "pitch_pressure"


# --- what cannot be

@pytest.mark.parametrize(("pitot", "message"), [
    ({"type": "three-dimensional", "coefficient": 0.9}, r"three-dimensional probe under ashrae-111"),
    ({"coefficient": 0.9, "legs": {"A": 0.8}}, "both coefficient and legs"),
    ({"type": "s-type", "coefficient": None, "legs": {"A": 0.8, "B": 0.81}}, "two legs, and none named"),
    ({"type": "s-type", "coefficient": None, "legs": {"A": 0.8}, "leg": "B"}, "only A is known"),
    ({"type": "s-type", "coefficient": None, "legs": {"A": 0.8}, "leg": "mean"}, "only A is known"),
    ({"type": "s-type", "coefficient": None, "legs": {"C": 0.8}}, r"\[pitot\] legs"),
    ({"type": "s-type", "coefficient": None, "legs": {"A": "0.8"}}, r"legs.A: '0.8'; a bare number"),
    ({"type": "s-type", "coefficient": None, "legs": {"A": 84}}, r"legs.A: 84; a number from 0.3"),
    ({"coefficient": None, "legs": {"A": 0.8}}, "legs of a pitot-static probe"),
    ({"leg": "A"}, "leg without legs"),
    ({"standard_coefficient": 0.99}, "standard_coefficient without calibration"),
    ({"coefficient": None, "calibration": "none.csv"}, "none.csv: no such file"),
    ({"yaw_offset": "2 deg"}, "no yaw angle of run 1"),
    ({"yaw_offset": 2}, "yaw_offset"),
    ({"head": "0 mm"}, "a diameter above zero"),
])
def test_probe_keys(tmp_path, pitot, message):
    with pytest.raises(TraverseError, match=message):
        load(tmp_path, {"job": {"method": "ashrae-111"}, "pitot": pitot})


@pytest.mark.parametrize(("text", "message"), [
    ("velocity,coefficient\n5,0.8\n10,0.84\n", r'probe.csv:1 column "velocity": no unit for the velocity'),
    ("velocity [Pa],coefficient\n5,0.8\n10,0.84\n", "probe.csv:1"),
    ("velocity [m/s],coefficient\n5,0.8\n,0.84\n", r'probe.csv:3 column "velocity \[m/s\]": a gap'),
    ("velocity [m/s],coefficient\n5,0.8\n10,\n", r'probe.csv:3 column "coefficient": a gap'),
    ("velocity [m/s],coefficient\n5,0.8\n10,n/a\n", "probe.csv:3 .*: a gap"),
    ("velocity [m/s],coefficient\n5,0.8\n10,about 0.84\n", "probe.csv:3 .*is no number"),
    ("# made in May\nvelocity [m/s],coefficient\n\n5,0.8\n5.0,0.84\n", "probe.csv:5 .*'5.0' stands in line 4 already"),
    ("velocity [m/s],coefficient\n5,0.8\n4,0.84\n", "probe.csv:3 .*'4' after '5'"),
    ("velocity [m/s],coefficient\n0,0.8\n4,0.84\n", "probe.csv:2 .*a velocity above zero"),
    ("velocity [m/s],coefficient\n5,0.8\n", "probe.csv:2: a curve of one point"),
    ("velocity [m/s],coefficient\n5,0.5\n5.1,0.9\n", "probe.csv:3 .*two velocities"),
    ("velocity [m/s],coefficient\n5,0.8\n10,84\n", "probe.csv:3 .*not in percent"),
    ("velocity [m/s],coefficient\n", "probe.csv:1: no row of numbers"),
    ("speed [m/s],v [m/s],coefficient\n5,5,0.8\n", "are both the velocity"),
    ("velocity [m/s],coefficient\n5,0.8\n10,\"0,84\"\n", "probe.csv:2 .*one decimal sign throughout"),
    ("velocity [m/s];coefficient\n5;0.8\n\"10;0.84\n", "probe.csv"),
    ("date,remark\n5,0.8\n", "no row names the columns of a calibration"),
    (PITCH, "holds F1 and F2 over pitch"),
    (PAIRS, "holds pairs of an S-type tube"),
])
def test_bad_curves(tmp_path, text, message):
    with pytest.raises(TraverseError, match=message):
        load(tmp_path, calibrated(), calibration=text)


@pytest.mark.parametrize(("spoil", "message"), [
    (lambda text: text.replace("pitch [deg]", "pitch"), r'probe.csv:1 column "pitch": no unit'),
    (lambda text: text.replace("\n5,", "\n0,"), "probe.csv:9 .*'0' stands in line 8 already"),
    (lambda text: text.replace("\n10,0.31,", "\n10,0.1,"), "probe.csv:10 .*F1 of '0.1' after '0.16'"),
    (lambda text: text.replace("\n10,0.31,", "\n10,,"), "probe.csv:10 .*a gap"),
    (lambda text: "\n".join([text.splitlines()[0], *text.splitlines()[9:]]), "angles on both sides of zero"),
    (lambda text: "\n".join(text.splitlines()[:3]), "probe.csv:3: 2 pitch angles"),
    (lambda text: CURVE, "a coefficient over velocity"),
])
def test_bad_pitch_calibrations(tmp_path, spoil, message):
    with pytest.raises(TraverseError, match=message):
        load(tmp_path, three(), BY_PRESSURE, spoil(PITCH))


@pytest.mark.parametrize(("spoil", "message"), [
    (lambda text: text.replace("A,0.5,0.692\n", ""), "probe.csv:3: 2 pairs of side A"),
    (lambda text: text.replace("A,0.5,0.692", "C,0.5,0.692"), "probe.csv:2 .*side A or B"),
    (lambda text: text.replace("A,0.5,0.692", "A,-0.5,0.692"), "probe.csv:2 .*a pressure above zero"),
    (lambda text: text.replace("A,0.5,0.692", "A,0.5,5"), "probe.csv:2: a pair that gives a coefficient of 0.313"),
    (lambda text: text.replace("standard_pressure [inH2O]", "standard_pressure"), "no unit for the standard_pressure"),
])
def test_bad_pairs(tmp_path, spoil, message):
    text = spoil(PAIRS)
    if "0.313" in message:
        text, message = text.replace("0.5,5\n", "0.5,9\n"), "probe.csv:2: a pair that gives a coefficient of 0.233"
    with pytest.raises(TraverseError, match=message):
        load(tmp_path, calibrated("s-type", leg="A"), calibration=text)


def test_what_a_directional_probe_needs(tmp_path):
    with pytest.raises(TraverseError, match=r"run 1, calibration probe.csv.*pitch beyond the calibration: A4 9.0 deg, B4 9.0 deg"):
        reduced(tmp_path, three(), BY_PRESSURE, "\n".join(PITCH.splitlines()[:9]) + "\n")
    with pytest.raises(TraverseError, match=r"readings.csv: no pitch of run 1"):
        load(tmp_path, three(), BY_PRESSURE.replace("P4-P5", "unknown"), PITCH)
    text = BY_PRESSURE.splitlines()
    text[2] = ",".join([*text[2].split(",")[:3], "", *text[2].split(",")[4:]])
    with pytest.raises(TraverseError, match=r"readings.csv:3: no pitch_pressure at A2"):
        load(tmp_path, three(), "\n".join(text) + "\n", PITCH)
    with pytest.raises(TraverseError, match="no unit for the pitch_pressure"):
        load(tmp_path, three(), BY_PRESSURE.replace("P4-P5 [Pa]", "P4-P5"), PITCH)
    with pytest.raises(TraverseError, match="a pitot-static probe under epa-2f"):
        load(tmp_path, {"job": {"method": "epa-2f"}})
    with pytest.raises(TraverseError, match="no calibration"):
        load(tmp_path, three() | {"pitot": {"type": "three-dimensional", "coefficient": None}}, BY_PRESSURE)
    with pytest.raises(TraverseError, match="has no pitch that acts"):
        load(tmp_path, {"uncertainty": {"pitch": "2 deg"}})


def test_a_point_that_was_not_read_has_no_pitch(tmp_path):
    gone = BY_PRESSURE.replace(f"A,2,{POINTS[1][2]},", "A,2,obstructed,")
    with pytest.raises(TraverseError, match=r"no pitch at A2.*omit"):
        reduced(tmp_path, three() | {"readings": {"missing": "neighbour"}}, gone, PITCH)
    result = reduced(tmp_path, three() | {"readings": {"missing": "omit"}}, gone, PITCH)
    assert "'neighbour' cannot be followed" in said(result, "missing readings")
    without = [p for p in result["runs"][0]["points"] if p["status"] == "read"]
    assert jobs.value(result, "mean_velocity") == pytest.approx(sum(p["velocity"] for p in without) / 7, rel=1e-12)
    assert all("coefficient" in p for p in without)


# --- the size of the probe

def shear(folder, **change):
    """Velocities k (y + 0.15 d) across a square duct's lower part, read by a head of 6 mm: four points on a line from the wall."""
    depth = (0.02, 0.05, 0.09, 0.14)
    readings = "line,point,depth [m],weight,differential_pressure [Pa]\n" + "".join(
        f"A,{k},{y},0.25,{0.6 * (80 * (y + 0.15 * 0.006)) ** 2!r}\n" for k, y in enumerate(depth, start=1))
    base = {"plane": {"shape": "rectangle", "diameter": None, "width": "1 m", "height": "1 m"}, "job": {"method": "ashrae-111"},
            "layout": {"rule": "custom", "lines": None, "points": None}, "pitot": {"head": "6 mm"}}
    return reduced(folder, jobs.merged(base, change), readings)


def test_displacement_in_a_linear_profile(tmp_path):
    """Inside the line the shift is undone exactly; the nearness of the wall, 1.5 % e^(-3.5 (y/d - 1/2)), stands beside it."""
    points = shear(tmp_path, corrections={"displacement": True})["runs"][0]["points"]
    for point in points[1:]:
        wanted = 80 * point["depth"] * (1 + 0.015 * math.exp(-3.5 * (point["depth"] / 0.006 - 0.5)))
        assert point["velocity"] == pytest.approx(wanted, rel=1e-9)


def test_the_size_of_a_correction_is_said_whether_it_acts_or_not(tmp_path):
    off, on = shear(tmp_path), shear(tmp_path, corrections={"displacement": True})
    change = 100 * (jobs.value(on, "mean_velocity") / jobs.value(off, "mean_velocity") - 1)
    assert f"{change:+.2f} % of the mean velocity by 0.15 d (MacMillan), not corrected" in said(off, "corrections")
    assert f"{change:+.2f} % of the mean velocity by 0.15 d (MacMillan), corrected" in said(on, "corrections")
    mild = shear(tmp_path, corrections={"displacement": "mckeon"})
    change = 100 * (jobs.value(mild, "mean_velocity") / jobs.value(off, "mean_velocity") - 1)
    assert f"by 0.15 d tanh(4 sqrt(a)) (McKeon) {change:+.2f} %" in said(off, "corrections")
    plain, block = (reduced(tmp_path, {"pitot": {"stem": "8 mm"}, "corrections": {"blockage": act}}) for act in (False, True))
    change = 100 * (jobs.value(block, "mean_velocity") / jobs.value(plain, "mean_velocity") - 1)
    assert f"{change:+.2f} % of the mean velocity, not corrected" in said(plain, "corrections")
    assert f"{change:+.2f} % of the mean velocity, corrected" in said(block, "corrections")
    assert not said(reduced(tmp_path, {}), "corrections")


def test_a_thick_stem_is_beyond_the_formula(tmp_path):
    """S/A at most 0.02 (ISO 3966, from memory): 40 mm over 0.9 m of a duct of 0.785 m2 fill 4.6 %."""
    assert "attention: run 1: blockage" in said(reduced(tmp_path, {"pitot": {"stem": "40 mm"}}), "corrections")


def test_small_holes(tmp_path):
    """Re = v d rho/mu: 9 m/s, 1.2 kg/m3, 1.81e-5 Pa s and 0.3 mm make 180, below the 200 of ISO 3966 (from memory)."""
    found = said(reduced(tmp_path, {"pitot": {"hole": "0.3 mm"}}), "pitot")
    assert "attention: run 1: least Reynolds number with the hole" in found and "below 200 at A1" in found
    least = float(found.split("0.3 mm: ")[1].split(",")[0])
    assert least == pytest.approx(1.2 * math.sqrt(2 * 48 / 1.2) * 3e-4 / 1.813e-5, rel=5e-3)
    found = said(reduced(tmp_path, {"pitot": {"head": "6 mm"}}), "pitot")
    assert "note: run 1: least Reynolds number with the head" in found and "hole, not stated" in found


@pytest.mark.parametrize(("change", "message"), [
    ({"corrections": {"displacement": True}}, r"displacement without the head.*\[pitot\] head"),
    ({"corrections": {"displacement": "prandtl"}, "pitot": {"head": "6 mm"}}, 'true, "macmillan" or "mckeon"'),
    ({"corrections": {"displacement": True}, "pitot": {"head": "140 mm"}}, "would reach into the wall: A1 at 66.99 mm"),
    ({"corrections": {"blockage": True}}, "without the stem"),
])
def test_corrections_that_cannot_be(tmp_path, change, message):
    with pytest.raises(TraverseError, match=message):
        reduced(tmp_path, change)


def test_a_head_too_large_for_the_gradient(tmp_path):
    steep = jobs.READINGS.replace("A,1,50", "A,1,0.1")
    with pytest.raises(TraverseError, match="too large for the gradient at A1"):
        reduced(tmp_path, {"corrections": {"displacement": True}, "pitot": {"head": "100 mm"}}, steep)
    assert "not estimated" in said(reduced(tmp_path, {"pitot": {"head": "100 mm"}}, steep), "corrections")


def test_alignment_and_holes_as_uncertainty(tmp_path):
    """1 % of the velocity pressure is half a percent of the velocity, for all points at once."""
    result = reduced(tmp_path, {"job": {"method": "ashrae-111"}, "uncertainty": {"alignment": "1 %", "static_holes": "±1 %"}})
    flow = result["runs"][0]["quantities"]["actual_flow"]
    assert flow["standard_uncertainty"] / flow["value"] == pytest.approx(0.005 * math.sqrt(1 + 1 / 3), rel=1e-6)
