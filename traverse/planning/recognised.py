"""Which standard's rule the depths of a job follow, where the job gives the points itself."""

from __future__ import annotations

import math

import numpy as np

from traverse import layouts
from traverse.errors import LayoutError
from traverse.layouts import Match
from traverse.model import Layout, Section


def recognised(section: Section, layout: Layout) -> tuple[tuple[str, Match], ...]:
    """Return for each line of a job's own points the rule it follows best; none for a section without such rules."""
    if layout.rule != "custom" or section.shape not in ("round", "ellipse", "rectangle"):
        return ()
    found = []
    for name in layout.lines:
        index = np.flatnonzero([line == name for line in layout.line])
        length = line_length(section, layout, index.tolist())
        if length is None or len(index) < 2:
            continue
        try:
            matches = layouts.recognise(layout.depth[index], length, shape="rectangle" if section.shape == "rectangle" else "round")
        except LayoutError:
            continue
        if matches:
            found.append((name, matches[0]))
    return tuple(found)


def line_length(section: Section, layout: Layout, index: list[int]) -> float | None:
    """Return the length of the line some points lie on, None where they lie on none. [m]"""
    x, y = layout.x[index], layout.y[index]
    if section.shape == "rectangle":
        if np.ptp(x) < 1e-6 * section.width:
            return section.height
        return section.width if np.ptp(y) < 1e-6 * section.height else None
    far = int(np.argmax(np.hypot(x, y)))
    angle = math.atan2(y[far], x[far])
    return 1.0 / math.hypot(math.cos(angle) / section.width, math.sin(angle) / section.height)


def words(match: Match, labels: tuple[str, ...]) -> str:
    """Return what a match says, with the mark that is furthest off."""
    regular = [k for k in range(len(match.deviations)) if k not in match.slips and math.isfinite(match.deviations[k])]
    if not regular:
        return "no rule that is known here"
    worst = max(regular, key=lambda k: abs(match.deviations[k]))
    what = f"{match.title}, {match.points} points"
    off = f"{1000 * match.deviations[worst]:+.1f} mm at {labels[worst]}"
    if not match.fits and match.largest > 20.0 * match.tolerance:
        return "no rule that is known here"
    if not match.fits:
        return f"no known rule; nearest is {what}, off by up to {off}"
    return f"{what} (off by up to {off})" + (f"; {match.note}" if match.note else "")
