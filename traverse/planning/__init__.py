"""Before the first reading: where to measure, where to mark the probe, what pressure to expect, what to bring."""

from traverse.planning.checklist import PRACTICE, Checklist
from traverse.planning.expected import Expected
from traverse.planning.gauge import GaugeAdvice
from traverse.planning.marks import MARK_STEP, Rounding
from traverse.planning.probe import Clearance, Probe
from traverse.planning.record import Plan, method_title, plan, site

__all__ = [
    "MARK_STEP", "PRACTICE", "Checklist", "Clearance", "Expected", "GaugeAdvice", "Plan", "Probe", "Rounding", "method_title", "plan",
    "site",
]
