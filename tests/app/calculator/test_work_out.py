"""The whole path: order, purity, and what must not change a value."""

from __future__ import annotations

import copy
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from app.calculator import Value, work_out
from app.calculator.catalogue import CATALOGUE
from app.reading import Caliper, CaliperKind, PicturePoint, Reading
from tests.app.calculator.sheets import (
    PX_PER_MM,
    calibration,
    exact_map,
    height,
    reading_of,
    rr_chain,
    time,
)
from tests.app.reading_examples import example_reading

PROPERTY = settings(max_examples=25, deadline=None)
millimetres = st.floats(1.0, 15.0, allow_nan=False)


@st.composite
def readings(draw: st.DrawFn) -> Reading:
    """A full set of marks of every kind, several beats of some."""
    # Whole pixels, all different: of two equal intervals either may count as the longest, and
    # the ± of the spread depends on which.
    widths_px = st.lists(st.integers(14 * 16, 40 * 16), min_size=2, max_size=6, unique=True)
    marks = rr_chain([width_px / PX_PER_MM for width_px in draw(widths_px)])
    for beat in range(1, draw(st.integers(1, 4)) + 1):
        marks.append(time("qt", draw(st.floats(6.0, 12.0)), beat=beat, at_mm=(20.0 * beat, 50.0)))
        marks.append(time("qrs", draw(st.floats(1.0, 4.0)), beat=beat, at_mm=(20.0 * beat, 60.0)))
    marks.append(time("pr", draw(st.floats(2.0, 7.0)), at_mm=(30.0, 70.0)))
    for y_mm, lead in ((120.0, "I"), (170.0, "aVF")):
        marks.append(height("r_height", draw(millimetres), lead=lead, at_mm=(8.0, y_mm)))
        marks.append(height("s_height", -draw(millimetres), lead=lead, at_mm=(9.0, y_mm)))
    return reading_of(*marks, sheet_map=exact_map(scatter_mm=0.02, step_variance_px2=1e-4))


def alike(values: list[Value], others: list[Value], scale: dict[str, float] | None = None) -> None:
    """Same keys, leads, counts and refusals; numbers equal, or scaled by unit."""
    assert [(v.key, v.lead, v.n) for v in values] == [(v.key, v.lead, v.n) for v in others]
    for one, other in zip(values, others, strict=True):
        if one.value is None or other.value is None:
            assert (one.value, one.refusal) == (other.value, other.refusal)
            continue
        factor = (scale or {}).get(one.unit, 1.0)
        same_number(one, factor * one.value, other.value)
        assert one.plus_minus is not None
        assert other.plus_minus == pytest.approx(factor * one.plus_minus, rel=1e-6), one.key


def same_number(value: Value, number: float, other: float) -> None:
    """But for the noise of arithmetic; -180° is 180°."""
    apart = other - number
    if value.unit == "deg":
        apart = (apart + 180.0) % 360.0 - 180.0
    assert abs(apart) <= 1e-9 + 1e-6 * abs(number), value.key


def without(values: list[Value], *starts: str) -> list[Value]:
    return [value for value in values if not value.key.startswith(starts)]


def moved(item: Caliper, x_px: float, y_px: float) -> Caliper:
    start = PicturePoint(item.start.x_px + x_px, item.start.y_px + y_px)
    end = PicturePoint(item.end.x_px + x_px, item.end.y_px + y_px)
    return replace(item, start=start, end=end)


def test_values_in_worksheet_order_with_stable_keys() -> None:
    reading = reading_of(
        height("r_height", 8.0, lead="aVF"),
        height("r_height", 8.0, lead="I"),
        time("qrs", 2.5, lead="V1"),
        time("qrs", 2.5),
        time("qt", 10.0, at_mm=(8.0, 60.0)),
        *rr_chain([20.0, 20.0]),
    )
    assert [(value.key, value.lead) for value in work_out(reading)] == [
        ("rate", "II"),
        ("rr_mean", "II"),
        ("rr_spread", "II"),
        ("qrs", "II"),
        ("qrs", "V1"),
        ("qt", "II"),
        ("qtc_bazett", "II"),
        ("qtc_fridericia", "II"),
        ("qtc_framingham", "II"),
        ("qtc_hodges", "II"),
        ("r_height", "I"),
        ("r_height", "aVF"),
        ("net_qrs", "I"),
        ("net_qrs", "aVF"),
        ("qrs_axis", None),
    ]
    for value in work_out(reading):
        entry = CATALOGUE[value.key]
        assert (value.label, value.unit, value.source) == (entry.label, entry.unit, entry.source)


