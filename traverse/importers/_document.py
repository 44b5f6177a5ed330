"""The job file as a document: read, split into its known tables, nothing interpreted yet."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from traverse import files
from traverse.errors import JobError, nearest
from traverse.importers._schema import RUN_TABLES, SCHEMA, Key, Table, check, convert
from traverse.model import Finding, Source

# Tables that are read by a grammar of their own, or kept for a later version.
_OWN = ("run", "submitted", "quality")


@dataclass(frozen=True, slots=True, kw_only=True)
class Override:
    """One [[run]] entry: the run it speaks of and the tables it overrides."""

    name: str
    tables: Mapping[str, Table]


@dataclass(frozen=True, slots=True, kw_only=True)
class Document:
    """A job file whose tables, keys and kinds of values are known good."""

    path: Path
    source: Source
    tables: Mapping[str, Table]
    uncertainty: Mapping[str, Any] | None
    runs: tuple[Override, ...]
    findings: tuple[Finding, ...]
    quality: Mapping[str, Any] | None = None

    def table(self, name: str) -> Table:
        """Return a table; an empty one where the file has none."""
        return self.tables.get(name) or Table(f"[{name}]")

    def beside(self, name: str) -> Path:
        """Return the path of a file named in the job, relative to the job file."""
        return self.path.parent / name


def source(path: Path, name: str, text: str) -> Source:
    """Return the record of a file that was read."""
    return Source(name=name, sha256=files.sha256(files.read_bytes(path)), text=text)


def parse(path: Path) -> dict[str, Any]:
    """Return the raw content of a TOML file.

    Raises
    ------
    JobError
        If there is no such file, or it is no TOML; the message names the line.
    """
    return _toml(path, _text(path)[0])


def _text(path: Path) -> tuple[str, str]:
    if not path.is_file():
        raise JobError("no such file", where=str(path), expected="a job file (TOML)")
    text, _, note = files.read_text(path)
    return text.removeprefix("\ufeff"), note


def _toml(path: Path, text: str) -> dict[str, Any]:
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as problem:
        place = re.search(r"\(at line (\d+), column (\d+)\)", str(problem))
        line = int(place.group(1)) if place else text.count("\n") + 1
        said = re.sub(r"\s*\(at .*\)\s*\Z", "", str(problem))
        raise JobError(
            f"no valid TOML: {said[0].lower()}{said[1:]}", where=f"{path.name}:{line}",
            expected='lines such as diameter = "60 in"'
        ) from problem
    except (ValueError, RecursionError) as problem:
        raise JobError(f"no valid TOML: {problem}", where=path.name, expected='lines such as diameter = "60 in"') from problem


def read(path: Path) -> Document:
    """Read a job file and check every table, key and kind of value in it."""
    text, note = _text(path)
    findings = (Finding(level="note", topic="encoding", message=note, where=path.name),) if note else ()
    return interpreted(path, text, source(path, path.name, text), findings)


def interpreted(path: Path, text: str, origin: Source, before: tuple[Finding, ...]) -> Document:
    """Return the document that the text of a job is, wherever it was read from."""
    content = _toml(path, text)
    findings = list(before)
    if not isinstance(content.get("job"), dict):
        raise JobError("no [job] table", where=path.name, expected="a job file begins with [job] title, date, method")
    tables: dict[str, Table] = {}
    for name, values in content.items():
        if name in _OWN:
            continue
        if name not in SCHEMA:
            raise _unknown(path, name, values)
        if not isinstance(values, dict):
            raise JobError(f"{name} = {values!r}", where=path.name, expected=f"a table [{name}]")
        if name != "uncertainty":
            tables[name] = check(name, values)
    if "submitted" in content:
        findings.append(Finding(
            level="note", topic="submitted figures", setting="[submitted]",
            message="[submitted] is kept out of the reduction; this version does not compare it.",
        ))
    return Document(
        path=path, source=origin, tables=tables, uncertainty=content.get("uncertainty"),
        runs=_overrides(content.get("run", [])), findings=tuple(findings), quality=_quality(content.get("quality")),
    )


def _quality(values: Any) -> Mapping[str, Any] | None:
    if values is not None and not isinstance(values, dict):
        raise JobError(f"quality = {values!r}", where="[quality]", expected="a table")
    return values


def _unknown(path: Path, name: str, values: object) -> JobError:
    known = (*SCHEMA, *_OWN)
    if not isinstance(values, dict):
        home = next((table for table, keys in SCHEMA.items() if name in keys), "")
        return JobError(
            f"{name!r} stands before any table", where=path.name, expected="every key under its [table]",
            how=f"{name} belongs into [{home}]" if home else "",
        )
    guess = nearest(name, known)
    return JobError(
        f"unknown table [{name}]", where=path.name, expected=f"one of {', '.join(known)}",
        how=f"perhaps [{guess}]" if guess else "",
    )


def _overrides(entries: Any) -> tuple[Override, ...]:
    """Read the [[run]] entries. ``temperature`` is that of the gas at the plane, as in [conditions]."""
    if not isinstance(entries, list) or not all(isinstance(entry, dict) for entry in entries):
        raise JobError("run is no list of tables", where="[[run]]", expected="each run under a [[run]] of its own")
    keys: dict[str, Key] = {}
    home: dict[str, str] = {}
    for table in RUN_TABLES:
        for key, kind in SCHEMA[table].items():
            if key not in keys:
                keys[key], home[key] = kind, table
    found = [_override(entry, keys, home) for entry in entries]
    names = [override.name for override in found]
    for name in names:
        if names.count(name) > 1:
            raise JobError(f"run {name!r} stands twice", where="[[run]] name", expected="one [[run]] for each run")
    return tuple(found)


def override(name: str, values: Mapping[str, Any], shown: str) -> Override:
    """Return what is said of one run elsewhere than in [[run]]; the keys are those of [[run]]."""
    home = {key: table for table in reversed(RUN_TABLES) for key in SCHEMA[table]}
    parts: dict[str, dict[str, Any]] = {}
    for key, value in values.items():
        parts.setdefault(home[key], {})[key] = convert(shown, home[key], {key: value}, SCHEMA[home[key]]).values[key]
    return Override(name=name, tables={part: Table(shown, found) for part, found in parts.items()})


def _override(entry: Mapping[str, Any], keys: Mapping[str, Key], home: Mapping[str, str]) -> Override:
    name = entry.get("name")
    if not isinstance(name, str) or not name.strip():
        raise JobError(
            "no name" if name is None else f"{name!r}", where="[[run]] name", expected="the run's name as text",
            how='for example name = "2"',
        )
    shown = f'[[run]] "{name}"'
    values = {key: value for key, value in entry.items() if key != "name"}
    table = next((home[key] for key in values if key in home), "conditions")
    converted = convert(shown, table, values, keys)
    parts: dict[str, dict[str, Any]] = {}
    for key, value in converted.values.items():
        parts.setdefault(home[key], {})[key] = value
    return Override(name=name.strip(), tables={part: Table(shown, values) for part, values in parts.items()})
