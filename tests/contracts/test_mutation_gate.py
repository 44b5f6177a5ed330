"""The gate on mutation testing: it must be able to close."""

import pytest

from tests.mutation import run

NONE = dict.fromkeys(("killed", "survived", "no_tests", "timeout", "segfault", "suspicious", "total"), 0)


@pytest.mark.parametrize(("counts", "passed"), [
    ({"killed": 90, "survived": 10}, True),
    ({"killed": 89, "timeout": 1, "survived": 10}, True),
    ({"killed": 89, "survived": 11}, False),
    ({"killed": 89, "survived": 1, "no_tests": 10}, False),
    ({"killed": 90, "suspicious": 11}, False),
    ({"killed": 50}, False),
    ({}, False),
])
def test_the_gate(counts, passed):
    stats = NONE | counts
    stats["total"] = sum(counts.values()) + 7
    done, line = run.verdict(stats, 0.9, least=100)
    assert done is passed
    assert "7 not judged" in line


def test_the_sample_is_the_same_each_time_and_of_its_size():
    names = [f"traverse.chain.x_f__mutmut_{number}" for number in range(4000)]
    chosen = run.sample(names, 4)
    assert chosen == run.sample(names[::-1], 4)
    assert len(chosen) == pytest.approx(1000, rel=0.1)
    assert run.sample(names, 1) == sorted(names)
