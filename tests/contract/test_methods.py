"""What every method found by the scan must keep, and what each brings."""

import pytest

import traverse
from tests.support import jobs
from traverse import checks, methods, tables
from traverse.units import parse

FLUE = {"kind": "flue-gas", "oxygen": "7 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None}
CONTRACT = ("epa-2", "exact", "iso-3966", "iso-10780", "en-16911-1", "en-12599", "ashrae-111", "amca-203", "jis-z-8808", "as-4323-1")


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
        assert not rule or rule in {entry["rule"] for entry in tables.load("site_rules")[key]}
    assert bool(method.constants) == name.startswith("epa")


@pytest.mark.parametrize("system", ["si", "us"])
@pytest.mark.parametrize("name", [name for name in CONTRACT if name != "epa-2"])
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
