"""The layouts that a study tries: places and weights, nothing measured."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from traverse import layouts
from traverse.errors import LayoutError
from traverse.model import Array, Layout
from traverse.physics import quadrature, sections
from traverse.physics.sections import Size

FAMILIES = {
    "used": "The layout used, from its readings",
    "rules": "Every rule on the same lines",
    "fewer": "Fewer points or lines of the rule used",
    "single": "One line alone, from its readings",
    "rotated": "The layout used, its diameters turned",
    "shifted": "The layout used, all points moved along the probe",
    "wall": "The zone at the wall",
}
# Shapes whose lines go through the centre.
AROUND = frozenset({"round", "ellipse", "annulus"})
# Numbers of points on a line that are tried; of those that exist, the nearest to the used number in all are kept, not
# further from it than this factor where there is a nearer one.
COUNTS, KEPT, FURTHEST = range(2, 25), 4, 2.5
# The rules that lend their names to points which others have too.
FIRST = ("equal-area", "log-linear", "log-tchebycheff")
STEP = np.radians(15.0)
# Shifts along the probe: parts of the extent, and a depth misread. [1], [m]
SHIFTS, MISREAD = (-0.02, -0.01, 0.01, 0.02), 0.005
# Points nearer to the wall than this are moved out. [m]
CLEARANCES = (0.0127, 0.0254)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Candidate:
    """A layout to be tried. Arrays have shape (points,); ``index`` are the places in the layout used of actual readings."""

    family: str
    name: str
    rule: str
    lines: int
    points: int
    x: Array
    y: Array
    weight: Array
    rotation: float | None = None
    index: np.ndarray[Any, np.dtype[np.intp]] | None = None
    also: tuple[str, ...] = ()
    long: bool = False

    @property
    def total(self) -> int:
        """Number of points; 0 for a mean over the whole section."""
        return 0 if self.long else len(self.weight)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Frame:
    """The section and the layout used: what the families start from.

    ``angles`` are the port angles of the diameters, None where there are no diameters through the centre; ``inward`` the
    direction of the probe at every point, shape (points, 2); ``each`` the largest number of points on a line; ``radii`` tells
    lines that end at the centre.
    """

    shape: str
    size: Size
    layout: Layout
    counted: np.ndarray[Any, np.dtype[np.intp]]
    angles: tuple[float, ...] | None
    along: str
    inward: Array
    each: int
    radii: bool

    @property
    def lines(self) -> int:
        """Number of lines."""
        return len(self.layout.lines)

    @property
    def turnable(self) -> bool:
        """Whether the section looks the same from every side."""
        return self.shape in {"round", "annulus"}

    def of_line(self, name: str) -> np.ndarray[Any, np.dtype[np.intp]]:
        """Return the places of the counted points of a line, by depth."""
        own = np.array([i for i in self.counted.tolist() if self.layout.line[i] == name], dtype=np.intp)
        return own[np.argsort(self.layout.depth[own], kind="stable")]

    def place(self, rule: str, lines: int, points: int) -> Candidate | None:
        """Return a rule's points on so many lines (0: as the rule itself says); None where the rule does not exist for that."""
        width, height = (float(side) for side in sections.extent(self.shape, self.size))
        angles: Sequence[float] | None = self.angles
        if self.angles is not None and lines != self.lines:
            turn = 2.0 * np.pi if self.radii or self.shape == "annulus" else np.pi
            angles = [self.angles[0] + k * turn / lines for k in range(lines)] if lines else None
        core = float(sections.annulus.diameters(self.size)[1]) if self.shape == "annulus" else 0.0
        try:
            found = layouts.place(
                rule, shape=self.shape, width=width, height=height, lines=lines, points=points, angles=angles, along=self.along,
                radii=self.radii, core=core,
            )
        except LayoutError:
            return None
        counts = [found.line.count(name) for name in dict.fromkeys(found.line)]
        name = f"{len(counts)} x {counts[0]}" if len(set(counts)) == 1 else f"{len(found.line)} points"
        return Candidate(
            family="rules", name=f"{found.title}, {name}", rule=rule, lines=len(counts), points=max(counts), x=found.x, y=found.y,
            weight=found.weight,
        )


def candidates(
    shape: str, size: Size, layout: Layout, counted: np.ndarray[Any, np.dtype[np.intp]]
) -> tuple[list[Candidate], tuple[str, ...]]:
    """Return the layouts to be tried, the one used first, means over the whole section last, and notes on what was left out.

    Parameters
    ----------
    shape, size
        The section. [m]
    layout : Layout
        The layout used.
    counted : array of int
        The places of its points that gave a reading.
    """
    frame = _frame(shape, size, layout, counted)
    used = Candidate(
        family="used", name=f"{layout.title}, as read", rule=layout.rule, lines=frame.lines, points=frame.each, index=counted,
        x=layout.x[counted], y=layout.y[counted], weight=_shares(layout.weight[counted]),
    )
    notes: list[str] = []
    found = [used, *_merged(_rules(frame)), *_merged(_fewer(frame)), *_single(frame), *_rotated(frame, used)]
    found += [*_shifted(frame, used, notes), *_wall(frame, used)]
    return sorted(found, key=lambda one: one.long), tuple(notes)


