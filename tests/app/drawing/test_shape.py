"""The lines a caliper is drawn with, on a grid that is not upright."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.drawing.frame import SheetFrame, frame_of
from app.drawing.shape import (
    BEYOND_BAR_MM,
    BEYOND_MARK_MM,
    Lane,
    aim_segments,
    caliper_shape,
)
from app.reading import Caliper, CaliperKind, PicturePoint
from tests.app.reading_examples import example_map, example_reading
from tests.bends import bent

UPRIGHT = SheetFrame((0.0, 0.0), (10.0, 0.0), (0.0, 10.0), (2000, 1000), has_grid=True)
SKEWED = SheetFrame((13.0, 7.0), (9.8, 0.7), (-0.6, 10.1), (2000, 1000), has_grid=True)
# Scanned with its right side up: +x of the sheet runs up the picture.
TURNED = SheetFrame((500.0, 900.0), (0.0, -10.0), (10.0, 0.0), (2000, 1000), has_grid=True)


def caliper(kind: CaliperKind, start: tuple[float, float], end: tuple[float, float]) -> Caliper:
    teeth = 5 if kind is CaliperKind.COMB else 2
    return Caliper(1, kind, PicturePoint(*start), PicturePoint(*end), teeth=teeth)


def test_a_time_caliper_stands_on_two_legs_with_its_bar_above() -> None:
    time = caliper(CaliperKind.TIME, (400.0, 500.0), (600.0, 480.0))
    shape = caliper_shape(time, UPRIGHT, Lane(side=-1, distance_mm=6.0))
    bar_y = 480.0 - 60.0
    tip_y, foot_y = bar_y - 10.0 * BEYOND_BAR_MM, 500.0 + 10.0 * BEYOND_MARK_MM
    assert shape.bar == pytest.approx((400.0, bar_y, 600.0, bar_y))
    assert shape.legs[0] == pytest.approx((400.0, tip_y, 400.0, foot_y))
    assert shape.legs[1] == pytest.approx((600.0, tip_y, 600.0, foot_y))
    assert shape.outward == pytest.approx((0.0, -10.0))


def test_below_it_is_the_same_upside_down() -> None:
    time = caliper(CaliperKind.TIME, (400.0, 500.0), (600.0, 480.0))
    shape = caliper_shape(time, UPRIGHT, Lane(side=1, distance_mm=6.0))
    assert shape.bar == pytest.approx((400.0, 560.0, 600.0, 560.0))
    assert shape.outward == pytest.approx((0.0, 10.0))


def test_a_height_caliper_lies_on_its_side() -> None:
    height = caliper(CaliperKind.HEIGHT, (400.0, 500.0), (420.0, 400.0))
    shape = caliper_shape(height, UPRIGHT, Lane(side=1, distance_mm=6.0))
    assert shape.bar == pytest.approx((480.0, 500.0, 480.0, 400.0))
    assert [leg[1] for leg in shape.legs] == pytest.approx([500.0, 400.0])
    assert shape.outward == pytest.approx((10.0, 0.0))


def test_the_teeth_of_a_comb_are_evenly_spaced_from_the_first_to_the_last() -> None:
    comb = caliper(CaliperKind.COMB, (200.0, 500.0), (600.0, 500.0))
    shape = caliper_shape(comb, UPRIGHT, Lane())
    assert [leg[0] for leg in shape.legs] == pytest.approx([200.0, 300.0, 400.0, 500.0, 600.0])


@pytest.mark.parametrize("frame", [UPRIGHT, SKEWED, TURNED], ids=["upright", "skewed", "turned"])
@pytest.mark.parametrize("kind", list(CaliperKind))
def test_every_leg_runs_through_its_mark_along_the_grid(
    frame: SheetFrame, kind: CaliperKind
) -> None:
    one = caliper(kind, (400.0, 500.0), (620.0, 430.0))
    shape = caliper_shape(one, frame, Lane(distance_mm=9.0))
    axis = 1 if kind is CaliperKind.HEIGHT else 0
    for leg, mark in ((shape.legs[0], one.start), (shape.legs[-1], one.end)):
        ends_mm = [
            frame.mm_from_px(PicturePoint(*leg[:2])),
            frame.mm_from_px(PicturePoint(*leg[2:])),
        ]
        mark_mm = frame.mm_from_px(mark)
        assert [end[axis] for end in ends_mm] == pytest.approx([mark_mm[axis]] * 2)
        across = sorted(end[1 - axis] for end in ends_mm)
        assert across[0] < mark_mm[1 - axis] < across[1]
    assert shape.marks == ((400.0, 500.0), (620.0, 430.0))


def test_the_long_arm_of_the_cross_runs_the_way_of_the_leg() -> None:
    place = PicturePoint(500.0, 500.0)

    def lengths(kind: CaliperKind | None) -> tuple[float, float]:
        across, down = aim_segments(UPRIGHT, place, kind)
        return across[2] - across[0], down[3] - down[1]

    across, down = lengths(CaliperKind.TIME)
    assert down > 5 * across
    across, down = lengths(CaliperKind.HEIGHT)
    assert across > 5 * down
    across, down = lengths(None)
    assert across == pytest.approx(down)


def test_the_cross_has_the_place_in_its_middle() -> None:
    place = PicturePoint(500.0, 300.0)
    for x1, y1, x2, y2 in aim_segments(SKEWED, place, CaliperKind.TIME):
        assert ((x1 + x2) / 2.0, (y1 + y2) / 2.0) == pytest.approx((500.0, 300.0))


def test_a_caliper_marked_backwards_has_the_same_lines() -> None:
    forward = caliper(CaliperKind.TIME, (400.0, 500.0), (600.0, 480.0))
    backward = replace(forward, start=forward.end, end=forward.start)
    there, back = (caliper_shape(one, SKEWED, Lane()) for one in (forward, backward))
    assert there.legs == tuple(reversed(back.legs))


def test_on_a_bent_sheet_the_legs_run_as_the_grid_does_there() -> None:
    sheet_map = bent(example_map())
    reading = replace(example_reading(), sheet_map=sheet_map)
    for start, end in (((150, 150), (230, 140)), ((1000, 700), (1080, 712))):
        shape = caliper_shape(caliper(CaliperKind.TIME, start, end), frame_of(reading), Lane())
        for leg in shape.legs:
            ends_mm = sheet_map.to_mm(np.array(leg).reshape(2, 2))
            assert abs(ends_mm[1, 0] - ends_mm[0, 0]) < 0.1
            assert abs(ends_mm[1, 1] - ends_mm[0, 1]) > 8.0
