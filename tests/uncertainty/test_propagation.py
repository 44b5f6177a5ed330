"""The budget against independent libraries, the closed form, and published examples."""

import math

import GTC
import numpy as np
import pytest
import uncertainties
from hypothesis import given
from hypothesis import strategies as st
from uncertainties import umath

from tests.support import jobs
from traverse.uncertainty.propagation import combine

READINGS = {"A": (50, 60, 62, 48), "B": (49, 61, 63, 52)}
DP = np.array([*READINGS["A"], *READINGS["B"]], dtype=float)
TABLE = {
    "coverage": 0.95, "coefficient": "±1 %", "density": "0.4 %",
    "differential_pressure": {"calibration": "1 % + 0.5 Pa", "resolution": "1 Pa", "repeatability": "2 %"},
    "dimensions": "±2 mm", "layout": "1.5 %",
}


def flow(result, name="actual_flow", run=0):
    return result["runs"][run]["quantities"][name]


def test_against_two_uncertainty_libraries(tmp_path):
    """The same measurement model in `uncertainties` (linear, automatic derivatives) and in GTC."""
    result = jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "uncertainty": TABLE})
    half = 1 / math.sqrt(3)
    for number, root, sqrt in (
        (lambda x, u: uncertainties.ufloat(x, u), umath.sqrt, lambda y: y.std_dev),
        (lambda x, u: GTC.ureal(x, u), GTC.sqrt, lambda y: GTC.uncertainty(y)),
    ):
        coefficient, density = number(1.0, 0.01 * half), number(1.2, 0.004 * 1.2)
        gain, zero, layout, diameter = number(1.0, 0.01), number(0.0, 0.5), number(1.0, 0.015), number(1.0, 0.002 * half)
        mean = 0
        for reading in DP:
            own = number(0.0, 1 / math.sqrt(12)) + number(0.0, 0.02 * reading)
            mean = mean + coefficient * root(2 * (gain * reading + zero + own) / density) / 8
        total = math.pi / 4 * diameter**2 * layout * mean
        assert flow(result)["standard_uncertainty"] == pytest.approx(sqrt(total), rel=1e-6)
    assert flow(result)["degrees_of_freedom"] is None
    assert flow(result)["coverage_factor"] == pytest.approx(1.959963984540054, rel=1e-12)
    assert flow(result)["expanded_uncertainty"] == pytest.approx(1.959963984540054 * flow(result)["standard_uncertainty"], rel=1e-12)


def test_against_the_closed_form(tmp_path):
    """Shared gain does not shrink with the number of points; zero weighs low points; noise falls with them."""
    change = {"job": {"method": "ashrae-111"}}
    weight = np.sqrt(DP) / np.sqrt(DP).sum()
    expected = {
        "calibration": 0.5 * 0.01, "zero": 0.5 * 0.5 * (weight / DP).sum(), "repeatability": 0.5 * 0.02 * math.sqrt((weight**2).sum()),
        "resolution": 0.5 / math.sqrt(12) * math.sqrt((weight**2 / DP**2).sum()),
    }
    stated = {"calibration": "1 %", "zero": "0.5 Pa", "repeatability": "2 %", "resolution": "1 Pa"}
    for kind, relative in expected.items():
        table = {"coverage": 0.95, "layout": "none", "differential_pressure": {kind: stated[kind]}}
        result = jobs.reduced(tmp_path, change | {"uncertainty": table})
        got = flow(result)
        assert got["standard_uncertainty"] / got["value"] == pytest.approx(relative, rel=1e-6), kind
        (row,) = result["runs"][0]["budget"]["actual_flow"]
        assert row["share"] == pytest.approx(1.0) and row["shared"] == (kind in {"calibration", "zero"})


def test_state_enters_velocity_and_standard_flow_once(tmp_path):
    """T and p through the density: half their relative size in velocity, minus and plus a half in standard flow."""
    change = {"gas": {"kind": "air", "dry": True, "density": None}, "job": {"method": "exact"},
              "reference": {"temperature": "20 degC", "pressure": "101325 Pa"}}
    for entry, relative, powers in (
        ({"temperature": "2 K"}, 2 / 293.15, {"mean_velocity": 0.5, "actual_flow": 0.5, "standard_flow": 0.5, "mass_flow": 0.5}),
        ({"barometric": "500 Pa"}, 500 / 101325, {"mean_velocity": 0.5, "standard_flow": 0.5, "mass_flow": 0.5}),
    ):
        result = jobs.reduced(tmp_path, change | {"uncertainty": {"layout": "none", **entry}})
        for name, power in powers.items():
            got = flow(result, name)
            assert got["standard_uncertainty"] / got["value"] == pytest.approx(power * relative, rel=1e-3), (entry, name)


