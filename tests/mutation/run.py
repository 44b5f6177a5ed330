"""Mutation testing of the core: change the program a little, many times over, and count how often the tests notice.

``python tests/mutation/run.py`` works in a copy of the repository, so that nothing is left in it. Two runs of mutmut: a first, small one makes the
mutants and learns which test meets which function; then a sample is judged that depends on the mutants' names alone, so that it is the same each time
and does not favour the quick ones. ``--every 1`` judges them all. mutmut's own exit code says nothing about survivors; the gate is here.
"""

from __future__ import annotations

import argparse
import hashlib
import json
import os
import shutil
import signal
import subprocess
import sys
import tempfile
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
COPIED = ("traverse", "tests", "example_data", "docs", ".ci", "README.md", "pyproject.toml", ".importlinter")
# The first run: one small module, all of it quick.
FIRST = "traverse.physics.atmosphere*"
# Run once, at import, before a mutant is switched on: no test could notice them. Other tests hold what they make: every unit against a unit
# library, every printed point against its formula.
AT_IMPORT = ("traverse.units.x__table__", "traverse.layouts._areas.x_printed__")
# A verdict on fewer mutants than this proves nothing.
LEAST = 120


def sample(names: list[str], every: int) -> list[str]:
    """Return about one name in ``every``, by digest: the same ones each time, whatever the order."""
    return [name for name in sorted(names) if int(hashlib.sha256(name.encode()).hexdigest(), 16) % every == 0]


def verdict(stats: dict[str, int], least_share: float, least: int = LEAST) -> tuple[bool, str]:
    """Return whether the gate is passed, and a line that says why.

    A mutant no test meets has survived; one that made the tests hang or crash was noticed. Those not judged count neither way.
    """
    noticed = stats["killed"] + stats["timeout"] + stats["segfault"] + stats.get("caught_by_type_check", 0)
    missed = stats["survived"] + stats["no_tests"] + stats["suspicious"]
    judged = noticed + missed
    share = noticed / judged if judged else 0.0
    line = f"{noticed} of {judged} mutants noticed, {share:.1%} (at least {least_share:.0%} of at least {least}); {stats['total'] - judged} not judged"
    return judged >= least and share >= least_share, line


def run(folder: Path, names: list[str], workers: int, seconds: float) -> bool:
    """Run mutmut on these mutants; stop it kindly after so many seconds, so that it keeps what it has. Return whether it came to its end."""
    environment = os.environ | {"PYTHONDONTWRITEBYTECODE": "1", "HYPOTHESIS_STORAGE_DIRECTORY": str(folder / "hypothesis")}
    with (folder / "mutmut.log").open("ab") as log:
        process = subprocess.Popen(
            [sys.executable, "-m", "mutmut", "run", "--max-children", str(workers), *names], cwd=folder, stdout=log, stderr=log, env=environment,
        )
        try:
            code = process.wait(timeout=seconds)
        except subprocess.TimeoutExpired:
            process.send_signal(signal.SIGINT)
            process.wait(timeout=60)
            return False
    if code:
        tail = (folder / "mutmut.log").read_text(encoding="utf-8", errors="replace").replace("\r", "\n").splitlines()[-40:]
        raise SystemExit("mutmut failed:\n" + "\n".join(tail))
    return True


def results(folder: Path) -> dict[str, int | None]:
    """Return mutmut's exit code of every mutant; None where it was not judged."""
    found: dict[str, int | None] = {}
    for path in sorted((folder / "mutants" / "traverse").rglob("*.meta")):
        found |= json.loads(path.read_text(encoding="utf-8"))["exit_code_by_key"]
    return found


def statistics(folder: Path) -> dict[str, int]:
    """Return mutmut's own count."""
    subprocess.run([sys.executable, "-m", "mutmut", "export-cicd-stats"], cwd=folder, check=True, capture_output=True)
    return json.loads((folder / "mutants" / "mutmut-cicd-stats.json").read_text(encoding="utf-8"))


def survivors(folder: Path, names: set[str]) -> list[str]:
    """Return each mutant of the sample that no test noticed."""
    missed = {0, 5, 33, 35}  # survived, no test (twice), suspicious
    return sorted(name for name, code in results(folder).items() if name in names and code in missed)


def main() -> int:
    """Judge a sample of mutants and gate on the share that was noticed."""
    parser = argparse.ArgumentParser(description="Mutation testing of the core.")
    parser.add_argument("--workers", type=int, default=os.cpu_count() or 1, help="mutants judged at a time")
    parser.add_argument("--seconds", type=float, default=240.0, help="stop judging after so long")
    parser.add_argument("--every", type=int, default=24, help="judge about one mutant in so many; 1 judges all")
    parser.add_argument("--share", type=float, default=0.80, help="the least share that must be noticed")
    parser.add_argument("--list", action="store_true", help="show the change of every survivor")
    options = parser.parse_args()
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        for part in COPIED:
            if (ROOT / part).is_dir():
                shutil.copytree(ROOT / part, folder / part, ignore=shutil.ignore_patterns("__pycache__"))
            else:
                shutil.copy2(ROOT / part, folder / part)
        run(folder, [FIRST], options.workers, 300.0)
        every = [mutant for mutant in results(folder) if not mutant.startswith(AT_IMPORT)]
        chosen = sample(every, options.every)
        finished = run(folder, chosen, options.workers, options.seconds)
        missed = survivors(folder, set(chosen))
        for mutant in missed:
            sys.stdout.write(f"survived: {mutant}\n")
            if options.list:
                shown = subprocess.run([sys.executable, "-m", "mutmut", "show", mutant], cwd=folder, capture_output=True, text=True, check=False)
                sys.stdout.write("".join(line + "\n" for line in shown.stdout.splitlines() if line[:1] in "+-" and line[:3] not in {"+++", "---"}))
        passed, line = verdict(statistics(folder), options.share, min(LEAST, len(chosen)))
    if not finished:
        sys.stdout.write(f"stopped after {options.seconds:.0f} s\n")
    sys.stdout.write(f"{len(every)} mutants, {len(chosen)} in the sample: {line}\n")
    return 0 if passed else 1


if __name__ == "__main__":
    raise SystemExit(main())
