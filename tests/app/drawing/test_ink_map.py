"""How much of a box is drawn line: pen, not paper, not grid."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from app.drawing.ink_map import InkMap


def page(paper: tuple[int, int, int] = (255, 250, 248)) -> NDArray[np.uint8]:
    return np.full((400, 600, 3), paper, dtype=np.uint8)


def test_paper_is_not_ink() -> None:
    assert InkMap(page()).share((0.0, 0.0, 600.0, 400.0)) == 0.0


@pytest.mark.parametrize("grid", [(235, 120, 120), (120, 220, 140), (110, 140, 235)])
def test_a_coloured_grid_is_not_ink(grid: tuple[int, int, int]) -> None:
    pixels = page()
    pixels[::8] = pixels[:, ::8] = grid
    assert InkMap(pixels).share((0.0, 0.0, 600.0, 400.0)) == 0.0


def test_a_block_of_ink_is_measured() -> None:
    pixels = page()
    pixels[100:200, 200:400] = 20
    ink = InkMap(pixels)
    assert ink.share((200.0, 100.0, 400.0, 200.0)) == 1.0
    assert ink.share((100.0, 100.0, 300.0, 200.0)) == pytest.approx(0.5, abs=0.02)
    assert ink.share((0.0, 300.0, 600.0, 400.0)) == 0.0


@pytest.mark.parametrize("row", [100, 101, 102, 103])
def test_a_thin_pen_is_not_passed_over(row: int) -> None:
    pixels = page()
    pixels[row : row + 2] = 20
    assert InkMap(pixels).share((0.0, 80.0, 600.0, 120.0)) > 0.0


def test_grey_paper_is_paper() -> None:
    """A dark photograph: what counts is darker than the paper."""
    pixels = page((150, 148, 145))
    pixels[100:200, 200:400] = 20
    ink = InkMap(pixels)
    assert ink.share((0.0, 220.0, 600.0, 400.0)) == 0.0
    assert ink.share((200.0, 100.0, 400.0, 200.0)) == 1.0


@pytest.mark.parametrize(
    "box",
    [(700.0, 0.0, 900.0, 100.0), (10.0, 10.0, 10.0, 50.0), (50.0, 50.0, 10.0, 10.0)],
)
def test_a_box_off_the_picture_or_without_area_holds_nothing(
    box: tuple[float, float, float, float],
) -> None:
    assert InkMap(np.zeros((400, 600, 3), dtype=np.uint8)).share(box) == 0.0


@pytest.mark.parametrize("size", [(1, 1), (3, 7), (2, 9)])
def test_a_tiny_picture_does_no_harm(size: tuple[int, int]) -> None:
    assert InkMap(np.zeros((*size, 3), dtype=np.uint8)).share((0.0, 0.0, 9.0, 9.0)) >= 0.0


def test_the_pixels_stay_as_they_are() -> None:
    pixels = page()
    before = pixels.copy()
    InkMap(pixels).share((0.0, 0.0, 100.0, 100.0))
    assert (pixels == before).all()


def test_a_box_thinner_than_a_cell_holds_what_its_cells_hold() -> None:
    pixels = page()
    pixels[100:104, 40:200] = 20
    assert InkMap(pixels).share((60.0, 101.0, 180.0, 102.0)) == 1.0
