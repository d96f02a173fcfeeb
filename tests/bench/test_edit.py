"""A value follows its caliper at once."""

from __future__ import annotations

import statistics

import pytest

from tests.bench.bench_edit import measure_edits


@pytest.mark.benchmark
def test_a_value_is_shown_within_a_tenth_of_a_second_of_letting_go() -> None:
    assert statistics.median(measure_edits()) <= 100.0
