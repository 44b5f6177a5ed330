"""[pitot]: type, size and orientation of the probe, and its coefficient by number, by legs or by calibration."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping
from pathlib import Path
from typing import Any, cast

import numpy as np

from traverse import tables
from traverse.errors import JobError
from traverse.importers import _calibration
from traverse.importers._schema import Table, plain_number
from traverse.methods import Method
from traverse.model import Calibration, Corrections, Finding, Leg, Pitot, ProbeType, Run, Source
from traverse.physics import probe
from traverse.units import Stated

Beside = Callable[[str], Path]
# The ways to say the coefficient: exactly one of them.
WAYS = ("coefficient", "legs", "calibration")
_BELONGS = (*WAYS, "leg", "standard_coefficient")
_S_TYPE = ("s-type", "two-dimensional")
_TURNED = ("two-dimensional", "three-dimensional")


def build(table: Table, method: Method, beside: Beside) -> tuple[Pitot, tuple[Finding, ...]]:
    """Return the probe, with the method's default coefficient where it allows one.

    Raises
    ------
    JobError
        For a coefficient that is missing, stated twice or of another kind of probe, and a probe that the method cannot use.
    ReadingError
        For a calibration that cannot be read.
    """
    kind, findings = table.text("type"), list[Finding]()
    if kind is None:
        kind = "pitot-static"
        findings.append(_note("type", 'type is not stated; "pitot-static" was taken.'))
    _refuse_type(table, kind, method)
    ways = [way for way in WAYS if way in table]
    if len(ways) > 1:
        raise JobError(f"both {ways[0]} and {ways[1]}", where=table.name, expected="exactly one of coefficient | legs | calibration")
    _refuse_stray(table, ways)
    parts: dict[str, Any]
    if ways == ["legs"]:
        parts = _by_legs(table, _legs(table, kind), "[pitot] legs", findings)
    elif ways == ["calibration"]:
        parts = _by_calibration(table, kind, method, beside, findings)
    else:
        parts = _by_number(table, kind, method, findings)
    return Pitot(
        type=cast("ProbeType", kind), stem=_length(table, "stem"), head=_length(table, "head"), hole=_length(table, "hole"),
        head_offset=table.stated("head_offset"), yaw_offset=_offsets(table), **parts,
    ), tuple(findings)


def merge(base: Table, over: Table | None) -> Table:
    """Return the probe of one run: another type, or another way to say the coefficient, does not keep the default's."""
    if over is None:
        return base
    kept = dict(base.values)
    if ("type" in over and over.text("type") != base.text("type")) or any(way in over for way in WAYS):
        kept = {key: value for key, value in kept.items() if key not in _BELONGS}
    return Table(over.name, {**kept, **over.values})


def sources(probes: Iterable[Pitot]) -> tuple[Source, ...]:
    """Return the files that the probes were read from, each once."""
    found = {pitot.calibration.source.name: pitot.calibration.source for pitot in probes if pitot.calibration}
    return tuple(found.values())


def refuse_unsized(corrections: Corrections, runs: Iterable[Run]) -> None:
    """Refuse a correction that needs a size of the probe which the job does not state."""
    for run in runs:
        if corrections.blockage and run.pitot.stem is None:
            raise JobError(
                "blockage = true without the stem of the probe", where="[corrections] blockage",
                expected="the diameter of the stem", how='[pitot] stem = "1 in"',
            )
        if corrections.displacement and run.pitot.head is None:
            raise JobError(
                "displacement without the head of the probe", where="[corrections] displacement",
                expected="the outside diameter of the head", how='[pitot] head = "6 mm"',
            )


def _note(key: str, message: str) -> Finding:
    return Finding(level="note", topic="pitot", setting=f"[pitot] {key}", message=message)


def _refuse_type(table: Table, kind: str, method: Method) -> None:
    if method.probes and kind not in method.probes:
        raise JobError(
            f"a {kind} probe under {method.id}", where=table.where("type"), expected=" or ".join(f'"{name}"' for name in method.probes)
        )
    if kind == "three-dimensional" and not method.uses_yaw:
        raise JobError(
            f"a three-dimensional probe under {method.id}, which knows no angles", where=table.where("type"),
            expected='method = "epa-2f", "epa-2g" (pitch left out) or "exact"',
        )


def _refuse_stray(table: Table, ways: list[str]) -> None:
    """Refuse keys that say something of a coefficient which is stated in another way."""
    if "leg" in table and not ({"legs", "calibration"} & set(ways)):
        raise JobError("leg without legs", where=table.where("leg"), expected="legs = { A = 0.838, B = 0.842 }, or a calibration by sides")
    if "standard_coefficient" in table and "calibration" not in ways:
        raise JobError(
            "standard_coefficient without calibration", where=table.where("standard_coefficient"),
            expected="only beside a calibration by pairs of readings against a standard tube",
        )


def _length(table: Table, key: str) -> Stated | None:
    found = table.stated(key)
    if found is not None and not found.value > 0:
        raise JobError(f"{found.text!r}", where=table.where(key), expected="a diameter above zero")
    return found


def _offsets(table: Table) -> tuple[Stated, ...]:
    found = table.get("yaw_offset")
    return () if found is None else found if isinstance(found, tuple) else (found,)


