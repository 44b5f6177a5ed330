"""The points where two careful people would differ, as the job file's contract fixes them."""

import math

import numpy as np
import pytest

from tests.support import jobs
from traverse.units import UNITS

R = 8.314462618
FLUE = {"kind": "flue-gas", "oxygen": "7.2 %", "carbon_dioxide": "11.8 %", "moisture": "9.4 %", "density": None}
AIR = {"kind": "air", "relative_humidity": "50 %", "density": None}


def test_given_density_holds_at_the_plane(tmp_path):
    """Without stated conditions the density holds at the plane; given gas has a ratio of 1.400."""
    result = jobs.reduced(tmp_path)
    dp = np.array([50, 60, 62, 48, 49, 61, 63, 52.0])
    x, a = dp / 101325, 0.4 / 1.4
    v = np.sqrt(2 * dp / 1.2) * np.sqrt(((1 + x) ** a - 1) / (a * x))
    assert jobs.value(result, "mean_velocity") == pytest.approx(v.mean(), rel=1e-10)
    assert jobs.value(result, "mass_flow") == pytest.approx(1.2 * v.mean() * math.pi / 4, rel=1e-10)
    assert result["runs"][0]["quantities"]["dry_standard_flow"] is None
    assert "[reference]" in result["runs"][0]["notes"]["dry_standard_flow"]


def test_given_density_at_stated_conditions(tmp_path):
    """Stated at 0 degC and 100 kPa, it is brought to the plane by the gas law."""
    result = jobs.reduced(tmp_path, {"gas": {"density": "1.3 kg/m3", "temperature": "0 degC", "pressure": "100 kPa"}})
    expected = 1.3 * 101325 / 100e3 * 273.15 / 293.15
    assert jobs.value(result, "density") == pytest.approx(expected, rel=1e-12)


def test_given_molar_mass_and_moisture(tmp_path):
    result = jobs.reduced(tmp_path, {"gas": {"density": None, "molar_mass": "29.0 g/mol", "moisture": "5 %"}, "conditions": {"temperature": "60 degC"},
                                     "reference": {"temperature": "0 degC", "pressure": "101325 Pa"}})
    assert jobs.value(result, "density") == pytest.approx(101325 * 29e-3 / (R * 333.15), rel=1e-12)
    assert jobs.value(result, "dry_standard_flow") == pytest.approx(0.95 * jobs.value(result, "standard_flow"), rel=1e-12)
    assert jobs.value(result, "molar_mass_dry") == pytest.approx((29.0 - 0.05 * 18.01528) / 0.95, rel=1e-12)


def test_modern_flue_gas(tmp_path):
    """The rest of a dry flue gas is nitrogen with argon in the proportion of air."""
    result = jobs.reduced(tmp_path, {"gas": FLUE, "conditions": {"temperature": "150 degC"}})
    rest = (0.780848 * 28.0134 + 0.009332 * 39.948) / (0.780848 + 0.009332)
    dry = 0.118 * 44.0095 + 0.072 * 31.9988 + (1 - 0.19) * rest
    assert jobs.value(result, "molar_mass_dry") == pytest.approx(dry, rel=1e-5)
    assert jobs.value(result, "molar_mass") == pytest.approx(dry * 0.906 + 18.01528 * 0.094, rel=1e-5)


def test_stated_ratio_of_specific_heats_acts(tmp_path):
    low = jobs.value(jobs.reduced(tmp_path, {"gas": {"ratio_of_specific_heats": 1.2}}), "mean_velocity")
    high = jobs.value(jobs.reduced(tmp_path, {"gas": {"ratio_of_specific_heats": 1.6}}), "mean_velocity")
    # k = 1 - x/(4 gamma): the difference at about 55 Pa.
    assert high / low - 1 == pytest.approx(56 / 101325 / 4 * (1 / 1.2 - 1 / 1.6), rel=0.03)


