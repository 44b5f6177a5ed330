"""Placing a scheme: lines that are not all alike, which the rule draws itself."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from traverse.layouts._base import Frame, Placement, Rule, checked_names


def place(chosen: Rule, frame: Frame, names: Sequence[str] | None) -> Placement:
    """Return the points of a rule's scheme for the shape of a frame."""
    found = chosen.schemes[frame.shape](frame)
    labels = checked_names(names, len(found))
    counts = [len(line.x) for line in found]
    joined = {name: np.concatenate([getattr(line, name) for line in found]) for name in ("x", "y", "depth", "weight")}
    return Placement(
        title=chosen.title, source=chosen.source, x=joined["x"], y=joined["y"], depth=joined["depth"],
        weight=joined["weight"] / joined["weight"].sum(),
        line=tuple(label for label, count in zip(labels, counts, strict=True) for _ in range(count)),
        point=tuple(number for count in counts for number in range(1, count + 1)), moved=(False,) * sum(counts),
    )
