"""Speed as ratios within one run: the program against what it cannot avoid, interleaved, medians of several repeats.

Run in series, apart from the other tests: ``python -m pytest tests/benchmarks -m benchmark``.
"""

import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from traverse.chain import Setting, evaluate

pytestmark = pytest.mark.benchmark
ROOT = Path(__file__).parents[2]
REPEATS = 9


def seconds(*arguments):
    start = time.perf_counter()
    subprocess.run([sys.executable, *arguments], check=True, capture_output=True, cwd=ROOT, env=os.environ)
    return time.perf_counter() - start


def ratio(command, reference, repeats=REPEATS):
    """Median of the command's times over the median of the reference's, taken in turn after a warm-up of each."""
    seconds(*command), seconds(*reference)
    pairs = [(seconds(*command), seconds(*reference)) for _ in range(repeats)]
    ours, theirs = (statistics.median(times) for times in zip(*pairs, strict=True))
    return ours / theirs


def test_help_starts_at_once():
    """``traverse --help`` at most twice a bare ``import click``."""
    assert ratio(["-m", "traverse", "--help"], ["-c", "import click"]) <= 2.0


def test_a_reduction_costs_its_imports(tmp_path):
    """A reduction with workbook and JSON at most twice the bare import of numpy, scipy.special and openpyxl."""
    target = tmp_path / "report.xlsx"
    command = ["-m", "traverse", "reduce", "example_data/supply_duct.toml", "--out", str(target), "--json", str(tmp_path / "r.json"), "--force"]
    assert ratio(command, ["-c", "import numpy, scipy.special, openpyxl"]) <= 2.0


def bare(dp, temperature, pressure, moisture, coefficient, weight, area):
    """The same formula in bare numpy: moist-air density, isentropic velocity, weighted mean, flows."""
    molar = 28.96546 * (1 - moisture) + 18.01528 * moisture
    density = pressure * molar * 1e-3 / (8.314462618 * temperature)
    impact = coefficient**2 * dp
    a, x = 0.4 / 1.4, impact / pressure
    velocity = np.sqrt(2 * impact / density) * np.sqrt(((1 + x) ** a - 1) / (a * x))
    mean = (weight * velocity).sum(axis=-1)
    mass = area * (weight * velocity * density).sum(axis=-1)
    standard = area * (weight * velocity * pressure / 101325 * 293.15 / temperature).sum(axis=-1)
    return area * mean, mass, standard, standard * (1 - moisture[..., 0])


def test_ten_thousand_traverses_in_one_call():
    """10 000 traverses of 24 points through the chain at most five times the bare formula, with equal results."""
    rng = np.random.default_rng(5)
    many, points = 10_000, 24
    dp = rng.uniform(20, 400, (many, points))
    temperature = rng.uniform(290, 420, (many, points))
    moisture = rng.uniform(0, 0.02, (many, 1))
    weight, area = np.full(points, 1 / points), 1.3
    one = {name: np.array([value]) for name, value in {
        "root_shift": 0.0, "static": -120.0, "barometric": 98e3, "yaw": 0.0, "coefficient": 0.99, "moisture_shift": 0.0, "oxygen": 0.0,
        "carbon_dioxide": 0.0, "carbon_monoxide": 0.0, "sulfur_dioxide": 0.0, "density": np.nan, "density_temperature": np.nan,
        "density_pressure": np.nan, "molar_mass": np.nan, "point_factor": 1.0, "wall_factor": 1.0, "profile_factor": 1.0, "width": 1.3,
        "height": 1.0}.items()}
    inputs = one | {"differential_pressure": dp, "temperature": temperature, "water": moisture, "weight": weight}
    setting = Setting(shape="rectangle", gas_kind="air", humidity="moisture", reference=("conditions", 293.15, 101325.0),
                      dimensions=("width", "height"))
    pressure = np.array([98e3 - 120.0])

    def ours():
        return evaluate(inputs, setting).quantities

    def theirs():
        return bare(dp, temperature, pressure, moisture, 0.99, weight, area)

    got, expected = ours(), theirs()
    for name, value in zip(("actual_flow", "mass_flow", "standard_flow", "dry_standard_flow"), expected, strict=True):
        np.testing.assert_allclose(got[name], value, rtol=1e-10)
    times = []
    for _ in range(15):
        start = time.perf_counter()
        ours()
        middle = time.perf_counter()
        theirs()
        times.append((middle - start, time.perf_counter() - middle))
    assert statistics.median(a for a, _ in times) <= 5.0 * statistics.median(b for _, b in times)
    assert statistics.median(a / b for a, b in times) <= 5.0


def test_a_plan_costs_no_more_than_its_imports_twice():
    """A plan at most twice the bare import of numpy and openpyxl."""
    assert ratio(["-m", "traverse", "plan", "example_data/extract_duct.toml"], ["-c", "import numpy, openpyxl"]) <= 2.0
