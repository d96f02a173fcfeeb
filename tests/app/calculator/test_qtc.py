"""QTc from marks: slopes, cautions, refusals. The numbers are in tests/published."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator import work_out
from app.calculator.qtc import FORMULAS
from app.calculator.spans import NO_SCALE
from app.reading import Caliper
from tests.app.calculator.sheets import (
    calibration,
    codes,
    estimate,
    number,
    reading_of,
    rr_chain,
    text_of,
    time,
    worked,
)

KEYS = tuple(FORMULAS)
BELOW_MM = (8.0, 60.0)


def qt(width_mm: float = 10.0, *, lead: str | None = "II", beat: int = 1) -> Caliper:
    return time("qt", width_mm, lead=lead, beat=beat, at_mm=(8.0 + 30.0 * beat, 60.0))


@pytest.mark.parametrize("key", KEYS)
@pytest.mark.parametrize(("qt_ms", "rr_s"), [(360.0, 0.5), (400.0, 0.8), (440.0, 1.2)])
def test_slopes_are_those_of_the_formula(key: str, qt_ms: float, rr_s: float) -> None:
    formula, step = FORMULAS[key], 1e-5
    per_qt = (formula.qtc_ms(qt_ms + step, rr_s) - formula.qtc_ms(qt_ms - step, rr_s)) / (2 * step)
    per_rr = (formula.qtc_ms(qt_ms, rr_s + step) - formula.qtc_ms(qt_ms, rr_s - step)) / (2 * step)
    assert formula.per_qt(qt_ms, rr_s) == pytest.approx(per_qt, rel=1e-6)
    assert formula.per_rr(qt_ms, rr_s) == pytest.approx(per_rr, rel=1e-6)


def test_errors_of_qt_and_rr_go_in_with_their_signs() -> None:
    """Bazett at RR 1 s: +1 ms of QT is +1 ms, +1 ms of RR is -0.2 ms at QT 400 ms."""
    shared = FORMULAS["qtc_bazett"].correct(estimate(400.0, 2.0), estimate(1000.0, 2.0)).shared
    assert shared[2] == pytest.approx(1.0 - 0.2)


@pytest.mark.parametrize("key", KEYS)
def test_every_lead_with_a_qt_has_its_qtc_by_the_rhythm_line(key: str) -> None:
    reading = reading_of(
        *rr_chain([20.0, 20.0]), *rr_chain([25.0], lead="V1", y_mm=90.0), qt(), qt(11.0, lead="V1")
    )
    for lead, width_mm in (("II", 10.0), ("V1", 11.0)):
        value = worked(reading, key, lead)
        expected = FORMULAS[key].qtc_ms(40.0 * width_mm, 0.8)
        assert number(value) == pytest.approx(expected)
        assert (value.unit, value.n, value.lead, value.spread) == ("ms", 1, lead, None)
        assert value.caliper_ids[1:] == (1, 2)
        assert "RR 0.800 s (mean of 2 intervals in lead II)" in value.method
        assert value.method.startswith(FORMULAS[key].words)


def test_cautions_of_an_ordinary_qtc() -> None:
    reading = reading_of(*rr_chain([20.0, 20.0]), qt(), qt(beat=2), time("qrs", 2.0))
    for key in KEYS:
        assert codes(worked(reading, key)) == {"single_lead_interval", "qt_method"}


@pytest.mark.parametrize("key", KEYS)
def test_cautions_on_what_it_rests_on(key: str) -> None:
    reading = reading_of(
        *rr_chain([12.0, 15.0]), qt(8.0, lead=None), settings=calibration(confirmed=False)
    )
    found = codes(worked(reading, key, None))
    assert found >= {
        "speed_unconfirmed",
        "no_lead",
        "qrs_not_measured_for_qtc",
        "irregular_rhythm",
        "few_beats_irregular",
        "single_beat",
        "qt_method",
    }
    assert ("bazett_outside_60_100" in found) == (key == "qtc_bazett")


def test_each_formula_has_its_own_500() -> None:
    """RR 0.6 s, QT 400 ms: Bazett 516.4, Fridericia 474.3 (computed)."""
    reading = reading_of(*rr_chain([15.0, 15.0]), qt(), time("qrs", 2.0))
    said = {key: "qtc_500" in codes(worked(reading, key)) for key in KEYS}
    assert said == {
        "qtc_bazett": True,
        "qtc_fridericia": False,
        "qtc_framingham": False,
        "qtc_hodges": False,
    }


def test_a_qtc_rounded_onto_500() -> None:
    """RR 1 s: QTc is QT, 499.6 ms."""
    reading = reading_of(*rr_chain([25.0]), qt(12.49))
    value = worked(reading, "qtc_hodges")
    assert text_of(value, "rounding") == "Shown rounded; worked out it is 499.60, below 500."
    assert text_of(value, "qtc_500").startswith("QTc is too close to call")


def test_single_beats_are_counted_on_both_sides() -> None:
    one = reading_of(*rr_chain([20.0]), qt())
    assert text_of(worked(one, "qtc_bazett"), "single_beat") == (
        "From one beat and one RR interval only."
    )
    rr_only = reading_of(*rr_chain([20.0]), qt(), qt(beat=2))
    assert text_of(worked(rr_only, "qtc_bazett"), "single_beat") == "From one RR interval only."


@pytest.mark.parametrize("key", KEYS)
def test_no_rr_no_qtc(key: str) -> None:
    value = worked(reading_of(qt()), key)
    assert (value.value, value.plus_minus, value.n) == (None, None, 0)
    assert value.refusal == "Mark an RR interval: QTc needs the rate."
    assert codes(value) == {"no_rr_for_qtc"}
    assert value.caliper_ids == (1,)


@pytest.mark.parametrize("key", KEYS)
def test_an_rr_that_was_refused(key: str) -> None:
    value = worked(reading_of(time("rr", 0.0), qt()), key)
    assert value.value is None
    assert value.refusal.startswith("RR in lead II, beat 1, has both legs")
    assert codes(value) == {"no_rr_for_qtc"}


@pytest.mark.parametrize("key", KEYS)
def test_a_qt_that_was_refused(key: str) -> None:
    value = worked(reading_of(*rr_chain([20.0]), qt(0.0)), key)
    assert value.value is None
    assert value.refusal.startswith("QT in lead II, beat 1, has both legs")
    assert codes(value) == set()


@pytest.mark.parametrize(("qt_mm", "is_refused"), [(19.0, False), (19.8, True), (22.0, True)])
def test_a_qt_as_long_as_the_rr(qt_mm: float, is_refused: bool) -> None:
    value = worked(reading_of(*rr_chain([20.0]), qt(qt_mm)), "qtc_bazett")
    assert (value.value is None) == is_refused
    if is_refused:
        assert value.refusal == "QT leaves no room in the mean RR: check both first."
        assert codes(value) == {"marks_disagree"}


@pytest.mark.parametrize(("rr_mm", "is_refused"), [(89.0, False), (90.0, True)])
def test_a_formula_that_gives_less_than_nothing(rr_mm: float, is_refused: bool) -> None:
    """Framingham with QT 400 ms reaches 0 at RR 1 + 400/154 = 3.597 s (89.9 mm)."""
    value = worked(reading_of(*rr_chain([rr_mm]), qt()), "qtc_framingham")
    assert (value.value is None) == is_refused
    if is_refused:
        assert value.refusal == "This formula has no meaning at a rate of 17/min."
    else:
        assert "implausible_rate" in codes(value)


def test_without_a_map() -> None:
    reading = replace(reading_of(*rr_chain([20.0]), qt()), sheet_map=None)
    assert {value.refusal for value in work_out(reading)} == {NO_SCALE}
