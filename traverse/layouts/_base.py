"""The record of a layout rule, and the geometry that turns its fractions into points of a section."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError

Array = npt.NDArray[np.float64]
# Points of one line: fractions of the line's length from the wall at the port, and weights that sum to 1.
Positions = Callable[[int], tuple[Array, Array]]

SHAPES = ("round", "rectangle")
DIGITS = ("exact", "printed")
# Why a diameter has an even number of points: said in every rule's refusal of an odd one.
EVEN = "an even number, the same on either side of the centre"


@dataclass(frozen=True, slots=True, kw_only=True)
class Term:
    """A profile that a rule claims to integrate exactly; zero outside its zone.

    Parameters
    ----------
    words : str
        The profile in words.
    zone : pair of float
        Round: area fractions counted from the centre. Rectangle: fractions of the side.
    value : callable
        Velocity at r/R (round) or at the fraction of the side (rectangle), inside the zone.
    """

    words: str
    zone: tuple[float, float]
    value: Callable[[Array], Array]


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A standard's rule for the points on a line.

    Parameters
    ----------
    name, title, source : str
        The name in the job file, the words of a report, and where the rule stands.
    round, rectangle : callable, optional
        Points on a diameter; points (and lines) on a side. None where the rule does not exist for the shape.
    printed : mapping of (shape, points) to digits
        Fractions as a standard prints them, for the first half of the line; the other half mirrors it.
    printed_source : str
        Where the printed digits stand.
    exact_for : str
        The family of profiles the rule integrates exactly, for the documentation.
    exact : callable
        The same family as terms, for a shape and a number of points; the conformance tests integrate every one.
    round_points, side_points : sequence of int
        Numbers of points on a diameter, and on a side, for which the rule exists; it refuses all others.
    """

    name: str
    title: str
    source: str
    round: Positions | None = None
    rectangle: Positions | None = None
    printed: Mapping[tuple[str, int], tuple[str, ...]] = field(default_factory=dict)
    printed_source: str = ""
    exact_for: str = ""
    exact: Callable[[str, int], Sequence[Term]]
    round_points: Sequence[int] = ()
    side_points: Sequence[int] = ()

    def fractions(self, shape: str, points: int, digits: str = "exact") -> tuple[Array, Array]:
        """Return the fractions of the line's length and the weights of that many points on a line.

        Raises
        ------
        LayoutError
            If the rule does not exist for the shape or the number of points, or prints no digits for them.
        """
        one_of("shape", shape, SHAPES, "[plane] shape")
        one_of("digits", digits, DIGITS, "[layout] digits")
        positions = self.round if shape == "round" else self.rectangle
        if positions is None:
            raise LayoutError(
                f"{self.name} has no rule for a {shape} section", where="[layout] rule", expected="another rule for this shape"
            )
        fraction, weight = positions(points)
        if digits == "printed":
            fraction = self._printed(shape, points)
        return fraction, weight

    def _printed(self, shape: str, points: int) -> Array:
        row = self.printed.get((shape, points))
        if row is None:
            counts = sorted(count for kind, count in self.printed if kind == shape)
            raise LayoutError(
                f"no digits are printed for {points} points of {self.name} in a {shape} section", where="[layout] digits",
                expected=f"one of {', '.join(map(str, counts))} points" if counts else "digits = \"exact\"",
            )
        half = np.array([float(text) for text in row])
        rest = points - len(half)
        return np.concatenate([half, 1.0 - half[:rest][::-1]])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Placement:
    """Points of a section. Arrays have shape (points,). [m]

    ``x`` to the right and ``y`` up from the centre, looking downstream; ``depth`` from the inner wall at the port.
    """

    title: str
    source: str
    x: Array
    y: Array
    depth: Array
    weight: Array
    line: tuple[str, ...]
    point: tuple[int, ...]
    moved: tuple[bool, ...]
    notes: tuple[str, ...] = ()


def one_of(what: str, word: str, known: Sequence[str], where: str) -> None:
    """Refuse a word that is not known: taken for another one it would give wrong places without a sign."""
    if word not in known:
        raise LayoutError(f"{what} {word!r}", where=where, expected=f"one of {', '.join(known)}")


def checked_size(shape: str, width: float, height: float) -> None:
    """Refuse a section without a size."""
    one_of("shape", shape, SHAPES, "[plane] shape")
    for name, size in (("diameter", width),) if shape == "round" else (("width", width), ("height", height)):
        if not 0.0 < size < math.inf:
            raise LayoutError(f"a {name} of {size} m", where=f"[plane] {name}", expected="a length above 0")


def line_names(count: int) -> tuple[str, ...]:
    """Return A, B, C, ... Z, AA, AB, ..."""
    return tuple(_letters(number) for number in range(1, count + 1))


def _letters(number: int) -> str:
    name = ""
    while number > 0:
        number, rest = divmod(number - 1, 26)
        name = chr(ord("A") + rest) + name
    return name


def checked_names(names: Sequence[str] | None, count: int) -> tuple[str, ...]:
    """Return the names of the lines, A, B, C, ... where none are given."""
    found = tuple(names) if names else line_names(count)
    if len(found) != count or len(set(found)) != count:
        raise LayoutError(
            f"{len(found)} names ({', '.join(found)})", where="[layout] names", expected=f"{count} different names, one a line"
        )
    return found


def diameters(width: float, depth: Array, angle: Array) -> tuple[Array, Array]:
    """Return x and y of points at depths along diameters whose ports are at angles (counter-clockwise from +x)."""
    radius = width / 2.0 - depth
    return radius * np.cos(angle), radius * np.sin(angle)


def default_angles(lines: int) -> Array:
    """Return the angles of equally spaced diameters from 0. [rad]"""
    return np.arange(lines) * np.pi / lines


def checked_angles(angles: Sequence[float] | None, lines: int) -> Array:
    """Return the port angles of the diameters. [rad]"""
    found = default_angles(lines) if angles is None else np.asarray(angles, dtype=np.float64)
    if found.shape != (lines,):
        raise LayoutError(f"{found.size} angles", where="[layout] angles", expected=f"{lines} angles, one a line")
    if not np.all(np.isfinite(found)):
        raise LayoutError("an angle is no number", where="[layout] angles", expected="an angle for every line")
    turned = np.sort(np.mod(found, np.pi))
    # Half a turn brings a diameter back onto itself, so the last angle is also compared with the first.
    if lines > 1 and np.any(np.diff(turned, append=turned[0] + np.pi) < 1e-6):
        raise LayoutError("two lines at the same angle", where="[layout] angles", expected="different diameters")
    return found


def move_off_wall(depth: Array, width: float, least: float) -> tuple[Array, npt.NDArray[np.bool_]]:
    """Move depths nearer than ``least`` to either wall out to it; return the depths and which were moved."""
    if least == 0.0:
        return depth, np.zeros(depth.shape, dtype=bool)
    if not 0.0 < least < width / 2.0:
        raise LayoutError(
            f"a wall distance of {least * 1000:.1f} mm in a duct of {width * 1000:.1f} mm", where="[layout]",
            expected="a duct wide enough for the method",
        )
    moved = (depth < least * (1.0 - 1e-9)) | (depth > (width - least) + 1e-9 * least)
    return np.clip(depth, least, width - least), moved
