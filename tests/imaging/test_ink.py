"""Grid ink told from paper and pen."""

from __future__ import annotations

import numpy as np
import pytest

from imaging.ink import grid_ink, grid_weights, is_two_level
from tests.pages import flat_page


def test_a_red_grid_shows_in_green_and_blue() -> None:
    weights = grid_weights(flat_page(dpi=150.0, colour="red").pixels)
    assert weights.sum() == pytest.approx(1.0, abs=1e-6)
    assert weights[0] < 0.3 * weights[1]
    assert weights[0] < 0.3 * weights[2]


def test_a_blank_page_weighs_all_channels_alike() -> None:
    assert grid_weights(np.full((90, 120, 3), 250, dtype=np.uint8)) == pytest.approx(1.0 / 3.0)


def test_paper_is_zero_and_bold_lines_about_one_under_shading() -> None:
    page = flat_page(dpi=200.0, shading=30.0, traces=False)
    darkness = grid_ink(page.pixels).darkness
    mm = np.stack(np.meshgrid(np.arange(5.0, 105.0, 5.0), np.arange(5.0, 70.0, 5.0)), axis=-1)
    paper = page.to_px(mm.reshape(-1, 2) + 0.5).round().astype(int)
    bold = page.to_px(mm.reshape(-1, 2)).round().astype(int)
    assert abs(float(np.median(darkness[paper[:, 1], paper[:, 0]]))) < 0.1
    assert 0.8 < float(np.median(darkness[bold[:, 1], bold[:, 0]])) <= 1.25


def test_the_pen_weighs_no_more_than_paper_with_lines() -> None:
    """On the trace stands the page's mean: a black line would be eight times as dark."""
    page = flat_page(dpi=200.0, colour="pink")
    ink = grid_ink(page.pixels).darkness
    points = page.to_px(page.page.strips[0].points_mm()).round().astype(int)
    on_pen = ink[points[:, 1], points[:, 0]]
    assert float(np.median(on_pen)) == pytest.approx(float(ink.mean()), abs=0.05)
    assert float(np.mean(on_pen)) < 0.4


def test_a_large_picture_is_binned_about_its_bins_centres() -> None:
    pixels = np.full((200, 300, 3), 255, dtype=np.uint8)
    pixels[0::20] = pixels[1::20] = 0
    ink = grid_ink(pixels, max_pixels=20_000)
    assert ink.bin_px == 2
    assert ink.darkness.shape == (100, 150)
    assert ink.darkness[50, 70] > 0.9
    assert ink.darkness[[49, 51], 70] == pytest.approx(0.0, abs=0.05)
    assert ink.binned(3).bin_px == 6
    assert ink.binned(3).darkness.shape == (33, 50)


def test_two_levels_are_known() -> None:
    assert is_two_level(flat_page(dpi=150.0, mode="one_bit").pixels)
    assert not is_two_level(flat_page(dpi=150.0).pixels)
    assert is_two_level(np.zeros((40, 40, 3), dtype=np.uint8))
