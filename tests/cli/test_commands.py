"""The commands as a user meets them: outputs, exit codes, and every refusal leaving existing files as they were."""

import hashlib
import json
import os
import shutil
import stat
from pathlib import Path

import pytest
from click.testing import CliRunner

from tests.support import jobs
from traverse.cli import main

EXAMPLES = Path(__file__).parents[2] / "example_data"


def run(*arguments):
    """Run a command; anything but a clean exit or the program's own error is a bug and shows itself."""
    return CliRunner().invoke(main, [str(argument) for argument in arguments], catch_exceptions=False)


def state(folder):
    return {str(path.relative_to(folder)): hashlib.sha256(path.read_bytes()).hexdigest() for path in sorted(folder.rglob("*")) if path.is_file()}


@pytest.fixture
def example(tmp_path):
    folder = tmp_path / "work"
    shutil.copytree(EXAMPLES, folder)
    return folder


def test_the_main_job(example, tmp_path):
    out, figures, tables = tmp_path / "report.xlsx", tmp_path / "figures", tmp_path / "tables"
    done = run("reduce", example / "boiler_stack.toml", "--out", out, "--json", "-", "--figures", figures, "--csv", tables)
    assert done.exit_code == 0
    assert json.loads(done.stdout)["format"] == "traverse reduction", "standard output is JSON and nothing else"
    assert out.stat().st_size > 20_000
    assert sorted(path.name for path in figures.iterdir()) == ["budget.png", "profiles.png", "section.png"]
    assert all(path.read_bytes().startswith(b"\x89PNG") for path in figures.iterdir())
    assert sorted(path.name for path in tables.iterdir()) == ["points.csv", "quantities.csv"]
    assert "report.xlsx" in done.stderr


def test_without_outputs_nothing_is_written(example):
    before = state(example)
    done = run("reduce", example / "supply_duct.toml")
    assert done.exit_code == 0 and "Actual flow (wet)" in done.stdout and "m3/s" in done.stdout
    assert state(example) == before


def test_several_jobs_make_a_register(example, tmp_path):
    import openpyxl

    (tmp_path / "reports").mkdir()
    (example / "broken.toml").write_text("[job]\ntitle = 'x'\n")
    done = run("reduce", example, "--out", tmp_path / "reports", "--json", tmp_path / "all.json")
    assert done.exit_code == 1 and "broken.toml" in done.stderr, "one job that fails is named and the others are done"
    assert {path.name for path in (tmp_path / "reports").iterdir()} == {"boiler_stack.xlsx", "extract_duct.xlsx", "supply_duct.xlsx", "register.xlsx"}
    data = json.loads((tmp_path / "all.json").read_text())
    assert [entry["job"]["source"] for entry in data] == ["boiler_stack.toml", "extract_duct.toml", "supply_duct.toml"]
    sheet = openpyxl.load_workbook(tmp_path / "reports" / "register.xlsx").active
    assert [sheet.cell(row, 1).value for row in (4, 5, 6)] == ["boiler_stack.toml", "extract_duct.toml", "supply_duct.toml"]


def test_strict_exits_with_3_after_the_work(example, tmp_path):
    out = tmp_path / "r.xlsx"
    assert run("reduce", example / "extract_duct.toml", "--strict", "--out", out).exit_code == 3
    assert out.exists()
    assert run("reduce", example / "supply_duct.toml", "--strict").exit_code == 0


def test_explain_lists_decisions_with_their_settings(example):
    done = run("reduce", example / "extract_duct.toml", "--explain")
    assert "[readings] negative" in done.stderr and "decided otherwise by" in done.stderr
    assert "note:" not in run("reduce", example / "extract_duct.toml").stderr
    assert run("reduce", example / "extract_duct.toml", "-q").stderr == ""


def test_plan(example, tmp_path):
    (example / "boiler_stack.csv").unlink()
    done = run("plan", example / "boiler_stack.toml", "--figure", tmp_path / "plan.svg")
    assert done.exit_code == 0, "a plan needs no readings"
    # 66 in stack, 12 points on a diameter would be 6 here: 4.4 % of 66 in is 2.875 in; marks add the 6.5 in port.
    assert "2.875" in done.stdout and "9.375" in done.stdout and "9 3/8" in done.stdout
    assert "Cautions" in done.stdout and "licensed" in done.stdout
    assert (tmp_path / "plan.svg").read_bytes().startswith(b"<?xml")


def test_plan_with_design_flow_expects_a_pressure(example):
    done = run("plan", example / "extract_duct.toml")
    # 4300 cfm in 3.1416 ft2: 22.81 ft/s; 0.0600 lb/ft3 gives 0.5 rho v^2 = 23.2 Pa = 0.093 inH2O.
    assert "22.81 ft/s" in done.stdout and "0.0932 inH2O" in done.stdout


