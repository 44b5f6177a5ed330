"""The chain where the job-level tests do not reach: Reynolds number, signs, no flow, standard density, batches."""

import math

import numpy as np
import pytest
from CoolProp.CoolProp import PropsSI

from tests.support import jobs
from traverse.chain import Setting, evaluate, roots

FLUE = {"kind": "flue-gas", "oxygen": "6 %", "carbon_dioxide": "12 %", "moisture": "10 %", "density": None}


def one(**change):
    """Inputs of four equal points of air in a round section."""
    base = {
        "differential_pressure": np.full(4, 60.0), "root_shift": np.array([0.0]), "temperature": np.full(4, 293.15), "static": np.zeros(4),
        "barometric": np.array([101325.0]), "yaw": np.zeros(4), "weight": np.full(4, 0.25), "coefficient": np.array([1.0]),
        "water": np.array([0.0]), "moisture_shift": np.array([0.0]), "oxygen": np.array([0.0]), "carbon_dioxide": np.array([0.0]),
        "carbon_monoxide": np.array([0.0]), "sulfur_dioxide": np.array([0.0]), "density": np.array([1.2]),
        "density_temperature": np.array([np.nan]), "density_pressure": np.array([np.nan]), "molar_mass": np.array([np.nan]),
        "point_factor": np.ones(4), "wall_factor": np.array([1.0]), "profile_factor": np.array([1.0]), "diameter": np.array([1.0]),
    }
    return base | change


AIR = Setting(shape="round", gas_kind="air", humidity="dry", compressible=False)
GIVEN = Setting(shape="round", gas_kind="given", humidity="none", density_given="at plane", compressible=False)


def test_reynolds_number_of_air(tmp_path):
    """Against CoolProp's viscosity of air at 20 degC (18.2057 uPa s): Sutherland is 0.4 % lower."""
    result = jobs.reduced(tmp_path)
    velocity = jobs.value(result, "mean_velocity")
    expected = 1.2 * velocity * 1.0 / PropsSI("V", "T", 293.15, "P", 101325, "Air")
    assert jobs.value(result, "reynolds_number") == pytest.approx(expected, rel=0.006)


def test_reynolds_number_of_flue_gas(tmp_path):
    """Cantera gri30 for this gas at 150 degC: 22.408 uPa s (tests/data/flue_states.csv, F2)."""
    result = jobs.reduced(tmp_path, {"gas": FLUE, "conditions": {"temperature": "150 degC", "barometric": "1000 hPa"}})
    expected = jobs.value(result, "density") * jobs.value(result, "mean_velocity") / 22.408e-6
    assert jobs.value(result, "reynolds_number") == pytest.approx(expected, rel=0.01)


def test_given_density_implies_a_molar_mass(tmp_path):
    """M = rho R T/p."""
    assert jobs.value(jobs.reduced(tmp_path), "molar_mass") == pytest.approx(1.2 * 8.314462618 * 293.15 / 101325 * 1000, rel=1e-12)


def test_no_flow_has_a_density():
    quantities = evaluate(one(differential_pressure=np.zeros(4), density=np.array([1.1])), GIVEN).quantities
    assert quantities["actual_flow"] == 0.0 and quantities["density"] == pytest.approx(1.1)


def test_flow_of_exactly_one_keeps_its_density():
    area = math.pi / 4
    pressure = 0.5 * 1.1 * (1 / area) ** 2
    quantities = evaluate(one(differential_pressure=np.full(4, pressure), density=np.array([1.1])), GIVEN).quantities
    assert quantities["actual_flow"] == pytest.approx(1.0) and quantities["density"] == pytest.approx(1.1)


def test_density_is_mass_flow_over_flow():
    """Hot half, cold half with equal pressures: the mean is weighted by flow, not by area."""
    temperature = np.array([300.0, 300.0, 600.0, 600.0])
    quantities = evaluate(one(temperature=temperature), AIR).quantities
    cold, hot = 101325 * 28.96546e-3 / (8.314462618 * 300), 101325 * 28.96546e-3 / (8.314462618 * 600)
    v = np.sqrt(2 * 60 / np.array([cold, hot]))
    assert quantities["density"] == pytest.approx((cold * v[0] + hot * v[1]) / v.sum(), rel=1e-12)
    assert quantities["density"] < (cold + hot) / 2


