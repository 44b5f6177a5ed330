"""Where to measure: one file per standard's rule, found by scanning this folder."""

from __future__ import annotations

import pkgutil
from collections.abc import Sequence
from dataclasses import replace
from functools import lru_cache
from importlib import import_module

import numpy as np
import numpy.typing as npt

from traverse.errors import LayoutError, nearest
from traverse.layouts import _recognise, _scheme
from traverse.layouts._base import (
    Array,
    Extent,
    Frame,
    Placement,
    Rule,
    Term,
    checked_angles,
    checked_names,
    checked_size,
    diameter_at,
    diameters,
    line_names,
    move_off_wall,
    one_of,
)
from traverse.layouts._counts import least
from traverse.layouts._custom import place_custom
from traverse.layouts._integration import fitted_exponent, integrable, velocity_area
from traverse.layouts._recognise import Match
from traverse.physics import sections

__all__ = [
    "Extent", "Match", "Placement", "Rule", "Term", "fitted_exponent", "fractions", "integrable", "least", "line_names", "place",
    "place_custom", "recognise", "rule", "rules", "velocity_area",
]


@lru_cache(maxsize=1)
def rules() -> dict[str, Rule]:
    """Return all rules by name."""
    modules = (import_module(f"{__name__}.{entry.name}") for entry in pkgutil.iter_modules(__path__) if entry.name[0] != "_")
    found: list[Rule] = [module.RULE for module in modules]
    return {rule.name: rule for rule in sorted(found, key=lambda rule: rule.name)}


def rule(name: str) -> Rule:
    """Return the rule of that name.

    Raises
    ------
    LayoutError
        If there is none; the message lists those there are.
    """
    if name not in rules():
        known = (*rules(), "custom")
        guess = nearest(name, known)
        raise LayoutError(
            f"unknown rule {name!r}", where="[layout] rule", expected=f"one of {', '.join(known)}",
            how=f'perhaps rule = "{guess}"' if guess else "",
        )
    return rules()[name]


def fractions(name: str, shape: str, points: int, digits: str = "exact", diameters: float = 2.0) -> tuple[Array, Array]:
    """Return a rule's points on one line: fractions of its length from the wall at the port, and weights that sum to 1.

    Raises
    ------
    LayoutError
        If the rule does not exist for what is asked.
    """
    return rule(name).fractions(shape, points, digits, diameters)


def recognise(
    depths: npt.ArrayLike, length: float, *, shape: str, claimed: str = "", rounding: float = 0.0254 / 16
) -> tuple[Match, ...]:
    """Return the rules that measured depths along a line may follow, the best first; see :class:`Match`.

    Parameters
    ----------
    depths : array_like
        From the inner wall at the port, of a line or of half a diameter. [m]
    length : float
        The diameter, or the side the probe travels along. [m]
    shape : {'round', 'rectangle'}
        What kind of line it is.
    claimed : str
        The rule somebody says it is.
    rounding : float
        The step the depths were rounded to besides three printed digits: a sixteenth of an inch by default, 0 for a document. [m]

    Raises
    ------
    LayoutError
        If a depth is no number or lies outside the line.
    """
    return _recognise.recognise(depths, length, rules(), shape=shape, claimed=claimed, rounding=rounding)