@pytest.mark.parametrize("system", ["us", "si"])
def test_epa_arithmetic_as_printed(tmp_path, system):
    """Kp 85.49 with 460 and 528, or 34.97 with 273 and 293; 13.6 in both; the two differ by 0.03 %."""
    change = {"job": {"method": "epa-2", "units": system}, "gas": FLUE, "pitot": {"type": "s-type", "coefficient": 0.84},
              "conditions": {"static": "-200 Pa", "temperature": "150 degC"}}
    result = jobs.reduced(tmp_path, change)
    dp = np.array([50, 60, 62, 48, 49, 61, 63, 52.0])
    ms = (0.44 * 11.8 + 0.32 * 7.2 + 0.28 * 81) * (1 - 0.094) + 18.0 * 0.094
    if system == "us":
        ts, ps, root = 302 + 460, 101325 / UNITS["inHg"].factor - 200 / UNITS["inH2O"].factor / 13.6, np.sqrt(dp / UNITS["inH2O"].factor).mean()
        velocity, standard = 85.49 * 0.84 * root * math.sqrt(ts / (ps * ms)) * 0.3048, 528 / ts * ps / 29.92
    else:
        ts, ps, root = 150 + 273, 101325 / UNITS["mmHg"].factor - 200 / 9.80665 / 13.6, np.sqrt(dp / 9.80665).mean()
        velocity, standard = 34.97 * 0.84 * root * math.sqrt(ts / (ps * ms)), 293 / ts * ps / 760
    assert jobs.value(result, "mean_velocity") == pytest.approx(velocity, rel=1e-11)
    assert jobs.value(result, "standard_flow") == pytest.approx(velocity * standard * math.pi / 4, rel=1e-11)
    assert jobs.value(result, "density") == pytest.approx((101325 - 200) * ms * 1e-3 / (R * 423.15), rel=1e-12)
    # JSON molar masses and physical state.
    assert jobs.value(result, "molar_mass") == pytest.approx(ms, rel=1e-12)
    assert jobs.value(result, "temperature") == pytest.approx(423.15)


def test_epa_air_without_analysis_is_29(tmp_path):
    result = jobs.reduced(tmp_path, {"job": {"method": "epa-2", "units": "us"}, "gas": {"kind": "air", "moisture": "2 %", "density": None}})
    assert jobs.value(result, "molar_mass_dry") == 29.0
    assert jobs.value(result, "molar_mass") == pytest.approx(29.0 * 0.98 + 18.0 * 0.02, rel=1e-14)


def test_explicit_reference_overrides_the_method_and_says_so(tmp_path):
    """With the method's own offset: 60 degF is 520 degR."""
    change = {"job": {"method": "epa-2", "units": "us"}, "gas": FLUE, "conditions": {"temperature": "300 degF"}}
    own = jobs.reduced(tmp_path, change)
    other = jobs.reduced(tmp_path, change | {"reference": {"temperature": "60 degF", "pressure": "29.92 inHg"}})
    assert jobs.value(other, "standard_flow") / jobs.value(own, "standard_flow") == pytest.approx(520 / 528, rel=1e-12)
    assert any("in place of the method's own" in finding["message"] for finding in other["findings"])


@pytest.mark.parametrize(("system", "density"), [("us", 0.075 * 0.45359237 / 0.3048**3), ("si", 1.2)])
def test_ashrae_standard_air(tmp_path, system, density):
    result = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111", "units": system}, "gas": AIR})
    mass, x, molar = (jobs.value(result, name) for name in ("mass_flow", "moisture", "molar_mass"))
    assert jobs.value(result, "standard_flow") == pytest.approx(mass / density, rel=1e-12)
    dry = mass * (1 - x) * 28.96546 / molar
    assert jobs.value(result, "dry_standard_flow") == pytest.approx(dry / density, rel=1e-12)


def test_no_compressibility_in_ashrae(tmp_path):
    result = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}})
    dp = np.array([50, 60, 62, 48, 49, 61, 63, 52.0])
    assert jobs.value(result, "mean_velocity") == pytest.approx(np.sqrt(2 * dp / 1.2).mean(), rel=1e-12)


@pytest.mark.parametrize(("method", "kind", "coefficient"), [
    ("epa-2", "s-type", 0.84), ("epa-2", "pitot-static", 0.99), ("iso-3966", "pitot-static", 1.0), ("ashrae-111", "pitot-static", 1.0),
])
def test_default_coefficients_are_findings(tmp_path, method, kind, coefficient):
    change = {"job": {"method": method, "units": "us"}, "pitot": {"type": kind, "coefficient": None}}
    with_default = jobs.reduced(tmp_path, change)
    stated = jobs.reduced(tmp_path, change | {"pitot": {"type": kind, "coefficient": coefficient}})
    assert jobs.value(with_default, "mean_velocity") == jobs.value(stated, "mean_velocity")
    assert any("coefficient" in finding["message"] for finding in with_default["findings"])


def readings(**changes):
    """The standard readings with the text at some points changed."""
    lines = jobs.READINGS.splitlines()
    for label, text in changes.items():
        lines = [f"{line.rsplit(',', 1)[0]},{text}" if line.startswith(f"{label[0]},{label[1:]},") else line for line in lines]
    return "\n".join(lines) + "\n"


