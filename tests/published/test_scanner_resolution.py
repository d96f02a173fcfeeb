"""What one pixel is worth at a scanner's resolution (computed: mm per px is 25.4 / dpi)."""

from __future__ import annotations

import pytest

from app.calculator import measure_caliper
from tests.app.calculator.sheets import (
    calibration,
    codes,
    exact_map,
    height,
    reading_of,
    text_of,
    time,
)

# dpi, px per mm, ms/px at 25 mm/s, ms/px at 50 mm/s, µV/px at 10 mm/mV.
RESOLUTIONS = [
    (72, 2.83, 14.11, 7.056, 35.28),
    (96, 3.78, 10.58, 5.292, 26.46),
    (150, 5.91, 6.773, 3.387, 16.93),
    (200, 7.87, 5.080, 2.540, 12.70),
    (300, 11.81, 3.387, 1.693, 8.47),
]


@pytest.mark.parametrize("row", RESOLUTIONS)
def test_a_coarse_picture_says_what_a_pixel_is(row: tuple[float, ...]) -> None:
    dpi, px_per_mm, at_25_ms, at_50_ms, microvolt = row
    sheet_map = exact_map(dpi / 25.4, dpi / 25.4)
    assert sheet_map.x_pitch_px_per_mm == pytest.approx(px_per_mm, abs=0.005)
    marks = {"ms": time(None, 5.0), "mV": height("r_height", 5.0)}
    for speed, unit, pixel in (
        (25.0, "ms", at_25_ms),
        (50.0, "ms", at_50_ms),
        (25.0, "mV", microvolt / 1000.0),
    ):
        reading = reading_of(sheet_map=sheet_map, settings=calibration(speed))
        (value,) = measure_caliper(reading, marks[unit])
        assert ("coarse_picture" in codes(value)) == (dpi < 150)
        if dpi < 150:
            assert text_of(value, "coarse_picture") == (
                f"Coarse picture: one pixel is {pixel:.3g} {unit}."
            )
