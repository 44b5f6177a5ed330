"""The figure of a study: differences with their uncertainty, and the field they come from."""

from __future__ import annotations

import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.ticker import MaxNLocator

from traverse.physics import sections
from traverse.report.figures import COLOURS, INK, MARKERS
from traverse.report.numbers import unit_text
from traverse.report.study_text import measured, name, speed
from traverse.study import FAMILIES, Row, Study
from traverse.units import UNITS

GRID = 181
# Lines alone may be far off; the axis follows the other rows and says how far these lie beyond it.
BESIDE = frozenset({"single", "wall"})


def draw(result: Study) -> Figure:
    """Return the figure: a dot for every layout, grouped by family, and the velocity over the section."""
    rows = [row for family in FAMILIES for row in result.of(family)]
    groups = len({row.family for row in rows})
    figure = Figure(figsize=(13.0, max(4.6, 0.185 * (len(rows) + 1.6 * groups) + 1.5)), layout="constrained")
    FigureCanvasAgg(figure)
    dots, section = figure.subplots(1, 2, width_ratios=[1.35, 1.0])
    _dots(dots, result, rows)
    _section(section, figure, result)
    figure.suptitle(f"{result.title}: what other layouts would have given ({result.basis})", fontsize=11)
    return figure


def _dots(axes: Axes, result: Study, rows: list[Row]) -> None:
    limit = _limit(rows)
    place, ticks, labels, previous = 0.0, [], [], ""
    for row in rows:
        if row.family != previous:
            place -= 1.6
            axes.text(0.0, place + 0.85, FAMILIES[row.family], transform=axes.get_yaxis_transform(), fontsize=8, weight="bold", color=INK,
                          va="center", clip_on=False, zorder=3, bbox={"facecolor": "white", "edgecolor": "none", "pad": 1.0})
            previous = row.family
        _dot(axes, row, place, limit)
        ticks.append(place)
        labels.append(name(row))
        place -= 1.0
    axes.axvline(0.0, color=INK, linewidth=1.0)
    axes.set_yticks(ticks, labels, fontsize=7)
    axes.set_ylim(place - 0.2, 0.1)
    axes.set_xlim(-limit, limit)
    axes.spines[["top", "right", "left"]].set_visible(False)
    axes.tick_params(axis="y", length=0)
    axes.grid(axis="x", color="#dddddd", linewidth=0.6)
    axes.set_axisbelow(True)
    bars = "; bars: two standard uncertainties of the layout" if measured(result) else ""
    mean = "section mean of the fitted field" if measured(result) else "exact mean"
    axes.set_xlabel(f"difference from the {mean} [%]{bars}", fontsize=8)


def _limit(rows: list[Row]) -> float:
    reach = [100.0 * (abs(row.difference) + 2.0 * (row.uncertainty or 0.0)) for row in rows if row.family not in BESIDE]
    return max(1.12 * max(reach), 0.5)


def _dot(axes: Axes, row: Row, place: float, limit: float) -> None:
    kind = list(FAMILIES).index(row.family)
    colour, marker = (*COLOURS, INK)[kind], (*MARKERS, "X")[kind]
    value = 100.0 * row.difference
    if abs(value) > limit:
        side = 1.0 if value > 0 else -1.0
        axes.annotate(f"{value:+.1f} %", (side * limit, place), xytext=(side * limit * 0.86, place), fontsize=7, color=colour, va="center",
                      ha="center", arrowprops={"arrowstyle": "->", "color": colour, "linewidth": 0.9})
        return
    spread = None if row.uncertainty is None else 200.0 * row.uncertainty
    axes.errorbar(value, place, xerr=spread, fmt=marker, color=colour, markersize=4.5, linewidth=1.0, capsize=2.0,
                  markerfacecolor="white" if row.read else colour)


def _section(axes: Axes, figure: Figure, result: Study) -> None:
    shape, dimensions = result.section.shape, {key: stated.value for key, stated in result.section.dimensions.items()}
    unit = "in" if result.units == "us" else "mm"
    scale = 1.0 / UNITS[unit].factor
    left, right, bottom, top = (float(side) for side in sections.bounds(shape, dimensions))
    x, y = np.meshgrid(np.linspace(left, right, GRID), np.linspace(bottom, top, GRID))
    speed_unit = UNITS[unit_text("mean_velocity", result.units)]
    factor = speed_unit.factor if measured(result) else 1.0
    values = result.at(x, y) / factor
    highest = float(np.nanmax(values))
    levels = MaxNLocator(12, steps=[1, 2, 2.5, 5, 10]).tick_values(0.0, highest)
    extend = "min" if float(np.nanmin(values)) < 0.0 else "neither"
    drawn = axes.contourf(x * scale, y * scale, values, levels=levels, cmap="cividis", extend=extend)
    axes.contour(x * scale, y * scale, values, levels=levels[::2], colors="white", linewidths=0.5)
    for ring in sections.outline(shape, dimensions):
        axes.plot(ring[:, 0] * scale, ring[:, 1] * scale, color=INK, linewidth=2.0)
    counted = list(result.counted)
    axes.scatter(result.layout.x[counted] * scale, result.layout.y[counted] * scale, c=result.velocity / factor, cmap="cividis",
                 vmin=levels[0], vmax=levels[-1], edgecolors="white", linewidths=0.9, s=34, zorder=6)
    axes.set_aspect("equal")
    axes.spines[:].set_visible(False)
    axes.set_xlabel(f"x [{unit}]", fontsize=8)
    axes.set_ylabel(f"y [{unit}], looking downstream", fontsize=8)
    axes.tick_params(labelsize=7)
    symbol = speed_unit.symbol if measured(result) else "1"
    words = f"fitted field [{symbol}], dots: readings" if measured(result) else "profile, over the velocity in the middle"
    figure.colorbar(drawn, ax=axes, label=words, shrink=0.7)
    axes.set_title(f"section mean {speed(result, result.section_mean)}", fontsize=9)
