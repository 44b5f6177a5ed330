"""The probe, and how its coefficient was found: as stated, by legs, or by a calibration that was read."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType
from typing import Literal

import numpy as np

from traverse.errors import JobError
from traverse.model._base import Array, Source, frozen
from traverse.physics import probe
from traverse.units import Stated, Unit

ProbeType = Literal["pitot-static", "s-type", "two-dimensional", "three-dimensional"]
Leg = Literal["A", "B", "mean"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Curve:
    """Coefficient against velocity: arrays of shape (m,). ``number`` is the velocity in the unit of the file."""

    velocity: Array
    coefficient: Array
    number: Array
    unit: Unit

    def __post_init__(self) -> None:
        for name in ("velocity", "coefficient", "number"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Directional:
    """The curves of a three-dimensional probe over the pitch angle [rad]: F1 and F2, arrays of shape (m,)."""

    pitch: Array
    ratio: Array
    coefficient: Array
    number: Array
    unit: Unit

    def __post_init__(self) -> None:
        for name in ("pitch", "ratio", "coefficient", "number"):
            object.__setattr__(self, name, frozen(getattr(self, name)))


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pairs:
    """The pairs of readings of one side of an S-type tube: pressures [Pa] and the coefficients they give, of shape (k,)."""

    standard: Array
    s_type: Array
    coefficient: Array
    deviation: float

    def __post_init__(self) -> None:
        for name in ("standard", "s_type", "coefficient"):
            object.__setattr__(self, name, frozen(getattr(self, name)))

    @property
    def mean(self) -> float:
        """The mean coefficient of the side."""
        return float(self.coefficient.mean())


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Calibration:
    """A calibration that was read from a file: exactly one of its parts.

    ``sides`` are the pairs of each side, made into coefficients with that of the standard tube.
    """

    source: Source
    curve: Curve | None = None
    directional: Directional | None = None
    sides: Mapping[str, Pairs] = field(default_factory=lambda: MappingProxyType({}))
    standard_coefficient: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Pitot:
    """The probe. ``coefficient`` multiplies the velocity: v = C sqrt(2 dp / density).

    With a curve, or a three-dimensional probe whose pitch counts (``by_pitch``), each point has its own; ``coefficient`` is then
    the one in the middle of the curve, or at no pitch. ``legs`` are the coefficients of an S-type tube by the side that faces the
    flow. ``head_offset`` is how far the place from which marks are counted lies ahead of the sensing openings, such as the end
    of the probe: every mark is that much farther away. ``head`` is the outside diameter of the head, ``hole`` that of its opening
    for the total pressure. ``yaw_offset`` comes off every yaw angle that was read.
    """

    type: ProbeType
    coefficient: float
    coefficient_source: str
    stem: Stated | None = None
    head_offset: Stated | None = None
    head: Stated | None = None
    hole: Stated | None = None
    yaw_offset: tuple[Stated, ...] = ()
    legs: Mapping[str, float] = field(default_factory=lambda: MappingProxyType({}))
    leg: Leg | None = None
    calibration: Calibration | None = None
    by_pitch: bool = False

    def __post_init__(self) -> None:
        if not 0.3 <= self.coefficient <= 1.5:
            raise JobError(
                f"a coefficient of {self.coefficient:g}", where="[pitot] coefficient",
                expected="a number between 0.3 and 1.5 (about 0.84 for an S-type, about 1 for a pitot-static tube)",
            )

    @property
    def curve(self) -> Curve | None:
        """The coefficient against velocity, None where one number serves all velocities."""
        return self.calibration.curve if self.calibration else None

    @property
    def directional(self) -> Directional | None:
        """The curves over the pitch angle, None where pitch does not count."""
        return self.calibration.directional if self.calibration and self.by_pitch else None

    @property
    def words(self) -> str:
        """The coefficient as a report says it."""
        found = self.curve or self.directional
        if found is None:
            return f"coefficient {self.coefficient:g} ({self.coefficient_source})"
        low, high = float(np.min(found.coefficient)), float(np.max(found.coefficient))
        return f"coefficient {low:g} to {high:g} ({self.coefficient_source})"

    def at(self, velocity: float) -> float:
        """Return the coefficient expected at a velocity [m/s]; the end of a curve beyond it."""
        if self.curve is None:
            return self.coefficient
        held = float(np.clip(velocity, self.curve.velocity[0], self.curve.velocity[-1]))
        return float(probe.interpolate(held, self.curve.velocity, self.curve.coefficient))
