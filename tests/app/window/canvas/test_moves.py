"""Calipers moved and combed by numbers, never off the picture."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.drawing.frame import SheetFrame, frame_of
from app.reading import Caliper, CaliperKind, PicturePoint
from app.window.canvas.moves import (
    MOST_TEETH,
    comb_from_two_teeth,
    leg_moved,
    nudged,
    span_is_too_small,
    whole_moved,
    with_teeth,
)
from app.window.canvas.selection import Part
from imaging.sheet_map import Coverage
from tests.app.reading_examples import example_map
from tests.app.window.canvas.hands import (
    blank_picture,
    comb_caliper,
    height_caliper,
    reading_of,
    time_caliper,
)

FRAME = SheetFrame((0.0, 0.0), (8.0, 0.0), (0.0, 8.0), (1200, 900), has_grid=True)
SKEWED = SheetFrame((12.0, 9.0), (7.9, 0.5), (-0.4, 8.1), (1200, 900), has_grid=True)
EDGE_PX = 1199.0


def xy(point: PicturePoint) -> tuple[float, float]:
    return point.x_px, point.y_px


def test_a_leg_moves_along_the_paper_and_not_down_it() -> None:
    before = time_caliper()
    after = leg_moved(before, 1, 2.5, SKEWED)
    moved_mm = np.subtract(SKEWED.mm_from_px(after.end), SKEWED.mm_from_px(before.end))
    assert moved_mm == pytest.approx((2.5, 0.0), abs=1e-9)
    assert after.start == before.start


def test_the_leg_of_a_height_moves_down_it() -> None:
    before = height_caliper()
    after = leg_moved(before, 0, -1.5, SKEWED)
    moved_mm = np.subtract(SKEWED.mm_from_px(after.start), SKEWED.mm_from_px(before.start))
    assert moved_mm == pytest.approx((0.0, -1.5), abs=1e-9)
    assert after.end == before.end


def test_a_leg_stops_on_the_edge_and_still_on_its_line() -> None:
    after = leg_moved(time_caliper(), 1, 500.0, SKEWED)
    assert after.end.x_px == pytest.approx(EDGE_PX)
    before_mm = SKEWED.mm_from_px(time_caliper().end)
    assert SKEWED.mm_from_px(after.end)[1] == pytest.approx(before_mm[1])


@pytest.mark.parametrize("tooth", [1, 2, 3, 4])
def test_a_tooth_stretches_the_comb_so_that_it_goes_with_the_hand(tooth: int) -> None:
    before = comb_caliper()
    after = leg_moved(before, tooth, 1.0, FRAME)
    assert after.start == before.start

    def tooth_x(comb: Caliper) -> float:
        return comb.start.x_px + (comb.end.x_px - comb.start.x_px) * tooth / (comb.teeth - 1)

    assert tooth_x(after) - tooth_x(before) == pytest.approx(8.0)


def test_the_first_tooth_moves_and_the_last_one_stays() -> None:
    after = leg_moved(comb_caliper(), 0, -2.0, FRAME)
    assert xy(after.start) == (184.0, 700.0)
    assert after.end == comb_caliper().end


def test_the_whole_keeps_its_span_and_slides_along_the_edge() -> None:
    before = time_caliper()
    after = whole_moved(before, (2000.0, 30.0), FRAME)
    assert after.end.x_px == EDGE_PX
    assert after.end.x_px - after.start.x_px == pytest.approx(160.0)
    assert after.start.y_px == 430.0
    after = whole_moved(before, (-20.0, -2000.0), FRAME)
    assert (xy(after.start), xy(after.end)) == ((380.0, 0.0), (540.0, 0.0))


@pytest.mark.parametrize(
    ("part", "start", "end"),
    [
        (Part.START, (408.0, 400.0), (560.0, 400.0)),
        (Part.END, (400.0, 400.0), (568.0, 400.0)),
        (Part.WHOLE, (408.0, 416.0), (568.0, 416.0)),
    ],
)
def test_a_nudge_moves_the_part_that_is_held(
    part: Part, start: tuple[float, float], end: tuple[float, float]
) -> None:
    after = nudged(time_caliper(), part, (1.0, 2.0), FRAME)
    assert xy(after.start) == pytest.approx(start)
    assert xy(after.end) == pytest.approx(end)


def test_a_tenth_of_a_small_square_is_the_smallest_span() -> None:
    assert span_is_too_small(time_caliper(width_px=0.7), FRAME)
    assert not span_is_too_small(time_caliper(width_px=0.9), FRAME)
    flat = replace(height_caliper(), end=PicturePoint(800.0, 600.0))
    assert span_is_too_small(flat, FRAME)  # far apart, but not the way a height measures


def test_more_teeth_keep_start_and_pitch() -> None:
    after = with_teeth(comb_caliper(), 9, FRAME)
    assert (after.teeth, after.start, xy(after.end)) == (
        9,
        comb_caliper().start,
        (680.0, 700.0),
    )


@pytest.mark.parametrize(("asked", "given"), [(1, 2), (-4, 2), (100, 17)])
def test_a_comb_keeps_two_teeth_and_stays_on_the_picture(asked: int, given: int) -> None:
    assert with_teeth(comb_caliper(), asked, FRAME).teeth == given


def test_a_fine_comb_has_sixty_teeth_at_most() -> None:
    fine = replace(comb_caliper(), end=PicturePoint(208.0, 700.0), teeth=2)
    assert with_teeth(fine, 500, FRAME).teeth == MOST_TEETH


def test_the_tooth_on_the_very_edge_counts() -> None:
    """Rounding must not cost it."""
    comb = replace(comb_caliper(), start=PicturePoint(199.0, 700.0), end=PicturePoint(299.0, 700.0))
    filled = with_teeth(replace(comb, teeth=2), 99, FRAME)
    assert (filled.teeth, filled.end.x_px) == (11, EDGE_PX)


def test_a_comb_from_two_teeth_is_level_and_ends_with_the_grid() -> None:
    cells = np.ones((23, 30), dtype=bool)
    cells[:, 15:] = False  # nothing seen from 600 px on
    sheet_map = replace(example_map(), coverage=Coverage.from_cells(cells, 40.0))
    reading = reading_of(blank_picture(), sheet_map=sheet_map)
    two = Caliper(1, CaliperKind.COMB, PicturePoint(100.0, 300.0), PicturePoint(220.0, 330.0))
    comb = comb_from_two_teeth(two, reading, frame_of(reading))
    assert comb.teeth == 5  # 100, 220, 340, 460, 580
    starts_mm, ends_mm = (frame_of(reading).mm_from_px(end) for end in (comb.start, comb.end))
    assert ends_mm[1] == pytest.approx(starts_mm[1])


def test_where_the_reader_gave_the_scale_a_comb_goes_on_past_the_box() -> None:
    nothing = Coverage.from_cells(np.zeros((23, 30), dtype=bool), 40.0)
    sheet_map = replace(example_map(), coverage=nothing, source="reader")
    reading = reading_of(blank_picture(), sheet_map=sheet_map)
    two = Caliper(1, CaliperKind.COMB, PicturePoint(100.0, 300.0), PicturePoint(200.0, 300.0))
    assert comb_from_two_teeth(two, reading, frame_of(reading)).teeth == 8
