"""Panning a marked page keeps at least half the frame rate of a bare view."""

from __future__ import annotations

import pytest

from tests.bench.bench_canvas import measure_panning
from tests.bench.screen import xvfb_is_there


@pytest.mark.benchmark
@pytest.mark.skipif(not xvfb_is_there(), reason="needs Xvfb: apt-get install xvfb")
def test_panning_keeps_half_the_frame_rate_of_a_bare_view() -> None:
    panning, whole_frames = measure_panning()
    assert panning.ratio >= 0.5
    assert whole_frames.ratio >= 0.5
