"""Test methods, one file each, found by scanning this folder."""

from __future__ import annotations

import pkgutil
from functools import lru_cache
from importlib import import_module

from traverse.errors import JobError, nearest
from traverse.methods._base import Constants, Method

__all__ = ["Constants", "Method", "get", "names"]


@lru_cache(maxsize=1)
def _all() -> dict[str, Method]:
    modules = (import_module(f"{__name__}.{entry.name}") for entry in pkgutil.iter_modules(__path__) if entry.name[0] != "_")
    methods: list[Method] = [module.METHOD for module in modules]
    return {method.id: method for method in sorted(methods, key=lambda method: method.id)}


def names() -> tuple[str, ...]:
    """Return the ids of all methods."""
    return tuple(_all())


def get(name: str, where: str = "[job] method") -> Method:
    """Return the method of that id.

    Raises
    ------
    JobError
        If there is no such method; the message lists those there are.
    """
    methods = _all()
    if name not in methods:
        guess = nearest(name, methods)
        raise JobError(
            f"unknown method {name!r}", where=where, expected=f"one of {', '.join(methods)}",
            how=f'perhaps method = "{guess}"' if guess else "",
        )
    return methods[name]
