"""What the probe itself does to the readings: blockage, displacement in a gradient, nearness of a wall, a head too small."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
import numpy.typing as npt

from traverse.chain import Flow
from traverse.errors import JobError
from traverse.model import Array, Corrections, Finding, Layout, Run, Section, frozen
from traverse.physics import displacement, sections

# Blockage of the section by a cylindrical stem: relative velocity correction per share of the area that the stem
# fills, and the largest share it holds for. ISO 3966 clause 12 (corrections), values from memory.
STEM_BLOCKAGE = 0.7
LARGEST_SHARE = 0.02
FORMS: tuple[displacement.Form, ...] = ("macmillan", "mckeon")
# A displacement that takes more than half of a velocity is no correction.
LEAST_FACTOR = 0.5
# Least Reynolds number with the diameter of the hole for the total pressure. ISO 3966, from memory.
LEAST_REYNOLDS = 200.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Displaced:
    """The displacement of a head at every point; arrays of shape (points,).

    ``wall`` is the distance from the nearest wall [m], ``depth`` the place along the line [m], ``speed`` what stands for the
    velocity, ``slope`` its gradient along the line over itself [1/m] and ``way`` how that was found, from which points of the layout.
    """

    diameter: float
    wall: Array
    depth: Array
    speed: Array
    slope: Array
    way: tuple[displacement.Way, ...]

    def factor(self, form: displacement.Form) -> Array:
        """Return the factor on the velocities; 1 where there is none."""
        both = displacement.gradient_factor(self.diameter, self.slope, form) * displacement.wall_factor(self.diameter, self.wall)
        return np.asarray(np.where(self.speed > 0.0, both, 1.0))


def displaced(run: Run, layout: Layout, section: Section, pressure: Array, counted: npt.NDArray[np.bool_]) -> Displaced:
    """Return what the head does at every point, from the profile along each line.

    Raises
    ------
    JobError
        Without the diameter of the head, or with one that would reach into a wall.
    """
    assert run.pitot.head is not None, "asked only with the head's size"
    size = run.pitot.head.value
    wall = np.asarray(sections.wall_distance(section.shape, section.size, layout.x, layout.y))
    inside = np.flatnonzero(counted & (wall < 0.5 * size * (1 - 1e-9)))
    if inside.size:
        shown = ", ".join(f"{layout.labels()[i]} at {1e3 * wall[i]:.2f} mm" for i in inside.tolist())
        raise JobError(
            f"a head of {run.pitot.head.text} would reach into the wall: {shown}", where="[pitot] head",
            expected="a head that fits between its axis and the wall at every point",
        )
    # One line: velocities go with the roots of pressure times temperature.
    speed = np.where(counted, np.sqrt(np.maximum(pressure, 0.0) * run.readings.temperature), 0.0)
    slope, way = np.zeros(layout.size), [displacement.Way("none")] * layout.size
    for name in layout.lines:
        index = np.flatnonzero([line == name for line in layout.line] & counted)
        order = index[np.argsort(layout.depth[index], kind="stable")]
        _, first = np.unique(layout.depth[order], return_index=True)
        once = order[first]
        found, ways = displacement.relative_slopes(layout.depth[once], wall[once], speed[once])
        for place in order:
            at = int(np.argmin(np.abs(layout.depth[once] - layout.depth[place])))
            if speed[place] > 0.0:
                slope[place] = found[at]
                way[place] = displacement.Way(ways[at].kind, tuple(int(once[i]) for i in ways[at].points))
    steep = np.flatnonzero(displacement.gradient_factor(size, slope) < LEAST_FACTOR)
    if steep.size:
        shown = ", ".join(layout.labels()[i] for i in steep.tolist())
        raise JobError(
            f"a head of {run.pitot.head.text} is too large for the gradient at {shown}", where="[pitot] head",
            expected=f"a correction that leaves at least {100 * LEAST_FACTOR:g} % of the reading", how="a thinner head, or no displacement",
        )
    return Displaced(
        diameter=size, wall=frozen(wall), depth=frozen(layout.depth), speed=frozen(speed), slope=frozen(slope), way=tuple(way)
    )


def stem_factor(run: Run, layout: Layout, area: float) -> Array:
    """Return the factor of the stem's blockage at every point, shape (points,)."""
    assert run.pitot.stem is not None, "asked only with the stem's size"
    return np.asarray(1.0 - STEM_BLOCKAGE * run.pitot.stem.value * layout.depth / area)


def point_factor(
    corrections: Corrections, run: Run, layout: Layout, section: Section, pressure: Array, counted: npt.NDArray[np.bool_]
) -> Array:
    """Return the factor on each point's velocity from the corrections that were asked for, shape (points,)."""
    factor = np.ones(layout.size)
    if corrections.turbulence is not None:
        factor /= np.sqrt(1.0 + corrections.turbulence.value**2)
    if corrections.blockage and run.pitot.stem is not None:
        factor *= stem_factor(run, layout, section.area)
    if corrections.displacement and run.pitot.head is not None:
        factor *= displaced(run, layout, section, pressure, counted).factor(corrections.displacement)
    return frozen(factor)


