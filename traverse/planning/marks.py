"""Before the first reading: where to measure, where to mark the probe, what pressure to expect."""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from traverse import methods
from traverse.model import Array, Finding, Layout, Setup
from traverse.physics import gas, moist_air
from traverse.units import UNITS

# Steps of the marks printed for the two systems: a millimetre, a sixteenth of an inch.
MARK_STEP = {"si": 0.001, "us": UNITS["in"].factor / 16}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Plan:
    """A traverse to be made. Arrays have shape (points,). [m], [Pa]

    ``mark`` is the distance on the probe from its head to where it meets the outer face of the port: depth plus port
    nipple. ``rounded`` is the mark to the nearest step of a rule. ``expected`` is the differential pressure that the
    mean velocity of the design flow would give, None where the job does not say enough.
    """

    setup: Setup
    layout: Layout
    mark: Array
    rounded: Array
    mean_velocity: float | None
    expected: float | None
    findings: tuple[Finding, ...]


def plan(setup: Setup) -> Plan:
    """Return the plan of a traverse: the points of the layout with the marks on the probe.

    Parameters
    ----------
    setup : Setup
        From :func:`traverse.load_setup`; readings are not needed.
    """
    nipple = setup.plane.port_depth.value if setup.plane.port_depth else 0.0
    mark = setup.layout.depth + nipple
    step = MARK_STEP[setup.units]
    velocity, expected = _expected(setup)
    findings = setup.findings + setup.layout.findings
    if setup.plane.port_depth is None:
        findings += (Finding(
            level="attention", topic="marks", setting="[plane] port_depth",
            message="No port depth is stated: the marks are counted from the inner wall. Add the length of the nipple.",
        ),)
    return Plan(
        setup=setup, layout=setup.layout, mark=mark, rounded=np.round(mark / step) * step, mean_velocity=velocity,
        expected=expected, findings=findings,
    )


def _expected(setup: Setup) -> tuple[float | None, float | None]:
    """Return the mean velocity of the design flow and the pressure it gives: dp = rho v^2 / (2 C^2)."""
    if setup.design is None:
        return None, None
    velocity = setup.design.actual_flow.value / setup.plane.section.area
    density = _density(setup)
    if density is None or setup.pitot is None:
        return velocity, None
    return velocity, density * velocity**2 / (2.0 * setup.pitot.coefficient**2)


def _density(setup: Setup) -> float | None:
    state, matter = setup.conditions, setup.gas
    if state is None or matter is None or state.temperature is None:
        return None
    if matter.density is not None and matter.density_temperature is None:
        return matter.density.value
    temperature = np.array([state.temperature.value])
    pressure = np.array([state.barometric.value + (state.static.value if state.static else 0.0)])
    molar_mass = np.array([gas.MOLAR_MASS["air"]])
    if matter.kind == "given":
        if matter.molar_mass is None:
            return None
        molar_mass = np.array([matter.molar_mass.value])
    else:
        water = np.array([matter.water.value if matter.water else 0.0])
        moisture = moist_air.mole_fraction(matter.humidity, water, temperature, pressure)
        if matter.kind == "flue-gas":
            molar_mass = gas.dry_molar_mass(
                *(np.array([matter.fraction(name)]) for name in
                  ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide"))
            )
        molar_mass = gas.wet_molar_mass(molar_mass, moisture)
    density = float(gas.density(pressure, molar_mass, temperature)[0])
    return density if math.isfinite(density) else None


def site(setup: Setup) -> tuple[float | None, float | None]:
    """Return the straight lengths before and after the plane in hydraulic diameters, None where not stated."""
    diameter = setup.plane.section.hydraulic_diameter
    before, after = setup.plane.upstream, setup.plane.downstream
    return (before.value / diameter if before else None, after.value / diameter if after else None)


def method_title(setup: Setup) -> str:
    """Return the title of the method that the plan is for."""
    return methods.get(setup.method).title
