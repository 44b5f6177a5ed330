"""traverse plan."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import click

if TYPE_CHECKING:
    from traverse.planning import Plan


@click.command()
@click.argument("job", type=click.Path(path_type=Path))
@click.option("--figure", type=click.Path(path_type=Path), help="Draw the section with its points into this PNG, SVG or PDF.")
@click.option("--sheet", type=click.Path(path_type=Path), help="Write the field workbook: the plan with pages to fill in.")
@click.option("--pressure-unit", metavar="UNIT", help="The unit of the gauge in the field workbook; Pa or inH2O by default.")
@click.option("--json", "json_to", metavar="FILE|-", help="The plan in SI units as JSON; - for standard output.")
@click.option("--force", is_flag=True, help="Overwrite an existing output.")
@click.option("--explain", is_flag=True, help="Print each decision that was taken and the setting that would change it.")
@click.option("-q", "--quiet", is_flag=True, help="No notes on the error stream.")
def plan(
    job: Path, figure: Path | None, sheet: Path | None, pressure_unit: str | None, json_to: str | None, force: bool, explain: bool,
    quiet: bool,
) -> None:
    """Print where to measure, the marks on the probe, the pressures to expect, the gauge and what to take along.

    JOB is a job file; readings are not needed yet.

    Example: traverse plan stack.toml --figure stack.png --sheet stack_field.xlsx
    """
    from traverse import files
    from traverse.importers import load_setup
    from traverse.planning import plan as make_plan
    from traverse.report import plan_text, text

    setup = load_setup(job)
    read = [job, *(job.parent / source.name for source in setup.sources[1:])]
    json_file = None if json_to in {None, "-"} else Path(str(json_to))
    for target in (figure, json_file, sheet):
        if target is not None:
            files.claim(target, read, force=force)
    planned = make_plan(setup)
    if json_to is not None:
        from traverse.report import plan_json

        content = plan_json.text(planned)
        if json_file is None:
            click.echo(content)
        else:
            with files.atomic(json_file) as stream:
                stream.write(f"{content}\n".encode())
    if json_to != "-":
        click.echo(plan_text.plan(planned))
    if figure is not None:
        from traverse.report import figures, plan_figure

        figures.write(plan_figure.plan(planned), figure)
    if sheet is not None:
        _field_workbook(planned, sheet, pressure_unit)
    for target in (json_file, figure, sheet):
        if target is not None and not quiet:
            click.echo(f"wrote {target}", err=True)
    if explain:
        click.echo(text.findings(planned.findings, everything=True), err=True)


def _field_workbook(planned: Plan, target: Path, pressure_unit: str | None) -> None:
    """Write the field workbook of a plan."""
    from traverse import files
    from traverse.errors import OutputError
    from traverse.planning.field import pressure_units
    from traverse.report import field

    if target.suffix.lower() != ".xlsx":
        raise OutputError(f"{target.name}: the field workbook is an .xlsx file", where=str(target))
    if pressure_unit is not None and pressure_unit not in pressure_units():
        raise OutputError(f"unit {pressure_unit!r}", where="--pressure-unit", expected=f"one of {', '.join(pressure_units())}")
    content = field.build(planned, planned.setup.sources[0].text, pressure_unit or "")
    with files.atomic(target) as stream:
        stream.write(content)