def _frame(shape: str, size: Size, layout: Layout, counted: np.ndarray[Any, np.dtype[np.intp]]) -> Frame:
    each = max(sum(line == name for line in layout.line) for name in layout.lines)
    inward = _inward(shape, size, layout)
    along = "width" if abs(inward[0, 0]) > abs(inward[0, 1]) else "height"
    middle = float(sections.extent(shape, size)[0]) / 2.0
    return Frame(
        shape=shape, size=size, layout=layout, counted=counted, angles=_angles(shape, size, layout, inward), along=along, inward=inward,
        each=each, radii=shape == "round" and each > 1 and bool(np.all(layout.depth <= middle * (1.0 + 1e-9))),
    )


def _inward(shape: str, size: Size, layout: Layout) -> Array:
    """Return the direction of growing depth at every point, from the ends of its line; from the depth itself for one point."""
    found = np.zeros((layout.size, 2))
    top = float(sections.bounds(shape, size)[3])
    for name in layout.lines:
        own = np.flatnonzero([line == name for line in layout.line])
        first, last = own[np.argmin(layout.depth[own])], own[np.argmax(layout.depth[own])]
        step = np.array([layout.x[last] - layout.x[first], layout.y[last] - layout.y[first]])
        if not np.any(step):
            place = np.array([layout.x[first], layout.y[first]])
            down = abs(top - layout.y[first] - layout.depth[first]) < 1e-6 * top
            step = -place if shape in AROUND and np.any(place) else np.array([0.0, -1.0]) if down else np.array([1.0, 0.0])
        found[own] = step / np.hypot(*step)
    return found


def _angles(shape: str, size: Size, layout: Layout, inward: Array) -> tuple[float, ...] | None:
    """Return the port angle of every line; None where a line does not go through the centre."""
    if shape not in AROUND:
        return None
    port = np.column_stack([layout.x, layout.y]) - layout.depth[:, None] * inward
    beside = np.abs(port[:, 0] * inward[:, 1] - port[:, 1] * inward[:, 0])
    if np.any(beside > 1e-6 * float(sections.extent(shape, size)[0])):
        return None
    first = [layout.line.index(name) for name in layout.lines]
    return tuple(float(np.arctan2(port[i, 1], port[i, 0])) for i in first)


def _rules(frame: Frame) -> Iterator[Candidate]:
    order = (*(name for name in FIRST if name in layouts.rules()), *(name for name in layouts.rules() if name not in FIRST))
    for name in order:
        rule = layouts.rules()[name]
        square = frame.shape == "rectangle"
        own = set(range(7)) if frame.shape in rule.schemes else set(rule.line_counts.get(frame.shape, (frame.lines,)))
        pairs = {(count, count) for count in COUNTS} if square else {(lines, count) for lines in own for count in COUNTS}
        pairs |= {(lines, points) for lines in own for points in (0, frame.each)}
        placed = [one for pair in sorted(pairs) if (one := frame.place(name, *pair)) is not None]
        near = sorted(placed, key=lambda one: (_far(one, frame), one.total, one.lines))[: KEPT + square]
        near = near[:1] + [one for one in near[1:] if _far(one, frame) < np.log(FURTHEST)]
        yield from sorted(near, key=lambda one: (one.total, one.lines))


def _far(one: Candidate, frame: Frame) -> float:
    return float(abs(np.log(one.total / frame.layout.size)))


def _fewer(frame: Frame) -> Iterator[Candidate]:
    if frame.layout.rule not in layouts.rules():
        return
    pairs = [(frame.lines, count) for count in range(1, frame.each)] + [(count, frame.each) for count in range(1, frame.lines)]
    for lines, points in pairs:
        one = frame.place(frame.layout.rule, lines, points)
        if one is not None and one.total < frame.layout.size:
            yield replace(one, family="fewer")


def _merged(found: Iterator[Candidate]) -> list[Candidate]:
    """Return layouts with the same points and weights once, with the names of the other rules."""
    kept: list[Candidate] = []
    for one in found:
        for k, other in enumerate(kept):
            if _alike(one, other):
                if one.rule != other.rule:
                    kept[k] = replace(other, also=(*other.also, one.rule))
                break
        else:
            kept.append(one)
    return kept