def test_free_calipers_and_unknown_quantities_are_left_alone() -> None:
    reading = reading_of(time(None, 4.0), time("a later quantity", 4.0))
    assert work_out(reading) == []


def test_a_reading_is_not_changed_and_gives_the_same_again() -> None:
    reading = example_reading()
    before = copy.deepcopy(reading)
    first = work_out(reading)
    assert reading == before
    assert work_out(reading) == first
    assert {type(value.cautions) for value in first} == {tuple}
    assert {type(value.caliper_ids) for value in first} == {tuple}


@PROPERTY
@given(readings(), st.floats(-40.0, 800.0), st.floats(-200.0, 400.0))
def test_the_place_on_the_sheet_does_not_matter(reading: Reading, x_px: float, y_px: float) -> None:
    shifted = replace(reading, calipers=tuple(moved(c, x_px, y_px) for c in reading.calipers))
    alike(work_out(reading), work_out(shifted))


@PROPERTY
@given(readings(), st.randoms(use_true_random=False))
def test_the_order_of_calipers_does_not_matter(
    reading: Reading, random: np.random.Generator
) -> None:
    calipers = list(reading.calipers)
    random.shuffle(calipers)
    alike(work_out(reading), work_out(replace(reading, calipers=tuple(calipers))))


@PROPERTY
@given(readings(), st.data())
def test_the_legs_of_a_time_may_be_swapped(reading: Reading, data: st.DataObject) -> None:
    """Of some or all: neighbours in a chain still share their leg's error."""
    swapped = tuple(
        replace(item, start=item.end, end=item.start)
        if item.kind is CaliperKind.TIME and data.draw(st.booleans())
        else item
        for item in reading.calipers
    )
    alike(work_out(reading), work_out(replace(reading, calipers=swapped)))


@PROPERTY
@given(readings(), st.sampled_from([12.5, 50.0]))
def test_another_paper_speed_scales_times_and_rates(reading: Reading, speed: float) -> None:
    """QTc is no ratio; it is left out here and has its own table."""
    other = replace(reading, calibration=calibration(speed))
    factor = 25.0 / speed
    alike(
        without(work_out(reading), "qtc_"),
        without(work_out(other), "qtc_"),
        {"ms": factor, "/min": 1.0 / factor},
    )


@PROPERTY
@given(readings(), st.sampled_from([2.5, 5.0, 20.0, 40.0]))
def test_another_gain_scales_heights_alone(reading: Reading, gain: float) -> None:
    other = replace(reading, calibration=calibration(gain_mm_per_mv=gain))
    alike(work_out(reading), work_out(other), {"mV": 10.0 / gain})


@PROPERTY
@given(readings())
def test_every_number_is_finite_and_has_its_error(reading: Reading) -> None:
    for value in work_out(reading):
        assert (value.value is None) == bool(value.refusal)
        if value.value is not None:
            assert np.isfinite(value.value)
            assert value.plus_minus is not None
            assert 0.0 < value.plus_minus < np.inf


@PROPERTY
@given(readings(), st.floats(0.5, 2.0))
def test_the_picture_s_size_does_not_matter(reading: Reading, zoom: float) -> None:
    """The same sheet scanned at another resolution gives the same numbers."""
    step = PX_PER_MM * zoom
    calipers = tuple(
        replace(
            item,
            start=PicturePoint(item.start.x_px * zoom, item.start.y_px * zoom),
            end=PicturePoint(item.end.x_px * zoom, item.end.y_px * zoom),
        )
        for item in reading.calipers
    )
    scanned = replace(reading, sheet_map=exact_map(step, step), calipers=calipers)
    for one, other in zip(work_out(reading), work_out(scanned), strict=True):
        if one.value is not None and other.value is not None:
            same_number(one, one.value, other.value)
