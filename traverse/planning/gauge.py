"""The gauge: what range and division would do, and what the expected pressures say of the one that will be used."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from traverse import tables
from traverse.model import Array, Gauge, Setup
from traverse.planning.expected import Expected
from traverse.result import CheckOutcome
from traverse.units import UNITS, parse

STEPS = ("good", "fair", "poor")
_ROUND = (1.0, 2.0, 2.5, 5.0, 10.0)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class GaugeAdvice:
    """What the gauge must show, from the expected pressures. [Pa], mean root [Pa^0.5]

    ``range`` is ``factor`` times the highest pressure, ``nominal`` the next round figure above it in the unit of the
    report. ``divisions`` maps a part of the velocity to the coarsest division of which half makes no more than that at
    the point of the lowest pressure. ``own`` is the gauge that will be used, ``own_error`` what half its division makes
    of the velocity at each point. ``outcomes`` are the checks whose result can be foreseen.
    """

    lowest: float
    highest: float
    lowest_at: int
    highest_at: int
    mean_root: float
    factor: float
    range: float
    nominal: float
    divisions: tuple[tuple[float, float], ...]
    own: Gauge | None
    own_error: Array | None
    outcomes: tuple[CheckOutcome, ...]

    def failed(self) -> tuple[CheckOutcome, ...]:
        """Return the checks that are expected to fail."""
        return tuple(outcome for outcome in self.outcomes if outcome.status == "fail")


def velocity_error(pressure: npt.ArrayLike, error: npt.ArrayLike) -> Array:
    """Return the relative error of velocity that an error of the pressure makes: half of dp over p. [1]"""
    return np.asarray(np.asarray(error, dtype=np.float64) / (2.0 * np.asarray(pressure, dtype=np.float64)))


def coarsest_division(pressure: float, part: float) -> float:
    """Return the division of which half is that part of the velocity: 4 times the part of the pressure. [Pa]"""
    return 4.0 * part * pressure


def sensitivity_ratio(pressure: npt.ArrayLike, constant: float) -> float:
    """Return T of EPA Method 2, equation 2-1: the sum of sqrt(dp + K) over the sum of sqrt(dp). [1]"""
    values = np.asarray(pressure, dtype=np.float64)
    roots = float(np.sum(np.sqrt(values)))
    return float(np.sum(np.sqrt(values + constant))) / roots if roots > 0 else math.inf


def advice(setup: Setup, expected: Expected) -> GaugeAdvice | None:
    """Return what the gauge must show; None where no pressure is expected, or none that is above zero at every point."""
    dp = expected.pressure
    if dp is None or not np.all(dp > 0.0):
        return None
    table, own = tables.load("planning"), setup.gauge
    lowest, highest = float(np.min(dp)), float(np.max(dp))
    factor = float(table["headroom"]["factor"])
    parts = tuple(parse(table["resolution"][name], "fraction").value for name in STEPS)
    division = own.division.value if own and own.division else None
    return GaugeAdvice(
        lowest=lowest, highest=highest, lowest_at=int(np.argmin(dp)), highest_at=int(np.argmax(dp)),
        mean_root=float(np.sum(setup.layout.weight * np.sqrt(dp))), factor=factor, range=factor * highest,
        nominal=_next_round(factor * highest, "inH2O" if setup.units == "us" else "Pa"),
        divisions=tuple((part, coarsest_division(lowest, part)) for part in parts), own=own,
        own_error=None if division is None else velocity_error(dp, division / 2.0), outcomes=_outcomes(setup, expected, dp),
    )


def _next_round(value: float, unit: str) -> float:
    """Return the next round figure (1, 2, 2.5, 5, 10) at or above a pressure, in its unit. [Pa]"""
    number = UNITS[unit].from_si(value)
    power = 10.0 ** math.floor(math.log10(number))
    return UNITS[unit].to_si(next(step for step in _ROUND if step * power >= number * (1.0 - 1e-12)) * power)


def _outcomes(setup: Setup, expected: Expected, dp: Array) -> tuple[CheckOutcome, ...]:
    found = [_lowest_pressure(setup, dp), _low_velocity(setup, expected)]
    if setup.method.startswith("epa"):
        found.append(_sensitivity(setup, dp))
    if setup.gauge is not None and setup.gauge.range is not None:
        found += [_over_range(setup, dp, setup.gauge.range.value), _headroom(setup, dp, setup.gauge.range.value)]
    if setup.gauge is not None and setup.gauge.division is not None:
        found.append(_resolution(setup, dp, setup.gauge.division.value))
    return tuple(found)


def _outcome(
    id_: str, title: str, *, met: bool, observed: str, criterion: str, source: str, message: str, demanded: bool = False
) -> CheckOutcome:
    status: Literal["pass", "fail"] = "pass" if met else "fail"
    return CheckOutcome(
        id=id_, title=title, status=status, observed=observed, criterion=criterion, source=source,
        message="" if met else message, demanded=demanded, effect="none" if met else "not estimated",
    )


def _labels(setup: Setup, which: npt.NDArray[np.bool_]) -> str:
    labels = [setup.layout.labels()[int(i)] for i in np.flatnonzero(which)]
    return ", ".join(labels[:8]) + (f" and {len(labels) - 8} more" if len(labels) > 8 else "")


def _shown(value: float, setup: Setup) -> str:
    unit = "inH2O" if setup.units == "us" else "Pa"
    return f"{UNITS[unit].from_si(value):.3g} {unit}"


def _lowest_pressure(setup: Setup, dp: Array) -> CheckOutcome:
    limit = tables.load("check_limits")["lowest-pressure"]
    low = dp <= float(limit["pascal"])
    return _outcome(
        "lowest-pressure", "Lowest differential pressure", met=not low.any(), source=limit["source"],
        observed=f"lowest {np.min(dp):.3g} Pa" + (f"; at or below: {_labels(setup, low)}" if low.any() else ""),
        criterion=f"every differential pressure above {float(limit['pascal']):g} Pa",
        message="Near zero the gauge's own error dominates: a finer gauge, or another kind of meter at these points.",
    )


def _low_velocity(setup: Setup, expected: Expected) -> CheckOutcome:
    limit = tables.load("planning")["low-velocity"]
    assert expected.velocity is not None
    low = expected.velocity < parse(limit[setup.units], "velocity").value
    unit = "ft/min" if setup.units == "us" else "m/s"
    least = UNITS[unit].from_si(float(np.min(expected.velocity)))
    return _outcome(
        "low-velocity", "Lowest velocity", met=not low.any(), source=limit["source"],
        observed=f"lowest {least:.3g} {unit}" + (f"; below: {_labels(setup, low)}" if low.any() else ""),
        criterion=f"every velocity at least {limit[setup.units]}",
        message="Too slow for a pitot tube by this rule: another kind of meter.",
    )


def _sensitivity(setup: Setup, dp: Array) -> CheckOutcome:
    """Foresee the test of EPA Method 2, 6.2, as the check of the readings will do it."""
    limit = tables.load("check_limits")["gauge-sensitivity"]
    least = parse(limit["least"], "pressure").value
    ratio = sensitivity_ratio(dp, parse(limit[f"constant_{setup.units}"], "pressure").value)
    low = int(np.sum(dp < least))
    allowed = 1 if dp.size < int(limit["many"]) else int(np.floor(float(limit["share"]) * dp.size))
    fine = bool(np.mean(dp) >= least) and low <= allowed
    return _outcome(
        "gauge-sensitivity", "Sensitivity of the gauge", met=fine or ratio <= float(limit["ratio"]), source=limit["source"],
        observed=f"mean {_shown(float(np.mean(dp)), setup)}, {low} below {limit['least']}, T = {ratio:.3f}",
        criterion=f"mean at least {limit['least']} and at most {allowed} below it, or T at most {limit['ratio']}",
        message="The method wants a gauge of greater sensitivity than one with divisions of 0.01 inH2O.", demanded=True,
    )


def _over_range(setup: Setup, dp: Array, top: float) -> CheckOutcome:
    over = dp > top
    return _outcome(
        "over-range", "Points over the range", met=not over.any(), source="the gauge's own range",
        observed=f"highest {_shown(float(np.max(dp)), setup)}" + (f"; over: {_labels(setup, over)}" if over.any() else ""),
        criterion=f"no point above {_shown(top, setup)}", message="A gauge of a wider range.",
    )


def _headroom(setup: Setup, dp: Array, top: float) -> CheckOutcome:
    table = tables.load("planning")["headroom"]
    needed = float(table["factor"]) * float(np.max(dp))
    return _outcome(
        "headroom", "Room above the highest pressure", met=top >= needed * (1.0 - 1e-9), source=table["source"],
        observed=f"range {_shown(top, setup)}", criterion=f"at least {table['factor']} times the highest: {_shown(needed, setup)}",
        message="Little room for a flow above design or an uneven profile.",
    )


def _resolution(setup: Setup, dp: Array, division: float) -> CheckOutcome:
    table = tables.load("planning")["resolution"]
    poor = parse(table["poor"], "fraction").value
    error = velocity_error(dp, division / 2.0)
    coarse = error > poor * (1.0 + 1e-9)
    return _outcome(
        "resolution", "Division of the gauge", met=not coarse.any(), source=table["source"],
        observed=f"half a division is up to {100 * float(np.max(error)):.2g} % of the velocity"
        + (f"; more than {table['poor']} at {_labels(setup, coarse)}" if coarse.any() else ""),
        criterion=f"at most {table['poor']} at every point", message="A gauge with finer divisions.",
    )