def test_moisture_is_one_input_of_density_and_dry_flow(tmp_path):
    """d ln Q_dry = (-1/(1 - B) + (Md - Mw)/(2 M)) dB: the two ways partly cancel and are never added as independent."""
    change = {"job": {"method": "exact"}, "conditions": {"temperature": "150 degC"},
              "gas": {"kind": "flue-gas", "oxygen": "6 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None},
              "reference": {"temperature": "20 degC", "pressure": "101325 Pa"}, "uncertainty": {"layout": "none", "moisture": "0.5 %"}}
    result = jobs.reduced(tmp_path, change)
    dry, wet = jobs.value(result, "molar_mass_dry"), jobs.value(result, "molar_mass")
    got = flow(result, "dry_standard_flow")
    expected = abs(-1 / 0.9 + 0.5 * (dry - 18.01528) / wet) * 0.005
    assert got["standard_uncertainty"] / got["value"] == pytest.approx(expected, rel=1e-3)
    assert result["runs"][0]["budget"]["dry_standard_flow"][0]["sensitivity"] < 0
    assert flow(result, "moisture")["standard_uncertainty"] == pytest.approx(0.005, rel=1e-9)


def test_dimensions_are_independent(tmp_path):
    change = {"plane": {"shape": "rectangle", "diameter": None, "width": "0.8 m", "height": "0.5 m"},
              "layout": {"rule": "equal-area", "lines": 2, "points": 4}, "uncertainty": {"layout": "none", "dimensions": "2 mm"}}
    got = flow(jobs.reduced(tmp_path, change), "area")
    assert got["standard_uncertainty"] / got["value"] == pytest.approx(math.hypot(2 / 800, 2 / 500), rel=1e-8)


def test_yaw_is_second_order(tmp_path):
    """cos(yaw) has no slope at zero: u = v u_yaw^2/sqrt(2) (JCGM 100 5.1.2 note), not zero."""
    got = flow(jobs.reduced(tmp_path, {"uncertainty": {"layout": "none", "yaw": "3 deg"}}), "mean_velocity")
    angle = math.radians(3)
    assert got["standard_uncertainty"] / got["value"] == pytest.approx(angle**2 / math.sqrt(2), rel=2e-3)


def test_position_acts_through_the_measured_gradient(tmp_path):
    """A root that falls linearly along the line by 20 Pa^0.5 a metre, eight independent marks off by 3 mm each."""
    depth = np.array([0.06699, 0.25, 0.75, 0.93301])
    root = 10 - 2 * depth
    text = "line,point,differential_pressure [Pa]\n" + "".join(f"{n},{i + 1},{r * r:.12f}\n" for n in "AB" for i, r in enumerate(root))
    got = flow(jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "uncertainty": {"layout": "none", "position": "3 mm"}}, text),
               "mean_root_differential_pressure")
    assert got["standard_uncertainty"] == pytest.approx(2 * 0.003 / math.sqrt(8), rel=1e-4)


def test_three_runs_do_not_shrink_what_they_share(tmp_path):
    """One coefficient for all runs stays; independent readings fall with the root of the number of runs."""
    lines = jobs.READINGS.splitlines()
    text = "run," + lines[0] + "\n" + "".join(f"{run},{line}\n" for run in "123" for line in lines[1:])
    for entry, factor in (({"coefficient": "1 %"}, 1.0), ({"differential_pressure": {"repeatability": "2 %"}}, 1 / math.sqrt(3))):
        result = jobs.reduced(tmp_path, {"uncertainty": {"layout": "none", **entry}}, text)
        single, mean = flow(result), result["summary"]["quantities"]["actual_flow"]
        assert mean["standard_uncertainty"] == pytest.approx(factor * single["standard_uncertainty"], rel=1e-9)


def test_below_range_limits_are_uncertainty(tmp_path):
    text = jobs.READINGS.replace("B,3,63", "B,3,<10")
    result = jobs.reduced(tmp_path, {"uncertainty": {"layout": "none"}}, text)
    (row,) = result["runs"][0]["budget"]["actual_flow"]
    assert row["input"] == "differential_pressure below range"
    assert row["standard_uncertainty"] == pytest.approx(10 / math.sqrt(12))