def test_roots():
    pressure = np.array([-4.0, 0.0, 9.0])
    assert roots(pressure, signed=False).tolist() == [0.0, 0.0, 3.0]
    assert roots(pressure, signed=True).tolist() == [-2.0, 0.0, 3.0]


def test_a_shifted_root_raises_the_velocity():
    plain = evaluate(one(), AIR).quantities["mean_velocity"]
    shifted = evaluate(one(root_shift=np.array([0.1])), AIR).quantities["mean_velocity"]
    assert shifted / plain == pytest.approx(1 + 0.1 / math.sqrt(60), rel=1e-12)


@pytest.mark.parametrize("system", ["us", "si"])
def test_epa_with_a_standard_density_yaw_and_factors(tmp_path, system):
    """An explicit standard density under epa-2: mass flow over it. A point factor and the cosine multiply the velocity."""
    base = {"job": {"method": "epa-2", "units": system}, "gas": FLUE, "conditions": {"temperature": "150 degC"}}
    result = jobs.reduced(tmp_path, base | {"reference": {"density": "1.2 kg/m3"}})
    assert jobs.value(result, "standard_flow") == pytest.approx(jobs.value(result, "mass_flow") / 1.2, rel=1e-12)
    x, dry, wet = (jobs.value(result, name) for name in ("moisture", "molar_mass_dry", "molar_mass"))
    assert jobs.value(result, "dry_standard_flow") == pytest.approx(jobs.value(result, "standard_flow") * (1 - x) * dry / wet, rel=1e-12)
    slower = jobs.reduced(tmp_path, base | {"corrections": {"turbulence": "20 %"}})
    assert jobs.value(slower, "mean_velocity") == pytest.approx(jobs.value(result, "mean_velocity") / math.sqrt(1.04), rel=1e-12)
    density = result["runs"][0]["points"][3]["density"]
    assert density == pytest.approx(jobs.value(result, "density"), rel=1e-12)


def test_yaw_reduces_root_mean_velocities_too():
    from traverse.methods import get

    setting = Setting(shape="round", gas_kind="air", humidity="dry", arithmetic="root-mean", compressible=False, constants=get("epa-2").constants["us"])
    straight = evaluate(one(), setting).quantities["mean_velocity"]
    turned = evaluate(one(yaw=np.full(4, 0.3)), setting).quantities["mean_velocity"]
    assert turned / straight == pytest.approx(math.cos(0.3), rel=1e-12)


def test_a_batch_is_the_same_as_one_by_one():
    """Leading axes are free: 3 x 2 traverses in one call."""
    rng = np.random.default_rng(1)
    pressure, temperature = rng.uniform(10, 90, (3, 2, 4)), rng.uniform(280, 400, (3, 2, 4))
    setting = Setting(shape="round", gas_kind="air", humidity="dry", reference=("conditions", 293.15, 101325.0))
    together = evaluate(one(differential_pressure=pressure, temperature=temperature), setting).quantities
    for i in range(3):
        for j in range(2):
            alone = evaluate(one(differential_pressure=pressure[i, j], temperature=temperature[i, j]), setting).quantities
            for name in ("actual_flow", "mass_flow", "standard_flow", "reynolds_number", "density"):
                assert together[name][i, j] == pytest.approx(float(alone[name]), rel=1e-14)


@pytest.mark.parametrize(("change", "power"), [({"diameter": np.array([2.0])}, 4.0), ({"differential_pressure": np.full(4, 240.0)}, 2.0),
                                                ({"density": np.array([0.3])}, 2.0), ({"coefficient": np.array([0.5])}, 0.5)])
def test_scaling(change, power):
    """Flow goes with the area, the root of the pressure, the inverse root of the density, the coefficient."""
    assert evaluate(one(**change), GIVEN).quantities["actual_flow"] / evaluate(one(), GIVEN).quantities["actual_flow"] == pytest.approx(power)
