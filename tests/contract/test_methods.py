"""What every method found by the scan must keep, and what each brings."""

import math

import pytest

import traverse
from tests.support import jobs
from traverse import checks, methods, tables
from traverse.units import parse

FLUE = {"kind": "flue-gas", "oxygen": "7 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None}
CONTRACT = ("epa-2", "epa-2c", "epa-2f", "epa-2g", "exact", "iso-3966", "iso-10780", "en-16911-1", "en-12599", "ashrae-111", "amca-203", "jis-z-8808", "as-4323-1")


def job(name, system, **plane):
    kind = "s-type" if name.startswith("epa") else "pitot-static"
    return {"job": {"method": name, "units": system}, "gas": FLUE, "conditions": {"temperature": "150 degC"},
            "pitot": {"type": kind, "coefficient": 0.84 if kind == "s-type" else 1.0}, "plane": plane}


def test_the_methods_of_the_contract_are_there():
    assert set(CONTRACT) <= set(methods.names())


@pytest.mark.parametrize("name", methods.names())
def test_a_method_says_what_it_is(name):
    method = methods.get(name)
    assert method.id == name and method.title and method.source
    assert set(method.checks) <= set(checks.checks())
    for text in (*method.reference.values(),):
        assert parse(text[0], "temperature").value > 200 and parse(text[1], "pressure").value > 9e4
    for rule, key in ((method.site_rule, "site"), (method.count_rule, "count")):
        own = tables.load("site_rules")["straight_lengths" if key == "site" else "point_count"]
        assert not rule or rule in own or rule in {entry["rule"] for entry in tables.load("site_rules")[key]}
    assert bool(method.constants) == name.startswith("epa")


@pytest.mark.parametrize("system", ["si", "us"])
@pytest.mark.parametrize("name", [name for name in CONTRACT if not name.startswith("epa")])
def test_physics_is_the_same_whatever_the_name(tmp_path, name, system):
    """All methods but EPA's compute with modern constants, point by point; compressibility and standard conditions are their own."""
    quantities = jobs.reduced(tmp_path, job(name, system))["runs"][0]["quantities"]
    exact = jobs.reduced(tmp_path, job("exact", system))["runs"][0]["quantities"]
    tolerance = 1e-13 if methods.get(name).compressible else 1e-3
    assert quantities["actual_flow"]["value"] == pytest.approx(exact["actual_flow"]["value"], rel=tolerance)
    method = methods.get(name)
    if method.reference:
        temperature, pressure = (parse(text, kind).value for text, kind in zip(method.reference[system], ("temperature", "pressure"), strict=True))
        expected = quantities["actual_flow"]["value"] * temperature / 423.15 * quantities["absolute_pressure"]["value"] / pressure
        assert quantities["standard_flow"]["value"] == pytest.approx(expected, rel=1e-12)
        assert quantities["dry_standard_flow"]["value"] == pytest.approx(0.9 * expected, rel=1e-12)
    elif method.standard_air:
        density = parse(method.standard_air[system], "density").value
        assert quantities["standard_flow"]["value"] == pytest.approx(quantities["mass_flow"]["value"] / density, rel=1e-12)
    else:
        assert quantities["standard_flow"] is None


def outcome(folder, name, check, **plane):
    result = traverse.reduce(traverse.load(jobs.write(folder, job(name, "si", **plane))))
    return next(entry.to_dict() for _, entry in result.all_checks() if entry.id == check)


@pytest.mark.parametrize(("name", "upstream", "downstream", "status"), [
    ("en-16911-1", "5 m", "5 m", "pass"), ("en-16911-1", "4.9 m", "5 m", "fail"), ("en-16911-1", "5 m", "1.9 m", "fail"),
    ("jis-z-8808", "1.5 m", "1.5 m", "pass"), ("jis-z-8808", "1.4 m", "2 m", "fail"), ("as-4323-1", "6 m", "2 m", "pass"), ("as-4323-1", "5 m", "2 m", "fail"),
    ("iso-10780", "1 m", "1 m", "not applicable"), ("en-16911-1", None, None, "not evaluated"),
])
def test_straight_lengths(tmp_path, name, upstream, downstream, status):
    assert outcome(tmp_path, name, "straight-lengths", upstream=upstream, downstream=downstream)["status"] == status


@pytest.mark.parametrize(("name", "diameter", "status", "criterion"), [
    ("en-16911-1", "1 m", "pass", "at least 4 points"), ("en-16911-1", "2 m", "fail", "at least 13 points"), ("iso-10780", "0.6 m", "pass", "at least 5 points"),
    ("iso-10780", "1 m", "fail", "at least 9 points"), ("jis-z-8808", "2 m", "pass", "at least 8 points"), ("amca-203", "1 m", "fail", "at least 24 points"),
    ("as-4323-1", "1 m", "not applicable", "none"),
])
def test_points(tmp_path, name, diameter, status, criterion):
    found = outcome(tmp_path, name, "point-count", diameter=diameter)
    assert found["status"] == status and found["criterion"].startswith(criterion)
    assert "memory" in found["source"] or status == "not applicable"


YAW = "line,point,differential_pressure [inH2O],temperature [degF],yaw [deg]\n" + "".join(
    f"{line},{k},{0.3 + 0.05 * k},{300 + 20 * k},{3 * k - 4}\n" for line in "AB" for k in (1, 2, 3, 4))


@pytest.mark.parametrize("system", ["us", "si"])
def test_method_2g_point_by_point(tmp_path, system):
    """va = Kp Cp sqrt(dp T/(Ps Ms)) cos(yaw), eq. 2G-6; mean 2G-8; Qsw with the mean temperature, 2G-9. Constants as printed, from memory."""
    found = jobs.reduced(tmp_path, job("epa-2g", system, diameter="60 in"), YAW)["runs"][0]["quantities"]
    kp, zero, standard, std_pressure = (85.49, 460.0, 528.0, 29.92) if system == "us" else (34.97, 273.0, 293.0, 760.0)
    mercury, water, speed = (3386.389, 249.08891, 0.3048) if system == "us" else (133.322387, 9.80665, 1.0)
    ps = 101325 / mercury
    ms = (0.44 * 12 + 0.32 * 7 + 0.28 * 81) * 0.9 + 18.0 * 0.1
    velocities, temperatures = [], []
    for k in (1, 2, 3, 4):
        head, fahrenheit = (0.3 + 0.05 * k) * 249.08891 / water, 300 + 20 * k
        own = fahrenheit + zero if system == "us" else (fahrenheit - 32) / 1.8 + zero
        temperatures.append(own)
        velocities.append(kp * 0.84 * math.sqrt(head * own / (ps * ms)) * math.cos(math.radians(3 * k - 4)))
    mean, warm = sum(velocities) / 4, sum(temperatures) / 4
    assert found["mean_velocity"]["value"] == pytest.approx(mean * speed, rel=2e-6)
    expected = found["actual_flow"]["value"] * (standard / warm) * (ps / std_pressure)
    assert found["standard_flow"]["value"] == pytest.approx(expected, rel=2e-6)
    assert found["dry_standard_flow"]["value"] == pytest.approx(0.9 * expected, rel=2e-6)


def test_method_2g_is_method_2_where_nothing_varies(tmp_path):
    plain = jobs.reduced(tmp_path, job("epa-2", "us"))["runs"][0]["quantities"]
    found = jobs.reduced(tmp_path, job("epa-2g", "us"))["runs"][0]["quantities"]
    assert found["actual_flow"]["value"] == pytest.approx(plain["actual_flow"]["value"], rel=1e-13)
    assert found["dry_standard_flow"]["value"] == pytest.approx(plain["dry_standard_flow"]["value"], rel=1e-13)


def test_method_2c_allows_the_standard_tube_only(tmp_path):
    change = job("epa-2c", "us") | {"pitot": {"type": "pitot-static", "coefficient": None}}
    assert jobs.reduced(tmp_path, change)["runs"][0]["quantities"]["actual_flow"]["value"] == pytest.approx(
        0.99 / 0.84 * jobs.reduced(tmp_path, job("epa-2", "us"))["runs"][0]["quantities"]["actual_flow"]["value"], rel=1e-13)
    with pytest.raises(traverse.errors.TraverseError, match="no default for a s-type"):
        jobs.reduced(tmp_path, job("epa-2c", "us") | {"pitot": {"type": "s-type", "coefficient": None}})
