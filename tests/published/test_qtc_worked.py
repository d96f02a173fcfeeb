"""QTc by four formulas, worked for five rates and three QT (computed from the exact forms).

Sources of the forms, all found in secondary sources: Bazett 1920, Heart 7:353; Fridericia
1920, Acta Med Scand 53:469 (exact third); Sagie 1992 (Framingham), Am J Cardiol 70:797;
Hodges 1983, JACC 1:694.
"""

from __future__ import annotations

import pytest

from app.calculator.qtc import FORMULAS
from tests.app.calculator.sheets import number, reading_of, time, worked
from tests.published.printed import rounds_to

FORMULA_KEYS = ("qtc_bazett", "qtc_fridericia", "qtc_framingham", "qtc_hodges")
# RR s, HR /min, QT ms, Bazett, Fridericia, Framingham, Hodges.
WORKED = [
    (0.5, 120, 360, "509.1", "453.6", "437.0", "465.0"),
    (0.5, 120, 400, "565.7", "504.0", "477.0", "505.0"),
    (0.5, 120, 440, "622.3", "554.4", "517.0", "545.0"),
    (0.6, 100, 360, "464.8", "426.8", "421.6", "430.0"),
    (0.6, 100, 400, "516.4", "474.3", "461.6", "470.0"),
    (0.6, 100, 440, "568.0", "521.7", "501.6", "510.0"),
    (0.75, 80, 360, "415.7", "396.2", "398.5", "395.0"),
    (0.75, 80, 400, "461.9", "440.3", "438.5", "435.0"),
    (0.75, 80, 440, "508.1", "484.3", "478.5", "475.0"),
    (0.8, 75, 360, "402.5", "387.8", "390.8", "386.3"),
    (0.8, 75, 400, "447.2", "430.9", "430.8", "426.3"),
    (0.8, 75, 440, "491.9", "474.0", "470.8", "466.3"),
    (1.2, 50, 360, "328.6", "338.8", "329.2", "342.5"),
    (1.2, 50, 400, "365.1", "376.4", "369.2", "382.5"),
    (1.2, 50, 440, "401.7", "414.1", "409.2", "422.5"),
    (1.0, 60, 360, "360.0", "360.0", "360.0", "360.0"),
    (1.0, 60, 400, "400.0", "400.0", "400.0", "400.0"),
    (1.0, 60, 440, "440.0", "440.0", "440.0", "440.0"),
]
HODGES_EXACT_AT_0_8_S = [(360, 386.25), (400, 426.25), (440, 466.25)]
MM_PER_S = 25.0


@pytest.mark.parametrize("row", WORKED)
def test_the_forms(row: tuple[float, int, int, str, str, str, str]) -> None:
    rr_s, _rate, qt_ms, *printed = row
    for key, text in zip(FORMULA_KEYS, printed, strict=True):
        assert rounds_to(FORMULAS[key].qtc_ms(qt_ms, rr_s), text), key


@pytest.mark.parametrize(("rr_s", "rate", "qt_ms", "b", "f", "s", "h"), WORKED)
def test_from_marks_on_a_sheet(
    rr_s: float, rate: int, qt_ms: int, b: str, f: str, s: str, h: str
) -> None:
    reading = reading_of(
        time("rr", rr_s * MM_PER_S), time("qt", qt_ms / 1000.0 * MM_PER_S, at_mm=(8.0, 40.0))
    )
    assert number(worked(reading, "rate")) == pytest.approx(rate, rel=1e-12)
    for key, printed in zip(FORMULA_KEYS, (b, f, s, h), strict=True):
        assert rounds_to(number(worked(reading, key)), printed), key


@pytest.mark.parametrize(("qt_ms", "exact_ms"), HODGES_EXACT_AT_0_8_S)
def test_hodges_is_exact_at_0_8_s(qt_ms: int, exact_ms: float) -> None:
    reading = reading_of(time("rr", 20.0), time("qt", qt_ms / 40.0, at_mm=(8.0, 40.0)))
    assert number(worked(reading, "qtc_hodges")) == pytest.approx(exact_ms, abs=1e-9)
