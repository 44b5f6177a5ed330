"""Where to measure: one file per standard's rule, found by scanning this folder."""

from __future__ import annotations

import pkgutil
from collections.abc import Sequence
from functools import lru_cache
from importlib import import_module

import numpy as np

from traverse.errors import LayoutError, nearest
from traverse.layouts._base import (
    Array,
    Placement,
    Rule,
    Term,
    checked_angles,
    checked_names,
    checked_size,
    diameters,
    move_off_wall,
    one_of,
)
from traverse.layouts._custom import place_custom

__all__ = ["Placement", "Rule", "Term", "fractions", "place", "place_custom", "rules"]


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


def fractions(name: str, shape: str, points: int, digits: str = "exact") -> tuple[Array, Array]:
    """Return a rule's points on one line: fractions of its length from the wall at the port, and weights that sum to 1.

    Raises
    ------
    LayoutError
        If the rule does not exist for what is asked.
    """
    return rule(name).fractions(shape, points, digits)


def place(
    name: str, *, shape: str, width: float, height: float, lines: int, points: int, angles: Sequence[float] | None = None,
    along: str = "height", names: Sequence[str] | None = None, digits: str = "exact", wall_distance: float = 0.0,
) -> Placement:
    """Return the points of a rule in a section.

    Parameters
    ----------
    name : str
        The rule.
    shape, width, height
        ``round`` or ``rectangle``, and its inside size. [m]
    lines, points : int
        Diameters of a round section or lines of a rectangle, and points on each.
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

    Raises
    ------
    LayoutError
        If the rule does not exist for what is asked.
    """
    chosen = rule(name)
    checked_size(shape, width, height)
    one_of("along", along, ("height", "width"), "[layout] along")
    if lines < 1:
        raise LayoutError(f"{lines} lines", where="[layout] lines", expected="at least 1")
    labels = checked_names(names, lines)
    if shape == "round":
        return _round(chosen, width, points, checked_angles(angles, lines), labels, digits, wall_distance)
    if angles is not None:
        raise LayoutError("angles for a rectangle", where="[layout] angles", expected="angles only for a round section")
    return _rectangle(chosen, width, height, points, along, labels, digits)


def _round(
    chosen: Rule, width: float, points: int, angles: Array, labels: tuple[str, ...], digits: str, least: float
) -> Placement:
    fraction, share = chosen.fractions("round", points, digits)
    lines = len(labels)
    depth, moved = move_off_wall(fraction * width, width, least)
    depths, shares = np.tile(depth, lines), np.tile(share / lines, lines)
    x, y = diameters(width, depths, np.repeat(angles, points))
    notes: tuple[str, ...] = ()
    if moved.any():
        notes = (f"{int(moved.sum())} points on each line moved out to {least * 1000:.1f} mm from the wall; "
                 "where two fall together both are read and both count",)
    return _placement(chosen, x, y, depths, shares, labels, points, tuple(np.tile(moved, lines).tolist()), notes, digits)


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
