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
    key_refined,
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
    after = leg_moved(before, 1, 2.5, SKEWED, hand_step_px=0.5)
    moved_mm = np.subtract(SKEWED.mm_from_px(after.end), SKEWED.mm_from_px(before.end))
    assert moved_mm == pytest.approx((2.5, 0.0), abs=1e-9)
    assert after.start == before.start


def test_the_leg_of_a_height_moves_down_it() -> None:
    before = height_caliper()
    after = leg_moved(before, 0, -1.5, SKEWED, hand_step_px=0.5)
    moved_mm = np.subtract(SKEWED.mm_from_px(after.start), SKEWED.mm_from_px(before.start))
    assert moved_mm == pytest.approx((0.0, -1.5), abs=1e-9)
    assert after.end == before.end


def test_a_leg_stops_on_the_edge_and_still_on_its_line() -> None:
    after = leg_moved(time_caliper(), 1, 500.0, SKEWED, hand_step_px=0.5)
    assert after.end.x_px == pytest.approx(EDGE_PX)
    before_mm = SKEWED.mm_from_px(time_caliper().end)
    assert SKEWED.mm_from_px(after.end)[1] == pytest.approx(before_mm[1])


@pytest.mark.parametrize("tooth", [1, 2, 3, 4])
def test_a_tooth_stretches_the_comb_so_that_it_goes_with_the_hand(tooth: int) -> None:
    before = comb_caliper()
    after = leg_moved(before, tooth, 1.0, FRAME, hand_step_px=0.5)
    assert after.start == before.start

    def tooth_x(comb: Caliper) -> float:
        return comb.start.x_px + (comb.end.x_px - comb.start.x_px) * tooth / (comb.teeth - 1)

    assert tooth_x(after) - tooth_x(before) == pytest.approx(8.0)


def test_the_first_tooth_moves_and_the_last_one_stays() -> None:
    after = leg_moved(comb_caliper(), 0, -2.0, FRAME, hand_step_px=0.5)
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


def in_steps(caliper: Caliper, start_px: float, end_px: float) -> Caliper:
    """The caliper as if its legs were placed in such steps."""
    return replace(
        caliper,
        start=replace(caliper.start, step_px=start_px),
        end=replace(caliper.end, step_px=end_px),
    )


def steps_px(caliper: Caliper) -> tuple[float, float]:
    return caliper.start.step_px, caliper.end.step_px


@pytest.mark.parametrize("hand_step_px", [0.25, 6.0])
def test_a_leg_takes_on_the_step_of_the_hand_that_moves_it(hand_step_px: float) -> None:
    before = in_steps(time_caliper(), 3.0, 4.0)
    start_moved, end_moved = (
        leg_moved(before, tooth, 1.0, FRAME, hand_step_px=hand_step_px) for tooth in (0, 1)
    )
    assert steps_px(start_moved) == (hand_step_px, 4.0)
    assert steps_px(end_moved) == (3.0, hand_step_px)


def test_a_tooth_held_near_the_start_moves_the_end_in_longer_steps() -> None:
    """Four gaps: the second tooth's pixel is four of the last one's."""
    before = in_steps(comb_caliper(), 3.0, 4.0)
    for tooth, end_px in ((1, 8.0), (2, 4.0), (4, 2.0)):
        after = leg_moved(before, tooth, 1.0, FRAME, hand_step_px=2.0)
        assert steps_px(after) == (3.0, pytest.approx(end_px))


def test_a_whole_move_makes_no_leg_finer() -> None:
    before = in_steps(time_caliper(), 1.0, 4.0)
    assert steps_px(whole_moved(before, (5.0, 5.0), FRAME, hand_step_px=2.5)) == (2.5, 4.0)
    assert steps_px(whole_moved(before, (5.0, 5.0), FRAME, hand_step_px=0.5)) == (1.0, 4.0)


@pytest.mark.parametrize(
    ("part", "step_mm", "expected"),
    [
        (Part.START, (0.1, 0.0), (0.8, 4.0)),
        (Part.END, (-0.1, 0.0), (0.5, 0.8)),
        (Part.WHOLE, (0.1, 0.0), (0.5, 4.0)),
        # Ten and fifty at once, and across: as it was.
        (Part.END, (1.0, 0.0), (0.5, 4.0)),
        (Part.END, (-5.0, 0.0), (0.5, 4.0)),
        (Part.END, (0.0, 0.1), (0.5, 4.0)),
    ],
)
def test_a_single_key_step_refines_the_leg_it_moves(
    part: Part, step_mm: tuple[float, float], expected: tuple[float, float]
) -> None:
    start_px = 4.0 if part is Part.START else 0.5
    moved = nudged(in_steps(time_caliper(), start_px, 4.0), part, step_mm, FRAME)
    assert steps_px(moved) == pytest.approx(expected)


def test_a_key_never_makes_a_leg_coarser() -> None:
    assert key_refined(0.3, (0.1, 0.0), 0, FRAME) == 0.3
    assert key_refined(0.0, (0.1, 0.0), 0, FRAME) == 0.0


def test_the_key_step_is_as_long_as_the_squares_are_there() -> None:
    for axis, step_mm in ((0, (0.1, 0.0)), (1, (0.0, 0.1))):
        expected = np.hypot(*SKEWED.px_step(*step_mm))
        assert key_refined(9.0, step_mm, axis, SKEWED) == pytest.approx(expected)


def pitch_variance(comb: Caliper) -> float:
    """Of the pitch, by the steps alone, in units of a step of 1 px."""
    return float(np.hypot(*steps_px(comb)) / (comb.teeth - 1)) ** 2


def test_a_comb_of_many_teeth_is_no_surer_of_its_pitch_than_the_two_it_came_from() -> None:
    reading = reading_of(blank_picture())
    two = Caliper(1, CaliperKind.COMB, PicturePoint(100, 300, 2.0), PicturePoint(200, 300, 3.0))
    comb = comb_from_two_teeth(two, reading, frame_of(reading))
    assert comb.teeth == 8
    assert comb.start.step_px == 2.0
    assert pitch_variance(comb) == pytest.approx(2.0**2 + 3.0**2)
    assert pitch_variance(with_teeth(comb, 10, FRAME)) == pytest.approx(2.0**2 + 3.0**2)
    assert steps_px(with_teeth(comb, 2, FRAME)) == pytest.approx((2.0, 3.0))


def test_fewer_teeth_never_make_the_pitch_surer() -> None:
    before = in_steps(comb_caliper(), 3.0, 0.1)
    after = with_teeth(before, 2, FRAME)
    assert steps_px(after) == (3.0, 0.0)
    assert pitch_variance(after) > pitch_variance(before)
    assert steps_px(with_teeth(before, 5, FRAME)) == (3.0, 0.1)
