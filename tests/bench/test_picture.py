"""Opening a JPEG costs little more than decoding it."""

from __future__ import annotations

import pytest

from tests.bench.bench_picture import measure_opening


@pytest.mark.benchmark
def test_opening_a_jpeg_takes_at_most_a_fifth_more_than_its_decoder() -> None:
    assert measure_opening().ratio <= 1.2
