"""Marks on the probe: where they go, and what rounding them to a rule's steps does."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from traverse.model import Array, Layout, Section, Setup
from traverse.physics import sections
from traverse.planning.expected import relative_velocity
from traverse.units import UNITS

# Steps of the marks in the two systems: a millimetre, a sixteenth of an inch.
MARK_STEP = {"si": 0.001, "us": UNITS["in"].factor / 16}
# A line whose points do not lie on one straight line by more than this has no direction [m].
_STRAIGHT = 1e-6
# The port of a line lies on the wall, to this part of the width of the section.
_AT_WALL = 1e-5


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Rounding:
    """Marks to the nearest step of a rule and what that does. Arrays have shape (points,). [m], [1]

    ``residual`` is the rounded mark less the mark: the head stands so much too deep. ``velocity_error`` is the relative
    change of the expected velocity that this makes at each point, ``flow_error`` the one of their weighted mean; NaN and
    None where the direction of the line is not known.
    """

    step: float
    mark: Array
    residual: Array
    velocity_error: Array
    flow_error: float | None


def nipples(setup: Setup) -> Array:
    """Return the port depth at every point, 0 where none is stated. [m]  Shape (points,)."""
    plane, layout = setup.plane, setup.layout
    if plane.port_depths:
        by_line = {name: stated.value for name, stated in zip(layout.lines, plane.port_depths, strict=True)}
        return np.array([by_line[name] for name in layout.line])
    return np.full(layout.size, plane.port_depth.value if plane.port_depth else 0.0)


def head_offset(setup: Setup) -> float:
    """Return what is added to every mark because it is not counted from the sensing head. [m]"""
    return setup.pitot.head_offset.value if setup.pitot and setup.pitot.head_offset else 0.0


def rounding(setup: Setup, mark: Array, direction: Array, exponent: float, step: float) -> Rounding:
    """Return marks rounded to a step, and the error of velocity and flow with the profile that is expected.

    The error at a point is the profile at the head's place less the one at the point, to first order the residual times
    d ln v / d depth.
    """
    section, layout = setup.plane.section, setup.layout
    rounded = np.round(mark / step) * step
    residual = rounded - mark
    x, y = layout.x + direction[:, 0] * residual, layout.y + direction[:, 1] * residual
    at_point = relative_velocity(section.shape, section.size, exponent, layout.x, layout.y)
    with np.errstate(divide="ignore", invalid="ignore"):
        error = relative_velocity(section.shape, section.size, exponent, x, y) / at_point - 1.0
    error = np.where(np.isfinite(error), error, np.nan)
    share = layout.weight * at_point
    flow = float(np.sum(share * error) / np.sum(share))
    return Rounding(
        step=step, mark=rounded, residual=residual, velocity_error=error, flow_error=flow if np.isfinite(flow) else None
    )


def directions(section: Section, layout: Layout) -> Array:
    """Return the direction from the port inward at every point as a unit vector, shape (points, 2).

    NaN where the points of a line do not lie at their depths along a straight line, so that no mark tells where the head is.
    """
    found = np.full((layout.size, 2), np.nan)
    places = np.column_stack([layout.x, layout.y])
    for name in layout.lines:
        index = np.flatnonzero([line == name for line in layout.line])
        depth, place = layout.depth[index], places[index]
        first, last = int(np.argmin(depth)), int(np.argmax(depth))
        span = depth[last] - depth[first]
        way = (place[last] - place[first]) / span if span > _STRAIGHT else _only_way(section, place[0], float(depth[0]))
        off = place - (place[first] + np.outer(depth - depth[first], way))
        port = place[first] - way * depth[first]
        at_wall = abs(float(sections.wall_distance(section.shape, section.size, *port))) < _AT_WALL * section.width
        if abs(float(np.hypot(*way)) - 1.0) < 1e-6 and np.all(np.abs(off) < _STRAIGHT) and at_wall:
            found[index] = way
    return found


def _only_way(section: Section, place: Array, depth: float) -> Array:
    """Return the direction in which a single point lies at its depth from a wall; NaN where no usual one fits."""
    from_centre = float(np.hypot(*place))
    ways = [np.array(way) for way in ((0.0, -1.0), (1.0, 0.0), (0.0, 1.0), (-1.0, 0.0))]
    if section.shape == "round" and from_centre > _STRAIGHT:
        ways = [-place / from_centre, place / from_centre, *ways]
    for way in ways:
        port = place - way * depth
        if abs(float(sections.wall_distance(section.shape, section.size, *port))) < _STRAIGHT:
            return way
    return np.array([np.nan, np.nan])


def room_ahead(section: Section, place: Array, way: Array) -> float:
    """Return how far it is from a point along a direction to the wall. [m]  NaN without a direction.

    The distance to the nearest wall is always free, so that steps of it approach the wall and never pass it.
    """
    if not np.all(np.isfinite(way)):
        return float("nan")
    gone = 0.0
    for _ in range(200):
        free = float(sections.wall_distance(section.shape, section.size, *(place + way * gone)))
        if free < 1e-9:
            break
        gone += free
    return gone
