"""The probe: how long it must be, the room it needs, how near to the walls its head comes."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from traverse import methods, tables
from traverse.model import Array, Setup
from traverse.physics import sections
from traverse.planning.marks import head_offset, room_ahead
from traverse.units import parse


@dataclass(frozen=True, slots=True, kw_only=True)
class Clearance:
    """A least distance over the points and what is needed of it. [m]

    ``at`` is the number of the point in the layout. ``needed`` and ``met`` are None where there is no rule, or where it
    needs something that is not stated.
    """

    distance: float | None
    at: int
    needed: float | None
    met: bool | None
    source: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Probe:
    """What the probe must be and what it meets. [m], [m2]

    ``length`` is the deepest mark with ``grip``, ``half_length`` the same when every line is reached from both its ends.
    ``wall`` holds the distance to the nearest wall against the method, ``head`` against the diameter of the probe;
    ``ahead`` is the room between the deepest point of a line and the wall behind it, of which the probe needs half its
    own diameter or what stands out ahead of its openings.
    """

    deepest_mark: float
    deepest: int
    grip: float
    grip_source: str
    length: float
    half_length: float | None
    platform_depth: float
    platform_area: float
    platform_source: str
    wall: Clearance
    head: Clearance
    ahead: Clearance


def probe(setup: Setup, mark: Array, nipple: Array, direction: Array) -> Probe:
    """Return the demands on the probe and on the room in front of the ports."""
    table = tables.load("planning")
    section, layout = setup.plane.section, setup.layout
    grip = parse(table["grip"][setup.units], "length").value
    length = float(np.max(mark)) + grip
    platform = table["platform"]
    depth, beyond = (parse(platform[name], "length").value for name in ("depth", "beyond"))
    places = np.column_stack([layout.x, layout.y])
    ahead = np.array([room_ahead(section, place, way) for place, way in zip(places, direction, strict=True)])
    # No probe passes the core of an annulus: its lines have one end.
    from_either = np.minimum(layout.depth, ahead if section.shape != "annulus" else np.nan) + nipple + head_offset(setup)
    wall, head = _walls(setup)
    return Probe(
        deepest_mark=float(np.max(mark)), deepest=int(np.argmax(mark)), grip=grip, grip_source=str(table["grip"]["source"]),
        length=length, half_length=float(np.max(from_either)) + grip if np.all(np.isfinite(from_either)) else None,
        platform_depth=max(depth, length + beyond), platform_area=parse(platform["area"], "area").value,
        platform_source=str(platform["source"]), wall=wall, head=head, ahead=_ahead(setup, ahead),
    )


def _walls(setup: Setup) -> tuple[Clearance, Clearance]:
    """Hold the least wall distance against the method's limit, and against the size of the head."""
    method, section, layout = methods.get(setup.method), setup.plane.section, setup.layout
    walls = sections.wall_distance(section.shape, section.size, layout.x, layout.y)
    at, least = int(np.argmin(walls)), float(np.min(walls))
    limit = (method.wall_distance(section.width, setup.units) if section.shape == "round" else 0.0) or None
    table = tables.load("planning")["head"]
    stem = setup.pitot.stem.value if setup.pitot and setup.pitot.stem else None
    across = None if stem is None else stem * float(table["diameters"])
    return (
        Clearance(distance=least, at=at, needed=limit, met=_reaches(least, limit), source=method.source if limit else ""),
        Clearance(distance=least, at=at, needed=across, met=_reaches(least, across), source=str(table["source"])),
    )


def _ahead(setup: Setup, ahead: Array) -> Clearance:
    """Say whether the deepest point leaves room for the probe itself before the far wall."""
    if not np.any(np.isfinite(ahead)):
        return Clearance(distance=None, at=0, needed=None, met=None, source="")
    at, stated = int(np.nanargmin(ahead)), []
    if setup.pitot is not None and setup.pitot.stem is not None:
        stated.append(setup.pitot.stem.value / 2.0)
    if setup.pitot is not None and setup.pitot.head_offset is not None:
        stated.append(setup.pitot.head_offset.value)
    needed = max(stated) if stated else None
    least = float(ahead[at])
    return Clearance(
        distance=least, at=at, needed=needed, met=_reaches(least, needed), source="geometry" if needed is not None else ""
    )


def _reaches(value: float, limit: float | None) -> bool | None:
    return None if limit is None else value >= limit * (1.0 - 1e-9)
