"""What all tests share."""

import os

from hypothesis import HealthCheck, settings

settings.register_profile("ci", derandomize=True, deadline=None, max_examples=100, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("long", deadline=None, max_examples=3000)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "ci"))


def pytest_collection_modifyitems(config, items):
    """Benchmarks compare times: they run only when asked for by their mark or their folder, never beside other tests."""
    asked = "benchmark" in (config.getoption("-m") or "") or any("benchmarks" in str(argument) for argument in config.args)
    if not asked:
        config.hook.pytest_deselected(items=[item for item in items if item.get_closest_marker("benchmark")])
        items[:] = [item for item in items if not item.get_closest_marker("benchmark")]