def correction_findings(
    corrections: Corrections, run: Run, layout: Layout, section: Section, inputs: Mapping[str, Array], flow: Flow,
    counted: npt.NDArray[np.bool_],
) -> tuple[Finding, ...]:
    """Say what each correction that the probe's size allows does, or would do, to the mean velocity."""
    weighted = inputs["weight"] * np.broadcast_to(flow.points["velocity"], (layout.size,))
    total = float(np.sum(weighted))
    found: list[Finding] = []
    if total == 0.0:
        return ()

    def effect(factor: Array, *, applied: bool) -> float:
        other = 1.0 / factor if applied else factor
        changed = float(np.sum(weighted * other)) / total
        return 100.0 * ((1.0 / changed if applied else changed) - 1.0)

    if run.pitot.stem is not None:
        found += _blockage(corrections, run, layout, section, effect(stem_factor(run, layout, section.area), applied=corrections.blockage))
    if run.pitot.head is not None:
        try:
            head = displaced(run, layout, section, inputs["differential_pressure"], counted)
        except JobError as problem:
            found.append(_finding(run, "displacement", f"displacement of the head not estimated: {problem.found}", attention=True))
        else:
            used: displacement.Form = corrections.displacement or "macmillan"
            sizes = {form: effect(head.factor(form), applied=bool(corrections.displacement)) for form in FORMS}
            found += _displacement(corrections, run, head, sizes, used)
    if corrections.turbulence is not None:
        change = 100.0 * (1.0 / np.sqrt(1.0 + corrections.turbulence.value**2) - 1.0)
        text = f"turbulence of {corrections.turbulence.text}: {change:+.2f} % of the velocity"
        found.append(_finding(run, "turbulence", text))
    return (*found, *_small_head(run, section, flow, counted))


def _finding(run: Run, key: str, message: str, *, attention: bool = False) -> Finding:
    level: Literal["note", "attention"] = "attention" if attention else "note"
    return Finding(level=level, topic="corrections", setting=f"[corrections] {key}", message=f"run {run.name}: {message}.")


def _blockage(corrections: Corrections, run: Run, layout: Layout, section: Section, size: float) -> list[Finding]:
    assert run.pitot.stem is not None, "asked only with the stem's size"
    share = float(np.max(run.pitot.stem.value * layout.depth)) / section.area
    text = f"blockage by a stem of {run.pitot.stem.text}: {size:+.2f} % of the mean velocity, {_said(corrections.blockage)}"
    if share <= LARGEST_SHARE:
        return [_finding(run, "blockage", text)]
    beyond = f"; the stem fills up to {100 * share:.1f} % of the section, the formula holds to {100 * LARGEST_SHARE:g} %"
    return [_finding(run, "blockage", text + beyond, attention=True)]


def _said(applied: bool) -> str:
    return "corrected" if applied else "not corrected"


def _displacement(
    corrections: Corrections, run: Run, head: Displaced, sizes: Mapping[displacement.Form, float], used: displacement.Form
) -> list[Finding]:
    assert run.pitot.head is not None, "asked only with the head's size"
    names: dict[displacement.Form, str] = {"macmillan": "0.15 d (MacMillan)", "mckeon": "0.15 d tanh(4 sqrt(a)) (McKeon)"}
    other: displacement.Form = "mckeon" if used == "macmillan" else "macmillan"
    text = (
        f"head of {run.pitot.head.text} in the gradient along the lines and near the wall: {sizes[used]:+.2f} % of the mean velocity by "
        f"{names[used]}, {_said(bool(corrections.displacement))}; by {names[other]} {sizes[other]:+.2f} %"
    )
    unknown = sum(way.kind == "none" and speed > 0.0 for way, speed in zip(head.way, head.speed, strict=True))
    if unknown:
        text += f"; no gradient at {unknown} point{'s' if unknown > 1 else ''}"
    large = bool(corrections.displacement) and abs(sizes[used] - sizes[other]) > 1.0
    return [_finding(run, "displacement", text + ("; the two differ so much that neither is sure" if large else ""), attention=large)]


def _small_head(run: Run, section: Section, flow: Flow, counted: npt.NDArray[np.bool_]) -> list[Finding]:
    """Say where the hole of the head, or the head itself, is too small for the velocity."""
    known, what = (run.pitot.hole, "hole for the total pressure") if run.pitot.hole is not None else (run.pitot.head, "head")
    duct = flow.quantities
    reynolds = float(duct["reynolds_number"])
    if known is None or not reynolds > 0.0:
        return []
    # The viscosity is the one of the reported Reynolds number.
    viscosity = float(duct["density"]) * abs(float(duct["mean_velocity"])) * section.hydraulic_diameter / reynolds
    local = np.abs(flow.points["velocity"]) * flow.points["density"] * known.value / viscosity
    values = np.broadcast_to(local, counted.shape)
    low = np.flatnonzero(counted & (values > 0.0) & (values < LEAST_REYNOLDS))
    least = float(np.min(values[counted & (values > 0.0)], initial=np.inf))
    text = f"least Reynolds number with the {what} of {known.text}: {least:.0f}"
    if not low.size:
        reach = "" if run.pitot.hole is not None else "; with its hole, not stated as [pitot] hole, it is less"
        return [_small(run, f"{text} (at least {LEAST_REYNOLDS:g} with the hole: ISO 3966, from memory){reach}", attention=False)]
    labels = ", ".join(f"{run.readings.line[i]}{run.readings.point[i]}" for i in low.tolist())
    text += f", below {LEAST_REYNOLDS:g} at {labels}: viscosity raises the reading there (ISO 3966, from memory)"
    return [_small(run, text, attention=True)]


def _small(run: Run, text: str, *, attention: bool) -> Finding:
    key = "hole" if run.pitot.hole is not None else "head"
    return Finding(level="attention" if attention else "note", topic="pitot", setting=f"[pitot] {key}", message=f"run {run.name}: {text}.")
