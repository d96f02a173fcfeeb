"""Rate from large boxes of one RR.

Sources: two teaching texts, 25 mm/s: 300 / large box, 1500 / small box, the sequence 300 150
100 75 60 50 (found, secondary source); 50 mm/s: 600 / large, 3000 / small (computed).
"""

from __future__ import annotations

import pytest

from tests.app.calculator.sheets import calibration, number, reading_of, time, worked

# Large boxes, rate at 25 mm/s, rate at 50 mm/s.
BOXES = [
    (1, 300.0, 600.0),
    (2, 150.0, 300.0),
    (3, 100.0, 200.0),
    (4, 75.0, 150.0),
    (5, 60.0, 120.0),
    (6, 50.0, 100.0),
]


@pytest.mark.parametrize(("boxes", "at_25", "at_50"), BOXES)
def test_large_boxes(boxes: int, at_25: float, at_50: float) -> None:
    for speed, printed in ((25.0, at_25), (50.0, at_50)):
        reading = reading_of(time("rr", 5.0 * boxes), settings=calibration(speed))
        assert number(worked(reading, "rate")) == pytest.approx(printed, rel=1e-12)


@pytest.mark.parametrize(("speed", "constant"), [(25.0, 1500.0), (50.0, 3000.0)])
@pytest.mark.parametrize("small_boxes", [5, 12, 20, 37])
def test_small_boxes(speed: float, constant: float, small_boxes: int) -> None:
    reading = reading_of(time("rr", float(small_boxes)), settings=calibration(speed))
    assert number(worked(reading, "rate")) == pytest.approx(constant / small_boxes, rel=1e-12)
