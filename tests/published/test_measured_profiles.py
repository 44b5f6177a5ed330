"""Real impact-tube readings in air through the whole program (tests/data/README.md: V. E. Senecal 1951, T. E. Stanton 1911).

Each run becomes a job: custom points on one radius from the wall to the axis, with weights from the integral of the
velocity over the area, linear in the squared radius between the points, and v ~ y^(1/m) outside the outermost one.
"""

import csv
import io
from collections import defaultdict
from pathlib import Path

import numpy as np
import pytest

import traverse
from tests.support import jobs

DATA = Path(__file__).parents[1] / "data"
FOOT, INCH = 0.3048, 0.0254
RUNS = defaultdict(list)
for _row in csv.DictReader((DATA / "senecal_1951.csv").open()):
    RUNS[int(_row["run"])].append(_row)
# Rows whose head and printed velocity cannot both be right: a lost digit or decimal in the source. (run, point): v/printed.
INCONSISTENT = {(37, 10): 3.17, (71, 2): 0.814, (81, 4): 0.960}
FLAGGED = (18, 6)  # marked as outlier by the digitiser
# Runs that reach the axis: the mean against the average velocity measured independently, in percent. Laminar profiles
# come out within 2 %; at Re above 2300 a tube of 4 to 6 % of the bore reads the velocity of a point nearer to the axis
# (displacement in the gradient), so the mean is expected high by 4 to 11 %.
LAMINAR, TURBULENT = (-1.5, 2.5), (3.5, 11.5)
MEANS = {18: LAMINAR, 19: LAMINAR, 67: LAMINAR, 69: LAMINAR, 73: LAMINAR, 28: LAMINAR,
         22: TURBULENT, 24: TURBULENT, 20: TURBULENT, 65: TURBULENT}


def half_profile(run):
    """The points from the wall to the axis, once each, without the flagged row."""
    radius = float(RUNS[run][0]["pipe_diameter_in"]) / 2
    rows = [row for row in RUNS[run] if float(row["wall_distance_in"]) <= radius * 1.0001 and (run, int(row["point"])) != FLAGGED]
    return sorted(rows, key=lambda row: float(row["wall_distance_in"]))


def weights(wall, radius, exponent):
    """Weights of points at wall distances for the mean over a circle of their piecewise-linear interpolant in r^2.

    The wall zone of the outermost point, s = y/R with v = v_1 (y/y_1)^(1/m), adds 2 s (m/(m+1) - s m/(2m+1)) of its
    velocity; inside the innermost point the velocity is constant.
    """
    squared = ((radius - np.asarray(wall)) / radius) ** 2
    share = np.zeros(len(wall))
    width = squared[:-1] - squared[1:]
    share[:-1] += width / 2
    share[1:] += width / 2
    share[-1] += squared[-1]
    s = wall[0] / radius
    share[0] += 2 * s * (exponent / (exponent + 1) - s * exponent / (2 * exponent + 1))
    return share


def job_of(rows, folder, weight):
    first = rows[0]
    text = io.StringIO()
    text.write("line,point,depth [in],weight,differential_pressure [inH2O],temperature [degF]\n")
    for k, (row, share) in enumerate(zip(rows, weight, strict=True), start=1):
        text.write(f"A,{k},{row['wall_distance_in']},{share:.12f},{row['head_inH2O']},{row['temperature_F']}\n")
    change = {
        "job": {"method": "ashrae-111", "units": "us"}, "plane": {"diameter": f"{first['pipe_diameter_in']} in"},
        "layout": {"rule": "custom", "lines": None, "points": None}, "gas": {"kind": "air", "dry": True, "density": None},
        "conditions": {"barometric": f"{first['pressure_mmHg']} mmHg", "temperature": None},
    }
    return traverse.load(jobs.write(folder, change, text.getvalue()))


def exponent_of(rows):
    """m of the wall law from the two outermost points, from their heads."""
    (y1, h1), (y2, h2) = ((float(row["wall_distance_in"]), float(row["head_inH2O"])) for row in rows[:2])
    return np.log(y2 / y1) / (0.5 * np.log(h2 / h1))


def test_the_data_are_whole():
    assert len(RUNS) == 51 and sum(len(rows) for rows in RUNS.values()) == 370


