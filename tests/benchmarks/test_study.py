"""The study of layouts: absolute for a machine on site, and against the plain loop it replaces."""

import statistics
import time

import numpy as np
import pytest

import traverse
from traverse import layouts
from traverse.physics import field, profiles, quadrature
from traverse.study import study
from traverse.study._candidates import candidates

pytestmark = pytest.mark.benchmark
SIZE = {"width": 1.6, "height": 1.0}


@pytest.fixture(scope="module", autouse=True)
def one_core():
    """Linear algebra on one core: what a tablet has to spare."""
    threadpoolctl = pytest.importorskip("threadpoolctl")
    with threadpoolctl.threadpool_limits(1):
        yield


@pytest.fixture(scope="module")
def measured():
    at = layouts.place("log-tchebycheff", shape="rectangle", **SIZE, lines=6, points=5)
    speed = 9 * profiles.velocity("power", 7, "rectangle", SIZE, at.x, at.y) * (1 + 0.2 * at.x - 0.3 * at.y**2)
    return at, speed * (1 + 0.01 * np.random.default_rng(1).normal(size=30))


def seconds(work, repeats=7):
    work()
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return statistics.median(times)


def test_a_fit_of_thirty_points_takes_a_tenth_of_a_second(measured):
    at, speed = measured
    assert seconds(lambda: field.fit("rectangle", SIZE, at.x, at.y, speed)) < 0.1


def test_a_study_takes_less_than_a_second(measured, tmp_path):
    from tests.support import jobs

    at, speed = measured
    readings = "line,point,velocity [m/s]\n" + "".join(f"{a},{b},{v:.5f}\n" for a, b, v in zip(at.line, at.point, speed, strict=True))
    job = jobs.write(tmp_path, {
        "plane": {"shape": "rectangle", "diameter": None, "width": "1.6 m", "height": "1 m"},
        "layout": {"rule": "log-tchebycheff", "lines": 6, "points": 5},
    }, readings)
    reduction = traverse.reduce(traverse.load(job))
    assert len(study(reduction).rows) > 25
    assert seconds(lambda: study(reduction), 5) < 1.0


def test_all_layouts_at_once_beat_a_loop_that_fits_for_each(measured):
    """Stacked: one fit and one operation for all layouts; the loop fits and evaluates each beside the section mean. Same numbers."""
    at, speed = measured
    from traverse.model import Layout

    layout = Layout(rule="log-tchebycheff", title="", source="", x=at.x, y=at.y, depth=at.depth, weight=at.weight, line=at.line, point=at.point)
    found = [one for one in candidates("rectangle", SIZE, layout, np.arange(30))[0] if not one.long]
    nodes = quadrature.nodes("rectangle", SIZE)
    longest = max(len(one.weight) for one in found)

    def padded(values, fill):
        return np.stack([np.append(v, np.full(longest - len(v), fill)) for v in values])

    def stacked():
        fitted = field.fit("rectangle", SIZE, at.x, at.y, speed)
        return fitted.functional(padded([one.x for one in found], 0.0), padded([one.y for one in found], 0.0),
                                 padded([one.weight for one in found], 0.0), also=[nodes])

    def loop():
        results = []
        for one in found:
            fitted = field.fit("rectangle", SIZE, at.x, at.y, speed)
            results.append(fitted.functional(one.x, one.y, one.weight, also=[nodes]))
        return results

    mean, covariance = stacked()
    for i, (own, spread) in enumerate(loop()):
        assert own == pytest.approx(mean[[i, -1]], rel=1e-9)
        assert spread == pytest.approx(covariance[np.ix_([i, -1], [i, -1])], rel=1e-6, abs=1e-12)
    assert seconds(loop, 3) > 5.0 * seconds(stacked, 5)