def place(
    name: str, *, shape: str, width: float, height: float, lines: int = 0, points: int = 0,
    angles: Sequence[float] | None = None, along: str = "height", names: Sequence[str] | None = None, digits: str = "exact",
    wall_distance: float = 0.0, radii: bool = False, core: float = 0.0, centre: str = "each",
) -> Placement:
    """Return the points of a rule in a section.

    Parameters
    ----------
    name : str
        The rule.
    shape, width, height
        The section and its inside size. [m]
    lines, points : int
        Diameters of a round section, radii of a ring or lines of a rectangle, and points on each. 0 where the rule fixes them.
    angles : sequence, optional
        Port angles of the diameters, counter-clockwise from +x; equally spaced from 0 by default. [rad]
    along : {'height', 'width'}
        Along which side of a rectangle the probe travels: ports on top and lines from the left, or ports on the left
        and lines from the top.
    names : sequence, optional
        Names of the lines; A, B, C, ... by default.
    digits : {'exact', 'printed'}
        Positions from the rule's mathematics, or the digits a standard prints.
    wall_distance : float
        Round sections only: no point nearer to the wall; it is moved out, and points that then coincide count twice.
        Points of a rectangle stay where they are. [m]
    radii : bool
        Round sections: each line runs from its port to the centre only, with ``points`` on it.
    core : float
        Diameter of the core of an annulus. [m]
    centre : {'each', 'once'}
        A rule with a centre point: read on every line, with its share each, or on the first line only.

    Raises
    ------
    LayoutError
        If the rule does not exist for what is asked.
    """
    chosen = rule(name)
    one_of("centre", centre, ("each", "once"), "[layout] centre")
    if centre == "once" and (chosen.round_by_lines is None or shape not in ("round", "ellipse")):
        raise LayoutError('centre = "once"', where="[layout] centre", expected="a rule with a centre point, in a round section")
    checked_size(shape, width, height)
    one_of("along", along, ("height", "width"), "[layout] along")
    chosen.refuse_shape(shape)
    if radii and shape not in ("round", "ellipse"):
        raise LayoutError("radii", where="[layout] radii", expected="radii only in a round section; the lines of an annulus are radii")
    if shape in chosen.schemes:
        if angles is not None or digits == "printed":
            raise LayoutError(
                "angles" if angles is not None else 'digits = "printed"', where="[layout]", expected=f"neither with {chosen.name} here"
            )
        return _scheme.place(chosen, Frame(shape=shape, width=width, height=height, lines=lines, points=points, along=along), names)
    lines = lines or next(iter(chosen.line_counts.get(shape, ())), 0)
    _refuse_counts(chosen, shape, lines, points)
    labels = checked_names(names, lines)
    if shape == "rectangle":
        if angles is not None:
            raise LayoutError("angles for a rectangle", where="[layout] angles", expected="angles only for a round section")
        placed = _rectangle(chosen, width, height, points, along, labels, digits)
    elif shape == "annulus":
        placed = _ring(chosen, width, core, points, checked_angles(angles, lines, 2.0 * np.pi), labels)
    else:
        turned = checked_angles(angles, lines, 2.0 * np.pi if radii else np.pi)
        placed = _round(chosen, (width, height), points, turned, labels, digits, wall_distance, radii=radii)
        placed = _centre_once(placed) if centre == "once" else placed
    return replace(placed, notes=placed.notes + _remarks(chosen, shape, width, height))


def _refuse_counts(chosen: Rule, shape: str, lines: int, points: int) -> None:
    """Refuse numbers of lines and points which the rule does not have."""
    if lines < 1:
        raise LayoutError(f"{lines} lines", where="[layout] lines", expected="at least 1")
    allowed = chosen.line_counts.get(shape, ())
    if allowed and lines not in allowed:
        raise LayoutError(
            f"{lines} lines", where="[layout] lines", expected=f"{' or '.join(map(str, allowed))} lines for {chosen.name}"
        )
    total, least, multiple = lines * points, chosen.least.get(shape, 1), chosen.multiple.get(shape, 1)
    if points > 0 and (total < least or total % multiple):
        raise LayoutError(
            f"{lines} lines of {points} points, {total} in all", where="[layout] points",
            expected=f"at least {least} points in all for {chosen.name}" + (f", a multiple of {multiple}" if multiple > 1 else ""),
        )


def _remarks(chosen: Rule, shape: str, width: float, height: float) -> tuple[str, ...]:
    if chosen.remarks is None:
        return ()
    size = {"diameter": width} if shape == "round" else {"width": width, "height": height}
    hydraulic = float(sections.hydraulic_diameter(shape, size))
    return chosen.remarks(Extent(shape=shape, width=width, height=height, hydraulic_diameter=hydraulic))


