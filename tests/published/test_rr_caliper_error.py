"""Effect of a 0.5 mm caliper error on one RR (computed).

The true rate, and the rates read with an RR 0.5 mm too long and too short.
"""

from __future__ import annotations

import pytest

from tests.app.calculator.sheets import calibration, number, reading_of, time, worked
from tests.published.printed import rounds_to

TRUE_PER_MIN = [40, 60, 75, 100, 150, 200]
READ_PER_MIN = {
    25.0: [
        ("39.5", "40.5"),
        ("58.8", "61.2"),
        ("73.2", "76.9"),
        ("96.8", "103.4"),
        ("142.9", "157.9"),
        ("187.5", "214.3"),
    ],
    50.0: [
        ("39.7", "40.3"),
        ("59.4", "60.6"),
        ("74.1", "75.9"),
        ("98.4", "101.7"),
        ("146.3", "153.8"),
        ("193.5", "206.9"),
    ],
}


@pytest.mark.parametrize("speed", [25.0, 50.0])
@pytest.mark.parametrize("column", range(len(TRUE_PER_MIN)))
def test_half_a_millimetre(speed: float, column: int) -> None:
    rr_mm = 60.0 / TRUE_PER_MIN[column] * speed
    for printed, error_mm in zip(READ_PER_MIN[speed][column], (0.5, -0.5), strict=True):
        reading = reading_of(time("rr", rr_mm + error_mm), settings=calibration(speed))
        assert rounds_to(number(worked(reading, "rate")), printed)
