"""traverse plan."""

from __future__ import annotations

from pathlib import Path

import click


@click.command()
@click.argument("job", type=click.Path(path_type=Path))
@click.option("--figure", type=click.Path(path_type=Path), help="Draw the section with its points into this PNG, SVG or PDF.")
@click.option("--force", is_flag=True, help="Overwrite an existing output.")
@click.option("--explain", is_flag=True, help="Print each decision that was taken and the setting that would change it.")
@click.option("-q", "--quiet", is_flag=True, help="No notes on the error stream.")
def plan(job: Path, figure: Path | None, force: bool, explain: bool, quiet: bool) -> None:
    """Print where to measure: points, weights, positions and the marks on the probe.

    JOB is a job file; readings are not needed yet.

    Example: traverse plan stack.toml --figure stack.png
    """
    from traverse import files
    from traverse.importers import load_setup
    from traverse.planning import plan as make_plan
    from traverse.report import text

    setup = load_setup(job)
    if figure is not None:
        files.claim(figure, [job], force=force)
    planned = make_plan(setup)
    click.echo(text.plan(planned))
    if figure is not None:
        from traverse.report import figures

        figures.write(figures.plan(planned), figure)
        if not quiet:
            click.echo(f"wrote {figure}", err=True)
    if explain:
        click.echo(text.findings(planned.findings, everything=True), err=True)
