"""The plan as a figure to scale: the section with ports and points, and the probe with its marks below it."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from textwrap import fill

import numpy as np
import numpy.typing as npt
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patches import Polygon

from traverse.model import Array
from traverse.physics import sections
from traverse.planning import Plan
from traverse.report.figures import COLOURS, GREY, INK, MARKERS
from traverse.report.plan_text import sixteenths
from traverse.units import UNITS

# Inches on the page: width, margin, title, tallest section, height of one probe with its labels, least way between labels.
WIDTH, MARGIN, TITLE, TALLEST, PROBE, APART = 8.0, 0.5, 0.85, 5.6, 1.85, 0.15


@dataclass(frozen=True, slots=True, kw_only=True)
class _Page:
    """Where things lie on the page. Everything is drawn in inches, so that metres times ``scale`` is true to scale."""

    axes: Axes
    scale: float
    left: float
    bottom: float
    x: float
    y: float

    def place(self, x: Array, y: Array) -> tuple[Array, Array]:
        """Return inches on the page from metres of the section."""
        return self.left + (x - self.x) * self.scale, self.bottom + (y - self.y) * self.scale


def plan(planned: Plan) -> Figure:
    """Draw the section at true scale with its ports and points, and each probe with its marks at the same scale."""
    groups = alike(planned)
    left, right, bottom, top = _extent(planned)
    scale = min((WIDTH - 2 * MARGIN) / max(right - left, planned.probe.length), TALLEST / (top - bottom))
    below = 0.55 + len(groups) * PROBE
    height = TITLE + (top - bottom) * scale + 0.35 + below
    figure = Figure(figsize=(WIDTH, height))
    FigureCanvasAgg(figure)
    axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
    axes.set_xlim(0.0, WIDTH)
    axes.set_ylim(0.0, height)
    axes.axis("off")
    middle = (WIDTH - (right - left) * scale) / 2.0
    page = _Page(axes=axes, scale=scale, left=middle, bottom=below + 0.2, x=left, y=bottom)
    _heads(planned, axes, height, scale)
    _section(planned, page)
    for k, lines in enumerate(groups):
        _probe(planned, page, lines, below - 0.25 - k * PROBE)
    return figure


def alike(planned: Plan) -> list[tuple[str, ...]]:
    """Return the lines in groups that share their marks, to a hundredth of a millimetre."""
    groups: dict[tuple[float, ...], list[str]] = {}
    for name in planned.layout.lines:
        groups.setdefault(tuple(np.round(planned.mark[_of(planned, name)], 5)), []).append(name)
    return [tuple(names) for names in groups.values()]


def _of(planned: Plan, line: str) -> npt.NDArray[np.intp]:
    """Return the numbers of a line's points."""
    return np.flatnonzero([name == line for name in planned.layout.line])


def _ports(planned: Plan) -> list[tuple[str, Array, Array, Array]]:
    """Return each line's name, the port at the inner wall, its outer end, and the direction inward; unknown ones are left out."""
    found = []
    for name in planned.layout.lines:
        i = int(_of(planned, name)[0])
        way = planned.direction[i]
        if np.all(np.isfinite(way)):
            wall = np.array([planned.layout.x[i], planned.layout.y[i]]) - way * planned.layout.depth[i]
            found.append((name, wall, wall - way * planned.nipple[i], way))
    return found


def _extent(planned: Plan) -> tuple[float, float, float, float]:
    """Return the box around section and ports, with room for the names of the ports. [m]"""
    left, right, bottom, top = planned.setup.plane.section.bounds
    room = 0.09 * max(right - left, top - bottom)
    ends = [outer - way * room for _, _, outer, way in _ports(planned)]
    x, y = [left, right, *(float(end[0]) for end in ends)], [bottom, top, *(float(end[1]) for end in ends)]
    return min(x), max(x), min(y), max(y)


def _heads(planned: Plan, axes: Axes, height: float, scale: float) -> None:
    axes.text(MARGIN, height - 0.32, planned.setup.title, fontsize=12, color=INK, va="center")
    facts = f"{planned.setup.plane.section.words}; looking downstream; scale 1 : {1 / 0.0254 / scale:.3g} where the figure is " \
        f"{WIDTH:g} in ({WIDTH * 25.4:.0f} mm) wide"
    axes.text(MARGIN, height - 0.5, fill(facts, 90), fontsize=8, color=INK, va="top")
    _axes_cross(axes, WIDTH - 0.75, height - 0.7)


def _section(planned: Plan, page: _Page) -> None:
    section, layout = planned.setup.plane.section, planned.layout
    for k, ring in enumerate(sections.outline(section.shape, section.size)):
        corners = np.column_stack(page.place(ring[:, 0], ring[:, 1]))
        page.axes.add_patch(Polygon(corners, closed=True, facecolor="#e4e9ee" if k else "#f7f9fb", edgecolor=INK, linewidth=1.8))
    for k, name in enumerate(layout.lines):
        index, colour = _of(planned, name), COLOURS[k % len(COLOURS)]
        x, y = page.place(layout.x[index], layout.y[index])
        page.axes.plot(x, y, linestyle="-", linewidth=0.6, color=colour, alpha=0.6)
        page.axes.plot(x, y, linestyle="none", marker=MARKERS[k % len(MARKERS)], markersize=4.5, color=colour)
        way = planned.direction[int(index[0])]
        # A label is wider than high.
        for k_shown in shown_labels(np.column_stack([x, y]), 0.13 + 0.19 * abs(float(np.nan_to_num(way[0])))):
            page.axes.annotate(layout.labels()[int(index[k_shown])], (x[k_shown], y[k_shown]), xytext=_beside(way),
                               textcoords="offset points", fontsize=6.5, color=colour, ha="center", va="center")
    for k, (name, wall, outer, way) in enumerate(_ports(planned)):
        x, y = page.place(np.array([wall[0], outer[0]]), np.array([wall[1], outer[1]]))
        page.axes.plot(x, y, color=GREY, linewidth=7, solid_capstyle="butt", zorder=1)
        page.axes.text(x[1] - 0.16 * way[0], y[1] - 0.16 * way[1], f"port {name}", fontsize=8, ha="center", va="center",
                       color=COLOURS[k % len(COLOURS)], rotation=90 if abs(way[0]) > 0.7 else 0)


