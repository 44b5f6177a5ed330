"""The study of layouts: its computation on one core, and against the plain loop it replaces."""

import json
import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

import traverse
from tests.support import jobs
from traverse import layouts
from traverse.physics import field, profiles, quadrature
from traverse.study import study
from traverse.study._candidates import candidates

pytestmark = pytest.mark.benchmark
ROOT = Path(__file__).parents[2]
SIZE = {"width": 1.6, "height": 1.0}
ONE_CORE = dict.fromkeys(("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"), "1")


def measured():
    """Return 30 points of a rectangle and velocities there: skewed, with 1 % of noise."""
    at = layouts.place("log-tchebycheff", shape="rectangle", **SIZE, lines=6, points=5)
    speed = 9 * profiles.velocity("power", 7, "rectangle", SIZE, at.x, at.y) * (1 + 0.2 * at.x - 0.3 * at.y**2)
    return at, speed * (1 + 0.01 * np.random.default_rng(1).normal(size=30))


def seconds(work, repeats):
    """Median time after a warm-up."""
    work()
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def write(folder):
    at, speed = measured()
    readings = "line,point,velocity [m/s]\n" + "".join(f"{a},{b},{v:.5f}\n" for a, b, v in zip(at.line, at.point, speed, strict=True))
    return jobs.write(folder, {
        "plane": {"shape": "rectangle", "diameter": None, "width": "1.6 m", "height": "1 m"},
        "layout": {"rule": "log-tchebycheff", "lines": 6, "points": 5}, "readings": {"meter_density": "1.2 kg/m3"},
    }, readings)


def time_all(job):
    """Return the times of a fit, of a study, of all layouts at once and of a loop that fits and evaluates for each."""
    at, speed = measured()
    reduction = traverse.reduce(traverse.load(job))
    found = [one for one in candidates("rectangle", SIZE, reduction.job.layout, np.arange(30))[0] if not one.long]
    nodes = quadrature.nodes("rectangle", SIZE)
    longest = max(len(one.weight) for one in found)

    def padded(name):
        return np.stack([np.append(getattr(one, name), np.zeros(longest - len(one.weight))) for one in found])

    def fit():
        return field.fit("rectangle", SIZE, at.x, at.y, speed)

    def stacked():
        return fit().functional(padded("x"), padded("y"), padded("weight"), also=[nodes])

    def loop():
        return [fit().functional(one.x, one.y, one.weight, also=[nodes]) for one in found]

    mean, covariance = stacked()
    for i, (own, spread) in enumerate(loop()):
        np.testing.assert_allclose(own, mean[[i, -1]], rtol=1e-9)
        np.testing.assert_allclose(spread, covariance[np.ix_([i, -1], [i, -1])], rtol=1e-6, atol=1e-12)
    return {"fit": seconds(fit, 7), "study": seconds(lambda: study(reduction), 5), "rows": len(study(reduction).rows),
            "stacked": seconds(stacked, 7), "loop": seconds(loop, 3)}


@pytest.fixture(scope="module")
def times(tmp_path_factory):
    """In a fresh interpreter, with linear algebra on one core."""
    job = write(tmp_path_factory.mktemp("study"))
    code = f"import json\nfrom tests.benchmarks import test_study\nprint(json.dumps(test_study.time_all({str(job)!r})))"
    done = subprocess.run([sys.executable, "-c", code], cwd=ROOT, env=os.environ | ONE_CORE, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return json.loads(done.stdout)


def test_a_fit_of_thirty_points_takes_less_than_a_tenth_of_a_second(times):
    assert times["fit"] < 0.1


def test_a_study_of_all_rules_takes_less_than_a_second(times):
    assert times["rows"] > 25 and times["study"] < 1.0


def test_all_layouts_at_once_beat_a_loop_that_fits_for_each(times):
    """The same numbers, held against each other before anything is timed."""
    assert times["loop"] > 5.0 * times["stacked"]
