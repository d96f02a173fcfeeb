"""Lines: where they lie, to a fraction of a pixel."""

from __future__ import annotations

import numpy as np
import pytest
from PIL import Image

from app.chart.strokes import Segment, draw_stroke

TEAL = (11, 85, 99)


def drawn(segment: Segment, width_px: float, size_px: tuple[int, int] = (60, 50)) -> Image.Image:
    image = Image.new("RGB", size_px, (255, 255, 255))
    draw_stroke(image, segment, width_px, TEAL)
    return image


def darkness(image: Image.Image) -> np.ndarray[tuple[int, int], np.dtype[np.float64]]:
    """Of the red channel, 0 to 1: the share of each pixel that the line covers."""
    return (255.0 - np.asarray(image)[..., 0].astype(np.float64)) / (255.0 - TEAL[0])


@pytest.mark.parametrize("x_px", [20.0, 20.25, 20.5, 20.9])
@pytest.mark.parametrize("width_px", [1.2, 2.0, 3.7])
def test_an_upright_line_lies_where_it_was_put(x_px: float, width_px: float) -> None:
    row = darkness(drawn((x_px, 5.0, x_px, 45.0), width_px))[25]
    assert float(row @ np.arange(row.size) / row.sum()) == pytest.approx(x_px, abs=0.08)
    assert float(row.sum()) == pytest.approx(width_px, abs=0.03)


def test_a_slanting_line_lies_where_it_was_put() -> None:
    cover = darkness(drawn((10.0, 5.0, 14.0, 45.0), 2.0))
    for y in (10, 25, 40):
        centre_px = float(cover[y] @ np.arange(cover.shape[1]) / cover[y].sum())
        assert centre_px == pytest.approx(10.0 + 4.0 * (y - 5.0) / 40.0, abs=0.05)


def test_a_line_thinner_than_a_pixel_is_paler() -> None:
    assert float(darkness(drawn((20.0, 5.0, 20.0, 45.0), 0.5)).max()) == pytest.approx(
        0.5, abs=0.01
    )


@pytest.mark.parametrize(
    "segment", [(-50.0, 20.0, 200.0, 20.0), (-9.0, -9.0, -2.0, -2.0), (5.0, 5.0, 5.0, 5.0)]
)
def test_what_lies_outside_is_left_out(segment: Segment) -> None:
    assert drawn(segment, 2.0).size == (60, 50)


def test_nothing_is_drawn_beyond_the_part_that_may_be_drawn_on() -> None:
    image = Image.new("RGB", (60, 50), (255, 255, 255))
    draw_stroke(image, (5.0, 20.0, 55.0, 20.0), 3.0, TEAL, within_px=(30, 21))
    cover = darkness(image)
    assert cover[:21, :30].max() == 1.0
    assert cover[21:].max() == 0.0
    assert cover[:, 30:].max() == 0.0
