"""Published examples through the whole program; the tolerance is half a unit of the last printed digit.

Where a print cannot come out (truncated, or made from rounded numbers) the file gives the computed number beside it and
says why; then the result must agree with that one, and the two must be near each other.
"""

import tomllib
from pathlib import Path

import pytest

import traverse
from tests.support import jobs
from traverse.units import UNITS

FILES = sorted(Path(__file__).parent.glob("*.toml"))
CASES = {path.stem: tomllib.loads(path.read_text(encoding="utf-8")) for path in FILES}


def half_unit(printed):
    return 0.5 * 10.0 ** -len(printed.partition(".")[2])


def reduced(case, folder):
    for name, text in {"readings.csv": case["readings"], **case.get("files", {})}.items():
        (folder / name).write_text(text, encoding="utf-8")
    (folder / "job.toml").write_text(jobs.text(case["job"]), encoding="utf-8")
    return traverse.reduce(traverse.load(folder / "job.toml")).to_dict()


def test_every_example_has_its_source():
    assert len(CASES) >= 15
    for name, case in CASES.items():
        assert case["title"] and case["source"] and case["read"], name
        assert case.get("expect") or case.get("points"), name


@pytest.mark.parametrize("name", CASES)
def test_printed_quantities(name, tmp_path):
    case = CASES[name]
    result = reduced(case, tmp_path)
    for expect in case.get("expect", []):
        unit = UNITS[expect["unit"]]
        got = unit.from_si(jobs.value(result, expect["quantity"]))
        wanted = expect.get("computed", expect["printed"])
        assert got == pytest.approx(float(wanted), abs=half_unit(wanted) * 1.0001), (expect["quantity"], got, wanted)
        if "computed" in expect:
            assert expect["remark"]
            assert float(expect["computed"]) == pytest.approx(float(expect["printed"]), rel=2e-3)
    if "points" in case:
        unit = UNITS[case["points"]["unit"]]
        for point, printed in zip(result["runs"][0]["points"], case["points"]["velocity"], strict=True):
            assert unit.from_si(point["velocity"]) == pytest.approx(float(printed), rel=case["points"]["tolerance"])
