"""Bars and labels: none over another, all on the picture, the pen line left free."""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from app.chart.placing import PlacedCaliper, place_calipers
from app.drawing.frame import SheetFrame
from app.drawing.ink_map import Box, InkMap
from app.reading import Caliper
from tests.app.chart.chart_examples import SIZE_PX, beats, caliper, reading_of

FRAME = SheetFrame((12.0, 9.0), (8.0, 0.0), (0.0, 8.0), SIZE_PX, True)
PAPER = np.full((SIZE_PX[1], SIZE_PX[0], 3), 245, dtype=np.uint8)


def placed(
    calipers: tuple[Caliper, ...],
    pixels: np.ndarray[tuple[int, int, int], np.dtype[np.uint8]] = PAPER,
    texts: tuple[str, ...] = ("QRS II·1 92 ± 8 ms", "QRS II·1", "#1"),
) -> list[PlacedCaliper]:
    height_px, width_px = pixels.shape[:2]
    return place_calipers(
        calipers,
        {item.caliper_id: texts for item in calipers},
        FRAME,
        InkMap(pixels),
        (width_px, height_px),
        lambda text: (9.0 * len(text), 22.0),
    )


def overlap(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]


@pytest.mark.parametrize("count", [1, 3, 10])
def test_no_label_lies_over_another_or_off_the_picture(count: int) -> None:
    labels = [item.label for item in placed(beats(count))]
    boxes = [label.box for label in labels if label is not None]
    assert len(boxes) == len(labels)
    assert not any(overlap(*pair) for pair in combinations(boxes, 2))
    for left, top, right, bottom in boxes:
        assert left >= 0.0
        assert top >= 0.0
        assert right <= SIZE_PX[0] - 1
        assert bottom <= SIZE_PX[1] - 1


def test_a_single_label_stands_in_full_above_its_bar() -> None:
    (one,) = placed((caliper(1, (300.0, 400.0), (480.0, 400.0)),))
    assert one.label is not None
    assert one.label.text == "QRS II·1 92 ± 8 ms"
    assert one.label.leader is None
    assert one.label.box[3] < one.lines.bar[1] < 400.0
    assert (one.label.box[0] + one.label.box[2]) / 2.0 == pytest.approx(390.0)


def test_a_label_and_a_bar_keep_off_the_pen_line() -> None:
    pixels = PAPER.copy()
    pixels[300:396, 250:520] = 20
    (one,) = placed((caliper(1, (300.0, 400.0), (480.0, 400.0)),), pixels)
    assert one.label is not None
    assert not overlap(one.label.box, (250.0, 300.0, 520.0, 396.0))


def test_a_chain_of_intervals_shares_one_lane() -> None:
    chain = tuple(
        caliper(n, (100.0 + 200.0 * n, 400.0), (300.0 + 200.0 * n, 400.0), "rr", beat=n)
        for n in range(1, 5)
    )
    assert len({item.lines.bar[1] for item in placed(chain)}) == 1


def test_bars_over_the_same_stretch_take_lanes_of_their_own() -> None:
    same = tuple(caliper(n, (300.0, 400.0), (480.0, 400.0), beat=n) for n in range(1, 5))
    heights_px = [item.lines.bar[1] for item in placed(same)]
    assert len({round(y) for y in heights_px}) == 4


def test_in_a_crowd_labels_become_short_and_none_is_over_another() -> None:
    crowd = tuple(
        caliper(n, (100.0 + 3.0 * n, 150.0), (130.0 + 3.0 * n, 150.0), beat=n) for n in range(1, 41)
    )
    found = placed(crowd, PAPER[:300, :400])
    boxes = [item.label.box for item in found if item.label is not None]
    assert not any(overlap(*pair) for pair in combinations(boxes, 2))
    assert any(item.label is not None and item.label.text == "#1" for item in found)


def test_where_no_label_fits_the_lines_are_there_all_the_same() -> None:
    (one,) = placed((caliper(1, (10.0, 20.0), (30.0, 20.0)),), PAPER[:40, :40], ("much too long",))
    assert one.label is None
    assert len(one.lines.legs) == 2


def test_a_label_away_from_its_bar_has_a_line_to_it() -> None:
    found = placed(beats(8))
    apart = [item.label for item in found if item.label is not None and item.label.leader]
    assert apart
    for label in apart:
        assert label.leader is not None
        left, top, right, bottom = label.box
        assert left <= label.leader[2] <= right
        assert top <= label.leader[3] <= bottom


def test_the_order_decides_and_the_same_comes_out_again() -> None:
    assert placed(beats(4)) == placed(beats(4))
    assert reading_of().sheet_map is not None
    assert place_calipers((), {}, FRAME, InkMap(PAPER), SIZE_PX, lambda _: (1.0, 1.0)) == []


def test_a_name_is_kept_before_the_bare_number() -> None:
    found = placed(beats(2), texts=("no value here", "#1"))
    assert {item.label.text for item in found if item.label is not None} == {"no value here"}
