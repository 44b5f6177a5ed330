"""One sample per input shape: the same twelve readings as people and instruments write them."""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest

from traverse.importers import load

FORMS = Path(__file__).parent.parent / "forms"
A = [20.5, 31.0, 44.2, 52.0, 47.1, 33.3]
B = [22.0, 35.4, 47.7, 55.1, 49.0, 30.6]
BOTH = A + B
DEGREES = [25.0, 25.5, 26.0, 26.5, 26.0, 25.5] * 2
INCH = 249.08891  # Pa, conventional inch of water (1000 kg/m3, standard gravity)


@dataclass(frozen=True)
class Form:
    """A sample, what the job must say about it, and what must come out in SI."""

    file: str
    pressure: list[float]
    temperature: list[float] | None = None
    settings: str = ""
    labels: tuple[str, ...] = ("A", "B")


CELSIUS = [273.15 + t for t in DEGREES]
ALL = [
    Form("plain.csv", BOTH, CELSIUS),
    Form("semicolon_8bit.csv", BOTH, CELSIUS),
    Form("tab_utf16.tsv", [round(v / 100, 3) * INCH for v in BOTH], [(10 * t - 32) / 1.8 + 273.15 for t in DEGREES]),
    Form("quoted_decimal_comma.csv", BOTH, CELSIUS),
    Form("velocity_fpm.csv", [0.6 * (round(v * 40) * 0.00508) ** 2 for v in BOTH], settings='meter_density = "1.2 kg/m3"'),
    Form("total_static.csv", BOTH),
    Form("logger_bom.csv", BOTH, CELSIUS),
    Form("numbered_through.csv", BOTH, labels=("East", "West")),
    Form("unlabelled.csv", [v * 9.80665 for v in BOTH]),
    Form("grouped.csv", [1000 + v for v in BOTH]),
    Form("bars.txt", BOTH),
    Form("restart.csv", BOTH),
    Form("depths.csv", BOTH),
]


@pytest.mark.parametrize("form", ALL, ids=lambda form: form.file)
def test_the_sample_gives_its_readings_in_si(tmp_path, write, form):
    (tmp_path / form.file).write_bytes((FORMS / form.file).read_bytes())
    path = write(None)
    path.write_text(path.read_text().replace('file = "readings.csv"', f'file = "{form.file}"\n{form.settings}'))
    (run,) = load(path).runs
    readings = run.readings
    assert run.name == "1"
    assert readings.differential_pressure == pytest.approx(form.pressure, rel=1e-12)
    expected = form.temperature or [298.15] * 12
    assert readings.temperature == pytest.approx(expected, rel=1e-12)
    assert readings.status == ("read",) * 12
    assert tuple(dict.fromkeys(readings.line)) == form.labels
    assert readings.point == (1, 2, 3, 4, 5, 6) * 2


def test_every_sample_is_tried():
    others = {"stack_list.csv", "words.csv"}
    assert {path.name for path in FORMS.iterdir() if path.suffix in {".csv", ".tsv", ".txt"}} == {f.file for f in ALL} | others


def test_the_stack_list_has_three_runs_with_one_temperature_a_port(tmp_path, write):
    (tmp_path / "readings.csv").write_bytes((FORMS / "stack_list.csv").read_bytes())
    job = load(write(None))
    assert [run.name for run in job.runs] == ["1", "2", "3"]
    for number, run in enumerate(job.runs):
        assert run.readings.differential_pressure == pytest.approx([(round(v / 100 + 0.01 * number, 3)) * INCH for v in BOTH])
        assert run.readings.temperature == pytest.approx([(300 - 32) / 1.8 + 273.15] * 12)
    said = [finding.message for finding in job.findings]
    assert any("head of each line" in message for message in said)
    assert sum("a total or an average" in message for message in said) == 3
    assert any("√ΔP" in message and "not used" in message for message in said)


def test_words_keep_their_status_and_text(tmp_path, write):
    (tmp_path / "readings.csv").write_bytes((FORMS / "words.csv").read_bytes())
    readings = load(write(None)).runs[0].readings
    assert readings.status == (
        "read",
        "obstructed",
        "below range",
        "plugged",
        "negative",
        "over range",
        "read",
        "missing",
        "excluded",
        "read",
        "read",
        "read",
    )
    assert readings.reason[8] == "probe slipped"
    dp = readings.differential_pressure
    assert [math.isnan(value) for value in dp] == [False, True, False, True, False, False, False, True, True, False, False, False]
    assert dp[2] == pytest.approx(0.01 * INCH)
    assert dp[4] == pytest.approx(-0.03 * INCH)
    assert dp[5] == pytest.approx(2 * INCH)
    assert readings.text[2] == "<0.01"
    assert readings.text[7] == "N/A"
    assert readings.text[8] == "excluded: probe slipped"
    column = readings.columns["differential_pressure"]
    assert column.unit == "inH2O"
    assert column.where[4] == "readings.csv:6"
    assert np.isnan(column.number[1])
    assert column.number[4] == -0.03
