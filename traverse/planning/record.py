"""The plan of a traverse: everything that is known before the first reading, put together."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from traverse import methods
from traverse.model import Array, Finding, Layout, Setup
from traverse.planning import checklist, expected, gauge, marks, probe
from traverse.planning.checklist import Checklist
from traverse.planning.expected import Expected
from traverse.planning.gauge import GaugeAdvice
from traverse.planning.marks import MARK_STEP, Rounding
from traverse.planning.probe import Probe
from traverse.units import UNITS


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Plan:
    """A traverse to be made. Arrays have shape (points,), ``direction`` (points, 2). [m], [Pa]

    ``mark`` is the distance on the probe from where marks are counted to where it meets the outer face of the port: depth
    plus ``nipple`` plus ``head_offset``. ``rounded`` is the mark to the nearest step of the job's own units; ``rounding``
    has both systems. ``expected`` is the pressure of the mean velocity at design flow, ``profile`` the pressures point by
    point; ``gauge`` is None where no pressure is expected.
    """

    setup: Setup
    layout: Layout
    mark: Array
    rounded: Array
    mean_velocity: float | None
    expected: float | None
    findings: tuple[Finding, ...]
    nipple: Array
    head_offset: float
    direction: Array
    rounding: dict[str, Rounding]
    profile: Expected
    probe: Probe
    gauge: GaugeAdvice | None
    checklists: tuple[Checklist, ...]


def plan(setup: Setup) -> Plan:
    """Return the plan of a traverse: points and marks, the probe, the pressures to be expected, the gauge, what to check.

    Parameters
    ----------
    setup : Setup
        From :func:`traverse.load_setup`; readings are not needed.
    """
    nipple, offset = marks.nipples(setup), marks.head_offset(setup)
    mark = setup.layout.depth + nipple + offset
    direction = marks.directions(setup.plane.section, setup.layout)
    profile = expected.expected(setup)
    rounding = {name: marks.rounding(setup, mark, direction, profile.exponent, step) for name, step in MARK_STEP.items()}
    measured = probe.probe(setup, mark, nipple, direction)
    advice = gauge.advice(setup, profile)
    return Plan(
        setup=setup, layout=setup.layout, mark=mark, rounded=rounding[setup.units].mark, mean_velocity=profile.mean_velocity,
        expected=profile.pressure_of_mean, findings=setup.findings + setup.layout.findings + _findings(setup, measured, advice, direction),
        nipple=nipple, head_offset=offset, direction=direction, rounding=rounding, profile=profile, probe=measured, gauge=advice,
        checklists=checklist.checklists(setup),
    )


def _findings(setup: Setup, measured: Probe, advice: GaugeAdvice | None, direction: Array) -> tuple[Finding, ...]:
    """Say what somebody must know before the way up: missing lengths, points too near a wall, checks that will fail."""
    found: list[tuple[str, str, str]] = []
    labels = setup.layout.labels()
    if setup.plane.port_depth is None and not setup.plane.port_depths:
        found.append(("marks", "[plane] port_depth",
                      "No port depth is stated: the marks are counted from the inner wall. Add the length of the nipple."))
    lost = [labels[int(i)] for i in np.flatnonzero(~np.isfinite(direction[:, 0]))]
    if lost:
        found.append(("marks", "[layout]", f"The points {', '.join(lost)} do not lie at their depths on a straight line from a port: "
                      "a mark does not bring the probe there."))
    found += _clearances(setup, measured)
    found += [
        ("gauge", "[gauge]", f"Expected to fail: {outcome.title.lower()}, {outcome.observed}; wanted {outcome.criterion}. "
         f"{outcome.message} ({outcome.source})") for outcome in (advice.failed() if advice else ())
    ]
    return tuple(Finding(level="attention", topic=topic, setting=setting, message=message) for topic, setting, message in found)


def _clearances(setup: Setup, measured: Probe) -> list[tuple[str, str, str]]:
    """Say where the probe comes too near to a wall."""
    found, labels = [], setup.layout.labels()

    def words(value: float | None) -> str:
        unit = UNITS["in" if setup.units == "us" else "mm"]
        return "" if value is None else f"{unit.from_si(value):.{2 if setup.units == 'us' else 1}f} {unit.symbol}"

    for clearance, what in ((measured.wall, "the method's least distance"), (measured.head, "the diameter of the probe")):
        if clearance.met is False:
            found.append(("wall distance", "[layout]", f"{labels[clearance.at]} lies {words(clearance.distance)} from the wall, "
                          f"nearer than {what}, {words(clearance.needed)} ({clearance.source})."))
    if measured.ahead.met is False:
        found.append(("reach", "[pitot] stem", f"The probe would touch the far wall: {words(measured.ahead.distance)} behind "
                      f"{labels[measured.ahead.at]}, where it needs {words(measured.ahead.needed)}."))
    return found


def site(setup: Setup) -> tuple[float | None, float | None]:
    """Return the straight lengths before and after the plane in hydraulic diameters, None where not stated."""
    diameter = setup.plane.section.hydraulic_diameter
    before, after = setup.plane.upstream, setup.plane.downstream
    return (before.value / diameter if before else None, after.value / diameter if after else None)


def method_title(setup: Setup) -> str:
    """Return the title of the method that the plan is for."""
    return methods.get(setup.method).title
