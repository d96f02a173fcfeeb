"""Panning a marked page keeps at least half the frame rate of a bare view."""

from __future__ import annotations

import pytest

from tests.bench.bench_canvas import measure_panning, x_server_is_there


@pytest.mark.benchmark
@pytest.mark.skipif(not x_server_is_there(), reason="needs Xvfb: apt-get install xvfb")
def test_panning_keeps_half_the_frame_rate_of_a_bare_view() -> None:
    measured = measure_panning()
    assert measured.ratio >= 0.5
    assert measured.whole_ratio >= 0.5
