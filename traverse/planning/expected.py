"""What the design flow should show at every point: a turbulent profile over the section, and the pressure of each velocity.

The profile is a guess of the program, good enough to choose a gauge and to see what a slip of the probe does. No result
of a reduction comes from it.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse import tables, treatment
from traverse.model import Array, Gas, Setup
from traverse.physics import gas, moist_air, quadrature, sections
from traverse.physics.sections import Size


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Expected:
    """Velocities and pressures at design flow, shape (points,). None where the job does not say enough; ``reason`` says why.

    ``relative`` is the local velocity over the area mean, ``velocity`` [m/s], ``pressure`` what the probe would show [Pa].
    """

    exponent: float
    profile: str
    source: str
    relative: Array
    mean_velocity: float | None
    velocity: Array | None
    density: float | None
    coefficient: float | None
    pressure: Array | None
    reason: str

    @property
    def pressure_of_mean(self) -> float | None:
        """The pressure of the mean velocity. [Pa]"""
        if self.mean_velocity is None or self.density is None or self.coefficient is None:
            return None
        return float(pressure(self.mean_velocity, self.density, self.coefficient))


def pressure(velocity: npt.ArrayLike, density: npt.ArrayLike, coefficient: npt.ArrayLike) -> Array:
    """Return the differential pressure of a velocity: dp = rho v^2 / (2 C^2), without compressibility. [Pa]"""
    speed, factor = np.asarray(velocity, dtype=np.float64), np.asarray(coefficient, dtype=np.float64)
    return np.asarray(np.asarray(density) * np.square(speed) / (2.0 * np.square(factor)))


def relative_velocity(shape: str, size: Size, exponent: float, x: npt.ArrayLike, y: npt.ArrayLike) -> Array:
    """Return the local velocity over the area mean of a turbulent profile s^(1/n).

    Parameters
    ----------
    shape, size : str, mapping
        Of a section. [m]
    exponent : float
        The n of the power law.
    x, y : array_like
        Places in the section's coordinates. [m]

    Returns
    -------
    array
        0 at the wall, NaN outside. s is the distance to the nearest wall; for a rectangle the product of the distances to
        the walls in both directions; for an ellipse one less the radius in parts of the ellipse. The mean is exact for all
        shapes but the polygon, whose mean is taken over a fine grid.
    """
    near = _nearness(shape, size, np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64))
    return np.asarray(np.power(near, 1.0 / exponent) / mean_of_power(shape, size, exponent))


def _nearness(shape: str, size: Size, x: Array, y: Array) -> Array:
    """Return a measure of the distance to the wall: 0 at the wall, 1 where it is greatest (polygon: in hydraulic diameters)."""
    distance = sections.wall_distance(shape, size, x, y)
    width, height = (float(side) for side in sections.extent(shape, size))
    if shape == "rectangle":
        near = (1.0 - np.abs(2.0 * x / width)) * (1.0 - np.abs(2.0 * y / height))
    elif shape == "ellipse":
        near = 1.0 - np.hypot(2.0 * x / width, 2.0 * y / height)
    else:
        near = distance / _greatest_distance(shape, size, width, height)
    # A point on the wall may come out a rounding error outside.
    return np.asarray(np.where(distance >= -1e-12 * width, np.maximum(near, 0.0), np.nan))


def _greatest_distance(shape: str, size: Size, width: float, height: float) -> float:
    if shape == "annulus":
        # Half the gap is the area over the perimeter.
        return float(sections.area(shape, size) / sections.perimeter(shape, size))
    if shape == "polygon":
        return float(sections.hydraulic_diameter(shape, size))
    return min(width, height) / 2.0


def mean_of_power(shape: str, size: Size, exponent: float) -> float:
    """Return the area mean of s^(1/n), see :func:`relative_velocity`.

    Round and ellipse 2 n^2 / ((n + 1)(2 n + 1)); rectangle (n / (n + 1))^2; annulus n / (n + 1), since the ring at each
    distance from the nearer wall has the same length. Flat oval: the curve at distance t from its wall is P - 2 pi t long.
    """
    n = exponent
    if shape in {"round", "ellipse"}:
        return 2.0 * n * n / ((n + 1.0) * (2.0 * n + 1.0))
    if shape == "rectangle":
        return (n / (n + 1.0)) ** 2
    if shape == "annulus":
        return n / (n + 1.0)
    if shape == "flat-oval":
        half = min(float(side) for side in sections.extent(shape, size)) / 2.0
        around, area = float(sections.perimeter(shape, size)), float(sections.area(shape, size))
        return half * (around * n / (n + 1.0) - 2.0 * math.pi * half * n / (2.0 * n + 1.0)) / area
    x, y, weight = quadrature.nodes(shape, size)
    # Cells cut by the wall are counted in part; their middle may lie outside, where there is no velocity.
    near = np.nan_to_num(_nearness(shape, size, x, y))
    return float(np.sum(weight * np.power(near, 1.0 / n)))


def expected(setup: Setup) -> Expected:
    """Return what the design flow of a job should show at its points."""
    table = tables.load("planning")["profile"]
    stated = setup.design.profile if setup.design else None
    exponent, source = (stated, "[design] profile") if stated is not None else (float(table["exponent"]), str(table["source"]))
    section, layout = setup.plane.section, setup.layout
    relative = relative_velocity(section.shape, section.size, exponent, layout.x, layout.y)
    density, unknown = density_of(setup)
    mean = setup.design.actual_flow.value / section.area if setup.design else None
    coefficient = None if setup.pitot is None else setup.pitot.coefficient if mean is None else setup.pitot.at(mean)
    lacking = ["no design flow: state [design] actual_flow or velocity"] if mean is None else []
    lacking += [unknown] if unknown else []
    lacking += ["no coefficient of the probe: state [pitot] coefficient"] if coefficient is None else []
    velocity = None if mean is None else mean * relative
    dp = None
    if velocity is not None and density is not None and coefficient is not None:
        dp = pressure(velocity, density, coefficient)
    return Expected(
        exponent=exponent, profile=f"(wall distance)^(1/{exponent:g})", source=source, relative=relative, mean_velocity=mean,
        velocity=velocity, density=density, coefficient=coefficient, pressure=dp, reason="; ".join(lacking),
    )


def density_of(setup: Setup) -> tuple[float | None, str]:
    """Return the density of the gas at the plane [kg/m3], or None and what the job does not say."""
    matter, state = setup.gas, setup.conditions
    if matter is None:
        return None, "no gas: state [gas]"
    if matter.density is not None and matter.density_temperature is None:
        return matter.density.value, ""
    if state is None:
        return None, "no state at the plane: state [conditions] barometric"
    if state.temperature is None:
        return None, "no temperature: state the one to be expected as [conditions] temperature"
    temperature = np.array([state.temperature.value])
    pressure_ = np.array([state.barometric.value + (state.static.value if state.static else 0.0)])
    molar_mass = _molar_mass(matter, temperature, pressure_, np.array([state.barometric.value]))
    if molar_mass is None:
        return None, "neither density nor molar mass: state one of them in [gas]"
    found = float(gas.density(pressure_, molar_mass, temperature)[0])
    return (found, "") if math.isfinite(found) else (None, "gas and conditions give no density")


def _molar_mass(matter: Gas, temperature: Array, absolute: Array, barometric: Array) -> Array | None:
    """Return the molar mass of the wet gas [g/mol]; a density at other conditions is one at the same molar mass."""
    if matter.kind == "given":
        if matter.density is not None and matter.density_temperature is not None and matter.density_pressure is not None:
            molar = matter.density.value * gas.R * matter.density_temperature.value / matter.density_pressure.value
            return np.array([molar * 1e3])
        return None if matter.molar_mass is None else np.array([matter.molar_mass.value])
    if matter.kind == "mixture" or matter.train or matter.fuel or matter.psychrometer:
        return treatment.molar_mass(matter, temperature, absolute, barometric)
    water = np.array([matter.water.value if matter.water else 0.0])
    moisture = moist_air.mole_fraction(matter.humidity, water, temperature, absolute)
    dry = np.array([gas.MOLAR_MASS["air"]])
    if matter.kind == "flue-gas":
        names = ("oxygen", "carbon_dioxide", "carbon_monoxide", "sulfur_dioxide")
        dry = gas.dry_molar_mass(*(np.array([matter.fraction(name)]) for name in names))
    return np.asarray(gas.wet_molar_mass(dry, moisture))
