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


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Section:
    """A cross-section: its shape and the stated dimensions it follows from. [m]"""

    shape: Literal["round", "rectangle"]
    dimensions: Mapping[str, Stated]

    def __post_init__(self) -> None:
        for name, stated in self.dimensions.items():
            if not stated.value > 0 and name != "wall_thickness":
                raise JobError(f"{stated.text!r}", where=f"[plane] {name}", expected="a length greater than zero")

    def _size(self) -> dict[str, float]:
        return {name: stated.value for name, stated in self.dimensions.items()}

    @property
    def area(self) -> float:
        """Open area. [m2]"""
        return float(sections.area(self.shape, self._size()))

    @property
    def width(self) -> float:
        """Extent along x. [m]"""
        return float(sections.extent(self.shape, self._size())[0])

    @property
    def height(self) -> float:
        """Extent along y. [m]"""
        return float(sections.extent(self.shape, self._size())[1])

    @property
    def hydraulic_diameter(self) -> float:
        """Four times the area over the perimeter. [m]"""
        return float(sections.hydraulic_diameter(self.shape, self._size()))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Plane:
    """The measuring plane: section, straight lengths before and after it, port nipple."""

    section: Section
    upstream: Stated | None = None
    downstream: Stated | None = None
    port_depth: Stated | None = None
    wall: Literal["metal", "brick"] | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Layout:
    """Where to measure, point by point. All arrays have shape (points,).

    ``x`` to the right and ``y`` up from the centre, looking downstream; ``depth`` from the inner wall at the port,
    along the probe. [m] ``weight`` is the share of the area a point stands for; the weights sum to 1.
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
