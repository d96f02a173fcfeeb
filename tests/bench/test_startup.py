"""The window shows its first picture not much later than a bare viewer does."""

from __future__ import annotations

import pytest

from tests.bench.bench_startup import measure_startup
from tests.bench.screen import xvfb_is_there


@pytest.mark.benchmark
@pytest.mark.skipif(not xvfb_is_there(), reason="needs Xvfb: apt-get install xvfb")
def test_the_first_picture_comes_within_two_and_a_half_times_a_bare_viewer_s() -> None:
    assert measure_startup().ratio <= 2.5
