"""A map with a bend: every question it answers is answered by the bend."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from imaging.bend import Bend
from imaging.sheet_map import SheetMap
from tests.app.reading_examples import example_map
from tests.bends import bent, curved_mm

POINTS_PX = np.random.default_rng(4).uniform((60.0, 60.0), (1140.0, 840.0), (200, 2))


@pytest.fixture
def sheet_map() -> SheetMap:
    return bent(example_map())


def test_places_are_the_bend_s(sheet_map: SheetMap) -> None:
    assert np.abs(sheet_map.to_mm(POINTS_PX) - curved_mm(POINTS_PX)).max() < 0.002
    assert np.abs(sheet_map.to_px(sheet_map.to_mm(POINTS_PX)) - POINTS_PX).max() < 1e-5


def test_outside_the_picture_there_is_no_place(sheet_map: SheetMap) -> None:
    outside_px = np.array([[-5.0, 10.0]])
    assert np.isnan(sheet_map.to_mm(outside_px)).all()
    assert np.isnan(sheet_map.standard_error_mm(outside_px)).all()


def test_errors_are_the_bend_s(sheet_map: SheetMap) -> None:
    assert sheet_map.standard_error_mm(POINTS_PX) == pytest.approx(np.sqrt(2.0) * 0.01)
    span = sheet_map.span_standard_error_mm(POINTS_PX[:9], POINTS_PX[9:18])
    assert span == pytest.approx(np.full((9, 2), np.sqrt(2.0) * 0.01))
    assert sheet_map.largest_standard_error_mm() == pytest.approx(np.sqrt(2.0) * 0.01)


def test_turning_turns_the_bend_too(sheet_map: SheetMap) -> None:
    x_mm, y_mm = sheet_map.to_mm(POINTS_PX).T
    assert np.allclose(sheet_map.turned(1).to_mm(POINTS_PX), np.column_stack([-y_mm, x_mm]))
    assert sheet_map.turned(2).turned(2).bend == sheet_map.bend


def test_steps_differ_from_place_to_place(sheet_map: SheetMap) -> None:
    for point_px in ((200.0, 200.0), (1000.0, 700.0)):
        x_step, y_step = sheet_map.steps_px_at(point_px)
        start_px = np.array([point_px])
        for step, expected_mm in ((x_step, (0.01, 0.0)), (y_step, (0.0, 0.01))):
            moved = sheet_map.to_mm(start_px + 0.01 * np.array(step)) - sheet_map.to_mm(start_px)
            assert moved[0] == pytest.approx(expected_mm, abs=1e-4)


def test_a_flat_map_has_one_pair_of_steps_everywhere() -> None:
    flat = example_map()
    assert flat.steps_px_at((7.0, 800.0)) == (flat.x_step_px, flat.y_step_px)


def test_where_a_bend_has_no_slope_the_flat_steps_stand_in() -> None:
    flat, zeros = example_map(), np.zeros((3, 3))
    dead = replace(flat, bend=Bend((0.0, 0.0), 600.0, zeros, zeros, zeros))
    assert dead.steps_px_at((5.0, 5.0)) == (flat.x_step_px, flat.y_step_px)
