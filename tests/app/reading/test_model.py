from __future__ import annotations

from pathlib import Path

import numpy as np

from app.reading import HandFigure, PictureIdentity, new_reading
from imaging.picture import Picture
from tests.app.reading_examples import example_caliper, example_reading


def test_a_new_reading_is_empty_and_knows_its_picture() -> None:
    pixels = np.zeros((30, 40, 3), dtype=np.uint8)
    picture = Picture(pixels, "sheet.png", Path("sheet.png"), "ab" * 32, page=1, page_count=2)
    reading = new_reading(picture, now="2026-01-02T03:04:05+00:00", software_version="S 1")
    assert reading.picture == PictureIdentity("sheet.png", "ab" * 32, (40, 30), 1)
    assert reading.calipers == ()
    assert reading.sheet_map is None
    assert not reading.calibration.paper_speed_mm_per_s.confirmed


def test_an_added_caliper_moves_the_next_id_on() -> None:
    reading = example_reading().with_caliper(example_caliper(7))
    assert [c.caliper_id for c in reading.calipers] == [1, 2, 7]
    assert reading.next_caliper_id == 8


def test_ids_are_not_used_again_after_removal() -> None:
    reading = example_reading().with_caliper(example_caliper(3)).without_calipers(frozenset({3}))
    assert reading.caliper(3) is None
    assert reading.next_caliper_id == 4


def test_a_caliper_is_replaced_where_it_stands() -> None:
    moved = example_caliper(1, lead="V5")
    reading = example_reading().with_caliper(moved)
    assert reading.calipers[0] == moved
    assert len(reading.calipers) == 2


def test_beats_of_a_line_are_numbered_on() -> None:
    reading = example_reading()
    assert reading.next_beat("qrs", "II") == 2
    assert reading.next_beat("qrs", "V1") == 1
    assert reading.calipers_of("qrs", "II") == (reading.calipers[0],)


def test_a_hand_figure_is_one_for_each_key_and_lead() -> None:
    reading = example_reading().with_hand_figure(HandFigure("qrs", 100.0, "II"))
    reading = reading.with_hand_figure(HandFigure("qrs", 88.0, "V1"))
    assert [h.value for h in reading.hand_figures] == [100.0, 88.0]
    assert reading.hand_figure("qrs", "II") == HandFigure("qrs", 100.0, "II")
    assert reading.without_hand_figure("qrs", "II").hand_figure("qrs", "II") is None