def _by_number(table: Table, kind: str, method: Method, findings: list[Finding]) -> dict[str, Any]:
    if kind == "three-dimensional":
        raise JobError(
            "no calibration", where=table.name, expected="the curves F1 and F2 over the pitch angle of a three-dimensional probe",
            how='calibration = "probe.csv", with columns pitch [deg], F1, F2',
        )
    coefficient, source = table.number("coefficient"), "[pitot] coefficient"
    if coefficient is None:
        if kind not in method.default_coefficients:
            raise JobError(
                "no coefficient", where=table.name,
                expected=f"the calibrated coefficient; {method.id} has no default for a {kind} tube",
                how="for example coefficient = 0.84",
            )
        coefficient, source = method.default_coefficients[kind], f"default of {method.id} for a {kind} tube"
        findings.append(_note("coefficient", f"coefficient is not stated; {coefficient:.2f}, the {source}."))
    return {"coefficient": coefficient, "coefficient_source": source}


def _legs(table: Table, kind: str) -> dict[str, float]:
    found, where = table.get("legs"), table.where("legs")
    if kind not in _S_TYPE:
        raise JobError(f"legs of a {kind} probe", where=where, expected='type = "s-type" or "two-dimensional"')
    if not isinstance(found, dict) or not found or not set(found) <= {"A", "B"}:
        raise JobError(f"{found!r}", where=where, expected="the coefficients by leg, such as { A = 0.838, B = 0.842 }")
    legs = {side: plain_number(f"{where}.{side}", found[side]) for side in sorted(found)}
    low, high = _calibration.PLAUSIBLE
    for side, value in legs.items():
        if not low <= value <= high:
            raise JobError(f"{value:g}", where=f"{where}.{side}", expected=f"a number from {low:g} to {high:g}")
    return legs


def _by_legs(table: Table, legs: Mapping[str, float], source: str, findings: list[Finding]) -> dict[str, Any]:
    """Return the coefficient of the leg that faces the flow, or the mean of both."""
    leg = table.text("leg")
    if leg is None:
        if len(legs) > 1:
            raise JobError(
                "two legs, and none named", where=table.name, expected='leg = "A" or "B", the one that faces the flow, or "mean"'
            )
        leg = next(iter(legs))
    if (leg == "mean" and len(legs) < 2) or (leg != "mean" and leg not in legs):
        raise JobError(f"leg {leg!r}, but only {', '.join(legs)} is known", where=table.where("leg"), expected=f'"{next(iter(legs))}"')
    coefficient = sum(legs.values()) / len(legs) if leg == "mean" else legs[leg]
    known = ", ".join(f"{side} {value:.4f}" for side, value in legs.items())
    words = "mean of both legs" if leg == "mean" else f"leg {leg}"
    findings.append(_note("leg", f"coefficient {coefficient:.4f}, {words} ({known})."))
    return {
        "coefficient": coefficient, "coefficient_source": f"{source}, {words}", "legs": legs, "leg": cast("Leg", leg),
    }


def _by_calibration(table: Table, kind: str, method: Method, beside: Beside, findings: list[Finding]) -> dict[str, Any]:
    name = str(table.text("calibration"))
    standard = table.number("standard_coefficient")
    default = float(tables.load("epa_method_2")["common"]["default_pitot_static"])
    found, said = _calibration.read(beside(name), name, default if standard is None else standard)
    findings += said
    if found.sides:
        if kind not in _S_TYPE:
            raise JobError(f"{name} holds pairs of an S-type tube", where=table.where("type"), expected='"s-type" or "two-dimensional"')
        if standard is None:
            findings.append(_note("standard_coefficient", f"{name}: the standard tube was taken to have {default:.2f} (Method 2, 10.2)."))
        means = {side: pairs.mean for side, pairs in found.sides.items()}
        text = f"calibration {name} (Method 2, eqs. 2-3 to 2-5)"
        return _by_legs(table, means, text, findings) | {"calibration": found}
    if "leg" in table or standard is not None:
        key = "leg" if "leg" in table else "standard_coefficient"
        raise JobError(f"{key} beside {name}, which has no sides", where=table.where(key), expected="one by sides, or no such key")
    return _curve(found, name, table, kind) if found.curve else _directional(found, name, table, kind, method, findings)


def _curve(found: Calibration, name: str, table: Table, kind: str) -> dict[str, Any]:
    curve = found.curve
    assert curve is not None, "asked only for a curve"
    if kind == "three-dimensional":
        raise JobError(f"{name} holds a coefficient over velocity", where=table.where("type"), expected="pitch, F1 and F2 for such a probe")
    middle = float(np.mean((curve.velocity[0], curve.velocity[-1])))
    value = float(probe.interpolate(middle, curve.velocity, curve.coefficient))
    text = f"calibration {name}, {curve.number[0]:g} to {curve.number[-1]:g} {curve.unit.symbol}"
    return {"coefficient": value, "coefficient_source": text, "calibration": found}


def _directional(
    found: Calibration, name: str, table: Table, kind: str, method: Method, findings: list[Finding]
) -> dict[str, Any]:
    curves = found.directional
    assert curves is not None, "asked only for such curves"
    if kind not in _TURNED:
        raise JobError(f"{name} holds F1 and F2 over pitch", where=table.where("type"), expected='"three-dimensional" or "two-dimensional"')
    value = float(probe.interpolate(0.0, curves.pitch, curves.coefficient))
    limits = math.degrees(curves.pitch[0]), math.degrees(curves.pitch[-1])
    text = f"calibration {name}, F2 over pitch {limits[0]:g} to {limits[1]:g} deg"
    by_pitch = kind == "three-dimensional" and method.uses_pitch
    if not by_pitch:
        text = f"calibration {name}, F2 at 0 deg pitch"
        findings.append(_note("type", f"pitch is left out: F2 at 0 deg, {value:.4f}, serves as the coefficient (eq. 2G-7)."))
    return {"coefficient": value, "coefficient_source": text, "calibration": found, "by_pitch": by_pitch}
