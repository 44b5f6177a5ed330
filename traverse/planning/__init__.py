"""Before the first reading: where to measure, where to mark the probe, what pressure to expect, what to bring."""

from traverse.planning.marks import MARK_STEP, Plan, method_title, plan, site

__all__ = ["MARK_STEP", "Plan", "method_title", "plan", "site"]
