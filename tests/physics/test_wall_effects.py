"""Method 2H: the areas close, the distances are those of the method's text, and a factor worked out by hand."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from traverse.physics import wall_effects as we

INCH = 0.0254


@pytest.mark.parametrize(("points", "share"), [(8, 0.133975), (12, 0.087129), (16, 0.064586), (20, 0.051317), (24, 0.042573)])
def test_the_edge_of_the_outermost_area(points, share):
    """Parts of the radius for 16, 24, 32, 40 and 48 points in all, from eq. 2H-3."""
    assert we.edge(1.0, points) == pytest.approx(share, abs=0.6e-6)


@pytest.mark.parametrize(("feet", "apart"), [(15.6, 0.270), (16.0, 0.430), (16.5, 0.629)])
def test_the_remainder_behind_twelve_inches(feet, apart):
    """With 16 points and 12 in measured: distance of the last point behind the 12 in, in inches, from eq. 2H-2."""
    radius = feet * 6.0
    assert we.remainder_distance(radius, 8, 12.0) - 12.0 == pytest.approx(apart, abs=6e-4)


def test_the_edge_passes_twelve_inches():
    assert we.edge(14.93 * 6.0, 8) == pytest.approx(12.0, abs=5e-3) and we.edge(15.6 * 6.0, 8) == pytest.approx(12.54, abs=6e-3)


@given(st.floats(0.51, 6.0), st.sampled_from([8, 10, 12, 16, 24]))
def test_the_areas_close(radius, points):
    """Rings and remainder make up the quarter of the outermost area, pi r^2/(2 p), and the remainder's place halves what is left."""
    last = we.last_step(radius, points, INCH, 12 * INCH)
    rings = sum(we.ring_area(radius, d * INCH, INCH) for d in range(1, last + 1))
    rest = we.remainder_area(radius, points, last * INCH)
    assert rings + rest == pytest.approx(math.pi * radius**2 / (2 * points), rel=1e-12)
    place = we.remainder_distance(radius, points, last * INCH)
    outer = math.pi / 4 * ((radius - last * INCH) ** 2 - (radius - place) ** 2)
    assert outer == pytest.approx(rest / 2, rel=1e-9)


def test_a_sector_by_hand():
    """Radius 40, 8 points, steps of 1: edge 5.36, so five rings. v = 10 at 1, 12 at 3, 13 behind; 2, 4 and 5 take the next farther one."""
    worked = we.sector(we.Sector(exterior=12.5, steps={1: 10.0, 3: 12.0}, remainder=13.0), 40.0, 8, 1.0, 5, 0.5)
    assert worked.filled == (2, 4, 5)
    v = [0.0, 10.0, 12.0, 12.0, 13.0, 13.0]
    quarter = [math.pi / 4 * ((40 - d + 1) ** 2 - (40 - d) ** 2) for d in range(1, 6)]
    flow = sum((v[d - 1] + v[d]) / 2 * quarter[d - 1] for d in range(1, 6)) + 13.0 * (math.pi / 4 * 35**2 - 3 / 16 * math.pi * 1600)
    assert worked.velocity == pytest.approx(flow / (math.pi * 1600 / 16), rel=1e-13)


def test_the_last_step_serves_for_a_near_remainder():
    radius = 15.6 * 6.0  # inches: 0.270 in behind the twelfth
    sector = we.Sector(exterior=12.5, steps={d: 8.0 + 0.3 * d for d in range(1, 13)})
    assert we.sector(sector, radius, 8, 1.0, 12, 0.5).remainder == pytest.approx(11.6)
    assert math.isnan(we.sector(sector, 16.5 * 6.0, 8, 1.0, 12, 0.5).velocity)


def test_a_dense_profile_gives_the_ratio_of_its_means():
    """1/7 power law in a wide stack: the four sectors replaced by their true means, the factor is the ratio of the means."""
    radius, points = 4.0, 8
    fractions = 0.5 * (1 - np.sqrt(1 - (2 * np.arange(1, 5) - 1) / points))
    v = lambda y: (y / radius) ** (1 / 7)  # noqa: E731
    one = [float(v(2 * radius * f)) for f in fractions]
    last = we.last_step(radius, points, INCH, 12 * INCH)
    rest = we.remainder_distance(radius, points, last * INCH)
    worked = we.sector(we.Sector(exterior=one[0], steps={d: float(v(d * INCH)) for d in range(1, last + 1)}, remainder=float(v(rest))), radius, points, INCH, last, 0.0127)
    edge = we.edge(radius, points)
    s = np.linspace(0, edge, 200001)
    true = np.trapezoid(v(s) * (radius - s), s) / np.trapezoid(radius - s, s)
    assert worked.velocity == pytest.approx(true, rel=0.02)  # the first inch counts as linear from zero: 1.4 % low here
    found = we.factor([one[0]] * 4, [worked.velocity] * 4, one * 4)
    assert found == pytest.approx((sum(one[1:]) + worked.velocity) / sum(one), rel=1e-13) and 0.98 < found < 1.0
