"""The check of the number of points in sections that are neither round nor rectangular."""

import pytest

import traverse
from tests.support import jobs

FAR = {"upstream": "20 m", "downstream": "20 m"}


def outcome(folder, method, plane, points=4):
    job = jobs.write(folder, {"job": {"method": method}, "plane": {**FAR, **plane}, "layout": {"points": points}})
    return next(check for _, check in traverse.reduce(traverse.load(job)).all_checks() if check.id == "point-count")


@pytest.mark.parametrize("method", ["iso-3966", "ashrae-111", "epa-2"])
@pytest.mark.parametrize("plane", [{"shape": "annulus", "core": "0.3 m"}, {"shape": "ellipse", "diameter": None, "width": "1 m", "height": "0.8 m"}])
def test_a_shape_without_a_number_of_points_is_no_failure(tmp_path, method, plane):
    """The rules speak of round and rectangular sections; Method 1, 11.3.1.3 (read), lays the points of a round stack on an ellipse's diameters."""
    found = outcome(tmp_path, method, plane)
    if (method, plane["shape"]) == ("epa-2", "ellipse"):
        assert found.status == "fail" and found.criterion.startswith("at least 12 points")
    else:
        assert found.status == "not evaluated" and plane["shape"] in found.message and found.criterion.endswith("shape")


@pytest.mark.parametrize(("width", "wanted"), [("0.60 m", "at least 8 points"), ("0.62 m", "at least 12 points")])
def test_small_elliptical_stacks_count_as_round_ones(tmp_path, width, wanted):
    """Method 1, 11.2.1.1 (read): 8 points in a round stack up to 0.61 m, 9 in a rectangular one, 12 above."""
    plane = {"shape": "ellipse", "diameter": None, "width": width, "height": str(float(width[:4]) + 0.001) + " m"}
    assert outcome(tmp_path, "epa-2", plane).criterion.startswith(wanted)