@pytest.mark.parametrize("arguments", [["--help"], ["reduce", "-h"], ["plan", "-h"], ["--version"]])
def test_help(arguments):
    assert run(*arguments).exit_code == 0


@pytest.mark.parametrize(("arguments", "code"), [
    ([], 2), (["reduce"], 2), (["reduce", "x.toml", "--wrong"], 2), (["nothing"], 2), (["reduce", "nowhere.toml"], 1), (["plan", "nowhere.toml"], 1),
])
def test_wrong_use(arguments, code):
    assert run(*arguments).exit_code == code


def refused(folder, *arguments, words=(), code=1):
    """The command must end with the code, say the words, show no traceback, and leave every file as it was."""
    before = state(folder)
    done = run(*arguments)
    assert done.exit_code == code, done.output
    text = done.stderr
    assert "Traceback" not in text and not isinstance(done.exception, (KeyError, ValueError, TypeError))
    for word in words:
        assert word in text, text
    assert state(folder) == before
    return text


READ = jobs.READINGS
BAD = {
    "missing column": ({}, READ.replace("differential_pressure [Pa]", "wind [Pa]"), ["readings.csv", "differential"]),
    "unit missing": ({}, READ.replace(" [Pa]", ""), ["readings.csv", "unit", "[readings.units]"]),
    "unit of the wrong kind": ({}, READ.replace("[Pa]", "[degC]"), ["readings.csv", "temperature", "pressure"]),
    "bare inches": ({}, READ.replace("[Pa]", "[in]"), ["inH2O"]),
    "gauge given as absolute": ({"conditions": {"static": "101 kPa"}}, READ, ["static", "gauge"]),
    "absolute below zero": ({"conditions": {"static": "-110 kPa"}}, READ, ["absolute pressure"]),
    "gauge given as barometric": ({"conditions": {"barometric": "-200 Pa"}}, READ, ["barometric"]),
    "percent for fraction": ({"gas": {"kind": "flue-gas", "density": None, "oxygen": 7.2, "carbon_dioxide": "11 %", "moisture": "9 %"}}, READ, ["[gas] oxygen", "7.2 %"]),
    "fraction without a unit": ({"gas": {"kind": "flue-gas", "density": None, "oxygen": "7 %", "carbon_dioxide": "11 %", "moisture": "0.09"}}, READ, ["[gas] moisture", "unit"]),
    "gases over 100 %": ({"gas": {"kind": "flue-gas", "density": None, "oxygen": "60 %", "carbon_dioxide": "50 %", "moisture": "1 %"}}, READ, ["100"]),
    "moisture above saturation": ({"gas": {"kind": "flue-gas", "density": None, "oxygen": "7 %", "carbon_dioxide": "11 %", "moisture": "9 %"}}, READ, ["moisture", "saturation"]),
    "relative humidity above 100 %": ({"gas": {"kind": "air", "density": None, "relative_humidity": "130 %"}}, READ, ["relative_humidity"]),
    "wet bulb above dry bulb": ({"gas": {"kind": "air", "density": None, "wet_bulb": "30 degC"}}, READ, ["wet bulb"]),
    "temperature below absolute zero": ({"conditions": {"temperature": "-300 degC"}}, READ, ["temperature", "absolute zero"]),
    "temperature below absolute zero in the readings": ({}, "line,point,dp [Pa],temperature [degC]\n" + "".join(f"{n},{k},50,-400\n" for n in "AB" for k in (1, 2, 3, 4)), ["absolute zero"]),
    "too few points": ({}, "\n".join(READ.splitlines()[:1] + [line.split(",", 2)[2] for line in READ.splitlines()[1:6]]).replace("line,point,", "") + "\n", ["5", "8"]),
    "too many points": ({}, READ + "B,5,44\n", ["B", "4"]),
    "duplicated point": ({}, READ.replace("A,2", "A,1"), ["A", "1", "repeats"]),
    "missing reading": ({}, READ.replace("A,2,60", "A,2,"), ["A2", "missing", "neighbour"]),
    "unknown key": ({"plane": {"diametre": "1 m"}}, READ, ["diametre", "diameter"]),
    "unknown table": ({"gass": {"kind": "air"}}, READ, ["gass", "gas"]),
    "unknown method": ({"job": {"method": "epa2"}}, READ, ["epa2", "epa-2"]),
    "unknown rule": ({"layout": {"rule": "log-linaer"}}, READ, ["log-linear"]),
    "odd points on a diameter": ({"layout": {"points": 5}}, READ, ["even"]),
    "number without a unit": ({"plane": {"diameter": 1.0}}, READ, ["[plane] diameter", "unit"]),
    "two humidities": ({"gas": {"kind": "air", "density": None, "dew_point": "5 degC", "relative_humidity": "40 %"}}, READ, ["dew_point", "relative_humidity"]),
    "no coefficient": ({"pitot": {"coefficient": None}}, READ, ["coefficient"]),
    "readings missing": ({"readings": {"file": "nowhere.csv"}}, READ, ["nowhere.csv"]),
    "readings binary": ({}, "\x00\x01\x02" * 100, ["readings.csv"]),
    "readings empty": ({}, "", ["readings.csv"]),
    "not a number": ({}, READ.replace("A,2,60", "A,2,6O"), ["readings.csv:3", "6O"]),
    "decimal comma undeclared": ({}, READ.replace(",", ";").replace("60", "6,012"), ["readings.csv", "decimal"]),
    "uncertainty of what is not there": ({"uncertainty": {"oxygen": "1 %"}}, READ, ["oxygen"]),
    "uncertainty that is no uncertainty": ({"uncertainty": {"coefficient": "about 1 %"}}, READ, ["coefficient", "about 1 %"]),
    "negative size": ({"plane": {"diameter": "-1 m"}}, READ, ["diameter"]),
    "wrong basis of the design flow": ({"design": {"actual_flow": "1000 scfm"}}, READ, ["actual_flow", "standard"]),
}