def _beside(way: Array) -> tuple[float, float]:
    """Return where a label stands beside its line, in points of the page: up or right of it."""
    if not np.all(np.isfinite(way)):
        return 6.0, 6.0
    right, up = float(way[1]), -float(way[0])
    side = 1.0 if right + up > 0 else -1.0
    return side * right * 11.0, side * up * 8.0


def _axes_cross(axes: Axes, x: float, y: float) -> None:
    """Draw which way x and y run."""
    for dx, dy, name in ((0.28, 0.0, "x"), (0.0, 0.28, "y")):
        axes.annotate("", (x + dx, y + dy), xytext=(x, y), arrowprops={"arrowstyle": "->", "color": GREY, "lw": 0.9})
        axes.text(x + dx * 1.35, y + dy * 1.35, name, fontsize=8, color=GREY, ha="center", va="center")


def _probe(planned: Plan, page: _Page, lines: Sequence[str], top: float) -> None:
    """Draw the probe of some lines from its head on the left, with a tick and a label at every mark."""
    index = _of(planned, lines[0])
    body, start = top - PROBE + 0.32, MARGIN
    names = f"line {lines[0]}" if len(lines) == 1 else f"lines {', '.join(lines)}"
    inch_first = planned.setup.units == "us"
    order = "in to 1/16 (mm)" if inch_first else "mm (in to 1/16)"
    origin = "where marks count" if planned.head_offset else "the head"
    ports = "included" if np.any(planned.nipple) else "not stated"
    words = f"probe for {names}: distance from {origin}, point: {order}, port depth {ports}"
    page.axes.text(start, body - 0.2, words, fontsize=7, color=INK, va="center")
    length = (float(np.max(planned.mark[index])) + planned.probe.grip) * page.scale
    page.axes.plot([start, start + length], [body, body], color=GREY, linewidth=4.5, solid_capstyle="butt", zorder=1)
    page.axes.plot([start], [body], marker="o", markersize=7, color=INK, zorder=3)
    labels = mark_labels(planned, index, inch_first=inch_first)
    places = [start + mark * page.scale for mark, _ in labels]
    for (_, label), at, shown in zip(labels, places, spread(places, APART, start, WIDTH - MARGIN), strict=True):
        page.axes.plot([at, at], [body - 0.07, body + 0.07], color=INK, linewidth=1.1, zorder=4)
        page.axes.plot([at, shown], [body + 0.07, body + 0.17], color=GREY, linewidth=0.6)
        page.axes.text(shown, body + 0.19, label, fontsize=6.8, rotation=90, ha="center", va="bottom", color=INK)


def mark_labels(planned: Plan, index: npt.NDArray[np.intp], *, inch_first: bool) -> list[tuple[float, str]]:
    """Return the marks of a line in order, each with the points it serves and its two texts. [m]"""
    found: dict[float, list[str]] = {}
    for i in sorted(index.tolist(), key=lambda i: float(planned.mark[i])):
        found.setdefault(round(float(planned.mark[i]), 6), []).append(str(planned.layout.point[i]))
    labels = []
    for mark, points in found.items():
        inch = sixteenths(round(mark / UNITS["in"].factor * 16) / 16 * UNITS["in"].factor)
        texts = (f"{inch} in", f"{1000 * mark:.0f} mm")
        first, second = texts if inch_first else texts[::-1]
        labels.append((mark, f"{', '.join(points)}: {first} ({second})"))
    return labels


def spread(places: Sequence[float], apart: float, start: float, end: float) -> list[float]:
    """Return rising places moved as little as keeps them apart and between two ends.

    The least squares of the moves: places less their number times the distance must not fall, so neighbours that would
    are pooled at their mean.
    """
    pools: list[tuple[float, int]] = []
    for number, place in enumerate(places):
        mean, count = place - number * apart, 1
        while pools and pools[-1][0] > mean:
            before, members = pools.pop()
            mean, count = (before * members + mean * count) / (members + count), members + count
        pools.append((mean, count))
    level = [mean for mean, count in pools for _ in range(count)]
    last = max(start, end - (len(level) - 1) * apart)
    return [min(max(mean, start), last) + number * apart for number, mean in enumerate(level)]


def shown_labels(places: Array, least: float) -> list[int]:
    """Return which of some places along a line keep their labels: the first, the last, and those between that have room."""
    kept = [0]
    for i in range(1, len(places)):
        if float(np.hypot(*(places[i] - places[kept[-1]]))) >= least:
            kept.append(i)
    last = len(places) - 1
    if kept[-1] != last:
        kept = [*(kept[:-1] if len(kept) > 1 else kept), last]
    return kept if len(places) == 1 or float(np.hypot(*(places[last] - places[0]))) >= least else [0]
