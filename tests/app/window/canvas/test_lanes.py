"""Where bars run: clear of the drawn line, of each other and on the picture."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise

import numpy as np
import pytest

from app.drawing.frame import SheetFrame
from app.drawing.ink_map import InkMap
from app.drawing.shape import Lane, caliper_shape
from app.reading import Caliper, CaliperKind, PicturePoint
from app.window.canvas.lanes import choose_lanes, first_lane
from tests.app.window.canvas.hands import time_caliper

FRAME = SheetFrame((0.0, 0.0), (8.0, 0.0), (0.0, 8.0), (1200, 900), has_grid=True)


def bars(calipers: Sequence[Caliper], ink: InkMap | None = None) -> list[tuple[float, ...]]:
    lanes = choose_lanes(calipers, FRAME, ink)
    return [caliper_shape(one, FRAME, lanes[one.caliper_id]).bar for one in calipers]


def test_alone_on_white_paper_it_takes_the_nearest_lane_on_its_own_side() -> None:
    (lane,) = choose_lanes([time_caliper()], FRAME, None).values()
    assert lane == Lane(side=-1, distance_mm=5.0)
    height = Caliper(2, CaliperKind.HEIGHT, PicturePoint(700.0, 600.0), PicturePoint(710.0, 500.0))
    (lane,) = choose_lanes([height], FRAME, None).values()
    assert lane == Lane(side=1, distance_mm=5.0)


def test_bars_over_one_another_keep_apart() -> None:
    """PR, QRS and QT of one beat."""
    three = [
        time_caliper(1, (400.0, 400.0), 60.0),
        time_caliper(2, (450.0, 400.0), 40.0),
        time_caliper(3, (450.0, 400.0), 160.0),
    ]
    heights = sorted(bar[1] for bar in bars(three))
    assert all(below - above >= 4.0 * 8.0 for above, below in pairwise(heights))


def test_the_spans_of_a_chain_share_one_lane() -> None:
    chain = [time_caliper(number, (200.0 * number, 400.0), 200.0) for number in range(1, 5)]
    assert len({bar[1] for bar in bars(chain)}) == 1


def test_those_placed_before_stay_where_they_are() -> None:
    first = [time_caliper(1), time_caliper(2, (420.0, 400.0))]
    before = choose_lanes(first, FRAME, None)
    after = choose_lanes([*first, time_caliper(3, (410.0, 400.0))], FRAME, None)
    assert {key: after[key] for key in before} == before


def test_a_bar_keeps_off_the_drawn_line() -> None:
    pixels = np.full((900, 1200, 3), 255, dtype=np.uint8)
    pixels[340:372, 380:600] = 20  # where the nearest lane above would be
    assert bars([time_caliper()])[0][1] == pytest.approx(360.0)
    (bar,) = bars([time_caliper()], InkMap(pixels))
    assert not 330.0 < bar[1] < 380.0


def test_near_the_edge_of_the_picture_the_bar_stays_on_it() -> None:
    (bar,) = bars([time_caliper(1, (400.0, 20.0))])
    assert 20.0 < bar[1] < 900.0


def test_while_it_is_placed_a_caliper_has_a_lane_that_depends_on_its_kind_alone() -> None:
    assert first_lane(CaliperKind.TIME) == first_lane(CaliperKind.COMB)
    assert first_lane(CaliperKind.TIME).side == -first_lane(CaliperKind.HEIGHT).side
