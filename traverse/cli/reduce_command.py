"""traverse reduce."""

from __future__ import annotations

import json
import sys
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from traverse.errors import OutputError, TraverseError

if TYPE_CHECKING:
    from traverse.model import Job
    from traverse.result import Reduction


@dataclass(frozen=True, slots=True, kw_only=True)
class Outputs:
    """Where results go. Every folder among them exists or can be made."""

    workbook: Path | None
    json: str | None
    figures: Path | None
    tables: Path | None
    force: bool


@click.command()
@click.argument("jobs", metavar="JOB...", nargs=-1, required=True, type=click.Path(path_type=Path))
@click.option("--out", type=click.Path(path_type=Path), help="The workbook (.xlsx); a folder when there are several jobs.")
@click.option("--json", "json_to", metavar="FILE|-", help="The result in SI units as JSON; - for standard output.")
@click.option("--figures", type=click.Path(path_type=Path), metavar="DIR", help="Draw section, profiles and budget here.")
@click.option("--csv", "tables", type=click.Path(path_type=Path), metavar="DIR", help="Points and quantities as CSV here.")
@click.option("--force", is_flag=True, help="Overwrite existing outputs. An input is never overwritten.")
@click.option("--strict", is_flag=True, help="Exit with 3 when a check fails.")
@click.option("--explain", is_flag=True, help="Print each decision that was taken and the setting that would change it.")
@click.option("-q", "--quiet", is_flag=True, help="No notes and no progress on the error stream.")
def reduce(
    jobs: tuple[Path, ...], out: Path | None, json_to: str | None, figures: Path | None, tables: Path | None, force: bool,
    strict: bool, explain: bool, quiet: bool,
) -> None:
    """Reduce readings to a flow: velocities, flows, uncertainty, checks and report.

    JOB is a job file or a folder of them. With no output option the summary is printed and nothing is written.

    Example: traverse reduce stack.toml --out report.xlsx --json - --figures figures
    """
    from traverse.importers import find_jobs

    paths = [path for job in jobs for path in find_jobs(job)]
    outputs = Outputs(workbook=out, json=json_to, figures=figures, tables=tables, force=force)
    _refuse_wrong_use(outputs, paths)
    results, problems = _reduce_all(paths, outputs, quiet=quiet, explain=explain)
    if json_to is not None:
        _write_json(results, paths, outputs)
    if len(paths) > 1 and out is not None:
        _write_register(results, problems, out, force=force, quiet=quiet)
    for path, problem in problems:
        click.echo(f"Error: {path.name}: {problem}", err=True)
    if problems:
        raise SystemExit(1)
    if strict and any(result.failed() for _, result in results):
        raise SystemExit(3)


def _refuse_wrong_use(outputs: Outputs, paths: Sequence[Path]) -> None:
    """Refuse before any work what could not be written after it."""
    if outputs.workbook is not None and len(paths) > 1 and outputs.workbook.suffix.lower() == ".xlsx":
        raise click.UsageError("several jobs need a folder for --out, not one .xlsx file")
    if outputs.workbook is not None and len(paths) == 1 and outputs.workbook.suffix.lower() != ".xlsx" \
            and not outputs.workbook.is_dir():
        raise click.UsageError(f"--out {outputs.workbook}: a workbook's name ends in .xlsx (or name an existing folder)")


def _reduce_all(
    paths: Sequence[Path], outputs: Outputs, *, quiet: bool, explain: bool
) -> tuple[list[tuple[Path, Reduction]], list[tuple[Path, TraverseError]]]:
    """Reduce and write job by job; with several jobs one that fails does not stop the others."""
    results: list[tuple[Path, Reduction]] = []
    problems: list[tuple[Path, TraverseError]] = []
    for path in _progress(paths, quiet=quiet):
        try:
            results.append((path, _one(path, outputs, several=len(paths) > 1, quiet=quiet, explain=explain)))
        except TraverseError as problem:
            if len(paths) == 1:
                raise
            problems.append((path, problem))
    return results, problems


def _progress(paths: Sequence[Path], *, quiet: bool) -> Iterable[Path]:
    if quiet or len(paths) < 2:
        yield from paths
        return
    with click.progressbar(paths, label="reducing", file=sys.stderr) as bar:
        yield from bar


