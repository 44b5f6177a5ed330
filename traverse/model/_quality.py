"""What a crew writes down beside the readings so that others can trust them."""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from traverse.units import Stated

Leak = Literal["passed", "failed", "not done"]
# What can carry a date of calibration.
CALIBRATED = ("pitot", "gauge", "thermometer", "barometer")


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Quality:
    """Leak checks, zeros of the gauge, readings taken again, dates of calibration of one run; None or empty where not stated.

    ``repeats`` are second readings of points by label, ``after_purge`` those taken after the tube was blown out. [Pa]
    """

    leak_before: Leak | None = None
    leak_after: Leak | None = None
    zero_before: Stated | None = None
    zero_after: Stated | None = None
    repeats: Mapping[str, Stated] = field(default_factory=dict)
    after_purge: Mapping[str, Stated] = field(default_factory=dict)
    calibrated: Mapping[str, dt.date] = field(default_factory=dict)
