"""The window shows its first picture not much later than a bare viewer does."""

from __future__ import annotations

import shutil

import pytest

from tests.bench.bench_startup import measure_startup


@pytest.mark.benchmark
@pytest.mark.skipif(shutil.which("Xvfb") is None, reason="needs Xvfb: apt-get install xvfb")
def test_the_first_picture_comes_within_two_and_a_half_times_a_bare_viewer_s() -> None:
    assert measure_startup().ratio <= 2.5
