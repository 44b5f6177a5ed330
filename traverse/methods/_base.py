"""The record of a test method: what a named method prescribes where it differs from plain physics."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

from traverse import tables


@dataclass(frozen=True, slots=True, kw_only=True)
class Constants:
    """The printed constants of a method that computes with its own, in one unit system.

    ``pressure`` and ``head`` are the units the method takes barometric pressure and differential pressure in,
    ``velocity`` the unit its constant gives.
    """

    velocity_constant: float
    temperature_offset: float
    standard_temperature: float
    standard_pressure: float
    water_over_mercury: float
    molar_mass_water: float
    molar_mass_air: float
    temperature: str
    pressure: str
    head: str
    velocity: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Method:
    """A test method as a record.

    Parameters
    ----------
    id, title, source : str
        The name in the job file, the name in the report, and the document with edition and clauses.
    arithmetic : {'pointwise', 'root-mean'}
        Point velocities averaged over the area, or the mean root with one mean density.
    compressible : bool
        Whether the isentropic form is used.
    uses_yaw, uses_pitch : bool
        Whether a measured yaw angle, and the pitch of a three-dimensional probe, reduce a point velocity to its axial component.
    probes : tuple of str
        The types of probe that the method is for; empty where it leaves them open.
    constants : mapping of unit system to Constants
        Empty for a method that computes with modern physical constants.
    default_coefficients : mapping of pitot type to number
        Coefficients the method allows without calibration.
    standard_air : mapping of unit system to density with its unit
        For a method whose standard flow is mass flow over a standard air density.
    reference : mapping of unit system to (temperature, pressure) texts
        The method's own standard conditions; empty where it has none.
    wall_distance : callable (diameter [m], unit system) -> distance [m]
        The nearest a point may lie to the wall of a round duct; 0 where the method has no such rule.
    checks : tuple of str
        The checks whose failure counts against this method.
    site_rule, count_rule : str
        The rules for straight lengths and for the number of points, in the table of site rules, that hold for the method.
    notes : tuple of str
        What the reader of a report must know, such as which numbers are from memory.
    """

    id: str
    title: str
    source: str
    arithmetic: Literal["pointwise", "root-mean"] = "pointwise"
    compressible: bool = True
    uses_yaw: bool = False
    uses_pitch: bool = False
    probes: tuple[str, ...] = ()
    constants: Mapping[str, Constants] = field(default_factory=lambda: MappingProxyType({}))
    default_coefficients: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    standard_air: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    reference: Mapping[str, tuple[str, str]] = field(default_factory=lambda: MappingProxyType({}))
    wall_distance: Callable[[float, str], float] = lambda diameter, system: 0.0  # noqa: ARG005
    checks: tuple[str, ...] = ()
    site_rule: str = ""
    count_rule: str = ""
    notes: tuple[str, ...] = ()


def epa_constants(system: str) -> Constants:
    """Return the constants of the stack-test methods as printed for ``us`` or ``si``."""
    table = tables.load("epa_method_2")
    own, common = table[system], table["common"]
    inch = system == "us"
    return Constants(
        velocity_constant=float(own["velocity_constant"]),
        temperature_offset=float(own["temperature_offset"]),
        standard_temperature=float(own["standard_temperature"]),
        standard_pressure=float(own["standard_pressure"]),
        water_over_mercury=float(common["water_over_mercury"]),
        molar_mass_water=float(common["molar_mass_water"]),
        molar_mass_air=float(common["molar_mass_air"]),
        temperature="degF" if inch else "degC",
        pressure="inHg" if inch else "mmHg",
        head="inH2O" if inch else "mmH2O",
        velocity="ft/s" if inch else "m/s",
    )
