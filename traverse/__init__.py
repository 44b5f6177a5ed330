"""Reduce pitot-tube traverses of ducts and stacks to a flow that holds up.

>>> import traverse
>>> job = traverse.load("example_data/supply_duct.toml")  # doctest: +SKIP
>>> result = traverse.reduce(job)  # doctest: +SKIP
>>> result.summary["actual_flow"].measured.value  # m3/s  # doctest: +SKIP

The public names are loaded on first use, so that importing the package costs nothing.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from traverse._version import __version__

if TYPE_CHECKING:
    from traverse.errors import TraverseError
    from traverse.importers import load, load_setup
    from traverse.model import Job, Setup
    from traverse.planning import Plan, plan
    from traverse.reduction import reduce
    from traverse.result import Measured, Reduction

__all__ = [
    "Job", "Measured", "Plan", "Reduction", "Setup", "TraverseError", "__version__", "load", "load_setup", "plan", "reduce",
]

_HOMES = {
    "TraverseError": "errors", "load": "importers", "load_setup": "importers", "Job": "model", "Setup": "model",
    "plan": "planning", "Plan": "planning", "reduce": "reduction", "Measured": "result", "Reduction": "result",
}


def __getattr__(name: str) -> object:
    if name not in _HOMES:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    from importlib import import_module

    return getattr(import_module(f"{__name__}.{_HOMES[name]}"), name)


def __dir__() -> list[str]:
    return sorted(__all__)
