"""The words on a label: what, where, how much, and whether that may be trusted."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator import format_value, measure_caliper
from app.reading import Calibration, Caliper, CaliperKind, Evidence, Reading, Setting
from app.window.canvas.caliper_text import (
    NO_GRID,
    caliper_name,
    caliper_value,
    quantity_name,
    short_name,
)
from tests.app.window.canvas.hands import (
    blank_picture,
    comb_caliper,
    height_caliper,
    reading_of,
    time_caliper,
)

CONFIRMED = Calibration(
    paper_speed_mm_per_s=Setting(25.0, Evidence.READER, confirmed=True),
    gain_mm_per_mv=Setting(10.0, Evidence.READER, confirmed=True),
)


def reading(calibration: Calibration = CONFIRMED) -> Reading:
    return replace(reading_of(blank_picture()), calibration=calibration)


@pytest.mark.parametrize(
    ("caliper", "name", "short"),
    [
        (time_caliper(), "QRS II·1", "QRS"),
        (replace(time_caliper(), beat=None), "QRS II", "QRS"),
        (replace(time_caliper(), quantity=None, beat=None, lead=None), "Time", "Time"),
        (replace(time_caliper(), quantity="later_version"), "later_version II·1", "later_version"),
        (height_caliper(), "R height V5·1", "R height"),
        (comb_caliper(), "Comb ×5", "Comb ×5"),
    ],
)
def test_names(caliper: Caliper, name: str, short: str) -> None:
    assert (caliper_name(caliper), short_name(caliper)) == (name, short)


def test_a_free_caliper_is_called_by_its_kind() -> None:
    assert [quantity_name(kind, None) for kind in CaliperKind] == ["Time", "Height", "Comb"]


def test_without_a_grid_there_is_no_number() -> None:
    text = caliper_value(replace(reading(), sheet_map=None), time_caliper())
    assert text.full == text.short == NO_GRID


def test_the_number_is_the_calculators() -> None:
    """160 px at 8 px/mm and 25 mm/s are 800 ms."""
    text = caliper_value(reading(), time_caliper())
    (value,) = measure_caliper(reading(), time_caliper())
    assert text.full == format_value(value)
    assert text.full.startswith("800 ± ")
    assert text.full.endswith(" ms")
    assert text.short == "800 ms"


def test_a_height_is_in_millivolts_and_a_comb_tells_its_rate_too() -> None:
    assert caliper_value(reading(), height_caliper()).short.endswith(" mV")
    comb = caliper_value(reading(), comb_caliper())
    assert " ms, " in comb.full
    assert comb.full.endswith("/min")
    assert comb.short.endswith(" ms")


@pytest.mark.parametrize("caliper", [time_caliper(), height_caliper(), comb_caliper()])
def test_while_a_setting_is_not_confirmed_every_form_says_so(caliper: Caliper) -> None:
    text = caliper_value(reading(Calibration()), caliper)
    assert text.full.endswith(" ?")
    assert text.short.endswith(" ?")
    assert "?" not in caliper_value(reading(), caliper).full


def test_an_uncertain_scale_is_marked_though_the_settings_are_confirmed() -> None:
    sure = reading()
    assert sure.sheet_map is not None
    unsure = replace(sure, sheet_map=replace(sure.sheet_map, scale_is_certain=False))
    text = caliper_value(unsure, time_caliper())
    assert text.full.endswith(" ?")
    assert text.short.endswith(" ?")
