"""The grid as plain numbers: there and back, and kept on the picture."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.drawing.frame import SheetFrame, frame_of
from app.reading import PicturePoint
from tests.app.reading_examples import example_map, example_reading
from tests.app.window.canvas.hands import blank_picture, reading_of
from tests.bends import bent

SKEWED = SheetFrame((13.0, 7.0), (9.8, 0.7), (-0.6, 10.1), (2000, 1000), has_grid=True)


def test_it_agrees_with_the_map() -> None:
    sheet_map = replace(example_map(), x_step_px=(7.9, 0.6), y_step_px=(-0.5, 8.1)).turned(1)
    frame = frame_of(reading_of(blank_picture(), sheet_map=sheet_map))
    points_px = np.array([[0.0, 0.0], [311.5, 402.25], [1199.0, 899.0]])
    for point_px, point_mm in zip(points_px, sheet_map.to_mm(points_px), strict=True):
        assert frame.mm_from_px(PicturePoint(*point_px)) == pytest.approx(tuple(point_mm))
        assert frame.px_from_mm(*point_mm) == pytest.approx(tuple(point_px))


def test_without_a_grid_it_is_a_guess_and_says_so() -> None:
    frame = frame_of(replace(example_reading(), sheet_map=None))
    assert not frame.has_grid
    assert frame.x_step_px[0] == frame.y_step_px[1] > 0.0


def test_a_key_goes_a_tenth_of_a_small_square_or_a_quarter_of_a_pixel() -> None:
    assert SKEWED.key_step_mm() == 0.1
    guessed = frame_of(replace(example_reading(), sheet_map=None))
    step_px = guessed.px_step(guessed.key_step_mm(), 0.0)
    assert step_px == pytest.approx((0.25, 0.0))


@pytest.mark.parametrize(
    ("wanted", "given"),
    [
        ((-5.0, 20.0), (0.0, 20.0)),
        ((2500.0, 1200.0), (1999.0, 999.0)),
        ((3.25, 4.5), (3.25, 4.5)),
    ],
)
def test_places_are_kept_on_the_picture(
    wanted: tuple[float, float], given: tuple[float, float]
) -> None:
    assert SKEWED.clamped(*wanted) == PicturePoint(*given)


@pytest.mark.parametrize(
    ("step_px", "share"),
    [
        ((100.0, 0.0), 0.99),  # from 1900 there are 99 px left
        ((-100.0, 0.0), 1.0),
        ((100.0, 1980.0), 0.25),  # 495 px down is where the picture ends
        ((0.0, -1010.0), 0.5 * 1008.0 / 1010.0),
        ((0.0, 0.0), 1.0),
    ],
)
def test_how_much_of_a_step_stays_on_the_picture(
    step_px: tuple[float, float], share: float
) -> None:
    assert SKEWED.share_inside(PicturePoint(1900.0, 504.0), step_px) == pytest.approx(share)


def test_from_the_edge_outward_there_is_no_step() -> None:
    assert SKEWED.share_inside(PicturePoint(1999.0, 500.0), (1.0, 0.0)) == 0.0


def test_the_smaller_pitch_is_that_of_the_closer_lines() -> None:
    frame = SheetFrame((0.0, 0.0), (0.0, 6.0), (-8.0, 0.0), (100, 80), has_grid=True)
    assert frame.pitch_px_per_mm == 6.0


def test_on_a_bent_sheet_it_touches_the_grid_at_a_place() -> None:
    sheet_map = bent(example_map())
    whole = frame_of(reading_of(blank_picture(), sheet_map=sheet_map))
    for x_px, y_px in ((150.0, 120.0), (1000.0, 700.0)):
        frame = whole.at(x_px, y_px)
        here_mm = sheet_map.to_mm(np.array([[x_px, y_px]]))[0]
        assert frame.mm_from_px(PicturePoint(x_px, y_px)) == pytest.approx(tuple(here_mm))
        beside_px = np.array([[x_px + 5.0, y_px - 3.0]])
        beside_mm = sheet_map.to_mm(beside_px)[0]
        assert frame.mm_from_px(PicturePoint(*beside_px[0])) == pytest.approx(
            tuple(beside_mm), abs=2e-3
        )


def test_a_flat_sheet_has_one_frame_everywhere() -> None:
    frame = frame_of(reading_of(blank_picture(), sheet_map=example_map()))
    assert frame.at(900.0, 5.0) is frame


def test_off_a_bent_sheet_s_picture_the_nearest_flat_frame_stands_in() -> None:
    frame = frame_of(reading_of(blank_picture(), sheet_map=bent(example_map())))
    assert frame.at(-500.0, 5.0) is frame
