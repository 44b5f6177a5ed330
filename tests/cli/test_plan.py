"""traverse plan as a user meets it: text, JSON, figure, and every refusal of the keys a plan needs."""

import json

import pytest
from click.testing import CliRunner

from tests.support import jobs
from traverse.cli import main

DESIGN = {"design": {"velocity": "10 m/s"}}


def run(*arguments):
    return CliRunner().invoke(main, [str(argument) for argument in arguments], catch_exceptions=False)


def test_the_sheet_has_all_parts(tmp_path):
    done = run("plan", jobs.write(tmp_path, DESIGN | {"plane": {"port_depth": "50 mm"}, "pitot": {"stem": "8 mm"}}))
    assert done.exit_code == 0
    for part in ("Section", "Layout", "Ports", "Probe", "Room", "Wall", "Far wall", "Rounding", "Expected", "Gauge", "Marks:", "Take along",
                 "Leak check", "Zero of the gauge", "Before the first reading", "At the end", "Cautions"):
        assert any(line.startswith(part) for line in done.stdout.splitlines()), part
    # Equal areas in 1 m: 67.0 mm and 250 mm; with the port 116.987 and 300 mm; 4.6058 in is 4 5/8 to a sixteenth.
    row = next(line.split() for line in done.stdout.splitlines() if line.startswith("A1 "))
    assert row[3:8] == ["67.0", "117.0", "117", "4", "5/8"]


def test_json_on_standard_output_is_json_alone(tmp_path):
    done = run("plan", jobs.write(tmp_path, DESIGN), "--json", "-")
    assert done.exit_code == 0
    data = json.loads(done.stdout)
    assert data["format"] == "traverse plan" and len(data["points"]) == 8


def test_json_and_figure_into_files(tmp_path):
    path = jobs.write(tmp_path, DESIGN)
    done = run("plan", path, "--json", tmp_path / "p.json", "--figure", tmp_path / "p.png")
    assert done.exit_code == 0 and "Marks:" in done.stdout
    assert json.loads((tmp_path / "p.json").read_text(encoding="utf-8"))["points"][0]["line"] == "A"
    assert (tmp_path / "p.png").read_bytes().startswith(b"\x89PNG")
    assert "wrote" in done.stderr and "p.json" in done.stderr and "p.png" in done.stderr
    before = (tmp_path / "p.json").read_bytes()
    again = run("plan", path, "--json", tmp_path / "p.json", "--figure", tmp_path / "new.png")
    assert again.exit_code == 1 and "--force" in again.stderr and again.stdout == ""
    assert (tmp_path / "p.json").read_bytes() == before and not (tmp_path / "new.png").exists()
    assert run("plan", path, "--json", tmp_path / "p.json", "--force", "-q").exit_code == 0


def test_an_input_is_never_overwritten(tmp_path):
    path = jobs.write(tmp_path)
    before = path.read_bytes()
    done = run("plan", path, "--json", path, "--force")
    assert done.exit_code == 1 and "input" in done.stderr and path.read_bytes() == before


@pytest.mark.parametrize(("change", "words"), [
    ({"plane": {"port_depth": ["50 mm"]}, "layout": {"lines": 2}}, ["1 port depths for 2 lines", "A, B"]),
    ({"plane": {"port_depth": ["50 mm", "40 mm", "30 mm"]}}, ["3 port depths for 2 lines"]),
    ({"plane": {"port_depth": ["50 mm", "-1 mm"]}}, ["-1 mm", "zero or more"]),
    ({"plane": {"port_depth": ["50 mm", 40]}}, ["port_depth[2]", "no unit"]),
    ({"plane": {"port_depth": 50}}, ["port_depth", "no unit"]),
    ({"plane": {"port_depth": []}}, ["port_depth", "list"]),
    ({"design": {"velocity": "10 m/s", "actual_flow": "3 m3/s"}}, ["both actual_flow and velocity"]),
    ({"design": {"velocity": "0 m/s"}}, ["velocity", "above zero"]),
    ({"design": {"velocity": "10 m3/s"}}, ["unit of flow"]),
    ({"design": {"profile": 7}}, ["no actual_flow", "velocity"]),
    ({"design": {"velocity": "10 m/s", "profile": 1}}, ["profile", "3 to 20"]),
    ({"design": {"velocity": "10 m/s", "profile": "7"}}, ["profile", "bare number"]),
    ({"gauge": {"range": "0 Pa"}}, ["range", "above zero"]),
    ({"gauge": {"range": "10 Pa", "division": "20 Pa"}}, ["division", "part of the range"]),
    ({"gauge": {"range": "5 in"}}, ["water or of mercury"]),
    ({"gauge": {"scale": "5 Pa"}}, ["unknown key", "range, division"]),
])
def test_refusals(tmp_path, change, words):
    done = run("plan", jobs.write(tmp_path, change))
    assert done.exit_code == 1 and done.stdout == ""
    assert "Traceback" not in done.stderr
    for word in words:
        assert word in done.stderr


def test_a_job_is_refused_for_the_same_ports(tmp_path):
    done = run("reduce", jobs.write(tmp_path, {"plane": {"port_depth": ["50 mm", "40 mm", "30 mm"]}}))
    assert done.exit_code == 1 and "3 port depths for 2 lines" in done.stderr


def test_a_design_velocity_is_a_design_flow_to_the_reduction(tmp_path):
    done = run("reduce", jobs.write(tmp_path, {"design": {"velocity": "10 m/s"}, "gauge": {"range": "250 Pa"}}), "--json", "-")
    # 10 m/s in a circle of 1 m.
    assert json.loads(done.stdout)["design"]["actual_flow"] == pytest.approx(7.853981634)


def test_the_rule_of_points_of_ones_own_is_named(tmp_path):
    from click.testing import CliRunner

    from tests.support import jobs
    from traverse.cli import main

    layout = {"rule": "custom", "lines": 2, "points": None, "depths": ["32 mm", "135 mm", "321 mm", "679 mm", "865 mm", "968 mm"]}
    shown = CliRunner().invoke(main, ["plan", str(jobs.write(tmp_path, {"layout": layout}))])
    assert "Looks like   Log-linear, 6 points" in shown.output and "lines A, B" in shown.output
    layout["depths"] = ["100 mm", "300 mm", "700 mm", "950 mm"]
    shown = CliRunner().invoke(main, ["plan", str(jobs.write(tmp_path, {"layout": layout}))])
    assert "Looks like   no rule that is known here" in shown.output
