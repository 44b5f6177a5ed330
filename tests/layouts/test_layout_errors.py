"""The error of each layout on profiles whose mean is known in closed form, in percent, to 0.01 %.

Expected errors: computed apart from this program from the rules' definitions and the printed digits. Each column says which digits it stands for.
"""

import math

import numpy as np
import pytest

from traverse import layouts

# Columns: rule, points per radius, digits. Printed: ISO 3966 y/D in four digits (from memory); log-linear 4: GOST ISO 5802-2012 table 3 (read).
COLUMNS = (
    ("log-linear", 2, "exact"), ("log-linear", 3, "printed"), ("log-linear", 4, "printed"), ("log-linear", 5, "printed"),
    ("log-tchebycheff", 3, "printed"), ("log-tchebycheff", 4, "printed"), ("log-tchebycheff", 5, "printed"),
    *(("equal-area", n, "exact") for n in (2, 3, 4, 5, 6, 8, 10)),
)
#       profile            mean       LL2    LL3    LL4    LL5    LT3    LT4    LT5    EA2    EA3    EA4    EA5    EA6    EA8    EA10
ROUND = """
    power 5            0.757576  -0.42  -0.47  -0.15  -0.25  -0.56  -0.38  -0.28  +1.61  +1.04  +0.76  +0.60  +0.49  +0.35  +0.27
    power 6            0.791209  -0.31  -0.35  -0.12  -0.19  -0.42  -0.29  -0.21  +1.50  +0.99  +0.73  +0.57  +0.47  +0.34  +0.27
    power 7            0.816667  -0.24  -0.27  -0.09  -0.15  -0.33  -0.22  -0.17  +1.39  +0.92  +0.68  +0.54  +0.44  +0.32  +0.25
    power 8            0.836601  -0.20  -0.21  -0.07  -0.12  -0.26  -0.18  -0.13  +1.29  +0.86  +0.64  +0.50  +0.42  +0.31  +0.24
    power 9            0.852632  -0.16  -0.17  -0.06  -0.10  -0.21  -0.15  -0.11  +1.20  +0.80  +0.60  +0.47  +0.39  +0.29  +0.23
    power 10           0.865801  -0.13  -0.14  -0.05  -0.08  -0.18  -0.12  -0.09  +1.12  +0.75  +0.56  +0.44  +0.37  +0.27  +0.22
    parabola           0.500000  -1.15  -2.50   0.00  -0.94  -2.84  -1.60  -1.02   0.00   0.00   0.00   0.00   0.00   0.00   0.00
    log 0.08 0         0.880000   0.00   0.00  +0.02   0.00  -0.02  -0.01  -0.01  +1.35  +0.93  +0.71  +0.58  +0.48  +0.37  +0.30
    log 0.12 0         0.820000   0.00   0.00  +0.02   0.00  -0.04  -0.02  -0.01  +2.17  +1.50  +1.14  +0.93  +0.78  +0.59  +0.48
    log 0.16 0         0.760000   0.00   0.00  +0.04   0.00  -0.06  -0.02  -0.02  +3.12  +2.15  +1.65  +1.33  +1.12  +0.85  +0.69
    log 0.10 0.20      0.916667   0.00  -0.18  +0.02  -0.06  -0.29  -0.17  -0.10  +1.26  +0.91  +0.72  +0.59  +0.50  +0.39  +0.32
"""


def profile(words):
    """The velocity over the wall distance y = 1 - r/R, and its mean over the circle in closed form."""
    kind, *numbers = words
    if kind == "power":
        n = int(numbers[0])
        return lambda y: y ** (1 / n), 2 * n * n / ((n + 1) * (2 * n + 1))
    if kind == "parabola":
        return lambda y: 1 - (1 - y) ** 2, 0.5
    k, c = map(float, numbers)
    return lambda y: 1 + k * np.log(y) + c * y, 1 - 1.5 * k + c / 3


ROWS = [(row.split()[: -len(COLUMNS) - 1], *map(float, row.split()[-len(COLUMNS) - 1:])) for row in ROUND.strip().splitlines()]
CASES = [(words, mean, *column, error) for words, mean, *errors in ROWS for column, error in zip(COLUMNS, errors, strict=True)]


def test_the_table_is_whole():
    assert len(CASES) == 11 * 14


@pytest.mark.parametrize(("words", "mean", "rule", "per_radius", "digits", "error"), CASES)
def test_axisymmetric_errors(words, mean, rule, per_radius, digits, error):
    velocity, exact = profile(words)
    assert exact == pytest.approx(mean, abs=0.6e-6)
    fraction, weight = layouts.fractions(rule, "round", 2 * per_radius, digits)
    found = float(weight @ velocity(2 * np.minimum(fraction, 1 - fraction)))
    assert 100 * (found / exact - 1) == pytest.approx(error, abs=0.00501)


# Product power law, exact mean (n/(n + 1))^2, exact positions; columns as in the head.
#      n   mean      LT3x3  LT4x4  LT5x5  LT6x6  LT7x7  LT8x8  EA4x4  EA5x5  EA6x6  EA8x8  EA10x10
SQUARE = """
       5  0.694444   +0.79  -2.36  -0.60  -0.74  -0.34  -1.14  +4.28  +4.30  +2.70  +1.94  +1.50
       7  0.765625   +0.85  -1.41  -0.26  -0.39  -0.14  -0.71  +3.47  +3.39  +2.24  +1.63  +1.27
      10  0.826446   +0.77  -0.82  -0.07  -0.19  -0.03  -0.42  +2.66  +2.55  +1.74  +1.28  +1.01
"""
SIDES = (*(("log-tchebycheff", n) for n in range(3, 9)), *(("equal-area", n) for n in (4, 5, 6, 8, 10)))
SQUARE_CASES = [(int(n), float(mean), *side, float(error)) for n, mean, *errors in map(str.split, SQUARE.strip().splitlines())
                for side, error in zip(SIDES, errors, strict=True)]


