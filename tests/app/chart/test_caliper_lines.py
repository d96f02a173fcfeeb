"""What the annotated picture adds to a caliper's shape."""

from __future__ import annotations

import numpy as np
import pytest

from app.chart.caliper_lines import DISTANCES_MM, box_of, lanes_of, mark_ticks
from app.drawing.frame import SheetFrame, frame_of
from app.drawing.shape import caliper_shape
from app.reading import CaliperKind
from tests.app.chart.chart_examples import caliper, reading_of

SKEWED = SheetFrame((20.0, 30.0), (8.0, 0.4), (-0.4, 7.8), (900, 700), True)


@pytest.mark.parametrize("kind", list(CaliperKind))
def test_ticks_cross_the_legs_at_the_marks(kind: CaliperKind) -> None:
    item = caliper(1, (100.0, 200.0), (180.0, 230.0), kind=kind, teeth=2)
    along = SKEWED.y_step_px if kind is CaliperKind.HEIGHT else SKEWED.x_step_px
    for mark, tick in zip(((100.0, 200.0), (180.0, 230.0)), mark_ticks(item, SKEWED), strict=True):
        (x1, y1, x2, y2) = tick
        assert ((x1 + x2) / 2.0, (y1 + y2) / 2.0) == pytest.approx(mark)
        assert (x2 - x1) * along[1] == pytest.approx((y2 - y1) * along[0])
        assert np.hypot(x2 - x1, y2 - y1) > 0.0


def test_a_height_has_its_bar_on_the_right_first() -> None:
    item = caliper(1, (300.0, 600.0), (310.0, 540.0), kind=CaliperKind.HEIGHT)
    lines = caliper_shape(item, frame_of(reading_of()), lanes_of(item)[0])
    assert lines.bar[0] == lines.bar[2] > 310.0


def test_lanes_alternate_sides_and_go_outwards() -> None:
    lanes = lanes_of(caliper(1, (100.0, 200.0), (180.0, 200.0)))
    assert [lane.side for lane in lanes[:4]] == [-1, 1, -1, 1]
    assert [lane.distance_mm for lane in lanes[::2]] == list(DISTANCES_MM)


def test_two_marks_at_one_place_still_have_lines() -> None:
    item = caliper(1, (100.0, 200.0), (100.0, 200.0))
    lines = caliper_shape(item, SKEWED, lanes_of(item)[0])
    assert np.isfinite([*lines.legs, lines.bar, *mark_ticks(item, SKEWED)]).all()


def test_the_box_of_a_line_holds_it() -> None:
    assert box_of((5.0, 9.0, 2.0, 1.0), 1.0) == (1.0, 0.0, 6.0, 10.0)
