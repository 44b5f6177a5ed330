"""A calibrated probe on its way into the chain, and what its calibration does not cover."""

from __future__ import annotations

from collections.abc import Iterable, Mapping

import numpy as np
import numpy.typing as npt

from traverse.errors import DomainError, ReadingError
from traverse.model import Array, Finding, Pitot, Run
from traverse.physics.probe import Calibrated

# Beyond its ends a curve over velocity is held by this part of the end, with a finding; farther it is an error. A convention of
# this program, no source: coefficients change little there, and a reading near the wall is worth more than none.
BEYOND = 0.1
# Rounding that a pitch angle at the very end of its curve may have. [rad]
_NEAR = 1e-9


def probe_setting(run: Run) -> Calibrated | None:
    """Return the equations of a probe whose coefficient differs from point to point; None for one number."""
    curve, directional = run.pitot.curve, run.pitot.directional
    if curve is not None:
        return Calibrated(kind="curve", at=tuple(curve.velocity.tolist()), coefficient=tuple(curve.coefficient.tolist()))
    if directional is None:
        return None
    return Calibrated(
        kind="pitch" if run.readings.pitch_pressure is None else "pitch-pressure", at=tuple(directional.pitch.tolist()),
        coefficient=tuple(directional.coefficient.tolist()), ratio=tuple(directional.ratio.tolist()),
    )


def probe_inputs(run: Run, counted: npt.NDArray[np.bool_], rule: tuple[str, ...]) -> dict[str, Array]:
    """Return the chain's inputs that only a calibrated probe has.

    Raises
    ------
    ReadingError
        Where the pressure of a point was taken from others, and its angle would have to be made up.
    """
    if probe_setting(run) is None:
        return {}
    values = {"coefficient_shift": np.zeros(1)}
    if run.pitot.directional is None:
        return values
    filled = np.array([text.startswith("from ") for text in rule]) & counted
    if filled.any():
        raise ReadingError(
            f"no pitch at {_labels(run, np.flatnonzero(filled))}, which was not read", where="readings",
            expected="a pitch at every point that counts", how='[readings] missing = "omit"',
        )
    if run.readings.pitch_pressure is None:
        return values | {"pitch": run.readings.pitch}
    return values | {"pitch": np.zeros(1), "pitch_pressure": np.nan_to_num(run.readings.pitch_pressure)}


def _labels(run: Run, index: Iterable[int]) -> str:
    return ", ".join(f"{run.readings.line[i]}{run.readings.point[i]}" for i in index)


def refuse_outside(run: Run, counted: npt.NDArray[np.bool_], inputs: Mapping[str, Array], points: Mapping[str, Array]) -> None:
    """Raise for a point that the calibration of the probe does not cover, naming it.

    Raises
    ------
    DomainError
        For a pitch angle beyond the calibrated ones, or a velocity more than a tenth beyond the calibrated ones.
    """
    directional, curve = run.pitot.directional, run.pitot.curve
    if directional is not None:
        used = counted & (np.asarray(inputs["differential_pressure"]) > 0.0)
        pitch = _all(points["pitch"], used)
        wrong = np.flatnonzero(used & ((pitch < directional.pitch[0] - _NEAR) | (pitch > directional.pitch[-1] + _NEAR)))
        if wrong.size:
            low, high = np.degrees(directional.pitch[0]), np.degrees(directional.pitch[-1])
            shown = ", ".join(f"{_labels(run, [i])} {np.degrees(pitch[i]):.1f} deg" for i in wrong.tolist())
            raise DomainError(
                f"pitch beyond the calibration: {shown}", where=f"run {run.name}, {run.pitot.coefficient_source}",
                expected=f"angles from {low:g} to {high:g} deg, as calibrated", how="a calibration that reaches farther, or another plane",
            )
    if curve is not None:
        speed = _all(np.abs(points["speed"]), counted)
        used = counted & (speed > 0.0)
        wrong = np.flatnonzero(used & ((speed < curve.velocity[0] * (1 - BEYOND)) | (speed > curve.velocity[-1] * (1 + BEYOND))))
        if wrong.size:
            shown = ", ".join(f"{_labels(run, [i])} {curve.unit.from_si(speed[i]):.3g} {curve.unit.symbol}" for i in wrong.tolist())
            raise DomainError(
                f"velocity beyond the calibration: {shown}", where=f"run {run.name}, {run.pitot.coefficient_source}",
                expected=f"{curve.number[0]:g} to {curve.number[-1]:g} {curve.unit.symbol}, or up to a tenth beyond",
                how="a calibration over these velocities, or one coefficient: [pitot] coefficient",
            )


def _all(values: Array, like: npt.NDArray[np.bool_]) -> Array:
    return np.broadcast_to(values, like.shape)


def probe_findings(run: Run, counted: npt.NDArray[np.bool_], points: Mapping[str, Array]) -> tuple[Finding, ...]:
    """Say what the calibration gave, and where it was stretched."""
    pitot = run.pitot
    found = list[Finding]()
    if pitot.curve is not None:
        found += _curve_findings(run, pitot, counted & (_all(np.abs(points["speed"]), counted) > 0.0), points)
    if pitot.directional is not None:
        pitch = np.degrees(_all(points["pitch"], counted))[counted]
        coefficient = _all(points["coefficient"], counted)[counted]
        way = "read" if run.readings.pitch_pressure is None else "from F1 = (P4-P5)/(P1-P2)"
        found.append(_note(run, "calibration", (
            f"pitch {way}, {np.min(pitch):.1f} to {np.max(pitch):.1f} deg; F2 {np.min(coefficient):.4f} to {np.max(coefficient):.4f}; "
            "axial component with cos(yaw) cos(pitch)")))
    elif "pitch" in run.readings.columns or "pitch_pressure" in run.readings.columns:
        found.append(_note(run, "type", "the pitch in the readings does not act: only a three-dimensional probe under a method that "
                           "knows pitch has one"))
    if pitot.type in {"two-dimensional", "three-dimensional"} and "yaw" not in run.readings.columns:
        found.append(_note(run, "type", f"a {pitot.type} probe and no yaw angles: yaw was taken as 0", attention=True))
    return tuple(found)


def _curve_findings(run: Run, pitot: Pitot, used: npt.NDArray[np.bool_], points: Mapping[str, Array]) -> list[Finding]:
    curve = pitot.curve
    assert curve is not None, "asked only for a curve"
    if not used.any():
        return []
    speed, coefficient = _all(np.abs(points["speed"]), used), _all(points["coefficient"], used)
    found = [_note(run, "calibration", (
        f"coefficient from the curve at each point's own velocity: {np.min(coefficient[used]):.4f} to {np.max(coefficient[used]):.4f} at "
        f"{curve.unit.from_si(np.min(speed[used])):.3g} to {curve.unit.from_si(np.max(speed[used])):.3g} {curve.unit.symbol}"))]
    beyond = np.flatnonzero(used & ((speed < curve.velocity[0] * (1 - 1e-12)) | (speed > curve.velocity[-1] * (1 + 1e-12))))
    if beyond.size:
        found.append(_note(run, "calibration", (
            f"{_labels(run, beyond)} up to a tenth beyond the calibrated velocities: the coefficient at the end of the curve was taken"),
            attention=True))
    return found


def _note(run: Run, key: str, message: str, *, attention: bool = False) -> Finding:
    return Finding(
        level="attention" if attention else "note", topic="pitot", setting=f"[pitot] {key}", message=f"run {run.name}: {message}."
    )


