"""The record of a layout rule, and the geometry that turns its fractions into points of a section."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError
from traverse.physics import sections

Array = npt.NDArray[np.float64]
# Points of one line: fractions of the line's length from the wall at the port, and weights that sum to 1.
Positions = Callable[[int], tuple[Array, Array]]

# The shapes whose lines are all alike: what a rule's fractions are asked for. An ellipse is asked as a circle.
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
class Extent:
    """A section as a rule's remarks see it. [m]"""

    shape: str
    width: float
    height: float
    hydraulic_diameter: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Frame:
    """What a scheme is drawn into: a section, and how many lines and points were asked for, 0 where nothing was. [m]"""

    shape: str
    width: float
    height: float
    lines: int
    points: int
    along: str


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SchemeLine:
    """One line of a scheme, its points from the port inwards: arrays of shape (points,). [m]

    ``weight`` is each point's share of the whole section.
    """

    x: Array
    y: Array
    depth: Array
    weight: Array

    def turned(self) -> SchemeLine:
        """Return the line of a section lying on its side for the same section standing up: ports stay left or on top."""
        return SchemeLine(x=-self.y, y=-self.x, depth=self.depth, weight=self.weight)


def _nothing_exact(_shape: str, _points: int) -> Sequence[Term]:
    return ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """A standard's rule for the points on a line.

    Parameters
    ----------
    name, title, source : str
        The name in the job file, the words of a report, and where the rule stands.
    round, rectangle : callable, optional
        Points on a diameter (of a circle or an ellipse); points (and lines) on a side. None where the rule does not exist for
        the shape.
    round_by_lines : callable (points, diameters), optional
        In place of ``round`` where the positions depend on the number of diameters; half a diameter is a radius.
    annulus : callable (points, core over wall diameter), optional
        Points on a radius, as fractions of the gap from the outer wall.
    schemes : mapping of shape to callable
        For shapes whose lines are not all alike.
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
    line_counts : mapping of shape to numbers of lines
        The numbers of lines the rule allows; any where the shape is absent.
    least, multiple : mapping of shape to int
        The fewest points in all, and what their number must be a multiple of.
    wall_distance : callable (diameter [m], unit system), optional
        The nearest a point may lie to the wall of a round section; otherwise the test method says.
    count : callable, optional
        The numbers of lines and points the rule asks for in a section, for a job that leaves them to the rule.
    remarks : callable, optional
        What the reader of a plan must know about the rule in this section.
    """

    name: str
    title: str
    source: str
    round: Positions | None = None
    rectangle: Positions | None = None
    round_by_lines: Callable[[int, float], tuple[Array, Array]] | None = None
    annulus: Callable[[int, float], tuple[Array, Array]] | None = None
    schemes: Mapping[str, Callable[[Frame], tuple[SchemeLine, ...]]] = field(default_factory=dict)
    printed: Mapping[tuple[str, int], tuple[str, ...]] = field(default_factory=dict)
    printed_source: str = ""
    exact_for: str = ""
    exact: Callable[[str, int], Sequence[Term]] = _nothing_exact
    round_points: Sequence[int] = ()
    side_points: Sequence[int] = ()
    line_counts: Mapping[str, tuple[int, ...]] = field(default_factory=dict)
    least: Mapping[str, int] = field(default_factory=dict)
    multiple: Mapping[str, int] = field(default_factory=dict)
    wall_distance: Callable[[float, str], float] | None = None
    count: Callable[[Extent], tuple[int, int]] | None = None
    remarks: Callable[[Extent], tuple[str, ...]] | None = None

    def shapes(self) -> tuple[str, ...]:
        """Return the shapes of section the rule exists for."""
        found = ["round", "ellipse"] if self.round else []
        found += ["rectangle"] if self.rectangle else []
        found += ["annulus"] if self.annulus else []
        return (*found, *(name for name in self.schemes if name not in found))

    def refuse_shape(self, shape: str) -> None:
        """Raise where the rule does not exist for a shape."""
        if shape not in self.shapes():
            raise LayoutError(
                f"{self.name} has no rule for a {shape} section", where="[layout] rule",
                expected=f'a section that is {" or ".join(self.shapes())}, another rule, or points of your own (rule = "custom")',
            )

    def fractions(self, shape: str, points: int, digits: str = "exact", diameters: float = 2.0) -> tuple[Array, Array]:
        """Return the fractions of the line's length and the weights of that many points on a line.

        ``diameters`` counts only for a rule whose positions depend on it.

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
        if shape == "round" and self.round_by_lines is not None:
            fraction, weight = self.round_by_lines(points, diameters)
        else:
            fraction, weight = positions(points)
        if digits == "printed":
            if self.round_by_lines is not None and diameters != 2.0 and shape == "round":
                raise LayoutError(
                    f"no digits are printed for {diameters:g} diameters of {self.name}", where="[layout] digits", expected='"exact"'
                )
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
    one_of("shape", shape, tuple(sections.SHAPES), "[plane] shape")
    for name, size in (("diameter", width),) if shape in ("round", "annulus") else (("width", width), ("height", height)):
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


def diameters(length: npt.ArrayLike, depth: Array, angle: Array) -> tuple[Array, Array]:
    """Return x and y of points at depths along diameters whose ports are at angles (counter-clockwise from +x)."""
    radius = np.asarray(length, dtype=np.float64) / 2.0 - depth
    return radius * np.cos(angle), radius * np.sin(angle)


def diameter_at(width: float, height: float, angle: npt.ArrayLike) -> Array:
    """Return the diameter of an ellipse (or a circle) at an angle. [m]"""
    if width == height:
        return np.full(np.shape(angle), width)
    return np.asarray(1.0 / np.hypot(np.cos(angle) / width, np.sin(angle) / height))


def default_angles(lines: int, turn: float = np.pi) -> Array:
    """Return the angles of equally spaced diameters (of radii: a full ``turn``) from 0. [rad]"""
    return np.arange(lines) * turn / lines


def checked_angles(angles: Sequence[float] | None, lines: int, turn: float = np.pi) -> Array:
    """Return the port angles of diameters, which repeat after half a turn, or of radii, which do not. [rad]"""
    found = default_angles(lines, turn) if angles is None else np.asarray(angles, dtype=np.float64)
    if found.shape != (lines,):
        raise LayoutError(f"{found.size} angles", where="[layout] angles", expected=f"{lines} angles, one a line")
    if not np.all(np.isfinite(found)):
        raise LayoutError("an angle is no number", where="[layout] angles", expected="an angle for every line")
    turned = np.sort(np.mod(found, turn))
    # Half a turn brings a diameter back onto itself, so the last angle is also compared with the first.
    if lines > 1 and np.any(np.diff(turned, append=turned[0] + turn) < 1e-6):
        raise LayoutError("two lines at the same angle", where="[layout] angles", expected="different lines")
    return found


def move_off_wall(depth: Array, width: npt.ArrayLike, least: float) -> tuple[Array, npt.NDArray[np.bool_]]:
    """Move depths nearer than ``least`` to either wall out to it; return the depths and which were moved."""
    wide = np.asarray(width, dtype=np.float64)
    if least == 0.0:
        return depth, np.zeros(depth.shape, dtype=bool)
    if not 0.0 < least < float(np.min(wide)) / 2.0:
        raise LayoutError(
            f"a wall distance of {least * 1000:.1f} mm in a duct of {float(np.min(wide)) * 1000:.1f} mm", where="[layout]",
            expected="a duct wide enough for the method",
        )
    moved = (depth < least * (1.0 - 1e-9)) | (depth > (wide - least) + 1e-9 * least)
    return np.clip(depth, least, wide - least), moved
