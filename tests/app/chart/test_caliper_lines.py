"""The lines of a caliper follow the map and pass through the marks."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.chart.caliper_lines import Frame, Lane, box_of, caliper_lines, lanes_of
from app.chart.strokes import Segment
from app.reading import CaliperKind
from tests.app.chart.chart_examples import caliper, reading_of

SKEWED = Frame((20.0, 30.0), (8.0, 0.4), (-0.4, 7.8))


def distance_px(point: tuple[float, float], line: Segment) -> float:
    start, end = np.array(line[:2]), np.array(line[2:])
    along = (end - start) / np.linalg.norm(end - start)
    to_point = np.array(point) - start
    return float(abs(to_point[0] * along[1] - to_point[1] * along[0]))


@pytest.mark.parametrize("side", [-1, 1])
@pytest.mark.parametrize("kind", list(CaliperKind))
def test_legs_pass_through_their_marks(kind: CaliperKind, side: int) -> None:
    item = caliper(1, (100.0, 200.0), (180.0, 230.0), kind=kind, teeth=2)
    lines = caliper_lines(item, SKEWED, Lane(side, 6.0))
    for mark, leg in zip(((100.0, 200.0), (180.0, 230.0)), lines.legs, strict=True):
        assert distance_px(mark, leg) == pytest.approx(0.0, abs=1e-9)
    for mark, tick in zip(((100.0, 200.0), (180.0, 230.0)), lines.ticks, strict=True):
        middle = ((tick[0] + tick[2]) / 2.0, (tick[1] + tick[3]) / 2.0)
        assert middle == pytest.approx(mark)


def angle_deg(x: float, y: float) -> float:
    return float(np.degrees(np.arctan2(y, x))) % 180.0


def test_legs_run_down_the_sheet_and_the_bar_along_it() -> None:
    item = caliper(1, (100.0, 200.0), (180.0, 230.0))
    lines = caliper_lines(item, SKEWED, Lane(-1, 6.0))
    (x1, y1, x2, y2), bar = lines.legs[0], lines.bar
    assert angle_deg(x2 - x1, y2 - y1) == pytest.approx(angle_deg(*SKEWED.y_step_px))
    assert angle_deg(bar[2] - bar[0], bar[3] - bar[1]) == pytest.approx(
        angle_deg(*SKEWED.x_step_px)
    )
    assert bar[1] < 200.0
    assert np.hypot(*lines.outward) == pytest.approx(1.0)


def test_a_height_lies_on_its_side() -> None:
    item = caliper(1, (300.0, 600.0), (310.0, 540.0), kind=CaliperKind.HEIGHT)
    lines = caliper_lines(item, Frame.of(reading_of()), lanes_of(item)[0])
    assert lines.bar[0] == lines.bar[2] > 310.0
    assert (lines.bar[1], lines.bar[3]) == pytest.approx((600.0, 540.0))
    assert lines.outward == pytest.approx((1.0, 0.0))


def test_a_comb_has_all_its_teeth_evenly_spaced() -> None:
    item = caliper(1, (100.0, 300.0), (500.0, 300.0), kind=CaliperKind.COMB, teeth=5)
    lines = caliper_lines(item, Frame.of(reading_of()), lanes_of(item)[0])
    assert [leg[0] for leg in lines.legs] == pytest.approx([100.0, 200.0, 300.0, 400.0, 500.0])


def test_without_a_map_lines_are_upright_on_the_picture() -> None:
    reading = replace(reading_of(), sheet_map=None)
    lines = caliper_lines(
        caliper(1, (100.0, 200.0), (180.0, 200.0)), Frame.of(reading), Lane(-1, 5)
    )
    assert [leg[0] for leg in lines.legs] == pytest.approx([100.0, 180.0])


def test_two_marks_at_one_place_still_have_lines() -> None:
    item = caliper(1, (100.0, 200.0), (100.0, 200.0))
    lines = caliper_lines(item, SKEWED, Lane(-1, 5.0))
    assert all(np.isfinite(line).all() for line in (*lines.legs, lines.bar, *lines.ticks))


def test_the_box_of_a_line_holds_it() -> None:
    assert box_of((5.0, 9.0, 2.0, 1.0), 1.0) == (1.0, 0.0, 6.0, 10.0)
