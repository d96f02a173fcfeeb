"""The sentences of a filed reading."""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np
import pytest

from app.calculator import Caution, Value, measure_caliper
from app.chart.wording import (
    caliper_name,
    confirmed_by,
    grid_sentences,
    hand_figure_text,
    moment,
    setting_sentence,
    settings_of,
    short_value_text,
    unconfirmed_sentences,
    value_text,
)
from app.reading import Calibration, CaliperKind, Evidence, HandFigure, Setting
from imaging import Coverage
from tests.app.chart.chart_examples import (
    caliper,
    confirmed_calibration,
    reading_of,
    upright_map,
)


def value(**changes: object) -> Value:
    plain = Value("qrs", "QRS", 92.4, "ms", 8.2, "width", "source", 1, "II")
    return replace(plain, **changes)  # type: ignore[arg-type]


def test_everything_unconfirmed_is_said() -> None:
    said = " ".join(unconfirmed_sentences(replace(reading_of(), reader=" ")))
    assert "Paper speed 25 mm/s rests on a default" in said
    assert "Gain 10 mm/mV rests on a default" in said
    assert "The reader is not named." in said


def test_nothing_is_said_where_all_is_confirmed() -> None:
    assert unconfirmed_sentences(reading_of(calibration=confirmed_calibration())) == []


@pytest.mark.parametrize(("certain", "words"), [(False, "off five times"), (None, "not known")])
def test_an_uncertain_or_missing_scale_comes_first(certain: bool | None, words: str) -> None:
    sheet_map = None if certain is None else replace(upright_map(), scale_is_certain=certain)
    said = unconfirmed_sentences(
        replace(reading_of(calibration=confirmed_calibration()), sheet_map=sheet_map)
    )
    assert len(said) == 1
    assert words in said[0]


def test_a_picture_that_is_not_the_one_read_is_said() -> None:
    reading = reading_of(calibration=confirmed_calibration())
    assert unconfirmed_sentences(reading, reading.picture.sha256) == []
    assert "content has changed" in unconfirmed_sentences(reading, "cd" * 32)[0]


@pytest.mark.parametrize(
    ("evidence", "words"),
    [
        (Evidence.DEFAULT, "a default"),
        (Evidence.PULSE, "the calibration pulse"),
        (Evidence.LEGEND, "the printed legend"),
        (Evidence.READER, "what the reader entered"),
    ],
)
def test_a_setting_says_what_it_rests_on_and_who_confirmed_it(
    evidence: Evidence, words: str
) -> None:
    reading = reading_of()
    open_, said = Setting(12.5, evidence), Setting(12.5, evidence, confirmed=True)
    sentence = setting_sentence(reading, "Paper speed", open_, "mm/s")
    assert sentence.startswith(f"Paper speed 12.5 mm/s: rests on {words}")
    assert sentence.endswith("; NOT confirmed.")
    assert setting_sentence(reading, "Paper speed", said, "mm/s").endswith(
        "confirmed by A. Reader."
    )
    assert confirmed_by(replace(reading, reader=""), said) == "a reader who is not named"


def test_the_chest_gain_is_a_setting_of_its_own() -> None:
    stepped = Calibration(chest_gain_mm_per_mv=Setting(5.0))
    assert [name for name, _, _ in settings_of(stepped)][-1] == "Gain in V1 to V6"
    assert len(settings_of(Calibration())) == 2


def test_the_grid_is_told_with_its_evidence() -> None:
    said = " ".join(grid_sentences(upright_map()))
    assert "8.000 px per small square along the paper" in said
    assert "certain" in said
    assert "Bold lines seen every fifth line." in said
    turned = replace(upright_map(), turn_deg=90, mirrored=True, source="reader")
    said = " ".join(grid_sentences(replace(turned, scale_is_certain=False)))
    assert "given by a box the reader drew" in said
    assert "NOT certain" in said
    assert "turned by 90°, mirrored" in said
    assert "none found" in grid_sentences(None)[0]


def test_the_largest_error_is_rounded_up() -> None:
    sheet_map = upright_map()
    found_mm = sheet_map.largest_standard_error_mm()
    assert found_mm is not None
    shown = re.search(r"at most (\d\.\d{4}) mm", " ".join(grid_sentences(sheet_map)))
    assert shown is not None
    assert found_mm <= float(shown[1]) < found_mm + 1e-4
    unseen = replace(sheet_map, coverage=Coverage.from_cells(np.zeros((3, 4), dtype=bool), 300.0))
    assert "not known" in " ".join(grid_sentences(unseen))


def test_a_value_that_rests_on_something_unconfirmed_is_marked() -> None:
    marked = value(cautions=(Caution("speed_unconfirmed", "t", "r", "s"),))
    assert value_text(value()) == "92 ± 8 ms"
    assert value_text(marked) == "92 ± 8 ms ?"
    assert short_value_text(value()) == "92 ms"
    assert short_value_text(marked) == "92 ms ?"


def test_a_refused_value_has_no_number() -> None:
    refused = value(value=None, plus_minus=None, refusal="Mark it anew.")
    assert value_text(refused) == short_value_text(refused) == "no value"


def test_calipers_are_called_by_what_they_measure() -> None:
    assert caliper_name(caliper(1, (0, 0), (9, 0))) == "QRS II·1"
    assert caliper_name(caliper(4, (0, 0), (9, 0), None, None, None)) == "Time 4"
    assert caliper_name(caliper(4, (0, 0), (9, 0), "of_later", "V9", None)) == "of_later V9"
    comb = caliper(7, (0, 0), (9, 0), None, "II", None, CaliperKind.COMB, 5)
    assert caliper_name(comb) == "Comb 7 ×5 II"


def test_a_colleagues_figure_has_its_name_and_unit() -> None:
    assert hand_figure_text(HandFigure("qrs_axis", -30.0)) == "QRS axis -30°"
    assert hand_figure_text(HandFigure("pr", 162.0, "II")) == "PR II 162 ms"
    assert hand_figure_text(HandFigure("of_later", 1.5)) == "of_later 1.5"


def test_a_moment_nobody_recorded_is_said() -> None:
    assert moment("2026-01-02T03:04:05+00:00") == "2026-01-02 03:04:05+00:00"
    assert moment("") == "not recorded"


def test_the_mark_comes_with_what_the_calculator_really_says() -> None:
    reading = reading_of(calipers=(caliper(1, (100.0, 400.0), (118.0, 400.0)),))
    (measured,) = measure_caliper(reading, reading.calipers[0])
    assert value_text(measured).startswith("90 ± ")
    assert value_text(measured).endswith("ms ?")
    sure = replace(reading, calibration=confirmed_calibration())
    assert not value_text(measure_caliper(sure, sure.calipers[0])[0]).endswith("?")
