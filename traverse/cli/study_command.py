"""traverse study."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING

import click

if TYPE_CHECKING:
    from traverse.study import Study


@click.command()
@click.argument("job", type=click.Path(path_type=Path))
@click.option("--run", help="Take this run's readings; the mean of all runs, point by point, by default.")
@click.option("--profile", metavar="KIND:NUMBER", help="No readings but a formula: power:7, log:0.12 or parabola.")
@click.option("--figure", type=click.Path(path_type=Path), help="Draw the differences and the field into this PNG, SVG or PDF.")
@click.option("--json", "json_to", metavar="FILE|-", help="The study in SI units as JSON; - for standard output.")
@click.option("--out", type=click.Path(path_type=Path), metavar="FILE.csv", help="The rows as CSV, SI units.")
@click.option("--force", is_flag=True, help="Overwrite existing outputs. An input is never overwritten.")
@click.option("-q", "--quiet", is_flag=True, help="No notes on the error stream.")
def study(
    job: Path, run: str | None, profile: str | None, figure: Path | None, json_to: str | None, out: Path | None, force: bool, quiet: bool
) -> None:
    """Show what other layouts would have given in this duct.

    A velocity field is fitted to the readings and read again at the points of every rule, of fewer points, of turned
    diameters and shifted marks, each with its uncertainty. With --profile no readings are needed.

    Example: traverse study stack.toml --figure study.png
    """
    from traverse.report import study_text

    if run is not None and profile is not None:
        raise click.UsageError("--run takes readings, --profile takes none: give one of them")
    json_file = None if json_to in {None, "-"} else Path(str(json_to))
    targets = [path for path in (figure, json_file, out) if path is not None]
    if len({path.absolute() for path in targets}) < len(targets):
        raise click.UsageError("two outputs have the same name")
    result, read = _made(job, run, profile, targets, force=force)
    content = json.dumps(result.to_dict(), indent=2, ensure_ascii=False, allow_nan=False)
    click.echo(content if json_to == "-" else study_text.study(result))
    for path in _write(result, content, figure, json_file, out):
        if not quiet:
            click.echo(f"wrote {path}", err=True)
    if not quiet and read:
        click.echo(read, err=True)


def _made(job: Path, run: str | None, profile: str | None, targets: list[Path], *, force: bool) -> tuple[Study, str]:
    """Return the study and what the reduction wants to be known, having made sure that the outputs can be written."""
    from traverse import files
    from traverse.importers import load, load_setup
    from traverse.report import text
    from traverse.study import of_formula
    from traverse.study import study as make_study

    if profile is not None:
        setup = load_setup(job)
        for target in targets:
            files.claim(target, [job, *(job.parent / source.name for source in setup.sources[1:])], force=force)
        return of_formula(setup, profile), ""
    from traverse.reduction import reduce

    loaded = load(job)
    for target in targets:
        files.claim(target, [job, *(job.parent / source.name for source in loaded.sources[1:])], force=force)
    reduction = reduce(loaded)
    return make_study(reduction, run=run), text.findings(reduction.findings, everything=False)


def _write(result: Study, content: str, figure: Path | None, json_file: Path | None, out: Path | None) -> list[Path]:
    from traverse import files
    from traverse.report import study_text

    if figure is not None:
        from traverse.report import figures, study_figure

        figures.write(study_figure.draw(result), figure)
    for target, data in ((json_file, (content + "\n").encode()), (out, study_text.csv_bytes(result))):
        if target is not None:
            with files.atomic(target) as stream:
                stream.write(data)
    return [path for path in (figure, json_file, out) if path is not None]
