"""The axis from marks: cautions and refusals. The numbers are in tests/published."""

from __future__ import annotations

import math

import pytest

from app.calculator import Value, work_out
from app.calculator.axis import AUGMENTED, frontal_axis_deg, small_vector
from app.reading import Caliper
from tests.app.calculator.sheets import (
    PX_PER_MM,
    calibration,
    codes,
    estimate,
    exact_map,
    height,
    number,
    reading_of,
    text_of,
    worked,
)


def net(lead: str, net_mm: float, *, beat: int = 1) -> list[Caliper]:
    """Q, R and S that leave a net height."""
    y_mm = {"I": 60.0, "aVF": 140.0}[lead] + 3.0 * beat
    parts = {
        "q_height": -1.0,
        "r_height": max(net_mm, 0.0) + 3.0,
        "s_height": min(net_mm, 0.0) - 2.0,
    }
    return [
        height(key, part, lead=lead, beat=beat, at_mm=(8.0, y_mm)) for key, part in parts.items()
    ]


def axis(lead_i_mm: float, lead_avf_mm: float, gain: float = 10.0) -> Value:
    reading = reading_of(
        *net("I", lead_i_mm),
        *net("aVF", lead_avf_mm),
        settings=calibration(gain_mm_per_mv=gain),
    )
    return worked(reading, "qrs_axis", None)


def test_an_ordinary_axis() -> None:
    value = axis(10.0, 5.0)
    assert number(value) == pytest.approx(30.0)
    assert (value.unit, value.n, value.lead) == ("deg", 1, None)
    assert value.caliper_ids == (1, 2, 3, 4, 5, 6)
    assert codes(value) == {"single_beat"}
    assert "I and aVF" in value.method


@pytest.mark.parametrize("lead_avf", [0.0, -0.0])
def test_straight_left_is_180_and_never_minus_180(lead_avf: float) -> None:
    assert frontal_axis_deg(-5.0, lead_avf) == 180.0


def test_two_beats_in_both_leads() -> None:
    marks = [mark for beat in (1, 2) for lead in ("I", "aVF") for mark in net(lead, 8, beat=beat)]
    value = worked(reading_of(*marks), "qrs_axis", None)
    assert value.n == 2
    assert "single_beat" not in codes(value)


@pytest.mark.parametrize(
    ("size_mm", "text"),
    [
        (5.31, None),
        (5.3, "Net QRS 5.3 ± 0.3 mm is too close to call against 5 mm, "),
        (5.0, "Net QRS 5.0 ± 0.3 mm is too close to call against 5 mm, "),
        (4.7, "Net QRS 4.7 ± 0.3 mm is too close to call against 5 mm, "),
        (4.69, "Small net QRS (4.7 mm): the angle is hardly determined."),
    ],
)
def test_a_small_vector(size_mm: float, text: str | None) -> None:
    found = [caution.text for caution in small_vector(estimate(size_mm, 0.3 + 1e-9))]
    assert len(found) == (0 if text is None else 1)
    assert text is None or found[0].startswith(text)


@pytest.mark.parametrize("gain", [5.0, 10.0, 20.0])
def test_the_vector_is_measured_on_the_paper(gain: float) -> None:
    """An error of a mark turns the axis by its share of the millimetres, at any gain."""
    assert "axis_small_vector" in codes(axis(3.0, 2.0, gain))
    assert "axis_small_vector" not in codes(axis(9.0, 2.0, gain))


def test_parts_not_marked_are_said_for_each_lead() -> None:
    reading = reading_of(height("r_height", 9.0), *net("aVF", 5.0))
    value = worked(reading, "qrs_axis", None)
    assert text_of(value, "one_sided_deflection") == "Q and S not marked in lead I: taken as none."
    both = reading_of(height("r_height", 9.0), height("r_height", 5.0, lead="aVF"))
    lines = [caution.text for caution in worked(both, "qrs_axis", None).cautions]
    assert "Q and S not marked in lead aVF: taken as none." in lines


def test_without_marks_in_i_or_avf_there_is_no_axis_at_all() -> None:
    values = work_out(reading_of(height("r_height", 9.0, lead="V1")))
    assert "qrs_axis" not in {value.key for value in values}


@pytest.mark.parametrize(("marked", "missing"), [("I", "aVF"), ("aVF", "I")])
def test_both_leads_are_needed(marked: str, missing: str) -> None:
    value = worked(reading_of(*net(marked, 5.0)), "qrs_axis", None)
    assert (value.value, value.plus_minus, value.n) == (None, None, 0)
    assert value.refusal == (
        f"Mark the QRS heights in lead {missing} too: the axis needs I and aVF."
    )
    assert value.caliper_ids == (1, 2, 3)


def test_a_lead_that_was_refused() -> None:
    reading = reading_of(*net("I", 5.0), height("r_height", -5.0, lead="aVF"))
    value = worked(reading, "qrs_axis", None)
    assert value.value is None
    assert value.refusal.startswith("R height in lead aVF, beat 1, ends below its baseline")


@pytest.mark.parametrize(
    ("lead_i_mm", "lead_avf_mm", "is_refused"),
    [(0.0, 0.0, True), (0.25, 0.0, True), (0.0, 0.25, True), (2.0, 0.0, False), (0.0, 2.0, False)],
)
def test_a_vector_not_told_from_none(
    lead_i_mm: float, lead_avf_mm: float, is_refused: bool
) -> None:
    value = axis(lead_i_mm, lead_avf_mm)
    assert (value.value is None) == is_refused
    if is_refused:
        assert value.refusal.endswith("the axis is indeterminate.")
    else:
        assert "axis_small_vector" in codes(value)


def test_an_error_across_the_vector_makes_it_indeterminate_too() -> None:
    """Lead I is 0.45 ± 0.2 mm, but aVF, from three marks, may be as much either way."""
    sure = height("r_height", 0.45, at_mm=(8.0, 60.0))
    unsure = [
        height("r_height", 4.0, lead="aVF", at_mm=(8.0, 140.0)),
        height("q_height", -2.0, lead="aVF", at_mm=(8.0, 140.0)),
        height("s_height", -2.0, lead="aVF", at_mm=(8.0, 140.0)),
    ]
    value = worked(reading_of(sure, *unsure), "qrs_axis", None)
    assert value.value is None


def test_the_scale_down_the_paper_does_not_turn_the_axis() -> None:
    """A longer square shrinks both leads alike."""
    marks = [*net("I", 8.0), *net("aVF", 6.0)]
    sure = worked(reading_of(*marks), "qrs_axis", None)
    unsure_map = exact_map(step_variance_px2=0.1**2)
    unsure = worked(reading_of(*marks, sheet_map=unsure_map), "qrs_axis", None)
    assert unsure.plus_minus == pytest.approx(sure.plus_minus, rel=1e-6)
    net_sure = worked(reading_of(*marks), "net_qrs", "I")
    net_unsure = worked(reading_of(*marks, sheet_map=unsure_map), "net_qrs", "I")
    assert net_sure.plus_minus is not None
    of_scale_mv = 2.0 * 0.8 * 0.1 / PX_PER_MM
    assert net_unsure.plus_minus == pytest.approx(math.hypot(net_sure.plus_minus, of_scale_mv))


def test_the_factor() -> None:
    assert pytest.approx(1.1547, abs=5e-5) == AUGMENTED
    assert math.isclose(AUGMENTED, 2.0 / math.sqrt(3.0))
