"""Frontal axes worked from net QRS in I and aVF (computed, mm).

Source of the form atan2(2/√3 aVF, I): Novosel 1999 (found). The sum of the augmented leads is
0 in each row. Uncorrected is atan2(aVF, I); its largest error is 4.12° (computed).
"""

from __future__ import annotations

import math

import numpy as np
import pytest

from app.calculator.axis import frontal_axis_deg, vector_size
from app.reading import Caliper
from tests.app.calculator.sheets import calibration, height, number, reading_of, worked
from tests.published.printed import rounds_to

# I, II, III, aVR, aVL, aVF in mm, axis, uncorrected, size mm.
WORKED = [
    ((10, 10, 0, -10, 5, 5), "30.0", "26.6", "11.55"),
    ((6, 11, 5, -8.5, 0.5, 8), "57.0", "53.1", "11.02"),
    ((8, 4, -4, -6, 6, 0), "0.0", "0.0", "8.00"),
    ((8, 2, -6, -5, 7, -2), "-16.1", "-14.0", "8.33"),
    ((5, -4, -9, -0.5, 7, -6.5), "-56.3", "-52.4", "9.02"),
    ((2, 10, 8, -6, -3, 9), "79.1", "77.5", "10.58"),
    ((0, 6, 6, -3, -3, 6), "90.0", "90.0", "6.93"),
    ((-4, 6, 10, -1, -7, 8), "113.4", "116.6", "10.07"),
    ((-6, -4, 2, 5, -4, -1), "-169.1", "-170.5", "6.11"),
    ((-5, -8, -3, 6.5, -1, -5.5), "-128.2", "-132.3", "8.08"),
]


def net_height(lead: str, net_mm: float, y_mm: float) -> list[Caliper]:
    """A Q of 1 mm, an R, and an S of 2 mm or deeper that leave that net height."""
    r_mm = max(net_mm, 0.0) + 3.0
    s_mm = r_mm - 1.0 - net_mm
    parts = {"q_height": -1.0, "r_height": r_mm, "s_height": -s_mm}
    return [height(key, part, lead=lead, at_mm=(8.0, y_mm)) for key, part in parts.items()]


@pytest.mark.parametrize(("leads_mm", "axis", "uncorrected", "size"), WORKED)
def test_the_form(leads_mm: tuple[float, ...], axis: str, uncorrected: str, size: str) -> None:
    lead_i, _ii, _iii, avr, avl, avf = leads_mm
    assert avr + avl + avf == 0.0
    assert rounds_to(frontal_axis_deg(lead_i, avf), axis)
    assert rounds_to(vector_size(lead_i, avf), size)
    assert rounds_to(math.degrees(math.atan2(avf, lead_i)), uncorrected)


@pytest.mark.parametrize("gain", [5.0, 10.0, 20.0])
@pytest.mark.parametrize(("leads_mm", "axis", "_uncorrected", "_size"), WORKED)
def test_from_marks_on_a_sheet(
    leads_mm: tuple[float, ...], axis: str, _uncorrected: str, _size: str, gain: float
) -> None:
    reading = reading_of(
        *net_height("I", leads_mm[0], 60.0),
        *net_height("aVF", leads_mm[5], 120.0),
        settings=calibration(gain_mm_per_mv=gain),
    )
    assert number(worked(reading, "net_qrs", "I")) == pytest.approx(leads_mm[0] / gain, abs=1e-12)
    assert rounds_to(number(worked(reading, "qrs_axis", None)), axis)


def test_what_the_factor_is_worth() -> None:
    """Largest error without it 4.12°, at ±47.1° and ±132.9°; none at 0, ±90, 180 (computed)."""
    true_deg = np.arange(-1800, 1801) / 10.0
    lead_i = np.cos(np.radians(true_deg))
    lead_avf = math.sqrt(3.0) / 2.0 * np.sin(np.radians(true_deg))
    corrected = [frontal_axis_deg(i, f) for i, f in zip(lead_i, lead_avf, strict=True)]
    assert np.allclose(np.cos(np.radians(corrected - true_deg)), 1.0)
    error = np.abs(np.degrees(np.arctan2(lead_avf, lead_i)) - true_deg)
    error = np.minimum(error, 360.0 - error)
    assert rounds_to(float(error.max()), "4.12")
    for start_deg, printed_deg in ((-180, -132.9), (-90, -47.1), (0, 47.1), (90, 132.9)):
        quadrant = np.flatnonzero((true_deg >= start_deg) & (true_deg <= start_deg + 90))
        assert true_deg[quadrant[error[quadrant].argmax()]] == printed_deg
    assert np.allclose(error[np.isin(np.abs(true_deg), (0.0, 90.0, 180.0))], 0.0, atol=1e-9)
