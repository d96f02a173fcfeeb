"""P, PR, QRS and QT from marks."""

from __future__ import annotations

import pytest

from app.calculator import work_out
from tests.app.calculator.sheets import (
    calibration,
    codes,
    number,
    reading_of,
    rr_chain,
    text_of,
    time,
    worked,
)

INTERVALS = [("p_duration", 2.5), ("pr", 4.0), ("qrs", 2.5), ("qt", 10.0)]


@pytest.mark.parametrize(("key", "width_mm"), INTERVALS)
def test_an_interval_of_two_beats(key: str, width_mm: float) -> None:
    reading = reading_of(time(key, width_mm), time(key, width_mm + 0.5, beat=2, at_mm=(60.0, 20.0)))
    value = worked(reading, key)
    assert number(value) == pytest.approx(40.0 * (width_mm + 0.25))
    assert (value.unit, value.n, value.caliper_ids) == ("ms", 2, (1, 2))
    assert value.spread == pytest.approx(20.0 / 2.0**0.5)
    assert value.method == "width in mm / 25 mm/s, mean of 2 beats in lead II"
    assert "found" in value.source or "from memory" in value.source
    assert codes(value) == {"single_lead_interval"} | ({"qt_method"} if key == "qt" else set())


def test_an_interval_of_three_beats_is_no_surer_than_they_agree() -> None:
    widths_mm = (9.0, 10.0, 11.0)
    beats = [time("qt", w, beat=n, at_mm=(20.0 * n, 20.0)) for n, w in enumerate(widths_mm, 1)]
    value = worked(reading_of(*beats), "qt")
    assert value.spread == pytest.approx(40.0)
    assert value.plus_minus == pytest.approx(2.0 * 40.0 / 3.0**0.5)


@pytest.mark.parametrize(("key", "width_mm"), INTERVALS)
def test_one_beat_says_so(key: str, width_mm: float) -> None:
    value = worked(reading_of(time(key, width_mm)), key)
    assert text_of(value, "single_beat") == "From one beat only."
    assert value.spread is None


def test_repeats_are_counted_in_the_method() -> None:
    value = worked(reading_of(*(time("qrs", width) for width in (2.4, 2.5, 2.6))), "qrs")
    assert value.method == "width in mm / 25 mm/s, one beat in lead II, 3 placings"
    assert value.n == 1


def test_without_a_lead_the_missing_lead_is_said_instead() -> None:
    value = worked(reading_of(time("qrs", 2.5, lead=None)), "qrs", None)
    assert "no_lead" in codes(value)
    assert "single_lead_interval" not in codes(value)
    assert value.method.endswith("one beat in a lead not named")


def test_an_interval_refused() -> None:
    value = worked(reading_of(time("pr", 0.0)), "pr")
    assert (value.value, value.plus_minus, value.spread, value.caliper_ids) == (
        *(None, None, None),
        (1,),
    )
    assert value.refusal == (
        "PR in lead II, beat 1, has both legs at the same place: move one of them."
    )


@pytest.mark.parametrize(
    ("width_mm", "is_said"), [(2.97, False), (2.99, True), (3.0, False), (3.03, False)]
)
def test_a_qrs_rounded_onto_120(width_mm: float, is_said: bool) -> None:
    """119.6 ± 8 ms is shown as 120 ± 8 ms."""
    value = worked(reading_of(time("qrs", width_mm)), "qrs")
    assert ("rounding" in codes(value)) == is_said


def test_only_qrs_has_a_limit_of_its_own() -> None:
    value = worked(reading_of(time("pr", 2.99)), "pr")
    assert "rounding" not in codes(value)


@pytest.mark.parametrize(("qt_mm", "disagrees"), [(19.0, False), (19.8, True), (21.0, True)])
def test_a_qt_as_long_as_the_rr(qt_mm: float, disagrees: bool) -> None:
    """RR is 20 mm; 0.2 mm is less than the ± of their difference."""
    reading = reading_of(*rr_chain([20.0]), time("qt", qt_mm))
    value = worked(reading, "qt")
    assert number(value) == pytest.approx(40.0 * qt_mm)
    assert ("marks_disagree" in codes(value)) == disagrees
    if disagrees:
        assert text_of(value, "marks_disagree").startswith("QT in lead II was marked as long")


def test_a_qt_without_a_usable_rr_is_not_compared() -> None:
    for others in ([], [time("rr", 0.0)]):
        reading = reading_of(time("qt", 21.0, at_mm=(8.0, 40.0)), *others)
        assert "marks_disagree" not in codes(worked(reading, "qt"))


def test_the_speed_is_named_and_doubted() -> None:
    reading = reading_of(time("qrs", 5.0), settings=calibration(50.0, confirmed=False))
    value = worked(reading, "qrs")
    assert number(value) == pytest.approx(100.0)
    assert "50 mm/s" in value.method
    assert "speed_unconfirmed" in codes(value)
    assert "gain_unconfirmed" not in codes(value)


def test_no_marks_no_values() -> None:
    assert work_out(reading_of()) == []
