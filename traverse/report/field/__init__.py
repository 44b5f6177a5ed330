"""The field workbook: the plan with pages to fill in on a tablet, in any spreadsheet program, without this one."""

from __future__ import annotations

from traverse.planning import Plan
from traverse.planning.field import RUNS, default_pressure, units
from traverse.report import workbook
from traverse.report.field import _job_page, _plan_page, _run_page
from traverse.report.spec import SheetSpec

__all__ = ["build", "pages"]


def pages(planned: Plan, job_text: str, pressure: str = "") -> list[SheetSpec]:
    """Return the pages: the plan, one page a run, the job.

    Parameters
    ----------
    planned : Plan
        From :func:`traverse.planning.plan`.
    job_text : str
        The job file as it stands; the workbook carries it, so that it can be reduced by itself.
    pressure : str
        The unit of the gauge; that of the job's system of units by default.
    """
    chosen = units(planned.setup.units, pressure or default_pressure(planned.setup.units))
    runs = [_run_page.page(planned, name, number, chosen) for number, name in enumerate(RUNS)]
    return [_plan_page.page(planned), *runs, _job_page.page(job_text, chosen)]


def build(planned: Plan, job_text: str, pressure: str = "") -> bytes:
    """Return the field workbook as bytes."""
    setup = planned.setup
    return workbook.build(pages(planned, job_text, pressure), title=setup.title, date=setup.date, subject="field workbook of traverse")