@pytest.mark.parametrize("run", sorted(RUNS))
def test_local_velocities(run, tmp_path):
    """Printed velocities come out 0.24 % high at the median (water density and moisture in the source), 1 % at most."""
    rows = sorted(RUNS[run], key=lambda row: float(row["wall_distance_in"]))
    result = traverse.reduce(job_of(rows, tmp_path, np.full(len(rows), 1 / len(rows)))).to_dict()
    ratios = []
    for row, point in zip(rows, result["runs"][0]["points"], strict=True):
        label = (run, int(row["point"]))
        ratio = point["velocity"] / FOOT / float(row["printed_velocity_ft_s"])
        if label in INCONSISTENT:
            assert ratio == pytest.approx(INCONSISTENT[label], abs=0.005), "the inconsistent row is still in the data"
        elif label != FLAGGED:
            assert abs(ratio - 1) <= 0.01, (label, ratio)
            ratios.append(ratio)
    assert np.median(ratios) == pytest.approx(1.0024, abs=0.0035)


@pytest.mark.parametrize("run", sorted(MEANS))
def test_mean_against_the_independent_average(run, tmp_path):
    rows = half_profile(run)
    radius = float(rows[0]["pipe_diameter_in"]) / 2
    wall = np.array([float(row["wall_distance_in"]) for row in rows])
    share = weights(wall, radius, exponent_of(rows))
    result = traverse.reduce(job_of(rows, tmp_path, share)).to_dict()
    # The program brings weights to a sum of 1; what the wall zone falls short of 1 is part of the integral.
    mean = jobs.value(result, "mean_velocity") * share.sum() / FOOT
    low, high = MEANS[run]
    assert low <= 100 * (mean / float(rows[0]["printed_average_ft_s"]) - 1) <= high
    assert 0.8 < share.sum() <= 1.0


def stanton():
    rows = list(csv.DictReader((DATA / "stanton_1911.csv").open()))
    return np.array([[float(row["radius_cm"]), float(row["velocity_cm_s"])] for row in rows])


def interpolated(fraction, data):
    """Velocity at fractions of the diameter: monotone cubic in the logarithm of the wall distance."""
    from scipy.interpolate import PchipInterpolator

    wall = 4.93 / 2 - data[:, 0]
    order = np.argsort(wall)
    profile = PchipInterpolator(np.log(wall[order]), data[order, 1])
    y = np.minimum(fraction, 1 - fraction) * 4.93
    return profile(np.log(y))


@pytest.mark.parametrize(("rule", "points", "mean"), [
    ("log-linear", 6, 1246.9), ("log-tchebycheff", 6, 1246.1), ("log-linear", 10, 1247.6), ("equal-area", 6, 1258.1), ("equal-area", 10, 1254.4),
])
def test_layouts_on_stantons_profile(rule, points, mean, tmp_path):
    """A job at each rule's points, readings taken off the measured profile (cm/s): agreed values within 0.3 %.

    The integrated mean is 1239 to 1244 cm/s: log-linear and log-Tchebycheff points lie 0.3 to 0.7 % high, equal areas
    0.9 to 1.5 %, as the theory of the rules says for few points in a turbulent profile.
    """
    from traverse.layouts import place

    placed = place(rule, shape="round", width=0.0493, height=0.0493, lines=1, points=points)
    velocity = interpolated(placed.depth / 0.0493, stanton())
    text = "line,point,velocity [cm/s]\n" + "".join(f"A,{k},{v:.6f}\n" for k, v in enumerate(velocity, start=1))
    change = {"job": {"method": "ashrae-111"}, "plane": {"diameter": "4.93 cm"}, "layout": {"rule": rule, "lines": 1, "points": points},
              "gas": {"density": "1.225 kg/m3"}, "readings": {"meter_density": "1.225 kg/m3"}}
    got = 100 * jobs.value(jobs.reduced(tmp_path, change, text), "mean_velocity")
    assert got == pytest.approx(mean, rel=3e-3)
    low, high = (0.9, 1.6) if rule == "equal-area" else (0.2, 0.8)
    assert low <= 100 * (got / 1241.5 - 1) <= high
