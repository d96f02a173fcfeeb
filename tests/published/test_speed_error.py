"""A recorder 5 % too fast or too slow, QT 400 ms and RR 0.8 s (computed).

Both times scale. ±5 % is what a recorder may claim under IEC 60601-2-25:2011 (found,
secondary source).
"""

from __future__ import annotations

import pytest

from tests.app.calculator.sheets import calibration, number, reading_of, time, worked
from tests.published.printed import rounds_to

# Formula: true, with times 5 % short, with times 5 % long.
QTC_MS = {
    "qtc_bazett": ("447.2", "435.9", "458.3"),
    "qtc_fridericia": ("430.9", "416.4", "445.1"),
    "qtc_framingham": ("430.8", "417.0", "444.6"),
    "qtc_hodges": ("426.3", "413.2", "440.0"),
}


@pytest.mark.parametrize("key", QTC_MS)
def test_both_times_scale(key: str) -> None:
    for printed, scale in zip(QTC_MS[key], (1.0, 0.95, 1.05), strict=True):
        reading = reading_of(
            time("rr", 20.0),
            time("qt", 10.0, at_mm=(8.0, 40.0)),
            settings=calibration(25.0 / scale),
        )
        assert rounds_to(number(worked(reading, key)), printed)