@pytest.mark.parametrize("rule", ["method", "zero", "signed", "omit"])
def test_negative_readings(tmp_path, rule):
    """Zero and count is the default everywhere; signed keeps the sign; omit renormalises."""
    result = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "readings": {"negative": rule}}, readings(A2="-4"))
    others = np.sqrt(2 * np.array([50, 62, 48, 49, 61, 63, 52.0]) / 1.2)
    expected = {"method": others.sum() / 8, "zero": others.sum() / 8, "signed": (others.sum() - math.sqrt(8 / 1.2)) / 8,
                "omit": others.mean()}[rule]
    assert jobs.value(result, "mean_velocity") == pytest.approx(expected, rel=1e-12)
    point = result["runs"][0]["points"][1]
    assert point["status"] == "negative" and point["differential_pressure"] == -4.0, "JSON keeps what was recorded"
    assert set(result["runs"][0]["negative_treatments"]) == {"zero", "signed", "omit"}
    assert any(finding["topic"] == "negative readings" and finding["level"] == "attention" for finding in result["findings"])


def test_negative_reading_keeps_its_temperature_unless_left_out(tmp_path):
    hot = "line,point,differential_pressure [Pa],temperature [degC]\nA,1,-5,100\nA,2,50,20\n"
    layout = {"layout": {"lines": 1, "points": 2}}
    assert jobs.value(jobs.reduced(tmp_path, layout, hot), "temperature") == pytest.approx(273.15 + 60)
    omitted = jobs.reduced(tmp_path, layout | {"readings": {"negative": "omit"}}, hot)
    assert jobs.value(omitted, "temperature") == pytest.approx(273.15 + 20)


@pytest.mark.parametrize(("rule", "pressure"), [(None, 5.0), ("zero", 0.0), ("limit", 10.0)])
def test_below_range(tmp_path, rule, pressure):
    change = {"job": {"method": "ashrae-111"}} | ({"readings": {"below": rule}} if rule else {})
    result = jobs.reduced(tmp_path, change, readings(B3="<10"))
    dp = np.array([50, 60, 62, 48, 49, 61, pressure, 52.0])
    assert jobs.value(result, "mean_velocity") == pytest.approx(np.sqrt(2 * dp / 1.2).mean(), rel=1e-12)
    assert result["runs"][0]["points"][6]["status"] == "below range"


def test_missing_readings(tmp_path):
    """Left out with the weights raised, or from the neighbours on the line: the mean of their roots."""
    text = readings(A2="")
    omitted = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "readings": {"missing": "omit"}}, text)
    others = np.sqrt(2 * np.array([50, 62, 48, 49, 61, 63, 52.0]) / 1.2)
    assert jobs.value(omitted, "mean_velocity") == pytest.approx(others.mean(), rel=1e-12)
    filled = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "readings": {"missing": "neighbour"}}, text)
    between = (others[0] + others[1]) / 2
    assert jobs.value(filled, "mean_velocity") == pytest.approx((others.sum() + between) / 8, rel=1e-12)
    for result in (omitted, filled):
        point = result["runs"][0]["points"][1]
        assert point["differential_pressure"] is None and point["status"] == "missing"


def test_zero_is_a_reading(tmp_path):
    result = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}}, readings(A1="0"))
    point = result["runs"][0]["points"][0]
    assert (point["status"], point["velocity"], point["differential_pressure"]) == ("read", 0.0, 0.0)


def test_yaw_acts_only_where_the_method_uses_it(tmp_path):
    text = "line,point,differential_pressure [Pa],yaw [deg]\nA,1,50,20\nA,2,50,-20\n"
    layout = {"layout": {"lines": 1, "points": 2}}
    straight = jobs.value(jobs.reduced(tmp_path, layout, text.replace("-20", "0").replace("20", "0")), "mean_velocity")
    assert jobs.value(jobs.reduced(tmp_path, layout, text), "mean_velocity") == pytest.approx(straight * math.cos(math.radians(20)), rel=1e-12)
    iso = jobs.reduced(tmp_path, layout | {"job": {"method": "iso-3966"}}, text)
    assert jobs.value(iso, "mean_velocity") == pytest.approx(straight, rel=1e-12)


def test_corrections_act_only_when_named(tmp_path):
    plain = jobs.reduced(tmp_path, {"plane": {"wall": "metal"}})
    factor = jobs.reduced(tmp_path, {"plane": {"wall": "metal"}, "corrections": {"wall_factor": "default"}})
    brick = jobs.reduced(tmp_path, {"plane": {"wall": "brick"}, "corrections": {"wall_factor": "default"}})
    own = jobs.reduced(tmp_path, {"corrections": {"wall_factor": 0.985}})
    base = jobs.value(plain, "mean_velocity")
    assert plain["runs"][0]["quantities"]["wall_factor"] is None
    for result, value in ((factor, 0.995), (brick, 0.990), (own, 0.985)):
        assert jobs.value(result, "wall_factor") == value
        assert jobs.value(result, "mean_velocity") == pytest.approx(base * value, rel=1e-12)
        assert jobs.value(result, "mass_flow") == pytest.approx(jobs.value(plain, "mass_flow") * value, rel=1e-12)
    turbulent = jobs.reduced(tmp_path, {"corrections": {"turbulence": "10 %"}})
    assert jobs.value(turbulent, "mean_velocity") == pytest.approx(base / math.sqrt(1.01), rel=1e-12)
    blocked = jobs.reduced(tmp_path, {"pitot": {"stem": "10 mm"}, "corrections": {"blockage": True}})
    assert jobs.value(blocked, "mean_velocity") < base


