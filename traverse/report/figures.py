"""Figures: returned as matplotlib figures, drawn without any global state, the same style in all."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import numpy.typing as npt
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import Patch, PathPatch
from matplotlib.path import Path as Curve
from matplotlib.ticker import MaxNLocator

from traverse import files
from traverse.errors import OutputError
from traverse.model import Layout, Section
from traverse.physics import sections
from traverse.report.numbers import significant, unit_text, with_uncertainty
from traverse.result import Reduction, RunResult
from traverse.units import UNITS

Array = npt.NDArray[np.float64]
INK, GREY = "#222222", "#8a8a8a"
# Colour-blind safe, of falling lightness, each with its own marker and dash: readable in black and white.
COLOURS = ("#0b3c6f", "#c1440e", "#4d8f8b", "#8c6bb1", "#b8860b", "#555555")
MARKERS = ("o", "s", "^", "D", "v", "P")
DASHES = ("-", "--", "-.", ":", (0, (5, 1)), (0, (1, 1)))
WALL_EXPONENT = 7.0


def write(figure: Figure, target: Path) -> None:
    """Write a figure as PNG, SVG or PDF by the ending of its name, whole or not at all."""
    kind = target.suffix.lower().lstrip(".")
    if kind not in {"png", "svg", "pdf"}:
        raise OutputError(f"{target.name}: figures are written as .png, .svg or .pdf", where=str(target))
    clean = {"png": {"Software": None}, "svg": {"Date": None}, "pdf": {"CreationDate": None}}[kind]
    with files.atomic(target) as stream:
        figure.savefig(stream, format=kind, dpi=160, metadata=clean)


def write_all(result: Reduction, target: Path) -> list[Path]:
    """Write section, profiles and, where there is one, the budget; ``target`` is a folder, or a folder with a prefix."""
    drawn = {"section": section(result), "profiles": profiles(result)}
    drawn |= {"budget": figure} if (figure := budget(result)) is not None else {}
    written = []
    for name, figure in drawn.items():
        path = target / f"{name}.png" if target.is_dir() else target.with_name(f"{target.name}{name}.png")
        write(figure, path)
        written.append(path)
    return written


def _figure(width: float, height: float) -> Figure:
    figure = Figure(figsize=(width, height), layout="constrained")
    FigureCanvasAgg(figure)
    return figure


def _plain(axes: Axes) -> None:
    axes.spines[["top", "right"]].set_visible(False)
    axes.grid(color="#dddddd", linewidth=0.6)
    axes.set_axisbelow(True)


def outline(plane_section: Section, scale: float) -> Patch:
    """Return the inner wall of a section as a patch, in the unit given by its scale; a core is part of it."""
    rings = sections.outline(plane_section.shape, plane_section.size, 361)
    curve = Curve.make_compound_path(*(Curve(ring * scale, closed=True) for ring in rings))
    return PathPatch(curve, fill=False, edgecolor=INK, linewidth=2.0, zorder=4)


def field(result: RunResult, layout: Layout, plane_section: Section, size: int = 181) -> tuple[Array, Array, Array]:
    """Return a grid over the section and a velocity on it, for the eye only: no number of the report comes from it.

    The velocity divided by the seventh root of the wall distance is interpolated between the points (thin plate,
    held level far from them) and multiplied back, so that it falls to zero at the wall as turbulent flow does.
    """
    left, right, bottom, top = plane_section.bounds
    x, y = np.meshgrid(np.linspace(left, right, size), np.linspace(bottom, top, size))
    dims = plane_section.size
    wall = np.clip(sections.wall_distance(plane_section.shape, dims, x, y), 0.0, None)
    counted = result.treated.counted
    near = np.clip(sections.wall_distance(plane_section.shape, dims, layout.x[counted], layout.y[counted]), 1e-9, None)
    level = result.velocity[counted] / near ** (1 / WALL_EXPONENT)
    places = np.column_stack([layout.x[counted], layout.y[counted]])
    unique, first = np.unique(np.round(places, 9), axis=0, return_index=True)
    if len(unique) >= 4 and np.linalg.matrix_rank(unique - unique.mean(axis=0), tol=1e-9) == 2:
        from scipy.interpolate import RBFInterpolator

        grid = np.column_stack([x.ravel(), y.ravel()])
        spread = RBFInterpolator(places[first], level[first], kernel="thin_plate_spline", smoothing=0.0)(grid)
        values = np.clip(spread, level.min(), level.max()).reshape(x.shape) * wall ** (1 / WALL_EXPONENT)
    else:
        values = float(np.mean(level)) * wall ** (1 / WALL_EXPONENT)
    return x, y, np.where(wall > 0, values, np.nan)


def section(result: Reduction) -> Figure:
    """Draw each run's section at true scale with velocity contours and the points."""
    job, runs = result.job, result.runs
    unit = "in" if job.units == "us" else "mm"
    scale = 1.0 / UNITS[unit].factor
    speed = UNITS[unit_text("mean_velocity", job.units)]
    tall = job.plane.section.height / job.plane.section.width
    figure = _figure(1.2 + 5.0 * len(runs), max(3.4, min(5.0 * tall + 1.4, 9.0)))
    fields = [field(item, job.layout, job.plane.section) for item in runs]
    top = max(float(np.nanmax(values)) for _, _, values in fields) / speed.factor
    levels = MaxNLocator(12, steps=[1, 2, 2.5, 5, 10]).tick_values(0.0, top if top > 0 else 1.0)
    axes = figure.subplots(1, len(runs), squeeze=False)[0]
    for one, item, (x, y, values) in zip(axes, runs, fields, strict=True):
        drawn = one.contourf(x * scale, y * scale, values / speed.factor, levels=levels, cmap="cividis", extend="min")
        one.contour(x * scale, y * scale, values / speed.factor, levels=levels[::2], colors="white", linewidths=0.5)
        one.add_patch(outline(job.plane.section, scale))
        _mark_points(one, item, job.layout, scale, speed.factor)
        one.set_aspect("equal")
        one.spines[:].set_visible(False)
        one.set_xlabel(f"x [{unit}]")
        one.set_title(f"run {item.run.name}: {_speed(item, job.units)}", fontsize=10)
    axes[0].set_ylabel(f"y [{unit}], looking downstream")
    figure.colorbar(drawn, ax=list(axes), label=f"velocity [{speed.symbol}], interpolated for the eye", shrink=0.85)
    figure.suptitle(job.title, fontsize=11)
    return figure


