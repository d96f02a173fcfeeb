"""Where the drawn line is."""

from __future__ import annotations

import numpy as np

from app.chart.ink import Ink


def test_a_pen_line_counts_and_the_grid_does_not() -> None:
    pixels = np.full((200, 300, 3), (255, 236, 232), dtype=np.uint8)
    pixels[::8] = (240, 150, 150)
    pixels[100:103, 40:200] = (20, 20, 25)
    ink = Ink(pixels)
    assert ink.share((40.0, 96.0, 200.0, 108.0)) > 0.2
    assert ink.share((40.0, 120.0, 200.0, 190.0)) == 0.0
    assert ink.share((210.0, 90.0, 290.0, 110.0)) == 0.0


def test_a_box_outside_or_without_room_holds_none() -> None:
    ink = Ink(np.zeros((33, 41, 3), dtype=np.uint8))
    assert ink.share((-90.0, -90.0, -10.0, -10.0)) == 0.0
    assert ink.share((500.0, 500.0, 900.0, 900.0)) == 0.0
    assert ink.share((8.0, 8.0, 8.0, 8.0)) == 0.0


def test_a_page_all_dark_has_no_line_on_it() -> None:
    assert Ink(np.full((64, 64, 3), 30, dtype=np.uint8)).share((0.0, 0.0, 63.0, 63.0)) == 0.0