@pytest.mark.parametrize(("plane", "diameter"), [
    ({"circumference": "3 m"}, 3 / math.pi), ({"circumference": "3 m", "wall_thickness": "5 mm"}, 3 / math.pi - 0.01),
])
def test_circumference(tmp_path, plane, diameter):
    result = jobs.reduced(tmp_path, {"plane": plane | {"diameter": None}})
    assert jobs.value(result, "area") == pytest.approx(math.pi / 4 * diameter**2, rel=1e-12)


def test_runs_override_and_columns_beat_them(tmp_path):
    text = "run,line,point,differential_pressure [Pa],static [Pa]\n1,A,1,50,\n1,A,2,50,\n2,A,1,50,-300\n2,A,2,50,-300\n".replace(",\n", ",-10\n")
    change = {"layout": {"lines": 1, "points": 2}, "gas": AIR, "run": [{"name": "2", "static": "-100 Pa", "temperature": "80 degC"}]}
    result = jobs.reduced(tmp_path, change, text)
    assert jobs.value(result, "static_pressure", 0) == pytest.approx(-10)
    assert jobs.value(result, "static_pressure", 1) == pytest.approx(-300), "a column beats [[run]]"
    assert jobs.value(result, "temperature", 1) == pytest.approx(353.15), "[[run]] beats [conditions]"
    flows = [jobs.value(result, "actual_flow", k) for k in (0, 1)]
    summary = result["summary"]["quantities"]["actual_flow"]
    assert summary["value"] == pytest.approx(np.mean(flows), rel=1e-14)
    assert summary["standard_deviation"] == pytest.approx(np.std(flows, ddof=1), rel=1e-12)


def test_single_run_is_called_1(tmp_path):
    result = jobs.reduced(tmp_path)
    assert [run["run"] for run in result["runs"]] == ["1"]
    assert result["summary"]["quantities"]["actual_flow"]["standard_deviation"] is None


def test_altitude_needs_its_model_named(tmp_path):
    result = jobs.reduced(tmp_path, {"conditions": {"barometric": None, "altitude": "1000 m", "model": "standard-atmosphere"}})
    assert jobs.value(result, "barometric_pressure") == pytest.approx(101325 * (1 - 2.25577e-2) ** 5.25588, rel=1e-12)


def test_velocity_readings_are_undone_to_pressure(tmp_path):
    text = "line,point,velocity [m/s]\nA,1,10\nA,2,-2\n"
    change = {"layout": {"lines": 1, "points": 2}, "readings": {"meter_density": "1.2 kg/m3"}, "gas": {"density": "0.9 kg/m3"},
              "job": {"method": "ashrae-111"}}
    result = jobs.reduced(tmp_path, change, text)
    points = result["runs"][0]["points"]
    assert points[0]["differential_pressure"] == pytest.approx(60.0)
    assert points[0]["velocity"] == pytest.approx(10 * math.sqrt(1.2 / 0.9), rel=1e-12)
    assert points[1]["status"] == "negative" and points[1]["differential_pressure"] == pytest.approx(-2.4)


def test_json_form(tmp_path):
    """Names, units and order of section 7 of the contract."""
    result = jobs.reduced(tmp_path)
    assert (result["format"], result["version"]) == ("traverse reduction", 1)
    assert set(result["job"]) >= {"title", "method", "source", "sha256"}
    units = {name: item["unit"] for name, item in jobs.reduced(
        tmp_path, {"gas": AIR, "reference": {"temperature": "20 degC", "pressure": "101325 Pa"}, "corrections": {"wall_factor": 1.0}},
    )["runs"][0]["quantities"].items()}
    assert units == {
        "area": "m2", "barometric_pressure": "Pa", "static_pressure": "Pa", "absolute_pressure": "Pa", "temperature": "K", "moisture": "1",
        "molar_mass_dry": "g/mol", "molar_mass": "g/mol", "density": "kg/m3", "mean_root_differential_pressure": "Pa^0.5",
        "mean_velocity": "m/s", "actual_flow": "m3/s", "standard_flow": "m3/s", "dry_standard_flow": "m3/s", "mass_flow": "kg/s",
        "reynolds_number": "1", "wall_factor": "1",
    }
    point = result["runs"][0]["points"][0]
    assert set(point) >= {"line", "point", "depth", "x", "y", "weight", "differential_pressure", "temperature", "density", "velocity",
                          "status", "text"}
    assert point["text"] == "50"