def _one(path: Path, outputs: Outputs, *, several: bool, quiet: bool, explain: bool) -> Reduction:
    """Load, reduce and report one job."""
    from traverse.importers import load
    from traverse.reduction import reduce as reduce_job
    from traverse.report import text

    job = load(path)
    targets = _targets(path, job, outputs, several=several)
    result = reduce_job(job)
    if outputs.json != "-":
        click.echo(text.reduction(result))
        if several:
            click.echo("")
    if not quiet or explain:
        notes = text.findings(result.findings, everything=explain)
        if notes:
            click.echo(notes, err=True)
    written = _write(result, targets)
    if not quiet:
        for line in written:
            click.echo(f"wrote {line}", err=True)
    return result


def _targets(path: Path, job: Job, outputs: Outputs, *, several: bool) -> dict[str, Path]:
    """Return where this job's outputs go, having made sure that they can."""
    from traverse import files

    read = [path, *(path.parent / source.name for source in job.sources[1:])]
    targets: dict[str, Path] = {}
    if outputs.workbook is not None:
        folder = several or outputs.workbook.is_dir()
        targets["workbook"] = _folder(outputs.workbook) / f"{path.stem}.xlsx" if folder else outputs.workbook
    if outputs.json not in {None, "-"} and not several:
        files.claim(Path(str(outputs.json)), read, force=outputs.force)
    if "workbook" in targets:
        files.claim(targets["workbook"], read, force=outputs.force)
    for name, option, endings in (
        ("figures", outputs.figures, ("section.png", "profiles.png", "budget.png")),
        ("tables", outputs.tables, ("points.csv", "quantities.csv")),
    ):
        if option is None:
            continue
        folder_path = _folder(option)
        prefix = f"{path.stem}_" if several else ""
        targets[name] = folder_path / prefix if prefix else folder_path
        for ending in endings:
            files.claim(folder_path / f"{prefix}{ending}", read, force=outputs.force)
    return targets


def _folder(path: Path) -> Path:
    """Return a folder for outputs, made when only its last part is missing."""
    if path.is_dir():
        return path
    if path.exists():
        raise OutputError(f"{path} is a file", expected="a folder")
    try:
        path.mkdir()
    except OSError as problem:
        raise OutputError(
            f"{path} cannot be made ({problem.strerror})", expected="a folder whose parent exists and can be written to"
        ) from problem
    return path


def _write(result: Reduction, targets: dict[str, Path]) -> list[str]:
    """Write the outputs of one job; return what to say about each."""
    from traverse import files

    said: list[str] = []
    if "workbook" in targets:
        from traverse.report import sheets, workbook

        content = workbook.build(
            sheets.reduction(result), title=result.job.title, date=result.job.date, subject=result.program
        )
        with files.atomic(targets["workbook"]) as stream:
            stream.write(content)
        said.append(f"{targets['workbook']} (content {workbook.content_digest(content)[:16]})")
    if "figures" in targets:
        from traverse.report import figures

        said += [str(path) for path in figures.write_all(result, targets["figures"])]
    if "tables" in targets:
        from traverse.report import frames

        said += [str(path) for path in frames.write_all(result, targets["tables"])]
    return said


def _write_json(results: Sequence[tuple[Path, Reduction]], paths: Sequence[Path], outputs: Outputs) -> None:
    from traverse import files

    data: Any = [result.to_dict() for _, result in results]
    if len(paths) == 1:
        data = data[0]
    content = json.dumps(data, indent=2, ensure_ascii=False, allow_nan=False)
    if outputs.json == "-":
        click.echo(content)
        return
    target = Path(str(outputs.json))
    files.claim(target, paths, force=outputs.force)
    with files.atomic(target) as stream:
        stream.write((content + "\n").encode())


def _write_register(
    results: Sequence[tuple[Path, Reduction]], problems: Sequence[tuple[Path, TraverseError]], out: Path, *, force: bool,
    quiet: bool,
) -> None:
    from traverse import files
    from traverse.report import register, workbook

    target = _folder(out) / "register.xlsx"
    files.claim(target, [path for path, _ in results], force=force)
    content = workbook.build(
        register.sheets(results, problems), title="Register of reductions", date=None, subject="register"
    )
    with files.atomic(target) as stream:
        stream.write(content)
    if not quiet:
        click.echo(f"wrote {target}", err=True)
