"""What all tests share."""

import os
import shutil
import sys
from pathlib import Path

import pytest
from hypothesis import HealthCheck, settings

ROOT = Path(__file__).parents[1]

settings.register_profile("ci", derandomize=True, deadline=None, max_examples=100, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("long", deadline=None, max_examples=3000)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "ci"))


def pytest_configure():
    """Forget what was computed before a mutant was switched on: otherwise a remembered result would hide it (see tests/mutation)."""
    if os.environ.get("MUTANT_UNDER_TEST"):
        for name, module in list(sys.modules.items()):
            if name.partition(".")[0] == "traverse":
                for thing in vars(module).values():
                    if hasattr(thing, "cache_clear"):
                        thing.cache_clear()


def pytest_collection_modifyitems(config, items):
    """Benchmarks compare times: they run only when asked for by their mark or their folder, never beside other tests."""
    asked = "benchmark" in (config.getoption("-m") or "") or any("benchmarks" in str(argument) for argument in config.args)
    if not asked:
        config.hook.pytest_deselected(items=[item for item in items if item.get_closest_marker("benchmark")])
        items[:] = [item for item in items if not item.get_closest_marker("benchmark")]


def pytest_runtest_setup(item):
    """Skip what needs a spreadsheet program where there is none; fail instead where TRAVERSE_OFFICE=required."""
    if item.get_closest_marker("office"):
        from tests.support import office

        office.program()


@pytest.fixture
def examples(tmp_path, monkeypatch):
    """Copy the example jobs into a folder of their own and work there."""
    folder = tmp_path / "example_data"
    shutil.copytree(ROOT / "example_data", folder)
    monkeypatch.chdir(folder)
    return folder
