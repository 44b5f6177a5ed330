"""What lies in the repository: no more than belongs there, and nothing that speaks of a machine or of anything but the product."""

import datetime
import os
import re
import subprocess
import tomllib
from pathlib import Path

import pytest

from traverse import tables

ROOT = Path(__file__).parents[2]
TOP = {"README.md", "pyproject.toml", "traverse", "tests", "example_data", "docs"}
LONGEST_MODULE = 400
# Spelt in pieces, so that this file does not find itself.
WORDS = [
    "lect" + "ures?", "trans" + "cripts?", "speak" + "ers?", "seed" + " documents?", "sess" + "ions?", "ag" + "ents?", "help" + "ers?",
]
HOSTS = ["py" + "pi", "python" + "hosted", "npm" + "js", "ana" + "conda", "conda" + "-forge", "crates" + r"\.io"]
FOLDERS = ["work", "tmp", "opt", "home", "root", "Users"]
FORBIDDEN = {
    "a word that is not of this product": re.compile(rf"\b({'|'.join(WORDS)})\b", re.I),
    "two letters that are not of this product": re.compile(r"\bA" + r"I\b"),
    "a host of packages": re.compile("|".join(HOSTS), re.I),
    # An absolute path of a machine: not part of a longer path, a fraction or an address.
    "a path of one machine": re.compile(rf"(?<![\w.)\]}}*])/({'|'.join(FOLDERS)})(?=/|\b)"),
    "a path out of the repository": re.compile(r"\.\./" + "shared"),
}


def kept():
    """Return the repository's files: what git keeps or would keep, or what the folder holds where git is not at hand."""
    if (ROOT / ".git").exists():
        done = subprocess.run(
            ["git", "-c", "safe.directory=*", "ls-files", "-z", "--cached", "--others", "--exclude-standard"],
            cwd=ROOT, capture_output=True, check=True, env=os.environ,
        )
        names = done.stdout.decode().split("\0")
        return sorted(path for name in names if name and (path := ROOT / name).is_file())
    skipped = {"__pycache__", "build", "dist", "mutants"}
    return sorted(
        path for path in ROOT.rglob("*") if path.is_file() and not skipped & set(path.relative_to(ROOT).parts)
        and not any(part.startswith(".") or part.endswith(".egg-info") for part in path.relative_to(ROOT).parts[:-1])
    )


def trespasses(text):
    """Return what a text says that it must not, with its line."""
    return [
        f"line {text.count(chr(10), 0, match.start()) + 1}: {what}: {match.group()!r}"
        for what, pattern in FORBIDDEN.items() for match in pattern.finditer(text)
    ]


def test_the_top_level_holds_what_belongs_there():
    names = {path.relative_to(ROOT).parts[0] for path in kept()}
    assert {name for name in names if not name.startswith(".")} <= TOP
    assert names >= {"README.md", "pyproject.toml", "traverse", "tests", "example_data", "docs", ".ci"}


def test_no_file_speaks_of_anything_but_the_product():
    found = {}
    for path in kept():
        content = path.read_bytes()
        name = str(path.relative_to(ROOT))
        said = trespasses(name) + ([] if b"\0" in content else trespasses(content.decode("utf-8", "replace")))
        if said:
            found[name] = said
    # The first line of a shell script names its interpreter; that is a path of no particular machine and not in the list.
    assert not found


@pytest.mark.parametrize(("text", "count"), [
    ("see /" + "tmp/x", 1), ("'/" + "home/me'", 1), ("at /" + "work", 1), ("a/" + "tmp", 0), ("m/" + "root", 0), ("#!/usr/bin/env bash", 0),
    ("pip from py" + "pi.org", 1), ("a " + "trans" + "cript", 1), ("transcribed", 0), ("Sess" + "ion", 1), ("sessile", 0),
    ("by A" + "I", 1), ("AIR", 0), ("reagent", 0), ("../" + "shared/x", 1), ("workbook", 0), ("a\nb\nspeak" + "er", 1),
])
def test_the_check_of_words_sees(text, count):
    assert len(trespasses(text)) == count


def test_modules_stay_readable():
    lengths = {str(path.relative_to(ROOT)): len(path.read_text(encoding="utf-8").splitlines()) for path in (ROOT / "traverse").rglob("*.py")}
    assert {name: length for name, length in lengths.items() if length > LONGEST_MODULE} == {}


TABLES = sorted((ROOT / "traverse" / "tables").glob("*.toml"))


def test_every_table_is_found():
    assert tables.names() == tuple(path.stem for path in TABLES)
    assert TABLES


@pytest.mark.parametrize("path", TABLES, ids=lambda path: path.stem)
def test_every_table_says_where_it_comes_from(path):
    table = tomllib.loads(path.read_text(encoding="utf-8"))
    for key in ("title", "source", "transcribed", "second_reading"):
        assert isinstance(table.get(key), str) and table[key].strip(), key
    for key in ("transcribed", "second_reading"):
        datetime.date.fromisoformat(table[key])
    if table["source"].lower().startswith("see each entry"):
        entries = {key: value for key, value in table.items() if isinstance(value, dict)}
        assert entries
        assert not [key for key, value in entries.items() if not _has_source(value)]


def _has_source(entry):
    """Return whether an entry states its source, itself or in each table within."""
    if str(entry.get("source", "")).strip():
        return True
    within = [value for value in entry.values() if isinstance(value, dict)]
    return bool(within) and all(_has_source(value) for value in within)


def test_the_package_carries_its_tables():
    """What is built takes the whole package folder; the settings leave nothing of it out."""
    build = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["tool"]["hatch"]["build"]["targets"]
    assert build["wheel"] == {"packages": ["traverse"]}
    assert {"/traverse", "/tests", "/docs", "/example_data", "/README.md", "/pyproject.toml", "/.ci", "/.importlinter"} <= set(build["sdist"]["include"])


def test_the_checks_can_be_started():
    run = ROOT / ".ci" / "run"
    assert os.access(run, os.X_OK)
    assert run.read_text(encoding="utf-8").startswith("#!/usr/bin/env bash\n")
    assert "set -euo pipefail" in run.read_text(encoding="utf-8")