@pytest.mark.parametrize(("n", "mean", "rule", "side", "error"), SQUARE_CASES)
def test_rectangular_errors(n, mean, rule, side, error):
    """On the placed points of a duct of 1.2 m by 0.7 m, so that coordinates and weights take part."""
    placed = layouts.place(rule, shape="rectangle", width=1.2, height=0.7, lines=side, points=side)
    velocity = ((1 - np.abs(placed.x) / 0.6) * (1 - np.abs(placed.y) / 0.35)) ** (1 / n)
    exact = (n / (n + 1)) ** 2
    assert exact == pytest.approx(mean, abs=0.6e-6)
    assert 100 * (float(placed.weight @ velocity) / exact - 1) == pytest.approx(error, abs=0.00501)


@pytest.mark.parametrize(("side", "error"), [(5, -0.195), (6, -0.447), (7, -0.079)])
def test_rectangular_errors_with_printed_digits(side, error):
    """Product 1/7 power law with the three printed digits (common practice, no source): to 0.001 %."""
    fraction, weight = layouts.fractions("log-tchebycheff", "rectangle", side, "printed")
    line = float(weight @ (2 * np.minimum(fraction, 1 - fraction)) ** (1 / 7))
    assert 100 * ((line * 8 / 7) ** 2 - 1) == pytest.approx(error, abs=0.000501)


@pytest.mark.parametrize(("rule", "side", "error"), [("log-tchebycheff", 5, 0.14), ("log-tchebycheff", 6, 0.05), ("log-tchebycheff", 7, 0.10),
                                                     ("equal-area", 5, 1.69), ("equal-area", 8, 0.93)])
def test_the_logarithm_on_one_line(rule, side, error):
    """1 + 0.1 ln(1 - |2x - 1|) between two walls: mean 0.9; exact positions.

    Seven on a side: 2 (ln(2/(7e)) + ln 0.40536 + ln 0.73247)/7 = -0.99059, so +0.1045 %. Rounding by way of 0.105 gives 0.11, which is not it.
    """
    fraction, weight = layouts.fractions(rule, "rectangle", side)
    found = float(weight @ (1 + 0.1 * np.log(2 * np.minimum(fraction, 1 - fraction))))
    assert 100 * (found / 0.9 - 1) == pytest.approx(error, abs=0.00501)


# Asymmetric profiles (1 - r)^(1/n) + m r (1 - r)^(1/k) f(theta), constants our own, as for the tables above. Diameters at the angles of the head.
ANGLES = ((0, 90), (45, 135), (0, 60, 120), (30, 90, 150), (0, 45, 90, 135))
SKEW = {
    "A1": (9, 4, 0.5, np.sin, 0.0, 0.852632),
    "A3": (7, 9, 1.0, lambda t: np.exp(-0.5 * t) * np.sin(t), (1 - math.exp(-math.pi)) / (2 * math.pi * 1.25), 0.883440),
    "A5": (7, 4, math.pi**-4, lambda t: t**2 * (2 * math.pi - t) ** 2, (2 * math.pi) ** 4 / 30, 1.050057),
}
SKEW_ERRORS = {
    ("A1", "log-linear", 3, "printed"): (-0.17,) * 5, ("A1", "log-tchebycheff", 5, "printed"): (-0.11,) * 5,
    ("A1", "equal-area", 3, "exact"): (0.80,) * 5, ("A1", "equal-area", 5, "exact"): (0.47,) * 5,
    ("A3", "log-linear", 3, "printed"): (-2.14, 0.83, -1.04, 0.27, -0.66), ("A3", "log-tchebycheff", 5, "printed"): (-2.08, 0.88, -0.98, 0.33, -0.60),
    ("A3", "equal-area", 3, "exact"): (-0.92, 2.11, 0.20, 1.55, 0.60), ("A3", "equal-area", 5, "exact"): (-1.36, 1.63, -0.25, 1.07, 0.13),
    ("A5", "log-linear", 3, "printed"): (-0.21, -0.04, -0.14, -0.10, -0.12), ("A5", "log-tchebycheff", 5, "printed"): (-0.16, 0.00, -0.09, -0.06, -0.08),
    ("A5", "equal-area", 3, "exact"): (1.66, 1.83, 1.74, 1.77, 1.75), ("A5", "equal-area", 5, "exact"): (0.86, 1.03, 0.93, 0.96, 0.94),
}


@pytest.mark.parametrize(("case", "rule", "per_radius", "digits"), list(SKEW_ERRORS))
def test_asymmetric_errors(case, rule, per_radius, digits):
    """The placed points, angle by angle: a port on the wrong side or turned the wrong way would show."""
    n, k, m, f, mean_f, mean = SKEW[case]
    exact = 2 * n * n / ((n + 1) * (2 * n + 1)) + m * 4 * k**3 / ((k + 1) * (2 * k + 1) * (3 * k + 1)) * mean_f
    assert exact == pytest.approx(mean, abs=0.6e-6)
    for angles, error in zip(ANGLES, SKEW_ERRORS[case, rule, per_radius, digits], strict=True):
        placed = layouts.place(rule, shape="round", width=2.0, height=2.0, lines=len(angles), points=2 * per_radius,
                               angles=np.radians(angles), digits=digits)
        r, theta = np.hypot(placed.x, placed.y), np.mod(np.arctan2(placed.y, placed.x), 2 * math.pi)
        found = float(placed.weight @ ((1 - r) ** (1 / n) + m * r * (1 - r) ** (1 / k) * f(theta)))
        assert 100 * (found / exact - 1) == pytest.approx(error, abs=0.00501), angles
