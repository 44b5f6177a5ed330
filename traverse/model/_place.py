"""Where a job measures: the section, the plane around it, the layout of the points."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np

from traverse.errors import JobError
from traverse.model._base import Array, Finding, frozen
from traverse.physics import sections
from traverse.units import Stated

Shape = Literal["round", "ellipse", "rectangle", "flat-oval", "annulus", "polygon"]
# Dimensions that may be nothing.
_MAY_BE_ZERO = frozenset(("wall_thickness", *sections.DEDUCTIONS))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Section:
    """A cross-section: its shape and the stated dimensions it follows from. [m]

    The dimensions of a polygon are the coordinates of its corners, x1, y1, x2, y2, ...; those of all other shapes are
    lengths, with what lies on the wall (``lining``, ``deposit``) to be taken off.
    """

    shape: Shape
    dimensions: Mapping[str, Stated]

    def __post_init__(self) -> None:
        if self.shape != "polygon":
            for name, stated in self.dimensions.items():
                if not (stated.value > 0 or (stated.value == 0 and name in _MAY_BE_ZERO)):
                    raise JobError(f"{stated.text!r}", where=f"[plane] {name}", expected="a length greater than zero")
        elif pair := sections.crossing(*sections.corners(self.size)):
            raise JobError(
                f"sides {pair[0]} and {pair[1]} of the polygon meet", where="[plane] vertices",
                expected="the corners in order around the section, sides that meet only at the corners",
            )
        if not self.area > 0:
            texts = ", ".join(f"{name} {stated.text}" for name, stated in self.dimensions.items())
            raise JobError(f"nothing is left open: {texts}", where="[plane]", expected="a section with an open area")

    @property
    def size(self) -> dict[str, float]:
        """The dimensions as numbers. [m]"""
        return {name: stated.value for name, stated in self.dimensions.items()}

    @property
    def area(self) -> float:
        """Open area. [m2]"""
        return float(sections.area(self.shape, self.size))

    @property
    def width(self) -> float:
        """Extent along x. [m]"""
        return float(sections.extent(self.shape, self.size)[0])

    @property
    def height(self) -> float:
        """Extent along y. [m]"""
        return float(sections.extent(self.shape, self.size)[1])

    @property
    def bounds(self) -> tuple[float, float, float, float]:
        """Low and high x, low and high y. [m]"""
        left, right, bottom, top = sections.bounds(self.shape, self.size)
        return float(left), float(right), float(bottom), float(top)

    @property
    def hydraulic_diameter(self) -> float:
        """Four times the area over the perimeter: for siting and Reynolds number. [m]"""
        return float(sections.hydraulic_diameter(self.shape, self.size))

    @property
    def equal_area_diameter(self) -> float:
        """Diameter of the circle of the same area. Not the hydraulic diameter. [m]"""
        return float(sections.equal_area_diameter(self.shape, self.size))

    @property
    def words(self) -> str:
        """Shape and dimensions as stated, for a report."""
        if self.shape == "polygon":
            return f"polygon of {len(self.dimensions) // 2} corners"
        return f"{self.shape}, " + ", ".join(f"{name.replace('_', ' ')} {stated.text}" for name, stated in self.dimensions.items())


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Plane:
    """The measuring plane: section, straight lengths before and after it, port nipples.

    ``port_depth`` holds where all ports are alike; ``port_depths`` has one length a line where they differ, else none.
    """

    section: Section
    upstream: Stated | None = None
    downstream: Stated | None = None
    port_depth: Stated | None = None
    port_depths: tuple[Stated, ...] = ()
    wall: Literal["metal", "brick"] | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Layout:
    """Where to measure, point by point. All arrays have shape (points,).

    ``x`` to the right and ``y`` up from the centre, looking downstream; ``depth`` from the inner wall at the port,
    along the probe. [m] ``weight`` is the share of the area a point stands for; the weights sum to 1. With a
    ``wall_exponent`` the velocities are integrated over the section instead (ISO 3966, numerical integration), with a power
    law between the outermost points and the wall.
    """

    rule: str
    title: str
    source: str
    x: Array
    y: Array
    depth: Array
    weight: Array
    line: tuple[str, ...]
    point: tuple[int, ...]
    moved: tuple[bool, ...] = ()
    digits: Literal["exact", "printed"] = "exact"
    findings: tuple[Finding, ...] = ()
    wall_exponent: float | Literal["fit"] | None = None

    def __post_init__(self) -> None:
        for name in ("x", "y", "depth", "weight"):
            object.__setattr__(self, name, frozen(getattr(self, name)))
        if not self.moved:
            object.__setattr__(self, "moved", (False,) * len(self.line))
        lengths = {len(self.x), len(self.y), len(self.depth), len(self.weight), len(self.line), len(self.point)}
        if lengths != {len(self.line)}:
            raise JobError(f"arrays of {sorted(lengths)} points", where="[layout]", expected="one length")
        if abs(float(np.sum(self.weight)) - 1.0) > 1e-9:
            raise JobError(f"weights sum to {np.sum(self.weight):.9g}", where="[layout]", expected="a sum of 1")

    @property
    def size(self) -> int:
        """Number of points."""
        return len(self.line)

    @property
    def lines(self) -> tuple[str, ...]:
        """The names of the lines in order of first appearance."""
        return tuple(dict.fromkeys(self.line))

    def labels(self) -> tuple[str, ...]:
        """Each point's label, such as ``A3``."""
        return tuple(f"{line}{point}" for line, point in zip(self.line, self.point, strict=True))


def check_ports(plane: Plane, layout: Layout) -> None:
    """Refuse port depths that are not one a line."""
    if plane.port_depths and len(plane.port_depths) != len(layout.lines):
        raise JobError(
            f"{len(plane.port_depths)} port depths for {len(layout.lines)} lines", where="[plane] port_depth",
            expected=f"one length for all ports, or a list of one a line ({', '.join(layout.lines)})",
        )