def _speed(item: RunResult, system: str) -> str:
    measured = item.quantities["mean_velocity"]
    return f"mean {with_uncertainty('mean_velocity', measured, system)}" if measured else ""


def _mark_points(axes: Axes, item: RunResult, layout: Layout, scale: float, speed: float) -> None:
    """Draw each point with its velocity; a cross where nothing was read, a ring where a rule acted."""
    for i in range(layout.size):
        x, y = layout.x[i] * scale, layout.y[i] * scale
        if not item.treated.counted[i]:
            axes.plot(x, y, "x", color="#ff3b1f", markersize=8, markeredgewidth=2, zorder=6)
            continue
        ring = bool(item.treated.rule[i])
        axes.plot(x, y, "o", color="white", markeredgecolor="#ff3b1f" if ring else INK, markersize=5,
                  markeredgewidth=1.8 if ring else 0.8, zorder=6)
        axes.annotate(f"{item.velocity[i] / speed:.1f}", (x, y), xytext=(0, 5), textcoords="offset points", ha="center",
                      fontsize=6.5, color="white", zorder=7,
                      bbox={"boxstyle": "round,pad=0.12", "facecolor": INK, "edgecolor": "none", "alpha": 0.55})


def profiles(result: Reduction) -> Figure:
    """Draw the velocity along each line, runs overlaid, one panel a line."""
    job = result.job
    unit = "in" if job.units == "us" else "mm"
    speed = UNITS[unit_text("mean_velocity", job.units)]
    lines = job.layout.lines
    columns = min(3, len(lines))
    rows = -(-len(lines) // columns)
    figure = _figure(3.6 * columns + 0.6, 2.9 * rows + 0.8)
    panels = figure.subplots(rows, columns, sharey=True, squeeze=False).ravel()
    for panel, name in zip(panels, lines, strict=False):
        index = np.flatnonzero([line == name for line in job.layout.line])
        for k, item in enumerate(result.runs):
            _line(panel, item, job.layout, index, k, unit, speed.factor)
        panel.set_title(f"line {result.runs[0].run.readings.line[index[0]]}", fontsize=10)
        panel.set_xlabel(f"depth from the inner wall [{unit}]")
        panel.set_ylim(bottom=min(0.0, panel.get_ylim()[0]))
        _plain(panel)
    for panel in panels[len(lines):]:
        panel.set_visible(False)
    for row in range(rows):
        panels[row * columns].set_ylabel(f"velocity [{speed.symbol}]")
    if len(result.runs) > 1:
        panels[0].legend(fontsize=8, frameon=False)
    figure.suptitle(f"{job.title}: velocity along each line", fontsize=11)
    return figure


def _line(axes: Axes, item: RunResult, layout: Layout, index: npt.NDArray[np.intp], k: int, unit: str, speed: float) -> None:
    order = index[np.argsort(layout.depth[index], kind="stable")]
    depth = layout.depth[order] / UNITS[unit].factor
    velocity = np.where(item.treated.counted[order], item.velocity[order], np.nan) / speed
    axes.plot(depth, velocity, linestyle=DASHES[k % len(DASHES)], marker=MARKERS[k % len(MARKERS)], markersize=4.5,
              color=COLOURS[k % len(COLOURS)], linewidth=1.3, label=f"run {item.run.name}")
    ruled = np.array([bool(item.treated.rule[i]) for i in order])
    axes.plot(depth[ruled], np.nan_to_num(velocity[ruled]), "o", markerfacecolor="none", markeredgecolor="#ff3b1f", markersize=10)


def budget(result: Reduction) -> Figure | None:
    """Draw the contributions to the uncertainty of the actual flow, largest first; None without a budget."""
    rows = result.runs[0].budget.get("actual_flow", ())
    if not rows:
        return None
    system = result.job.units
    names = [f"{row.input.replace('_', ' ')}{'' if row.kind == 'plain' else ', ' + row.kind}" for row in rows][::-1]
    shares = [100 * row.share for row in rows][::-1]
    figure = _figure(7.4, 0.36 * len(rows) + 1.7)
    axes = figure.subplots()
    bars = axes.barh(names, shares, color=[COLOURS[0] if row.shared else "#9fb8d3" for row in rows][::-1], edgecolor=INK,
                     linewidth=0.6, hatch=["" if row.shared else "///" for row in rows][::-1])
    axes.bar_label(bars, labels=[f" {significant(share, 2)} %" if share >= 0.1 else " < 0.1 %" for share in shares], fontsize=8)
    axes.set_xlabel("share of the variance [%]")
    axes.set_xlim(0, max(shares) * 1.15)
    _plain(axes)
    measured = result.runs[0].quantities["actual_flow"]
    stated = with_uncertainty("actual_flow", measured, system) if measured else ""
    axes.set_title(f"Actual flow {stated}, run {result.runs[0].run.name}\nfilled: shared by all points; hatched: point by point. "
                   f"Layout term {result.layout_term.split(':')[0]}", fontsize=9, loc="left")
    return figure
