"""Which equation humid air takes: the one the job names, where it holds; said with what another would have given."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from traverse.chain import Equation, Setting, composition, compressibility, evaluate
from traverse.errors import DomainError
from traverse.model import Array, Finding, Run
from traverse.physics import humid_air

_NAMES = {"ideal": "the ideal gas", "cipm-2007": "CIPM-2007", "virial": "the virial equation"}


def air_equation(run: Run) -> Equation:
    """Return the equation of a run's humid air: one for all its points, so that a flow has no step between them.

    Raises
    ------
    DomainError
        If a point lies outside the range of the equation that the job names.
    """
    wanted = run.gas.equation
    if wanted == "ideal":
        return "ideal"
    if wanted == "real":
        return "cipm-2007" if not _outside(run, "cipm-2007") else _held(run, "virial")
    return _held(run, wanted)


def _held(run: Run, equation: Equation) -> Equation:
    outside = _outside(run, equation)
    if outside:
        near = equation == "cipm-2007"
        raise DomainError(
            f"{outside}, outside {_NAMES[equation]}", where=f"run {run.name}, [gas] equation", expected=_range(equation),
            how='hot and wet air: use equation = "real"' if near else 'use equation = "ideal"',
        )
    return equation


def _range(equation: str) -> str:
    cold, hot, low, high = humid_air.RANGE[equation]
    return f"{cold:g} to {hot:g} degC and {low / 100:g} to {high / 100:g} hPa"


def _outside(run: Run, equation: str) -> str:
    """Return the first point outside the range of an equation and its state, '' where all lie inside."""
    readings = run.readings
    pressure = run.conditions.barometric.value + readings.static
    found = np.flatnonzero(~humid_air.inside(equation, readings.temperature, pressure))
    if not found.size:
        return ""
    i = int(found[0])
    return f"{readings.line[i]}{readings.point[i]} at {readings.temperature[i] - 273.15:.1f} degC and {pressure[i] / 100:.1f} hPa"


def air_findings(run: Run, inputs: Mapping[str, Array], setting: Setting) -> tuple[Finding, ...]:
    """Say which equation humid air took, and how far another would have put density and flow."""
    if run.gas.kind != "air":
        return ()
    wanted = run.gas.equation
    if setting.constants is not None:
        if wanted == "ideal":
            return ()
        return (_finding(run, f'equation = "{wanted}" acts on the exact physics beside the method only: the method\'s own arithmetic is '
                              "that of an ideal gas", attention=True),)
    if wanted == "ideal":
        other: Equation = "cipm-2007" if not _outside(run, "cipm-2007") else "virial"
        if _outside(run, other):
            return ()
        change = _change(inputs, setting, replace(setting, equation=other))
        return (_finding(run, f'humid air as an ideal gas; equation = "real" ({_NAMES[other]}) would put {change}'),) if change else ()
    factor = compressibility_factor(inputs, setting)["compressibility_factor"]
    if setting.equation == "cipm-2007":
        why = f"every point within {_range('cipm-2007')}"
    else:
        why = f"{_outside(run, 'cipm-2007')}, outside CIPM-2007" if wanted == "real" else f"for {_range('virial')}"
    text = f"density by {_NAMES[setting.equation]} ({why}), Z {factor:.6f}"
    change = _change(inputs, setting, replace(setting, equation="ideal"))
    return (_finding(run, f"{text}; the ideal gas would put {change}" if change else text),)


def _finding(run: Run, message: str, *, attention: bool = False) -> Finding:
    return Finding(
        level="attention" if attention else "note", topic="density", message=f"run {run.name}: {message}.", setting="[gas] equation"
    )


def _change(inputs: Mapping[str, Array], used: Setting, other: Setting) -> str:
    """Return what another equation would do to density and flow; '' where it gives no number or there is no flow."""
    ours, theirs = (evaluate(inputs, setting).quantities for setting in (used, other))
    with np.errstate(invalid="ignore", divide="ignore"):
        density, flow = (100.0 * float(theirs[name] / ours[name] - 1.0) for name in ("density", "actual_flow"))
    if not np.isfinite(density):
        return ""
    return f"the density {density:+.3f} %" + (f" and the actual flow {flow:+.3f} %" if np.isfinite(flow) else "")


def compressibility_factor(inputs: Mapping[str, Array], setting: Setting) -> dict[str, float]:
    """Return the mean compressibility factor over the section, by name; nothing for an ideal gas."""
    if setting.equation == "ideal":
        return {}
    weight = inputs["weight"]
    temperature, pressure = (
        np.array([float(np.sum(weight * values))]) for values in (inputs["temperature"], inputs["barometric"] + inputs["static"])
    )
    factor = compressibility(inputs, setting, composition(inputs, setting, temperature, pressure))
    assert factor is not None, "the equation is not that of an ideal gas"
    return {"compressibility_factor": float(np.sum(weight * factor))}
