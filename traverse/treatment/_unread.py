"""What enters the mean at a point that was not read: nothing, its neighbours, or the fitted velocity field."""

from __future__ import annotations

import numpy as np
import numpy.typing as npt

from traverse.errors import DomainError, ReadingError
from traverse.model import Array, Layout, Readings, Section
from traverse.physics import field

Flags = npt.NDArray[np.bool_]
RULES = ("neighbour", "field", "omit")
FROM_FIELD = "from the fitted velocity field"


def fill(
    policy: str, readings: Readings, layout: Layout, section: Section, unread: Flags, pressure: Array, counted: Flags,
    rule: list[str],
) -> None:
    """Fill or drop the points that gave no usable number, in place.

    Raises
    ------
    ReadingError
        If the rule is that every point must be read, or cannot be followed with the readings there are.
    """
    if policy == "error":
        labels = [f"{readings.line[i]}{readings.point[i]} ({readings.status[i]})" for i in np.flatnonzero(unread)]
        raise ReadingError(
            f"no usable reading at {', '.join(labels)}", where="readings", expected="a reading at every point of the plan",
            how='or say what to do: [readings] missing = "neighbour", "field" or "omit"',
        )
    if policy == "omit":
        counted[unread] = False
        for index in np.flatnonzero(unread):
            rule[index] = "left out, weights of the others raised"
        return
    root = np.sign(pressure) * np.sqrt(np.abs(pressure))
    if policy == "field":
        _from_field(layout, section, unread, pressure, root, rule)
        return
    for place in np.flatnonzero(unread).tolist():
        pressure[place], names = _neighbours(place, readings, layout, unread, root)
        rule[place] = f"from {names}"


def _from_field(layout: Layout, section: Section, unread: Flags, pressure: Array, root: Array, rule: list[str]) -> None:
    """Take the roots of the unread points from the field that the other roots leave possible; they go with the velocities."""
    read = ~unread
    try:
        fitted = field.fit(section.shape, section.size, layout.x[read], layout.y[read], root[read])
    except DomainError as problem:
        raise ReadingError(
            f"no field can be fitted: {problem.found}", where="readings", expected="enough readings around the missing points",
            how='[readings] missing = "neighbour" or "omit"',
        ) from problem
    found = fitted.at(layout.x[unread], layout.y[unread])
    pressure[unread] = found * np.abs(found)
    for index in np.flatnonzero(unread):
        rule[index] = FROM_FIELD


def _neighbours(
    index: int, readings: Readings, layout: Layout, unread: Flags, root: Array
) -> tuple[float, str]:
    """Return the pressure whose root is the mean of the roots read next to a point on its line."""
    same = np.array([line == layout.line[index] for line in layout.line]) & ~unread
    before = np.flatnonzero(same & (layout.depth < layout.depth[index]))
    after = np.flatnonzero(same & (layout.depth > layout.depth[index]))
    chosen = [int(before[np.argmax(layout.depth[before])])] if before.size else []
    chosen += [int(after[np.argmin(layout.depth[after])])] if after.size else []
    if not chosen:
        raise ReadingError(
            f"no usable reading on line {readings.line[index]}", where="readings",
            expected="a neighbour on the same line to take the missing point from", how='or set [readings] missing = "omit"',
        )
    mean = float(np.mean(root[chosen]))
    names = " and ".join(f"{readings.line[i]}{readings.point[i]}" for i in chosen)
    return mean * abs(mean), names
