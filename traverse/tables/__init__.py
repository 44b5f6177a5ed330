"""Numbers out of documents, and the loader that refuses a table without its source."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from functools import lru_cache
from importlib.resources import files
from typing import Any

from traverse.errors import TableError

MANDATORY = ("title", "source", "transcribed", "second_reading")


@lru_cache(maxsize=64)
def load(name: str) -> Mapping[str, Any]:
    """Return the table of that name (without ``.toml``).

    Numbers stand in it as strings, with the digits as printed, unless a table says otherwise.

    Raises
    ------
    TableError
        If the table does not exist, is damaged, or does not say where it comes from.
    """
    resource = files(__name__) / f"{name}.toml"
    try:
        table = tomllib.loads(resource.read_text(encoding="utf-8"))
    except (OSError, tomllib.TOMLDecodeError) as problem:
        raise TableError(f"cannot be read ({problem})", where=f"tables/{name}.toml") from problem
    for key in MANDATORY:
        if not table.get(key):
            raise TableError(f"no {key!r}", where=f"tables/{name}.toml", expected="a table that says where it comes from")
    return table


def names() -> tuple[str, ...]:
    """Return the names of all tables."""
    return tuple(sorted(entry.name[:-5] for entry in files(__name__).iterdir() if entry.name.endswith(".toml")))
