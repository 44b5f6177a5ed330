"""Positions of the three rules against exact mathematics worked out another way, and against figures printed in other places."""

import mpmath as mp
import numpy as np
import pytest

from traverse import layouts
from traverse.errors import LayoutError
from traverse.layouts.log_tchebycheff import nodes


def radii(rule, per_radius):
    """r/R from the centre outwards."""
    fraction, _ = layouts.fractions(rule, "round", 2 * per_radius)
    return np.sort(1 - 2 * fraction[:per_radius])


def numbers(text):
    return [float(word) for word in text.split()]


# --- the definitions, by 30-digit quadrature and polynomial roots instead of the closed forms


def zone_mean(f, inner, outer):
    return mp.quad(lambda r: 2 * r * f(r), [mp.sqrt(inner), mp.sqrt(outer)]) / (outer - inner)


def log_linear_by_quadrature(n):
    n = mp.mpf(n)
    odd = int(n) % 2
    found = [1 - mp.exp(zone_mean(lambda r: mp.log(1 - r), (n - 1) / n, 1))] if odd else []
    for zone in range((int(n) - odd) // 2):
        inner, outer = 2 * zone / n, (2 * zone + 2) / n
        logarithm, distance = zone_mean(lambda r: mp.log(1 - r), inner, outer), zone_mean(lambda r: 1 - r, inner, outer)
        apart = mp.sqrt(distance**2 - mp.exp(2 * logarithm))
        found += [1 - distance - apart, 1 - distance + apart]
    return [float(r) for r in sorted(found)]


@pytest.mark.parametrize("per_radius", range(2, 11))
def test_log_linear_by_quadrature(per_radius):
    with mp.workdps(30):
        expected = log_linear_by_quadrature(per_radius)
    np.testing.assert_allclose(radii("log-linear", per_radius), expected, atol=1e-14)


@pytest.mark.parametrize("count", [1, 2, 3, 4, 5, 6, 7, 9])
def test_tchebycheff_nodes_by_series(count):
    """The classical polynomial: the polynomial part of x^n exp(-n (1/(2 3 x^2) + 1/(4 5 x^4) + ...)). Newton's step from each node is nil."""
    with mp.workdps(30):
        exponent = [mp.mpf(0)] * (count + 1)
        for k in range(2, count + 1, 2):
            exponent[k] = -mp.mpf(count) / (k * (k + 1))
        series = [mp.mpf(1)] + [mp.mpf(0)] * count
        for k in range(1, count + 1):
            series[k] = sum((j * exponent[j] * series[k - j] for j in range(1, k + 1)), mp.mpf(0)) / k
        steps = []
        for node in map(mp.mpf, nodes(count)):
            value, slope = mp.mpf(0), mp.mpf(0)
            for coefficient in series:
                value, slope = value * node + coefficient, slope * node + value
            steps.append(abs(float(value / slope)))
    assert len(set(nodes(count))) == count, "as many different roots as the polynomial has"
    assert max(steps) < 1e-14


# Nine digits, as found in tables of numerical analysis; computed here.
NODES = {2: "0.577350269", 3: "0 0.707106781", 4: "0.187592474 0.794654472", 5: "0 0.374541410 0.832497487",
         6: "0.266635402 0.422518654 0.866246818", 7: "0 0.323911811 0.529656775 0.883861701",
         9: "0 0.167906184 0.528761783 0.601018655 0.911589308"}


@pytest.mark.parametrize("count", NODES)
def test_tchebycheff_nodes_in_nine_digits(count):
    half = nodes(count)[count // 2:]
    np.testing.assert_allclose(half, numbers(NODES[count]), atol=0.51e-9)
    np.testing.assert_allclose(nodes(count), -np.array(nodes(count))[::-1], atol=0)


# --- five-digit positions, computed apart from this program from the definitions (half a unit of the last digit)

RADII = {
    ("log-linear", 2): "0.41903 0.91430",
    ("log-linear", 3): "0.35846 0.73020 0.93582",
    ("log-linear", 4): "0.31032 0.63249 0.76557 0.95828",
    ("log-linear", 5): "0.27716 0.56612 0.69489 0.84697 0.96223",
    ("log-linear", 6): "0.25267 0.51713 0.63493 0.77259 0.85017 0.97251",
    ("log-linear", 7): "0.23367 0.47903 0.58798 0.71513 0.79408 0.89339 0.97323",
    ("log-linear", 8): "0.21837 0.44829 0.55006 0.66889 0.74323 0.83526 0.88974 0.97950",
    ("log-tchebycheff", 3): "0.37534 0.72511 0.93582",
    ("log-tchebycheff", 4): "0.33141 0.61237 0.80010 0.95245",
    ("log-tchebycheff", 5): "0.28660 0.57006 0.68923 0.84727 0.96223",
    ("log-tchebycheff", 6): "0.26418 0.51050 0.64550 0.75679 0.87381 0.96867",
    ("log-tchebycheff", 7): "0.23942 0.49749 0.56062 0.73678 0.78080 0.89433 0.97323",
    ("log-tchebycheff", 8): "0.22541 0.45362 0.54386 0.66144 0.76106 0.81806 0.90785 0.97663",
    ("equal-area", 1): "0.70711",
    ("equal-area", 2): "0.50000 0.86603",
    ("equal-area", 3): "0.40825 0.70711 0.91287",
    ("equal-area", 4): "0.35355 0.61237 0.79057 0.93541",
    ("equal-area", 5): "0.31623 0.54772 0.70711 0.83666 0.94868",
    ("equal-area", 6): "0.28868 0.50000 0.64550 0.76376 0.86603 0.95743",
    ("equal-area", 7): "0.26726 0.46291 0.59761 0.70711 0.80178 0.88641 0.96362",
    ("equal-area", 8): "0.25000 0.43301 0.55902 0.66144 0.75000 0.82916 0.90139 0.96825",
    ("equal-area", 10): "0.22361 0.38730 0.50000 0.59161 0.67082 0.74162 0.80623 0.86603 0.92195 0.97468",
}
DIAMETERS = {
    ("log-linear", 2): "0.29049 0.04285",
    ("log-linear", 3): "0.32077 0.13490 0.03209",
    ("log-linear", 4): "0.34484 0.18375 0.11721 0.02086",
    ("log-linear", 5): "0.36142 0.21694 0.15255 0.07651 0.01889",
    ("log-linear", 6): "0.37366 0.24144 0.18253 0.11370 0.07492 0.01375",
    ("log-linear", 7): "0.38317 0.26049 0.20601 0.14244 0.10296 0.05330 0.01338",
    ("log-linear", 8): "0.39081 0.27585 0.22497 0.16556 0.12839 0.08237 0.05513 0.01025",
    ("log-tchebycheff", 3): "0.31233 0.13745 0.03209",
    ("log-tchebycheff", 4): "0.33429 0.19381 0.09995 0.02377",
    ("log-tchebycheff", 5): "0.35670 0.21497 0.15539 0.07637 0.01889",
    ("equal-area", 1): "0.14645",
    ("equal-area", 2): "0.25000 0.06699",
    ("equal-area", 3): "0.29588 0.14645 0.04356",
    ("equal-area", 4): "0.32322 0.19381 0.10472 0.03229",
    ("equal-area", 5): "0.34189 0.22614 0.14645 0.08167 0.02566",
    ("equal-area", 6): "0.35566 0.25000 0.17725 0.11812 0.06699 0.02129",
    ("equal-area", 7): "0.36637 0.26854 0.20119 0.14645 0.09911 0.05680 0.01819",
    ("equal-area", 8): "0.37500 0.28349 0.22049 0.16928 0.12500 0.08542 0.04931 0.01588",
    ("equal-area", 10): "0.38820 0.30635 0.25000 0.20420 0.16459 0.12919 0.09689 0.06699 0.03902 0.01266",
}
SIDES = {
    3: "0.12263 0.5", 4: "0.09197 0.35566", 5: "0.07358 0.28787 0.50000", 6: "0.06131 0.23512 0.43747",
    7: "0.05255 0.20268 0.36624 0.50000", 8: "0.04598 0.17516 0.34156 0.40001", 9: "0.04088 0.15628 0.29402 0.37403 0.5",
}


@pytest.mark.parametrize(("rule", "per_radius"), list(RADII))
def test_radii_in_five_digits(rule, per_radius):
    np.testing.assert_allclose(radii(rule, per_radius), numbers(RADII[rule, per_radius]), atol=0.51e-5)


@pytest.mark.parametrize(("rule", "per_radius"), list(DIAMETERS))
def test_wall_distances_in_five_digits(rule, per_radius):
    fraction, _ = layouts.fractions(rule, "round", 2 * per_radius)
    np.testing.assert_allclose(fraction[:per_radius], numbers(DIAMETERS[rule, per_radius])[::-1], atol=0.51e-5)


@pytest.mark.parametrize("side", SIDES)
def test_log_tchebycheff_sides_in_five_digits(side):
    fraction, _ = layouts.fractions("log-tchebycheff", "rectangle", side)
    np.testing.assert_allclose(fraction[: (side + 1) // 2], numbers(SIDES[side]), atol=0.51e-5)


# --- figures printed elsewhere

JIS = {1: "0.707", 2: "0.500 0.866", 3: "0.408 0.707 0.913", 4: "0.354 0.612 0.791 0.935", 5: "0.316 0.548 0.707 0.837 0.949"}


@pytest.mark.parametrize("rings", JIS)
def test_equal_area_rings_of_jis_z_8808(rings):
    """JIS Z 8808, r/R (from memory); five rings also JIS B 8330 (quoted second-hand)."""
    np.testing.assert_allclose(radii("equal-area", rings), numbers(JIS[rings]), atol=0.51e-3)


def test_equal_area_in_a_mine_ventilation_course():
    """Indian Institute of Technology Kharagpur, mine ventilation (read): ten on a diameter; the page leaves out 0.658 and prints 0.919 for 0.91833, 0.975 for 0.97434."""
    fraction, _ = layouts.fractions("equal-area", "round", 10)
    printed = numbers("0.026 0.082 0.146 0.226 0.342 0.774 0.854 0.919 0.975")
    found = np.delete(fraction, 5)
    np.testing.assert_allclose(found[:7], printed[:7], atol=0.51e-3)
    assert found[7] == pytest.approx(0.91833, abs=0.5e-5) and printed[7] == 0.919
    assert found[8] == pytest.approx(0.97434, abs=0.5e-5) and printed[8] == 0.975


def test_equal_area_in_navfac_mo_114():
    """NAVFAC MO-114 volume 3 (read): 18 in square, 16 points, first hole 2.25 in; 20 in round, 20 points, third point printed 2.90 in, exact 2.929."""
    square = layouts.place("equal-area", shape="rectangle", width=18.0, height=18.0, lines=4, points=4)
    assert square.depth[0] == pytest.approx(2.25, abs=1e-12)
    circle = layouts.place("equal-area", shape="round", width=20.0, height=20.0, lines=2, points=10)
    assert circle.depth[2] == pytest.approx(2.929, abs=0.5e-3)
    assert circle.depth[2] == pytest.approx(2.90, abs=0.03)


def test_the_laboratory_traverse_is_log_linear():
    """AMCA 210 / ISO 5801 (from memory): eight on a diameter at 0.021 0.117 0.184 0.345 D, three digits."""
    fraction, _ = layouts.fractions("log-linear", "round", 8)
    np.testing.assert_allclose(fraction[:4], numbers("0.021 0.117 0.184 0.345"), atol=0.51e-3)


@pytest.mark.parametrize(("points", "printed"), [(6, "0.032 0.135 0.321"), (8, "0.021 0.117 0.184 0.345"), (10, "0.019 0.077 0.153 0.217 0.361")])
def test_trade_tables_headed_log_tchebycheff_are_log_linear(points, printed):
    """Common practice, no source: the digits fit log-linear to half a unit, and miss log-Tchebycheff by two units and more."""
    half = points // 2
    np.testing.assert_allclose(layouts.fractions("log-linear", "round", points)[0][:half], numbers(printed), atol=0.51e-3)
    other = layouts.fractions("log-tchebycheff", "round", points)[0][:half]
    assert np.max(np.abs(other - numbers(printed))) > 2e-3


# --- which counts exist


@pytest.mark.parametrize("side", [1, 2, 10, 12])
def test_sides_without_tchebycheff_points_are_refused_for_points_and_for_lines(side):
    with pytest.raises(LayoutError, match=r"\[layout\] points: .*3 to 9"):
        layouts.place("log-tchebycheff", shape="rectangle", width=1.0, height=1.0, lines=5, points=side)
    with pytest.raises(LayoutError, match=rf"\[layout\] lines: {side} lines: .*3 to 9"):
        layouts.place("log-tchebycheff", shape="rectangle", width=1.0, height=1.0, lines=side, points=5)


@pytest.mark.parametrize("rule", ["equal-area", "log-linear", "log-tchebycheff"])
def test_an_odd_number_on_a_diameter_is_refused_with_the_reason(rule):
    with pytest.raises(LayoutError, match="an even number, the same on either side of the centre"):
        layouts.place(rule, shape="round", width=1.0, height=1.0, lines=2, points=7)
