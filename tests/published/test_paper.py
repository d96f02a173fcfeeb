"""What a box of ECG paper is worth.

Sources: 25 and 50 mm/s, 5 and 10 mm/mV: teaching texts and AHA/ACC/HRS 2007 part I (found,
secondary source); the other speeds and gains: IEC 60601-2-25, practice (from memory). Box
values and rate constants: computed.
"""

from __future__ import annotations

import pytest

from app.calculator import measure_caliper
from app.reading import CaliperKind
from tests.app.calculator.sheets import (
    between,
    calibration,
    height,
    number,
    reading_of,
    time,
    worked,
)

# Speed mm/s, small box ms, large box ms, rate constant small, large, 6 s in mm, 10 s in mm.
SPEEDS = [
    (10.0, 100.0, 500.0, 600.0, 120.0, 60.0, 100.0),
    (12.5, 80.0, 400.0, 750.0, 150.0, 75.0, 125.0),
    (25.0, 40.0, 200.0, 1500.0, 300.0, 150.0, 250.0),
    (50.0, 20.0, 100.0, 3000.0, 600.0, 300.0, 500.0),
    (100.0, 10.0, 50.0, 6000.0, 1200.0, 600.0, 1000.0),
]
# Gain mm/mV, small box mV, large box mV.
GAINS = [(2.5, 0.4, 2.0), (5.0, 0.2, 1.0), (10.0, 0.1, 0.5), (20.0, 0.05, 0.25)]


@pytest.mark.parametrize("row", SPEEDS)
def test_boxes_in_time(row: tuple[float, ...]) -> None:
    speed, small_ms, large_ms, per_small, per_large, six_s_mm, ten_s_mm = row
    settings = calibration(speed)
    for width_mm, printed_ms in ((1.0, small_ms), (5.0, large_ms)):
        (value,) = measure_caliper(reading_of(settings=settings), time(None, width_mm))
        assert number(value) == pytest.approx(printed_ms, rel=1e-12)
    for width_mm, printed in ((10.0, per_small / 10.0), (20.0, per_large / 4.0)):
        reading = reading_of(time("rr", width_mm), settings=settings)
        assert number(worked(reading, "rate")) == pytest.approx(printed, rel=1e-12)
    # A tenth of the strip, so that the fastest paper fits the sheet.
    for strip_mm, seconds in ((six_s_mm, 6.0), (ten_s_mm, 10.0)):
        (value,) = measure_caliper(reading_of(settings=settings), time(None, strip_mm / 10.0))
        assert number(value) == pytest.approx(100.0 * seconds, rel=1e-12)


@pytest.mark.parametrize(("gain", "small_mv", "large_mv"), GAINS)
def test_boxes_in_height(gain: float, small_mv: float, large_mv: float) -> None:
    settings = calibration(gain_mm_per_mv=gain)
    for height_mm, printed_mv in ((1.0, small_mv), (5.0, large_mv)):
        reading = reading_of(height("r_height", height_mm), settings=settings)
        assert number(worked(reading, "r_height", "I")) == pytest.approx(printed_mv, rel=1e-12)


def test_the_calibration_pulse() -> None:
    """1 mV is 10 mm high, 0.2 s is 5 mm wide (found, secondary source)."""
    reading = reading_of()
    pulse = between(None, (8.0, 40.0), (13.0, 30.0), kind=CaliperKind.TIME)
    (width,) = measure_caliper(reading, pulse)
    upright = between(None, (8.0, 40.0), (13.0, 30.0), kind=CaliperKind.HEIGHT)
    (tall,) = measure_caliper(reading, upright)
    assert number(width) == pytest.approx(200.0)
    assert number(tall) == pytest.approx(1.0)
    assert (width.unit, tall.unit) == ("ms", "mV")