@pytest.mark.parametrize("name", BAD)
def test_bad_input(name, tmp_path):
    change, readings, words = BAD[name]
    path = jobs.write(tmp_path, change, readings)
    old = tmp_path / "report.xlsx"
    old.write_bytes(b"an older report")
    refused(tmp_path, "reduce", path, "--out", old, "--json", tmp_path / "new.json", "--force", words=words)


def test_job_that_is_no_toml(tmp_path):
    path = jobs.write(tmp_path)
    path.write_text("[job\ntitle = ")
    refused(tmp_path, "reduce", path, words=["job.toml:1"])
    path.write_bytes(b"\xff\xfe\x00")
    refused(tmp_path, "reduce", path, words=["job.toml"])


def test_outputs_that_cannot_be_written(tmp_path):
    path = jobs.write(tmp_path)
    (tmp_path / "there.xlsx").write_bytes(b"old")
    (tmp_path / "closed").mkdir()
    refused(tmp_path, "reduce", path, "--out", tmp_path / "no" / "r.xlsx", words=["folder", "does not exist"])
    refused(tmp_path, "reduce", path, "--out", tmp_path / "there.xlsx", words=["exists already", "--force"])
    refused(tmp_path, "reduce", path, "--out", tmp_path / "report", words=[".xlsx"], code=2)
    refused(tmp_path, "reduce", path, path, "--out", tmp_path / "r.xlsx", words=["folder"], code=2)
    refused(tmp_path, "reduce", path, "--json", path, "--force", words=["input"])
    refused(tmp_path, "reduce", path, "--json", tmp_path / "readings.csv", "--force", words=["input"])
    refused(tmp_path, "reduce", path, "--figures", tmp_path / "there.xlsx", words=["folder"])
    refused(tmp_path, "reduce", path, "--figures", tmp_path / "a" / "b", words=["folder"])
    refused(tmp_path, "plan", path, "--figure", tmp_path / "plan.bmp", words=[".png"])


@pytest.mark.skipif(os.geteuid() == 0 if hasattr(os, "geteuid") else False, reason="the administrator may write anywhere")
def test_read_only_folder(tmp_path):
    path = jobs.write(tmp_path)
    closed = tmp_path / "closed"
    closed.mkdir()
    closed.chmod(stat.S_IREAD | stat.S_IEXEC)
    try:
        refused(tmp_path, "reduce", path, "--out", closed / "r.xlsx", words=["cannot be written"])
    finally:
        closed.chmod(0o755)


def test_an_output_held_open_is_reported(tmp_path, monkeypatch):
    """Where the system refuses to replace an open file, the old one stays and the message says to close it."""
    path, out = jobs.write(tmp_path), tmp_path / "r.xlsx"
    out.write_bytes(b"old")
    monkeypatch.setattr(Path, "replace", lambda self, target: (_ for _ in ()).throw(PermissionError(13, "Permission denied")))
    refused(tmp_path, "reduce", path, "--out", out, "--force", words=["close it"])


def test_force_overwrites_an_output(tmp_path):
    path, out = jobs.write(tmp_path), tmp_path / "r.xlsx"
    out.write_bytes(b"old")
    assert run("reduce", path, "--out", out, "--force").exit_code == 0
    assert out.read_bytes().startswith(b"PK")
