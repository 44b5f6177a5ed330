"""What all tests share."""

import os

from hypothesis import HealthCheck, settings

settings.register_profile("ci", derandomize=True, deadline=None, max_examples=100, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("long", deadline=None, max_examples=3000)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "ci"))
