"""A plain QTc with a wide QRS: QT 460, QRS 160 ms, RR 0.8 s (computed).

The row without a correction for QRS; that it reads too long: Bogossian 2014, Heart Rhythm
11:2273, and Wang 2017 (both found); 120 ms: AHA/ACCF/HRS 2009 part III (found, secondary
source).
"""

from __future__ import annotations

import pytest

from tests.app.calculator.sheets import codes, number, reading_of, time, worked
from tests.published.printed import rounds_to

PLAIN_MS = {
    "qtc_bazett": "514.3",
    "qtc_fridericia": "495.5",
    "qtc_framingham": "490.8",
    "qtc_hodges": "486.3",
}


@pytest.mark.parametrize("key", PLAIN_MS)
def test_plain_values_with_their_caution(key: str) -> None:
    reading = reading_of(
        time("rr", 20.0), time("qt", 11.5, at_mm=(8.0, 40.0)), time("qrs", 4.0, at_mm=(8.0, 50.0))
    )
    value = worked(reading, key)
    assert rounds_to(number(value), PLAIN_MS[key])
    assert "wide_qrs_qtc" in codes(value)