def _alike(one: Candidate, other: Candidate) -> bool:
    if len(one.x) != len(other.x):
        return False
    first, second = (_ordered(candidate) for candidate in (one, other))
    return bool(np.allclose(first, second, rtol=0.0, atol=1e-6 * float(np.ptp(second[:, :2]) or 1.0)))


def _ordered(one: Candidate) -> Array:
    rows = np.column_stack([one.x, one.y, one.weight])
    scale = 1e-5 * (float(np.ptp(rows[:, :2])) or 1.0)
    return np.asarray(rows[np.lexsort(np.round(rows[:, :2] / scale).T)])


def _single(frame: Frame) -> Iterator[Candidate]:
    if frame.lines < 2:
        return
    for name in frame.layout.lines:
        own = frame.of_line(name)
        if own.size:
            yield _read(frame, "single", f"Line {name} alone", own, 1)


def _read(frame: Frame, family: str, name: str, index: np.ndarray[Any, np.dtype[np.intp]], lines: int) -> Candidate:
    layout = frame.layout
    return Candidate(
        family=family, name=name, rule=layout.rule, lines=lines, points=-(-len(index) // lines), x=layout.x[index],
        y=layout.y[index], weight=_shares(layout.weight[index]), index=index,
    )


def _rotated(frame: Frame, used: Candidate) -> Iterator[Candidate]:
    if not frame.turnable:
        return
    seen = [used]
    for k in range(1, 7):
        angle = k * float(STEP)
        one = replace(
            used, family="rotated", name=f"Turned by {15 * k} degrees", index=None, rotation=angle,
            x=used.x * np.cos(angle) - used.y * np.sin(angle), y=used.x * np.sin(angle) + used.y * np.cos(angle),
        )
        if not any(_alike(one, other) for other in seen):
            seen.append(one)
            yield one


def _shifted(frame: Frame, used: Candidate, notes: list[str]) -> Iterator[Candidate]:
    width, height = (float(side) for side in sections.extent(frame.shape, frame.size))
    extent = width if frame.along == "width" else height
    whole = "diameter" if frame.shape == "round" else frame.along
    steps = [(part * extent, f"{'Deeper' if part > 0 else 'Less deep'} by {abs(part) * 100:g} % of the {whole}") for part in SHIFTS]
    steps += [(step, f"{'Deeper' if step > 0 else 'Less deep'} by {MISREAD * 1000:g} mm") for step in (-MISREAD, MISREAD)]
    inward = frame.inward[frame.counted]
    for step, name in steps:
        x, y = used.x + step * inward[:, 0], used.y + step * inward[:, 1]
        if not np.all(sections.wall_distance(frame.shape, frame.size, x, y) > 0.0):
            notes.append(f"{name}: not possible, a point would lie in the wall.")
            continue
        yield replace(used, family="shifted", name=name, index=None, x=x, y=y)


def _wall(frame: Frame, used: Candidate) -> Iterator[Candidate]:
    inner = [frame.of_line(name)[1:-1] for name in frame.layout.lines]
    if all(own.size for own in inner):
        yield _read(frame, "wall", "Without the outermost points, from readings", np.sort(np.concatenate(inner)), frame.lines)
    for least in CLEARANCES:
        moved = _clear(frame, used.x, used.y, least)
        if moved is not None:
            name = f"No point nearer to the wall than {least * 1000:.1f} mm ({least / 0.0254:g} in)"
            yield replace(used, family="wall", name=name, index=None, x=moved[0], y=moved[1])
    x, y, weight = quadrature.nodes(frame.shape, frame.size)
    nearest = float(np.min(sections.wall_distance(frame.shape, frame.size, used.x, used.y)))
    flat = _clear(frame, x, y, nearest)
    if flat is not None:
        yield Candidate(
            family="wall", name="Section mean without the fall beyond the outermost points", rule="", lines=0, points=0,
            x=flat[0], y=flat[1], weight=weight, long=True,
        )


def _clear(frame: Frame, x: Array, y: Array, least: float) -> tuple[Array, Array] | None:
    """Return points moved inwards to a distance from the wall; None where none moves, or the shape does not say which way."""
    width, height = (float(side) for side in sections.extent(frame.shape, frame.size))
    near = sections.wall_distance(frame.shape, frame.size, x, y) < least * (1.0 - 1e-9)
    if not near.any() or least > 0.25 * min(width, height):
        return None
    if frame.shape == "round":
        radius = np.hypot(x, y)
        scale = np.minimum(1.0, (width / 2.0 - least) / np.where(radius > 0.0, radius, 1.0))
        return x * scale, y * scale
    if frame.shape == "rectangle":
        side, top = width / 2.0 - least, height / 2.0 - least
        return np.clip(x, -side, side), np.clip(y, -top, top)
    return None


def _shares(weight: Array) -> Array:
    return np.asarray(weight / weight.sum())
