"""traverse study as a user meets it."""

import csv
import json
import shutil
from pathlib import Path

import pytest
from click.testing import CliRunner

from traverse.cli import main

EXAMPLES = Path(__file__).parents[2] / "example_data"


def run(*arguments):
    """Run a command; anything but a clean exit or the program's own error is a bug and shows itself."""
    return CliRunner().invoke(main, [str(argument) for argument in arguments], catch_exceptions=False)


@pytest.fixture
def example(tmp_path):
    folder = tmp_path / "work"
    shutil.copytree(EXAMPLES, folder)
    return folder


def test_the_table_and_the_verdict(example):
    before = sorted(path.name for path in example.iterdir())
    done = run("study", example / "boiler_stack.toml")
    assert done.exit_code == 0
    for words in ("Every rule on the same lines", "Line A alone", "Turned by 45 degrees", "Deeper by 1 % of the diameter", "equal areas would read", "Limits"):
        assert words in done.stdout
    assert "ft/s" in done.stdout and "mean of 3 runs" in done.stdout
    assert sorted(path.name for path in example.iterdir()) == before, "nothing is written"


def test_outputs(example, tmp_path):
    figure, rows, data = tmp_path / "s.png", tmp_path / "s.csv", tmp_path / "s.json"
    done = run("study", example / "supply_duct.toml", "--figure", figure, "--out", rows, "--json", data)
    assert done.exit_code == 0 and done.stderr.count("wrote") == 3
    assert figure.read_bytes().startswith(b"\x89PNG") and figure.stat().st_size > 50_000
    content = json.loads(data.read_text(encoding="utf-8"))
    assert (content["format"], content["version"], content["measured"]) == ("traverse study", 1, True)
    table = list(csv.DictReader(rows.open(encoding="utf-8")))
    assert [row["name"] for row in table] == [row["name"] for row in content["rows"]]
    assert [float(row["difference"]) for row in table] == [row["difference"] for row in content["rows"]]
    assert 5 < content["section_mean"]["value"] < 10 and content["section_mean"]["standard_uncertainty"] > 0


def test_json_alone_on_standard_output(example):
    done = run("study", example / "supply_duct.toml", "--json", "-", "-q")
    assert json.loads(done.stdout)["basis"] == "run 1" and done.stderr == ""


def test_one_run(example):
    assert json.loads(run("study", example / "boiler_stack.toml", "--run", "2", "--json", "-").stdout)["basis"] == "run 2"
    done = run("study", example / "boiler_stack.toml", "--run", "9")
    assert done.exit_code == 1 and "no run '9'" in done.stderr and "1, 2, 3" in done.stderr


def test_a_formula_needs_no_readings(example, tmp_path):
    (example / "extract_duct.csv").unlink()
    done = run("study", example / "extract_duct.toml", "--profile", "power:7", "--figure", tmp_path / "p.svg")
    assert done.exit_code == 0 and "exact mean is 0.8167" in done.stdout, "98/120"
    assert (tmp_path / "p.svg").read_bytes().startswith(b"<?xml")
    assert run("study", example / "extract_duct.toml").exit_code == 1


def test_wrong_use(example, tmp_path):
    assert run("study", example / "boiler_stack.toml", "--run", "1", "--profile", "power:7").exit_code == 2
    assert run("study", example / "boiler_stack.toml", "--out", tmp_path / "a", "--json", tmp_path / "a").exit_code == 2
    done = run("study", example / "boiler_stack.toml", "--profile", "plug")
    assert done.exit_code == 1 and "power:7" in done.stderr


def test_refusals_leave_everything_as_it_was(example, tmp_path):
    old = tmp_path / "old.csv"
    old.write_text("mine")
    job, readings = example / "supply_duct.toml", example / "supply_duct.csv"
    before = job.read_bytes(), readings.read_bytes()
    assert run("study", job, "--out", old).exit_code == 1 and old.read_text() == "mine"
    for target in (job, readings):
        assert run("study", job, "--out", target, "--force").exit_code == 1
        assert run("study", job, "--profile", "power:7", "--json", job, "--force").exit_code == 1
    assert (job.read_bytes(), readings.read_bytes()) == before
    assert run("study", job, "--figure", tmp_path / "a.bmp", "--out", tmp_path / "b.csv").exit_code == 1
    assert not (tmp_path / "b.csv").exists()
    assert run("study", job, "--out", old, "--force").exit_code == 0 and old.read_text().startswith("family,")


def test_what_the_reduction_wants_known_is_said(example):
    assert "negative reading at A6" in run("study", example / "extract_duct.toml").stderr