def _round(
    chosen: Rule, size: tuple[float, float], points: int, angles: Array, labels: tuple[str, ...], digits: str, least: float, *,
    radii: bool,
) -> Placement:
    lines = len(labels)
    fraction, share = _on_radius(chosen, points, digits, lines) if radii else chosen.fractions("round", points, digits, float(lines))
    length = np.repeat(diameter_at(*size, angles), points)
    depths, moved = move_off_wall(np.tile(fraction, lines) * length, length, least)
    x, y = diameters(length, depths, np.repeat(angles, points))
    notes: tuple[str, ...] = ()
    if moved.any():
        notes = (f"{int(moved.sum()) // lines} points on each line moved out to {least * 1000:.1f} mm from the wall; "
                 "where two fall together both are read and both count",)
    return _placement(chosen, x, y, depths, np.tile(share / lines, lines), labels, points, tuple(moved.tolist()), notes, digits)


def _centre_once(placed: Placement) -> Placement:
    """Keep the centre point on the first line only, with all of its weight; the points of the others are counted anew."""
    at_centre = np.hypot(placed.x, placed.y) <= 1e-9 * float(np.max(placed.depth))
    first = int(np.argmax(at_centre))
    weight = placed.weight.copy()
    weight[first] = weight[at_centre].sum()
    kept = np.flatnonzero(~at_centre | (np.arange(len(weight)) == first)).tolist()
    line = tuple(placed.line[i] for i in kept)
    return replace(
        placed, x=placed.x[kept], y=placed.y[kept], depth=placed.depth[kept], weight=weight[kept], line=line,
        point=tuple(line[:k + 1].count(name) for k, name in enumerate(line)), moved=tuple(placed.moved[i] for i in kept),
    )


def _on_radius(chosen: Rule, points: int, digits: str, lines: int) -> tuple[Array, Array]:
    """Return the points of a rule from the wall to the centre: the first half of a diameter, with the centre where it has one."""
    centred = chosen.round_by_lines is not None
    fraction, share = chosen.fractions("round", 2 * points - 1 if centred else 2 * points, digits, lines / 2.0)
    own = share[:points].copy()
    if centred:
        own[-1] /= 2.0
    return fraction[:points], own / own.sum()


def _ring(chosen: Rule, width: float, core: float, points: int, angles: Array, labels: tuple[str, ...]) -> Placement:
    assert chosen.annulus is not None, "the shape was checked"
    if not 0.0 < core < width:
        raise LayoutError(f"a core of {core} m", where="[plane] core", expected="a core narrower than the duct")
    lines = len(labels)
    fraction, share = chosen.annulus(points, core / width)
    depths = np.tile(fraction * (width - core) / 2.0, lines)
    x, y = diameters(width, depths, np.repeat(angles, points))
    return _placement(
        chosen, x, y, depths, np.tile(share / lines, lines), labels, points, (False,) * len(depths), (), "exact"
    )


def _rectangle(
    chosen: Rule, width: float, height: float, points: int, along: str, labels: tuple[str, ...], digits: str
) -> Placement:
    lines = len(labels)
    along_fraction, along_share = chosen.fractions("rectangle", points, digits)
    try:
        across_fraction, across_share = chosen.fractions("rectangle", lines, digits)
    except LayoutError as problem:
        raise LayoutError(
            f"{lines} lines: {problem.found}", where="[layout] lines", expected=problem.expected, how=problem.how
        ) from problem
    travel, across = (height, width) if along == "height" else (width, height)
    depth = np.tile(along_fraction * travel, lines)
    position = np.repeat(across_fraction * across, points)
    shares = np.tile(along_share, lines) * np.repeat(across_share, points)
    if along == "height":
        x, y = position - width / 2.0, height / 2.0 - depth
    else:
        x, y = depth - width / 2.0, height / 2.0 - position
    return _placement(chosen, x, y, depth, shares, labels, points, (False,) * len(depth), (), digits)


def _placement(
    chosen: Rule, x: Array, y: Array, depth: Array, weight: Array, labels: tuple[str, ...], points: int,
    moved: tuple[bool, ...], notes: tuple[str, ...], digits: str,
) -> Placement:
    source = chosen.printed_source if digits == "printed" else chosen.source
    return Placement(
        title=chosen.title, source=source, x=x, y=y, depth=depth, weight=weight / weight.sum(),
        line=tuple(label for label in labels for _ in range(points)),
        point=tuple(range(1, points + 1)) * len(labels), moved=moved, notes=notes,
    )
