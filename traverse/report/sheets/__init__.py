"""The pages of the workbook, one file each, found by scanning this folder and put in the order they state."""

from __future__ import annotations

import pkgutil
from functools import lru_cache
from importlib import import_module
from typing import TYPE_CHECKING, Any

from traverse.report.sheets._view import View

if TYPE_CHECKING:
    from traverse.report.spec import SheetSpec
    from traverse.result import Reduction


@lru_cache(maxsize=1)
def pages() -> tuple[Any, ...]:
    """Return the page modules in order; each has ORDER, TITLE and sheets(view)."""
    names = (entry.name for entry in pkgutil.iter_modules(__path__) if entry.name[0] != "_")
    return tuple(sorted((import_module(f"{__name__}.{name}") for name in names), key=lambda page: page.ORDER))


def reduction(result: Reduction) -> list[SheetSpec]:
    """Return the specifications of all pages for a reduction."""
    view = View(result=result)
    return [spec for page in pages() for spec in page.sheets(view)]
