"""Write what the documentation takes from the program: help texts, the nomenclature, the output of console blocks.

``python -m tests.tools.write_docs`` writes ``docs/commands.md`` and ``docs/nomenclature.md``, which are the program's alone. Pages written by hand
change only with ``--blocks``, which refills their ```` ```console ```` blocks; ``--check`` writes nothing and lists what would change. Read the
difference before keeping it: this tool writes what the program says, not what is right.
"""

from __future__ import annotations

import argparse
import os
import re
import shlex
import shutil
import sys
import tempfile
from collections.abc import Callable, Iterator
from pathlib import Path

from click.testing import CliRunner

from traverse.cli import main
from traverse.quantities import QUANTITIES

ROOT = Path(__file__).parents[2]
WIDTH = 100
REMARK = "<!-- Written by `python -m tests.tools.write_docs`; change the program, not this page. -->"
_BLOCK = re.compile(r"^```console\n(.*?)^```[ \t]*$", re.M | re.S)


def _help(*command: str) -> str:
    done = CliRunner().invoke(main, [*command, "--help"], prog_name="traverse", terminal_width=WIDTH, max_content_width=WIDTH, catch_exceptions=False)
    return done.stdout.rstrip()


def commands() -> str:
    """Return the page of all commands: the help text of each."""
    parts = ["# Commands", "", REMARK, ""]
    for name in ("", *main.commands):
        title = f"traverse {name}".strip()
        parts += [f"## {title}", "", "```text", _help(*name.split()), "```", ""]
    return "\n".join(parts)


def nomenclature() -> str:
    """Return the page of all reported quantities."""
    head = "| name | words | symbol | unit of the JSON form | shown in SI | shown in US units | meaning |"
    rows = [
        f"| `{q.name}` | {q.label} | {q.symbol} | `{q.unit}` | `{q.si}` | `{q.us}` | {q.meaning} |".replace("`1`", "1") for q in QUANTITIES
    ]
    return "\n".join(["# Nomenclature", "", REMARK, "", "What a result reports, under the names of the JSON form and the library.", "", head,
                      "|" + "---|" * (head.count("|") - 1), *rows, ""])


def pages() -> list[Path]:
    """Return the pages a reader sees."""
    return [ROOT / "README.md", *sorted((ROOT / "example_data").glob("*.md")), *sorted((ROOT / "docs").rglob("*.md"))]


def blocks(text: str) -> list[str]:
    """Return the console blocks of a page."""
    return _BLOCK.findall(text)


def _commands(block: str) -> Iterator[tuple[str, str]]:
    """Yield each command of a block with the output that stands below it."""
    for part in re.split(r"^\$ ", block, flags=re.M)[1:]:
        command, _, output = part.partition("\n")
        yield command, output


def replay(block: str) -> str:
    """Run the commands of a console block in a copy of the example jobs; return the block as the program fills it.

    Only ``traverse`` and ``echo $?`` are known; anything else is refused, since its output would be nobody's promise.
    """
    if not block.startswith("$ "):
        raise ValueError(f"a console block begins with a command, not with {block[:40]!r}")
    lines, code, before = [], 0, Path.cwd()
    with tempfile.TemporaryDirectory() as folder:
        here = Path(folder) / "example_data"
        shutil.copytree(ROOT / "example_data", here)
        os.chdir(here)
        try:
            for command, _ in _commands(block):
                lines.append(f"$ {command}\n")
                if command == "echo $?":
                    lines.append(f"{code}\n")
                    continue
                program, *arguments = shlex.split(command)
                if program != "traverse":
                    raise ValueError(f"{program!r} is not run in console blocks")
                done = CliRunner().invoke(main, arguments, prog_name="traverse", terminal_width=WIDTH, max_content_width=WIDTH, catch_exceptions=False)
                code = done.exit_code
                lines.append("".join(f"{line.rstrip()}\n" for line in done.output.splitlines()))
        finally:
            os.chdir(before)
    return "".join(lines)


def agrees(written: str, run: str) -> bool:
    """Return whether a block is what the program says; a line of only ``...`` stands for any lines."""
    pattern = "".join(r"(?:.*\n)*?" if line == "..." else re.escape(line.rstrip() + "\n") for line in written.splitlines())
    return re.fullmatch(pattern, run) is not None


def refilled(text: str, run: Callable[[str], str] = replay) -> str:
    """Return a page with its console blocks filled anew; shortened blocks that still agree stay as they are."""

    def fill(match: re.Match[str]) -> str:
        block = match.group(1)
        now = run(block)
        return match.group() if agrees(block, now) else f"```console\n{now}```"

    return _BLOCK.sub(fill, text)


def write(*, fill_blocks: bool = False, check: bool = False) -> list[str]:
    """Write what has changed, or only look with ``check``; return the names of the pages."""
    wanted = {ROOT / "docs" / "commands.md": commands(), ROOT / "docs" / "nomenclature.md": nomenclature()}
    if fill_blocks:
        wanted |= {page: refilled(page.read_text(encoding="utf-8")) for page in pages() if page not in wanted}
    changed = [page for page, text in wanted.items() if not page.exists() or page.read_text(encoding="utf-8") != text]
    for page in changed:
        if not check:
            page.write_text(wanted[page], encoding="utf-8", newline="\n")
    return [str(page.relative_to(ROOT)) for page in changed]


def _main() -> int:
    parser = argparse.ArgumentParser(prog="python -m tests.tools.write_docs", description="Write the pages that come from the program.")
    parser.add_argument("--blocks", action="store_true", help="refill the console blocks of the pages written by hand as well")
    parser.add_argument("--check", action="store_true", help="write nothing; list what would change and exit with 1 if anything would")
    options = parser.parse_args()
    changed = write(fill_blocks=options.blocks, check=options.check)
    sys.stdout.write("".join(f"{'would write' if options.check else 'wrote'} {name}\n" for name in changed))
    return 1 if options.check and changed else 0


if __name__ == "__main__":
    raise SystemExit(_main())
