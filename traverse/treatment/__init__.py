"""From a run's records to the arrays of the chain: the rules for readings that are not plain numbers, stated once."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
import numpy.typing as npt

from traverse import layouts
from traverse.chain import Setting
from traverse.errors import DomainError, ReadingError
from traverse.methods import Method
from traverse.model import COMPONENTS, UNREAD, Array, Job, Layout, Policies, Readings, Reference, Run, Section, frozen
from traverse.treatment._air import air_equation, air_findings, compressibility_factor
from traverse.treatment._corrections import STEM_BLOCKAGE, correction_findings, displaced, point_factor, stem_factor
from traverse.treatment._matter import derived_gas, matter_findings, molar_mass, shown_water, stack_inputs, stack_setting, why_no_water
from traverse.treatment._probe import probe_findings, probe_inputs, probe_setting, refuse_outside
from traverse.treatment._unread import FROM_FIELD, fill
from traverse.treatment._unread import RULES as MISSING_RULES

Flags = npt.NDArray[np.bool_]
__all__ = [
    "FROM_FIELD", "MISSING_RULES", "STEM_BLOCKAGE", "Flags", "Treated", "air_findings", "compressibility_factor",
    "correction_findings", "derived_gas", "displaced", "inputs", "matter_findings", "molar_mass", "point_factor",
    "probe_findings", "refuse_impossible", "refuse_outside", "setting", "stem_factor", "treat",
]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Treated:
    """Readings after the stated rules. Arrays have shape (points,).

    ``differential_pressure`` [Pa] is finite everywhere (0 where a point does not count); ``weight`` is the weight used
    and sums to 1; ``rule`` says per point what acted, empty where the reading was taken as it stands. ``profile_factor`` is
    what the integration over the section makes of a uniform velocity: 1 where velocities are averaged, less where they
    fall to zero at the wall; ``wall_exponent`` is the exponent of that fall.
    """

    differential_pressure: Array
    weight: Array
    counted: Flags
    rule: tuple[str, ...]
    profile_factor: float = 1.0
    wall_exponent: float | None = None


def treat(
    readings: Readings, layout: Layout, section: Section, policies: Policies, *, negative: str | None = None,
    missing: str | None = None,
) -> Treated:
    """Apply the rules for unread, below-range and negative readings.

    Parameters
    ----------
    readings, layout, section, policies
        The run's readings, the points they belong to, the section they lie in, and the job's rules.
    negative, missing : str, optional
        Override the job's rule for negative readings (``zero``, ``signed``, ``omit``) and for points that were not read
        (``neighbour``, ``field``, ``omit``).

    Raises
    ------
    ReadingError
        If a point is unread and the job says that is an error, or if no point is left.
    """
    status = np.array(readings.status)
    pressure = np.array(readings.differential_pressure)
    counted = np.ones(len(status), dtype=bool)
    rule = [""] * len(status)
    for index in np.flatnonzero(status == "below range"):
        share = {"half": 0.5, "zero": 0.0, "limit": 1.0}[policies.below]
        pressure[index] *= share
        rule[index] = {"half": "half the limit", "zero": "zero", "limit": "the limit"}[policies.below]
    unread = np.isin(status, list(UNREAD)) | ~np.isfinite(pressure)
    if unread.any():
        fill(missing or policies.missing, readings, layout, section, unread, pressure, counted, rule)
    choice = negative or ("zero" if policies.negative == "method" else policies.negative)
    below_zero = counted & (pressure < 0)
    for index in np.flatnonzero(below_zero):
        rule[index] = {"zero": "counted as zero", "signed": "root with its sign", "omit": "left out"}[choice]
    if choice == "omit":
        counted &= ~below_zero
    if not np.any(layout.weight[counted] > 0):
        raise ReadingError("no point is left to average", where="readings", expected="at least one usable reading")
    pressure = np.where(counted, pressure, 0.0)
    weight, factor, exponent = _weights(layout, section, pressure, counted)
    return Treated(
        differential_pressure=frozen(pressure), weight=frozen(weight), counted=counted, rule=tuple(rule), profile_factor=factor,
        wall_exponent=exponent,
    )


def _weights(layout: Layout, section: Section, pressure: Array, counted: Flags) -> tuple[Array, float, float | None]:
    """Return the weights of the points that count, their sum before it was made 1, and the exponent of the wall law."""
    if layout.wall_exponent is None:
        weight = np.where(counted, layout.weight, 0.0)
        return weight / weight.sum(), 1.0, None
    index = np.flatnonzero(counted)
    places = ([layout.line[i] for i in index.tolist()], layout.x[index], layout.y[index])
    exponent = layout.wall_exponent
    if exponent == "fit":
        # The exponent is of velocities; on one line they go with the roots.
        root = np.sqrt(np.maximum(pressure[index], 0.0))
        exponent, _ = layouts.fitted_exponent(section.shape, section.size, *places, root)
    own = layouts.velocity_area(section.shape, section.size, *places, exponent)
    weight = np.zeros(layout.size)
    weight[index] = own
    return weight / own.sum(), float(own.sum()), float(exponent)


def setting(job: Job, run: Run, method: Method, *, signed: bool = False) -> Setting:
    """Return which equations the chain uses for this run under this method."""
    gas = run.gas
    density = ""
    if gas.density is not None:
        density = "at conditions" if gas.density_temperature is not None else "at plane"
    own = method.constants.get(job.units)
    return Setting(
        shape=job.plane.section.shape, gas_kind=gas.kind, humidity=gas.humidity,
        density_given=density,  # type: ignore[arg-type]
        ratio_of_specific_heats=gas.ratio_of_specific_heats, arithmetic=method.arithmetic,
        compressible=method.compressible, signed=signed, constants=own,
        reference=_reference(job.reference), dimensions=tuple(job.plane.section.dimensions), stack=stack_setting(gas),
        probe=probe_setting(run), equation="ideal" if own is not None else air_equation(run),
    )


def _reference(reference: Reference | None) -> tuple[str, float, float] | None:
    if reference is None:
        return None
    if reference.density is not None:
        return ("density", reference.density.value, 0.0)
    assert reference.temperature is not None and reference.pressure is not None, "checked when the job was read"
    return ("conditions", reference.temperature.value, reference.pressure.value)


def inputs(job: Job, run: Run, method: Method, treated: Treated) -> dict[str, Array]:
    """Return the chain's inputs for one run, each of shape (points,) or (1,)."""
    gas, readings = run.gas, run.readings

    def one(value: float | None) -> Array:
        return np.array([np.nan if value is None else value])

    values = {
        "differential_pressure": treated.differential_pressure,
        "root_shift": one(0.0),
        "temperature": readings.temperature,
        "static": readings.static,
        "barometric": one(run.conditions.barometric.value),
        "yaw": readings.yaw if method.uses_yaw else np.zeros_like(readings.yaw),
        "weight": treated.weight,
        "coefficient": one(run.pitot.coefficient),
        "water": one(gas.water.value if gas.water else 0.0),
        "moisture_shift": one(0.0),
        "density": one(gas.density.value if gas.density else None),
        "density_temperature": one(gas.density_temperature.value if gas.density_temperature else None),
        "density_pressure": one(gas.density_pressure.value if gas.density_pressure else None),
        "molar_mass": one(gas.molar_mass.value if gas.molar_mass else None),
        "point_factor": point_factor(
            job.corrections, run, job.layout, job.plane.section, treated.differential_pressure, treated.counted
        ),
        "wall_factor": one(job.corrections.wall_factor if job.corrections.wall_factor is not None else 1.0),
        "profile_factor": one(treated.profile_factor),
    }
    values |= {name: one(gas.fraction(name)) for name in COMPONENTS}
    values |= stack_inputs(gas)
    values |= probe_inputs(run, treated.counted, treated.rule)
    values |= {name: one(stated.value) for name, stated in job.plane.section.dimensions.items()}
    return values


def refuse_impossible(quantities: dict[str, Array], run: Run) -> None:
    """Raise where the chain found the inputs impossible, naming the input that is.

    Raises
    ------
    DomainError
        For water above saturation, a wet bulb above the dry bulb, and any result that is not a number.
    """
    gas = run.gas
    if gas.humidity != "none" and not np.isfinite(quantities["moisture"]):
        temperature, pressure = float(quantities["temperature"]), float(quantities["absolute_pressure"])
        expected, how = why_no_water(gas, temperature, pressure)
        raise DomainError(
            f"{shown_water(gas)} is not possible at {temperature - 273.15:.1f} degC and {pressure:.0f} Pa",
            where=f"run {run.name}, [gas] {'fuel' if gas.humidity == 'combustion' else gas.humidity}", expected=expected, how=how,
        )
    for name in ("density", "mean_velocity", "actual_flow"):
        if not np.isfinite(quantities[name]):
            raise DomainError(
                f"{name.replace('_', ' ')} cannot be computed", where=f"run {run.name}",
                expected="pressures, temperatures and a composition that can exist together",
                how="above 1600 K state [gas] ratio_of_specific_heats" if float(quantities["temperature"]) > 1600.0 else "",
            )
