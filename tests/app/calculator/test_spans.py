"""Single calipers to ms and mV."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from app.calculator.spans import NO_SCALE, Span, measure_spans
from app.calculator.uncertainty import Axis, leg_error
from app.reading import Caliper, CaliperKind, PicturePoint, Setting
from imaging.bend import Bend
from tests.app.calculator.sheets import (
    PX_PER_MM,
    between,
    calibration,
    exact_map,
    height,
    in_steps,
    reading_of,
    rr_chain,
    time,
)
from tests.bends import bent


def refusal(caliper: Caliper, speed: float = 25.0, gain: float = 10.0) -> str:
    (span,) = measure_spans(reading_of(settings=calibration(speed, gain)), [caliper])
    assert (span.estimate is None) == bool(span.refusal)
    return span.refusal


def test_nothing_is_measured_of_nothing() -> None:
    assert measure_spans(reading_of(), []) == []


def test_without_a_map_each_is_refused() -> None:
    reading = replace(reading_of(), sheet_map=None)
    spans = measure_spans(reading, [time("qrs", 3.0), height("r_height", 5.0)])
    assert [(span.estimate, span.step_mm, span.refusal) for span in spans] == [
        (None, 0.0, NO_SCALE)
    ] * 2
    assert all(span.resolution_share.size == 0 for span in spans)


@pytest.mark.parametrize(
    ("speed", "possible"), [(0.99, False), (1.0, True), (1000.0, True), (1000.1, False)]
)
def test_a_speed_no_recorder_has(speed: float, possible: bool) -> None:
    said = refusal(time("qrs", 3.0), speed=speed)
    assert (said == "") == possible
    assert possible or said == f"cannot be read at {speed:g} mm/s: check the paper speed."


@pytest.mark.parametrize(
    ("gain", "possible"), [(0.09, False), (0.1, True), (1000.0, True), (1000.1, False)]
)
def test_a_gain_no_recorder_has(gain: float, possible: bool) -> None:
    said = refusal(height("r_height", 3.0), gain=gain)
    assert (said == "") == possible
    assert possible or said == f"cannot be read at a gain of {gain:g} mm/mV: check the gain."


@pytest.mark.parametrize(("width_mm", "possible"), [(0.0, False), (0.009, False), (0.011, True)])
def test_both_legs_at_one_place(width_mm: float, possible: bool) -> None:
    said = refusal(time("qrs", width_mm))
    assert (said == "") == possible
    assert possible or said == "has both legs at the same place: move one of them."


def test_a_height_may_be_none() -> None:
    """An isoelectric part is a measurement; a time of nothing is a slip."""
    assert refusal(height("r_height", 0.0)) == ""


def test_a_mark_off_the_picture() -> None:
    off = replace(time("qrs", 3.0), end=PicturePoint(-10.0, 20.0))
    assert refusal(off) == "has a mark off the picture: move it back onto the trace."


def test_a_comb_is_measured_by_its_gaps() -> None:
    comb = between(None, (4.0, 10.0), (64.0, 10.0), kind=CaliperKind.COMB, teeth=4)
    whole = between(None, (4.0, 10.0), (64.0, 10.0), kind=CaliperKind.TIME)
    pitch, span = measure_spans(reading_of(), [comb, whole])
    assert pitch.estimate is not None
    assert span.estimate is not None
    assert pitch.estimate.value == pytest.approx(800.0)
    assert pitch.estimate.sigma == pytest.approx(span.estimate.sigma / 3.0)


def test_the_map_s_scale_is_one_source_and_each_leg_another() -> None:
    """sigma² = (span × relative pitch error)² + 2 leg²."""
    sheet_map = exact_map(scatter_mm=0.03, step_variance_px2=0.01**2)
    span, doubled = measure_spans(
        reading_of(sheet_map=sheet_map), [time("rr", 20.0), time("rr", 40.0, at_mm=(4.0, 50.0))]
    )
    leg_mm = leg_error(sheet_map, Axis.ALONG).sigma_mm
    for measured, width_mm in ((span, 20.0), (doubled, 40.0)):
        assert measured.estimate is not None
        scale_mm = width_mm * 0.01 / 16.0
        expected_ms = 40.0 * math.sqrt(scale_mm**2 + 2.0 * leg_mm**2)
        assert measured.estimate.sigma == pytest.approx(expected_ms, rel=1e-9)
    # Both spans share the scale and no leg.
    assert span.estimate is not None
    assert doubled.estimate is not None
    shared = np.flatnonzero((span.estimate.shared != 0.0) & (doubled.estimate.shared != 0.0))
    assert shared.tolist() == [0]


def sigma_ms(span: Span) -> float:
    assert span.estimate is not None
    return span.estimate.sigma


def test_each_leg_has_the_step_it_was_placed_in() -> None:
    """sigma² = leg² + leg², each with its own step; 40 ms to a millimetre."""
    sheet_map = exact_map(8.0, 4.0, scatter_mm=0.02)
    mark = between("qrs", (4.0, 9.0), (9.0, 9.0))
    (span,) = measure_spans(reading_of(sheet_map=sheet_map), [in_steps(mark, 0.1, 0.3)])
    start, end = (leg_error(sheet_map, Axis.ALONG, step_px) for step_px in (1.6, 4.8))
    assert sigma_ms(span) == pytest.approx(40.0 * math.hypot(start.sigma_mm, end.sigma_mm))
    assert span.step_mm == pytest.approx(4.8 / 8.0)
    expected = [1.0, 1.0, start.resolution_share, end.resolution_share]
    assert span.resolution_share == pytest.approx(expected)


def test_a_height_s_step_is_one_down_the_paper() -> None:
    sheet_map = exact_map(8.0, 4.0)
    (span,) = measure_spans(
        reading_of(sheet_map=sheet_map), [in_steps(height("r_height", 5.0), 0.3, 0.1)]
    )
    start, end = (leg_error(sheet_map, Axis.DOWN, step_px) for step_px in (4.8, 1.6))
    assert span.estimate is not None
    assert span.estimate.sigma == pytest.approx(0.1 * math.hypot(start.sigma_mm, end.sigma_mm))
    assert span.step_mm == pytest.approx(4.8 / 4.0)


def test_a_step_not_known_or_finer_than_a_pixel_changes_nothing() -> None:
    mark = time("qrs", 3.0)
    plain, fine = measure_spans(reading_of(), [mark, in_steps(mark, 0.5 / PX_PER_MM)])
    assert plain.step_mm == 0.0
    assert sigma_ms(fine) == sigma_ms(plain)


def test_a_leg_that_two_spans_share_has_one_error_and_the_coarser_step() -> None:
    first, second = rr_chain([20.0, 21.0])
    spans = measure_spans(reading_of(), [in_steps(first, 0.1, 0.4), in_steps(second, 0.2, 0.1)])
    estimates = [span.estimate for span in spans if span.estimate is not None]
    shared = math.prod(estimate.shared for estimate in estimates)
    leg_ms = 40.0 * leg_error(exact_map(), Axis.ALONG, 0.4 * PX_PER_MM).sigma_mm
    assert np.flatnonzero(shared).tolist() == [3]
    assert shared[3] == pytest.approx(-(leg_ms**2))


def test_a_comb_s_steps_are_divided_by_its_gaps() -> None:
    comb = between(None, (4.0, 10.0), (64.0, 10.0), kind=CaliperKind.COMB, teeth=4)
    (pitch,) = measure_spans(reading_of(), [in_steps(comb, 0.3, 0.6)])
    legs = [leg_error(exact_map(), Axis.ALONG, step * PX_PER_MM).sigma_mm for step in (0.3, 0.6)]
    assert sigma_ms(pitch) == pytest.approx(40.0 * math.hypot(*legs) / 3.0)
    assert pitch.step_mm == pytest.approx(0.2)


@pytest.mark.parametrize("up_mm", [5.0, -5.0])
def test_a_longer_square_makes_a_height_smaller_either_way(up_mm: float) -> None:
    sheet_map = exact_map(step_variance_px2=0.01**2)
    (span,) = measure_spans(reading_of(sheet_map=sheet_map), [height("r_height", up_mm)])
    assert span.estimate is not None
    assert math.copysign(1.0, span.estimate.shared[1]) == math.copysign(1.0, up_mm)
    assert span.estimate.value == pytest.approx(up_mm / 10.0)


def test_the_chest_leads_gain_is_used_in_the_chest_leads() -> None:
    settings = replace(calibration(), chest_gain_mm_per_mv=Setting(5.0, confirmed=True))
    limb, chest = measure_spans(
        reading_of(settings=settings),
        [height("r_height", 5.0, lead="I"), height("r_height", 5.0, lead="V2")],
    )
    assert limb.estimate is not None
    assert chest.estimate is not None
    assert (limb.estimate.value, chest.estimate.value) == (0.5, 1.0)


def test_a_mark_where_a_bent_sheet_was_not_followed_is_refused() -> None:
    sheet_map = bent(exact_map(8.0, 8.0))
    assert sheet_map.bend is not None
    errors = sheet_map.bend.standard_error_mm.copy()
    errors[:, :10] = np.nan
    bend = Bend((0.0, 0.0), 32.0, sheet_map.bend.x_mm, sheet_map.bend.y_mm, errors)
    reading = replace(reading_of(), sheet_map=replace(sheet_map, bend=bend))
    y_mm, step_mm = 300.0 / PX_PER_MM, 80.0 / PX_PER_MM
    marks = [
        between("qrs", (x_px / PX_PER_MM, y_mm), (x_px / PX_PER_MM + step_mm, y_mm))
        for x_px in (100.0, 600.0)
    ]
    lost, followed = measure_spans(reading, marks)
    assert (lost.estimate is None, followed.refusal) == (True, "")
    assert lost.refusal.startswith("has a mark where the grid could not be followed")
