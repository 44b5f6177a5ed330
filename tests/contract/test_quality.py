"""What a crew writes down beside the readings, and the checks that decide on it: both sides of every limit."""

import pytest

import traverse
from tests.support import jobs
from traverse.errors import TraverseError


def outcomes(folder, quality, **change):
    path = jobs.write(folder, change)
    path.write_text(path.read_text() + quality, encoding="utf-8")
    result = traverse.reduce(traverse.load(path))
    return {(run, check.id): check for run, check in result.all_checks()}, result


def one(folder, quality, name, **change):
    found, _ = outcomes(folder, quality, **change)
    return next(check for (_, check_id), check in found.items() if check_id == name)


@pytest.mark.parametrize(("text", "status"), [
    ('leak_after = "passed"', "pass"), ('leak_after = "failed"', "fail"), ('leak_before = "failed"\nleak_after = "passed"', "fail"),
    ('leak_before = "passed"', "not evaluated"), ('leak_after = "not done"', "not evaluated"),
])
def test_leak_check(tmp_path, text, status):
    assert one(tmp_path, f"[quality]\n{text}\n", "leak-check").status == status


def test_a_leak_check_nobody_speaks_of(tmp_path):
    assert one(tmp_path, "", "leak-check").status == "not applicable"
    flue = {"gas": {"kind": "flue-gas", "oxygen": "7 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None}}
    assert one(tmp_path, "", "leak-check", job={"method": "epa-2"}, conditions={"temperature": "150 degC"}, **flue).status == "not evaluated"


@pytest.mark.parametrize(("before", "after", "status"), [("0 Pa", "2.7 Pa", "pass"), ("0 Pa", "2.9 Pa", "fail"), ("-1.5 Pa", "1.5 Pa", "fail"), ("2.7 Pa", "2.7 Pa", "pass")])
def test_zero_of_the_gauge(tmp_path, before, after, status):
    """The mean pressure is 55.6 Pa; 5 % of it are 2.78 Pa."""
    found = one(tmp_path, f'[quality]\nzero_before = "{before}"\nzero_after = "{after}"\n', "zero-drift")
    assert found.status == status and before in found.observed


@pytest.mark.parametrize(("key", "name", "reading", "status"), [
    ("repeats", "repeat-reading", "55 Pa", "pass"), ("repeats", "repeat-reading", "55.1 Pa", "fail"), ("repeats", "repeat-reading", "44.9 Pa", "fail"),
    ("after_purge", "plugging", "52.5 Pa", "pass"), ("after_purge", "plugging", "52.6 Pa", "fail"),
])
def test_readings_again(tmp_path, key, name, reading, status):
    """A1 read 50 Pa: within 10 % (UFGS 15951N), within 5 % after blowing out (Method 2, 6.1.2)."""
    found = one(tmp_path, f'[quality]\n{key} = {{ A1 = "{reading}", B4 = "52 Pa" }}\n', name)
    assert found.status == status and "A1" in found.observed


@pytest.mark.parametrize(("method", "text", "status"), [
    ("exact", "gauge_calibrated = 2026-01-01", "pass"), ("exact", "gauge_calibrated = 2025-01-01", "fail"), ("exact", "pitot_calibrated = 2026-12-31", "fail"),
    ("epa-2", "gauge_calibrated = 2026-09-02", "pass"), ("epa-2", "gauge_calibrated = 2026-09-01", "fail"),
    ("epa-2", "barometer_calibrated = 2026-11-01", "pass"), ("epa-2", "thermometer_calibrated = 2026-10-31", "fail"),
])
def test_dates_of_calibration(tmp_path, method, text, status):
    """Methods 2F and 2G: gauge 90 days, thermometer and barometer 30; otherwise 12 months. The day is 2026-12-01."""
    path = jobs.write(tmp_path, {"job": {"method": method}, "gas": {"kind": "air", "dry": True, "density": None}})
    path.write_text(path.read_text().replace('[job]\n', '[job]\ndate = 2026-12-01\n') + f"[quality]\n{text}\n", encoding="utf-8")
    found = next(c for _, c in traverse.reduce(traverse.load(path)).all_checks() if c.id == "calibration-dates")
    assert found.status == status


def test_without_a_date_no_age(tmp_path):
    assert one(tmp_path, "[quality]\ngauge_calibrated = 2026-01-01\n", "calibration-dates").status == "not evaluated"


def test_a_run_of_its_own(tmp_path):
    readings = jobs.READINGS.replace("line,", "run,line,").replace("\nA", "\n1,A").replace("\nB", "\n1,B")
    second = "".join(f"2,{row}\n" for row in jobs.READINGS.splitlines()[1:])
    path = jobs.write(tmp_path, None, readings + second)
    path.write_text(path.read_text() + '[quality]\nleak_after = "passed"\n[quality.run."2"]\nleak_after = "failed"\n', encoding="utf-8")
    status = {run: check.status for run, check in traverse.reduce(traverse.load(path)).all_checks() if check.id == "leak-check"}
    assert sorted(status.values()) == ["fail", "pass"]


def test_nothing_of_it_changes_a_number(tmp_path):
    _, plain = outcomes(tmp_path, "")
    _, found = outcomes(tmp_path, '[quality]\nzero_after = "9 Pa"\nrepeats = { A1 = "90 Pa" }\n')
    assert found.to_dict()["runs"][0]["quantities"] == plain.to_dict()["runs"][0]["quantities"]


@pytest.mark.parametrize(("text", "message"), [
    ('leak = "passed"', "unknown key 'leak'"), ('leak_after = "ok"', "passed, failed, not done"), ("zero_after = 0.1", "no unit"),
    ('zero_after = "3 mm"', "zero_after"), ('repeats = { C1 = "3 Pa" }', "point 'C1'"), ('repeats = "3 Pa"', "by point"),
    ('gauge_calibrated = "May"', "without quotes"), ('[quality.run."7"]\nleak_after = "passed"', "run '7'"), ('run = "2"', "run is no table"),
])
def test_what_cannot_be_said(tmp_path, text, message):
    with pytest.raises(TraverseError, match=message):
        outcomes(tmp_path, f"[quality]\n{text}\n")
