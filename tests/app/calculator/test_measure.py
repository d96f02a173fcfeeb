"""One caliper by itself."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator import format_value, measure_caliper
from app.calculator.spans import NO_SCALE
from app.reading import Caliper, CaliperKind
from tests.app.calculator.sheets import (
    between,
    calibration,
    codes,
    exact_map,
    height,
    in_steps,
    number,
    reading_of,
    time,
    worked,
)

COMB = between(None, (4.0, 10.0), (64.0, 10.0), kind=CaliperKind.COMB, teeth=4)
ONE_OF_EACH = [time("qrs", 4.0), height("s_height", -5.0), COMB]


def test_a_time() -> None:
    (value,) = measure_caliper(reading_of(), time("qrs", 4.05))
    assert (value.key, value.lead, value.n, value.caliper_ids) == ("span", "II", 1, (1,))
    assert format_value(value) == "162 ± 7 ms"
    assert value.method == "width in mm / 25 mm/s"
    assert value.cautions == ()


def test_one_beat_s_row_agrees_with_its_line() -> None:
    mark = time("qt", 10.0)
    (value,) = measure_caliper(reading_of(), mark)
    line = worked(reading_of(mark), "qt")
    assert (value.value, value.plus_minus) == (line.value, line.plus_minus)


def test_a_height_is_positive_upwards() -> None:
    (up,) = measure_caliper(reading_of(), height("r_height", 5.0))
    (down,) = measure_caliper(reading_of(), height("r_height", -5.0))
    assert (up.key, up.unit, up.method) == ("height", "mV", "height in mm / 10 mm/mV")
    assert (up.value, down.value) == (0.5, -0.5)
    assert format_value(down) == "−0.500 ± 0.017 mV"


def test_a_comb_gives_pitch_and_rate() -> None:
    pitch, rate = measure_caliper(reading_of(), COMB)
    assert (pitch.key, pitch.unit, pitch.n) == ("comb", "ms", 3)
    assert (rate.key, rate.unit, rate.n) == ("comb_rate", "/min", 3)
    assert number(pitch) == pytest.approx(800.0)
    assert number(rate) == pytest.approx(75.0)
    assert pitch.plus_minus is not None
    assert rate.plus_minus == pytest.approx(75.0 * pitch.plus_minus / 800.0)
    assert pitch.method == "width in mm / 3 gaps / 25 mm/s"
    assert rate.method == "60 / pitch, width in mm / 3 gaps / 25 mm/s"
    (two_teeth, _) = measure_caliper(reading_of(), replace(COMB, teeth=2))
    assert two_teeth.method == "width in mm / 1 gap / 25 mm/s"


@pytest.mark.parametrize("caliper", ONE_OF_EACH)
def test_without_a_map(caliper: Caliper) -> None:
    values = measure_caliper(replace(reading_of(), sheet_map=None), caliper)
    assert len(values) == (2 if caliper.kind is CaliperKind.COMB else 1)
    for value in values:
        assert (value.value, value.plus_minus, value.n) == (None, None, 0)
        assert value.refusal == NO_SCALE


def test_a_caliper_that_cannot_be_read() -> None:
    (value,) = measure_caliper(reading_of(), time(None, 0.0))
    assert value.refusal == "This caliper has both legs at the same place: move one of them."


@pytest.mark.parametrize("caliper", ONE_OF_EACH)
def test_its_cautions_are_those_of_the_sheet(caliper: Caliper) -> None:
    doubtful = exact_map(5.0, 4.0, seen=False, scale_is_certain=False, source="reader")
    reading = reading_of(sheet_map=doubtful, settings=calibration(confirmed=False))
    setting = "gain" if caliper.kind is CaliperKind.HEIGHT else "speed"
    for value in measure_caliper(reading, caliper):
        assert codes(value) == {
            f"{setting}_unconfirmed",
            "scale_uncertain",
            "scale_by_hand",
            "outside_seen_grid",
            "coarse_picture",
            "unequal_pitch",
        }


@pytest.mark.parametrize("caliper", ONE_OF_EACH)
def test_a_coarse_zoom_widens_its_error_and_is_said(caliper: Caliper) -> None:
    for fine, coarse in zip(
        measure_caliper(reading_of(), caliper),
        measure_caliper(reading_of(), in_steps(caliper, 0.9)),
        strict=True,
    ):
        assert fine.plus_minus is not None
        assert coarse.plus_minus is not None
        assert coarse.plus_minus > 2.0 * fine.plus_minus
        assert (codes(fine), codes(coarse)) == (set(), {"coarse_placing"})


def test_a_quantity_of_another_kind_is_measured_as_it_stands() -> None:
    wrong = between("qrs", (4.0, 9.0), (9.0, 4.0), kind=CaliperKind.HEIGHT)
    (value,) = measure_caliper(reading_of(), wrong)
    assert (value.key, value.value) == ("height", 0.5)
