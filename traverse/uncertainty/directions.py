"""What is uncertain: each stated component as directions in which the chain's inputs may be off by one sigma.

A *direction* is one independent deviation. A component shared by all points is one direction (the whole array moves);
a component independent from point to point is one direction per point. ``dimensions`` is one per dimension.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

import numpy as np

from traverse.model import Array, Component, Job, Run
from traverse.physics.mixture import SPECIES
from traverse.result import RunResult
from traverse.treatment import Flags

# Job-file input -> the chain's input that it moves. Inputs not listed move the chain's input of the same name.
_TARGET = {
    "moisture": "moisture_shift", "relative_humidity": "water", "wet_bulb": "water", "dew_point": "water",
    "humidity_ratio": "water", "meter_pressure": "meter_barometric",
    "position": "root_shift", "layout": "profile_factor", "alignment": "differential_pressure", "static_holes": "differential_pressure",
}
_UNIT = {
    "coefficient": "1", "differential_pressure": "Pa", "temperature": "K", "static": "Pa", "barometric": "Pa",
    "moisture": "1", "relative_humidity": "1", "wet_bulb": "K", "dew_point": "K", "humidity_ratio": "kg/kg",
    "oxygen": "1", "carbon_dioxide": "1", "carbon_monoxide": "1", "sulfur_dioxide": "1", "density": "kg/m3",
    "molar_mass": "g/mol", "position": "m", "yaw": "rad", "layout": "1",
    "pitch": "rad", "pitch_pressure": "Pa", "alignment": "Pa", "static_holes": "Pa",
    "condensed": "kg", "silica_gel": "kg", "meter_volume": "m3", "meter_temperature": "K", "meter_pressure": "Pa", "orifice_pressure": "Pa",
    "meter_factor": "1", "excess_air": "1", "air_humidity_ratio": "kg/kg", **dict.fromkeys(SPECIES, "1"),
}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Direction:
    """One independent deviation: the chain input it moves and by how much for one sigma, shape (points,) or (1,)."""

    target: str
    deviation: Array


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Row:
    """One row of a budget before it is evaluated: its directions and what the report says of it."""

    input: str
    kind: str
    shared: bool
    standard_uncertainty: float
    unit: str
    degrees_of_freedom: float
    stated: str
    second_order: bool
    directions: tuple[Direction, ...]


def rows(job: Job, run: Run, inputs: Mapping[str, Array], counted: Flags) -> tuple[Row, ...]:
    """Return the budget rows of one run, in the order of the job file, then those the readings bring themselves."""
    stated = job.uncertainties.components if job.uncertainties else ()
    found: list[Row] = []
    for component in stated:
        names = job.plane.section.dimensions if component.input == "dimensions" else (component.input,)
        found.extend(_row(component, name, job, run, inputs, counted) for name in names)
    found.extend(_from_readings(job, run, counted))
    return tuple(row for row in found if row.directions)


def _row(component: Component, name: str, job: Job, run: Run, inputs: Mapping[str, Array], counted: Flags) -> Row:
    target = _TARGET.get(name, name)
    shown_by = target
    if name == "coefficient" and "coefficient_shift" in inputs:
        # Each point has a coefficient of its own: the calibration moves as a whole.
        target = "coefficient_shift"
    base = np.asarray(inputs[shown_by], dtype=np.float64)
    if name == "moisture" and component.relative:
        base = np.asarray(inputs["water"], dtype=np.float64)
    size = component.standard * np.abs(base) if component.relative else np.full(base.shape, component.standard)
    shown = float(np.mean(size))
    if name == "position":
        size = component.standard * root_gradient(job, inputs["differential_pressure"])
        shown = component.standard
    if not component.shared:
        size = np.broadcast_to(size, (job.layout.size,))
    unit = "m" if name in job.plane.section.dimensions else _UNIT[name]
    if name == "condensed" and run.gas.train is not None:
        unit = "m3" if run.gas.train.by_volume else "kg"
    return Row(
        input=name, kind=component.kind, shared=component.shared, standard_uncertainty=shown, unit=unit,
        degrees_of_freedom=component.degrees_of_freedom, stated=component.text, second_order=name in {"yaw", "pitch"},
        directions=tuple(_directions(target, size, component.shared, counted)),
    )


def _directions(target: str, size: Array, shared: bool, counted: Flags) -> Iterator[Direction]:
    if shared:
        yield Direction(target=target, deviation=size)
        return
    for index in np.flatnonzero(counted):
        deviation = np.zeros(len(counted))
        deviation[index] = size[index]
        if size[index] != 0.0:
            yield Direction(target=target, deviation=deviation)


def _from_readings(job: Job, run: Run, counted: Flags) -> Iterator[Row]:
    """Rows that come from the readings themselves, once the job states uncertainties at all."""
    if job.uncertainties is None:
        return
    readings = run.readings
    below = np.array([status == "below range" for status in readings.status])
    if below.any():
        # The true value lies anywhere between zero and the limit; rectangular about its middle, wider about an end.
        width = readings.differential_pressure / (np.sqrt(12.0) if job.policies.below == "half" else np.sqrt(3.0))
        yield _point_row("below range", np.where(below, width, 0.0), counted, "between zero and the limit")
    if readings.standard_error is not None:
        size = np.where(np.isfinite(readings.standard_error), readings.standard_error, 0.0)
        yield _point_row("averaging", size, counted, "standard error of the logged mean")


def _point_row(kind: str, size: Array, counted: Flags, stated: str) -> Row:
    used = size[counted & (size > 0)]
    return Row(
        input="differential_pressure", kind=kind, shared=False,
        standard_uncertainty=float(np.sqrt(np.mean(used**2))) if used.size else 0.0, unit="Pa",
        degrees_of_freedom=np.inf, stated=stated, second_order=False,
        directions=tuple(_directions("differential_pressure", size, False, counted)),
    )


def root_gradient(job: Job, differential_pressure: Array) -> Array:
    """Return the gradient of the root along the probe at each point. [Pa^0.5/m], shape (points,)

    From the parabola through neighbouring points of the line; one-sided at its ends; zero on a line of one point.
    """
    root = np.sqrt(np.maximum(differential_pressure, 0.0))
    gradient = np.zeros(job.layout.size)
    for name in job.layout.lines:
        index = np.flatnonzero([line == name for line in job.layout.line])
        order = index[np.argsort(job.layout.depth[index], kind="stable")]
        depth, first = np.unique(job.layout.depth[order], return_index=True)
        if depth.size < 2:
            continue
        slope = np.gradient(root[order][first], depth, edge_order=2 if depth.size > 2 else 1)
        gradient[order] = np.abs(np.interp(job.layout.depth[order], depth, slope))
    return gradient


def signed_shared(result: RunResult, name: str) -> dict[tuple[str, str], float]:
    """Return the signed contributions of the shared rows of a run's budget for one quantity."""
    return {
        (row.input, row.kind): row.sensitivity * row.standard_uncertainty
        for row in result.budget.get(name, ()) if row.shared
    }