def test_zero_reading_has_a_finite_effect(tmp_path):
    """The root is not linear at zero: the step is a whole sigma there, and the result is finite and not zero."""
    text = jobs.READINGS.replace("B,3,63", "B,3,0")
    got = flow(jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "uncertainty": {"layout": "none", "differential_pressure": {"resolution": "2 Pa"}}}, text))
    quiet = flow(jobs.reduced(tmp_path, {"job": {"method": "ashrae-111"}, "uncertainty": {"layout": "none", "differential_pressure": {"resolution": "2 Pa"}}}))
    assert math.isfinite(got["standard_uncertainty"]) and got["standard_uncertainty"] > 2 * quiet["standard_uncertainty"]


@pytest.mark.parametrize(("layout", "words"), [("none", "none"), ("estimate", "not estimated"), ("2 %", "stated: 2 %")])
def test_the_result_says_which_layout_term(tmp_path, layout, words):
    result = jobs.reduced(tmp_path, {"uncertainty": {"layout": layout, "coefficient": "1 %"}})
    assert result["uncertainty"]["layout_term"].startswith(words)
    got = flow(result)
    expected = math.hypot(0.01, 0.02) if layout == "2 %" else 0.01
    assert got["standard_uncertainty"] / got["value"] == pytest.approx(expected, rel=1e-3)
    if layout == "estimate":
        assert any(f["level"] == "attention" and "layout" in f["message"] for f in result["findings"])


# --- published --------------------------------------------------------------------------------------------------------


def test_gum_h1_end_gauge():
    """JCGM 100:2008 H.1 (read): components 25 (18), 9.7 (25.6), 2.9 (50), 16.6 (2) nm; u 32, nu 16, k99 = 2.92, U 93.

    Unrounded the components give 31.66, 16.75 and 92.48; the print rounds u to 32 before multiplying by 2.92.
    """
    # The third, 2.9 nm, is the rectangular coefficient difference with 50 degrees of freedom; the fourth 2.
    got = combine([(25.0, 18), (9.7, 25.6), (2.9, 50), (16.6, 2)], 0.99)
    assert got.standard == pytest.approx(32, abs=0.5)
    assert got.degrees_of_freedom == 16
    assert got.factor == pytest.approx(2.92, abs=0.005)
    assert got.factor * 32 == pytest.approx(93, abs=0.5)


@pytest.mark.parametrize(("freedom", "printed"), [(1, "12.706"), (2, "4.303"), (8, "2.306"), (15, "2.131"), (30, "2.042")])
def test_students_factor(freedom, printed):
    """Two-sided 95 % quantiles as tabulated in relative-accuracy tests of stacks (from memory, reproduced)."""
    assert combine([(1.0, freedom)], 0.95).factor == pytest.approx(float(printed), abs=0.0005)


def test_jcgm_101_additive_normal():
    """JCGM 101:2008 9.2.2 (read): four standard normal inputs, 95 % interval +-3.92."""
    assert combine([(1.0, math.inf)] * 4, 0.95).expanded == pytest.approx(3.92, abs=0.005)


@given(st.lists(st.tuples(st.floats(1e-3, 10), st.sampled_from([3.0, 9.0, 50.0, math.inf])), min_size=1, max_size=6))
def test_combination_properties(parts):
    """In any order; never below the largest; degrees of freedom between the least and the sum (Welch-Satterthwaite)."""
    got, turned = combine(parts, 0.95), combine(parts[::-1], 0.95)
    assert got.standard == pytest.approx(turned.standard) and got.degrees_of_freedom == turned.degrees_of_freedom
    assert got.standard >= max(u for u, _ in parts) * (1 - 1e-12)
    finite = [nu for _, nu in parts if math.isfinite(nu)]
    if finite and len(finite) == len(parts):
        assert min(finite) - 1 <= got.degrees_of_freedom <= sum(finite) + 1e-6


def test_a_quantity_that_an_input_does_not_move_has_no_uncertainty_from_it(tmp_path):
    """The density does not depend on the dimensions: rounding in the last digits of a difference is no uncertainty."""
    from tests.support import jobs

    change = {"gas": {"kind": "air", "density": None, "relative_humidity": "45 %"}, "uncertainty": {"dimensions": "2 mm", "coefficient": "1 %", "layout": "none"}}
    quantities = jobs.reduced(tmp_path, change)["runs"][0]["quantities"]
    assert quantities["density"]["standard_uncertainty"] == 0.0 == quantities["temperature"]["standard_uncertainty"]
    assert quantities["actual_flow"]["standard_uncertainty"] > 0.0
