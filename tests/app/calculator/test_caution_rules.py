"""Cautions on settings, sheet, beats and rounding, at their boundaries."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator.caution_rules import (
    line_cautions,
    rounding,
    sheet_cautions,
    single_beat,
)
from app.calculator.lines import measure_lines
from app.calculator.uncertainty import Axis
from app.calculator.values import Caution
from app.reading import Calibration, Evidence, Reading, Setting
from imaging.sheet_map import SheetMap
from tests.app.calculator.sheets import (
    calibration,
    estimate,
    exact_map,
    in_steps,
    reading_of,
    time,
)
from tests.bends import bent


def said(
    sheet_map: SheetMap | None = None,
    settings: Calibration | None = None,
    axis: Axis = Axis.ALONG,
    lead: str | None = "II",
    *,
    covered: bool = True,
    step_mm: float = 0.0,
) -> dict[str, str]:
    """Line by code, nothing twice."""
    reading = reading_of(sheet_map=sheet_map, settings=settings)
    return by_code(sheet_cautions(reading, axis, lead, covered=covered, step_mm=step_mm))


def by_code(cautions: list[Caution]) -> dict[str, str]:
    lines = {caution.code: caution.text for caution in cautions}
    assert len(lines) == len(cautions)
    return lines


def test_a_fine_sheet_with_confirmed_settings_has_none() -> None:
    assert said() == {}
    assert said(axis=Axis.DOWN) == {}


@pytest.mark.parametrize(
    ("evidence", "words"),
    [
        (Evidence.DEFAULT, "is only the usual setting"),
        (Evidence.PULSE, "comes from the calibration pulse"),
        (Evidence.LEGEND, "comes from the printed legend"),
        (Evidence.READER, "was set by the reader"),
    ],
)
def test_an_unconfirmed_setting_says_what_it_rests_on(evidence: Evidence, words: str) -> None:
    settings = Calibration(Setting(12.5, evidence), Setting(5.0, evidence))
    assert said(settings=settings) == {
        "speed_unconfirmed": f"Paper speed 12.5 mm/s {words}; nobody has confirmed it."
    }
    assert said(settings=settings, axis=Axis.DOWN) == {
        "gain_unconfirmed": f"Gain 5 mm/mV {words}; nobody has confirmed it."
    }


def test_each_lead_asks_for_its_own_gain() -> None:
    settings = replace(calibration(), chest_gain_mm_per_mv=Setting(5.0, Evidence.PULSE))
    assert set(said(settings=settings, axis=Axis.DOWN, lead="V3")) == {"gain_unconfirmed"}
    assert said(settings=settings, axis=Axis.DOWN, lead="aVF") == {}


def test_the_scale_s_doubts() -> None:
    assert set(said(exact_map(scale_is_certain=False))) == {"scale_uncertain"}
    assert set(said(exact_map(source="reader"))) == {"scale_by_hand"}
    assert set(said(covered=False)) == {"outside_seen_grid"}


def test_a_doubtful_scale_stands_first() -> None:
    reading = reading_of(
        sheet_map=exact_map(scale_is_certain=False), settings=calibration(confirmed=False)
    )
    cautions = sheet_cautions(reading, Axis.ALONG, None, covered=True, step_mm=0.0)
    assert [caution.code for caution in cautions] == ["scale_uncertain", "speed_unconfirmed"]


def test_without_a_map_only_the_settings_are_doubted() -> None:
    reading = replace(reading_of(settings=calibration(confirmed=False)), sheet_map=None)
    cautions = sheet_cautions(reading, Axis.ALONG, None, covered=False, step_mm=0.9)
    assert [caution.code for caution in cautions] == ["speed_unconfirmed"]


@pytest.mark.parametrize(("px_per_mm", "is_coarse"), [(5.89, True), (5.9, False)])
def test_a_coarse_picture_is_below_150_dots_an_inch(px_per_mm: float, is_coarse: bool) -> None:
    coarse = exact_map(px_per_mm, px_per_mm)
    for axis in Axis:
        assert ("coarse_picture" in said(coarse, axis=axis)) == is_coarse


def test_what_a_coarse_pixel_is_worth() -> None:
    across = exact_map(5.0, 5.0)
    settings = replace(calibration(50.0), chest_gain_mm_per_mv=Setting(5.0, confirmed=True))
    assert said(across, settings)["coarse_picture"] == "Coarse picture: one pixel is 4 ms."
    assert said(across, settings, Axis.DOWN, "I")["coarse_picture"].endswith("0.02 mV.")
    assert said(across, settings, Axis.DOWN, "V1")["coarse_picture"].endswith("0.04 mV.")


def test_coarse_is_asked_along_the_axis_that_is_measured() -> None:
    lying = exact_map(16.0, 5.0)
    assert "coarse_picture" not in said(lying)
    assert "coarse_picture" in said(lying, axis=Axis.DOWN)


@pytest.mark.parametrize(
    ("step_mm", "words"),
    [
        (0.0, None),
        (0.2, None),
        (0.21, "A mark was placed at a coarse zoom, in steps of about 0.21 mm."),
        (0.4, "A mark was placed at a coarse zoom, in steps of about 0.4 mm."),
    ],
)
def test_a_step_of_more_than_half_a_pen_width_is_said(step_mm: float, words: str | None) -> None:
    for axis in Axis:
        assert said(axis=axis, step_mm=step_mm).get("coarse_placing") == words


def test_a_nudged_leg_is_coarse_no_more() -> None:
    coarse, fine = in_steps(time("qrs", 3.0), 0.4), in_steps(time("qrs", 3.0), 0.1)
    assert set(lines_said(reading_of(coarse))) == {"coarse_placing"}
    assert lines_said(reading_of(fine)) == {}
    one_of_two = reading_of(time("qt", 9.0), in_steps(time("qrs", 3.0), 0.1, 0.4))
    assert set(lines_said(one_of_two)) == {"coarse_placing"}


@pytest.mark.parametrize(
    ("x_px_per_mm", "y_px_per_mm", "words"),
    [
        (10.19, 10.0, None),
        (10.21, 10.0, "Squares are 2.1 % wider than high on this picture."),
        (10.0, 10.19, None),
        (10.0, 10.21, "Squares are 2.1 % higher than wide on this picture."),
    ],
)
def test_stretched_squares(x_px_per_mm: float, y_px_per_mm: float, words: str | None) -> None:
    for axis in Axis:
        assert said(exact_map(x_px_per_mm, y_px_per_mm), axis=axis).get("unequal_pitch") == words


def lines_said(reading: Reading) -> dict[str, str]:
    marked = measure_lines(reading)
    return by_code(line_cautions(reading, Axis.ALONG, list(marked.lines.values())))


def test_a_line_without_a_lead() -> None:
    assert lines_said(reading_of(time("qrs", 3.0), time("qt", 9.0))) == {}
    named_by_half = reading_of(time("qt", 9.0), time("rr", 20.0, lead=None))
    assert set(lines_said(named_by_half)) == {"no_lead"}


def test_one_line_outside_the_seen_grid_is_enough() -> None:
    unseen = reading_of(time("qt", 9.0), sheet_map=exact_map(seen=False))
    assert set(lines_said(unseen)) == {"outside_seen_grid"}


@pytest.mark.parametrize(
    ("beats", "intervals", "text"),
    [
        (1, None, "From one beat only."),
        (1, 2, "From one beat only."),
        (2, 1, "From one RR interval only."),
        (None, 1, "From one RR interval only."),
        (1, 1, "From one beat and one RR interval only."),
        (2, None, None),
        (2, 2, None),
    ],
)
def test_what_rests_on_one_alone(
    beats: int | None, intervals: int | None, text: str | None
) -> None:
    assert [caution.text for caution in single_beat(beats, intervals)] == ([text] if text else [])


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (119.5, "Shown rounded; worked out it is 119.50, below 120."),
        (119.4, None),
        (120.0, None),
        (119.9, "Shown rounded; worked out it is 119.90, below 120."),
        (120.4, "Shown rounded; worked out it is 120.40, above 120."),
        (120.6, None),
        (119.994, "Shown rounded; worked out it is 119.99, below 120."),
        # No more than the noise of arithmetic.
        (119.996, None),
        (120.004, None),
        (120.006, "Shown rounded; worked out it is 120.01, above 120."),
    ],
)
def test_a_number_shown_on_the_other_side_of_its_limit(value: float, text: str | None) -> None:
    found = rounding(estimate(value, 8.0), 60.0, 120.0)
    assert [caution.text for caution in found] == ([text] if text else [])


def test_no_rounding_caution_where_the_digits_shown_tell() -> None:
    assert rounding(estimate(119.6, 0.8), 120.0) == []
    assert rounding(estimate(-0.2, 8.0), 60.0) == []


def test_a_bent_sheet_says_so_and_not_that_its_squares_are_unequal() -> None:
    tilted = exact_map(8.0, 6.0)
    assert "unequal_pitch" in said(tilted)
    assert said(bent(tilted)).keys() == {"bent_sheet"}
