"""The sentences of strip, banner and status bar."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.reading import Calibration, Evidence, PicturePoint, Setting
from app.window.statements import (
    evidence_statement,
    grid_statement,
    holds_work,
    pointer_statement,
    unconfirmed_statement,
)
from imaging import Coverage, sheet_map_from_box
from tests.app.reading_examples import example_map, example_reading


@pytest.mark.parametrize(
    ("setting", "statement"),
    [
        (Setting(25.0), "default, not confirmed"),
        (Setting(25.0, Evidence.PULSE), "pulse, not confirmed"),
        (Setting(25.0, Evidence.LEGEND, confirmed=True), "legend, confirmed"),
        (Setting(25.0, Evidence.READER, confirmed=True), "confirmed by reader"),
    ],
)
def test_a_setting_says_what_it_rests_on(setting: Setting, statement: str) -> None:
    assert evidence_statement(setting) == statement


def test_every_unconfirmed_setting_is_named() -> None:
    confirmed = Setting(25.0, Evidence.READER, confirmed=True)
    all_three = Calibration(chest_gain_mm_per_mv=Setting(5.0))
    assert unconfirmed_statement(all_three).startswith(
        "Paper speed 25 mm/s, gain 10 mm/mV and chest gain 5 mm/mV are not confirmed"
    )
    only_gain = replace(Calibration(), paper_speed_mm_per_s=confirmed)
    assert unconfirmed_statement(only_gain).startswith("Gain 10 mm/mV is not confirmed")
    both = replace(only_gain, gain_mm_per_mv=Setting(10.0, Evidence.PULSE, confirmed=True))
    assert unconfirmed_statement(both) == ""


def test_the_grid_s_statement_gives_pitch_and_error() -> None:
    sheet_map = example_map()
    assert grid_statement(None) == "No grid yet"
    statement = grid_statement(sheet_map)
    assert statement.startswith("Grid found: 8.00 × 7.92 px per small square, standard error ")
    sharp = replace(sheet_map, covariance=((0.0,) * 6,) * 6, scatter_mm=0.0002)
    assert grid_statement(sharp).endswith("standard error below 0.001 mm")
    uncertain = replace(sheet_map, scale_is_certain=False)
    assert grid_statement(uncertain).startswith("Grid found, scale NOT certain: ")
    by_hand = sheet_map_from_box((1200, 900), (100.0, 100.0), (500.0, 300.0), 10.0, 5.0)
    assert grid_statement(by_hand).startswith("Scale given by hand: 8.00 × 8.00 px")


def test_no_error_is_told_where_no_grid_was_seen() -> None:
    sheet_map = example_map()
    assert "standard error" in grid_statement(sheet_map)
    nowhere = replace(sheet_map, coverage=Coverage.from_cells(np.zeros((23, 30), bool), 40.0))
    assert "standard error" not in grid_statement(nowhere)


def test_the_pointer_is_told_in_the_best_frame_known() -> None:
    point = PicturePoint(12.0, 9.0)
    assert pointer_statement(point, example_map()) == "x 0.0 mm, y 0.0 mm"
    assert pointer_statement(point, None) == "12, 9 px"
    assert pointer_statement(None, example_map()) == ""
    assert pointer_statement(PicturePoint(-50.0, 0.0), example_map()) == ""


def test_only_what_a_reader_did_is_work_worth_a_question() -> None:
    empty = replace(
        example_reading(),
        calibration=Calibration(),
        calipers=(),
        hand_figures=(),
        reader="",
        colleague="",
    )
    assert not holds_work(empty)
    assert holds_work(replace(empty, reader="N."))
    assert holds_work(replace(empty, calibration=example_reading().calibration))
    by_hand = sheet_map_from_box((1200, 900), (100.0, 100.0), (500.0, 300.0), 10.0, 5.0)
    assert holds_work(replace(empty, sheet_map=by_hand))
