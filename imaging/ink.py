"""Split a page into grid ink, trace ink and paper, as far as finding the grid needs it.

The grid is printed lighter than the trace and often in a colour. What is kept is one number
a pixel: darkness against the paper around it, weighed by the grid's own colour and cut off
a little above the bold lines, so that a black trace counts no more than a bold line.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatPlane = NDArray[np.float32]

MAX_WORKING_PIXELS = 10_500_000
_BLOCK_PX = 48
_BLOCK_STRIDE = 3
_PATCH_PX = 32
_PATCHES = 120
_PAPER_PERCENTILE = 80.0
_GRID_PERCENTILES = (70.0, 94.0)
_BOLD_PERCENTILE = 93.0
_FAINTEST_GREY_LEVELS = 1.5
_CUT_ABOVE_BOLD = 1.25
_PEN_STRIDE = 5
_LEVELS_STRIDE = 7
_LEVELS_SHARE = 0.002
_PEN_PERCENTILE = 99.7
_GRID_PERCENTILE = 95.0
_PEN_OVER_GRID = 2.0
_PEN_CORE = 0.6
_CUT_BELOW_PAPER = -0.3


@dataclass(frozen=True, slots=True, eq=False)
class GridInk:
    """Darkness of the grid's colour, and how its pixels lie on the picture.

    Attributes
    ----------
    darkness : ndarray of float32, shape (rows, columns)
        0 is paper, 1 about a bold line; trace ink is cut off a little above.
    bin_px : int
        Picture pixels on the side of one pixel of `darkness`; the centre of its pixel (i, j)
        lies at ``bin_px * (j, i) + (bin_px - 1) / 2`` in picture_px.
    """

    darkness: FloatPlane
    bin_px: int

    def binned(self, times: int) -> GridInk:
        """Coarser by a whole factor; rows and columns that fill no bin are left out."""
        return GridInk(_bin_floats(self.darkness, times), self.bin_px * times)


def grid_ink(pixels: NDArray[np.uint8], max_pixels: int = MAX_WORKING_PIXELS) -> GridInk:
    """Darkness of the grid's colour over a whole picture.

    Parameters
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        sRGB. Not modified.
    max_pixels : int
        Larger pictures are binned by a whole factor; a bin's centre is the centre of its
        pixels, so nothing is shifted.
    """
    import cv2

    height_px, width_px = pixels.shape[:2]
    bin_px = max(1, int(np.ceil(np.sqrt(height_px * width_px / max_pixels))))
    bin_px = min(bin_px, height_px, width_px)
    # cv2.transform rounds to 8 bits again: 0.3 grey levels, which the lock-in averages away.
    light = np.asarray(
        cv2.transform(pixels, grid_weights(pixels)[np.newaxis]), dtype=np.uint8
    ).reshape(height_px, width_px)
    if bin_px > 1:
        rows, columns = height_px // bin_px, width_px // bin_px
        whole = light[: rows * bin_px, : columns * bin_px]
        binned = cv2.resize(whole, (columns, rows), interpolation=cv2.INTER_AREA)
        light = np.asarray(binned, dtype=np.uint8)
    return GridInk(_darkness(light), bin_px)


def grid_weights(pixels: NDArray[np.uint8]) -> FloatPlane:
    """How much each channel darkens on the grid's lines, shape (3,), summing to one.

    Looked at in patches scattered over the picture, so that shading does not matter: the
    ink between paper and the darkest few per cent (which hold the trace and text).
    """
    height_px, width_px = pixels.shape[:2]
    side = min(_PATCH_PX, height_px, width_px)
    rng = np.random.default_rng(0)
    tops = rng.integers(0, height_px - side + 1, _PATCHES)
    lefts = rng.integers(0, width_px - side + 1, _PATCHES)
    patches = np.stack(
        [
            pixels[top : top + side, left : left + side].reshape(-1, 3)
            for top, left in zip(tops, lefts, strict=True)
        ]
    ).astype(np.float32)
    index = round((patches.shape[1] - 1) * _PAPER_PERCENTILE / 100.0)
    paper = np.partition(patches, index, axis=1)[:, index : index + 1]
    darkness = (paper - patches).reshape(-1, 3)
    total = darkness.sum(axis=1)
    low, high = np.percentile(total, _GRID_PERCENTILES)
    chosen = darkness[(total >= low) & (total <= high)]
    weights = np.maximum(chosen.mean(axis=0), 0.0)
    if weights.sum() < 1.0:
        return np.full(3, 1.0 / 3.0, dtype=np.float32)
    return np.asarray(weights / weights.sum(), dtype=np.float32)


def is_two_level(pixels: NDArray[np.uint8]) -> bool:
    """Whether a picture is black and white with hardly a grey between."""
    sample = pixels[::_LEVELS_STRIDE, ::_LEVELS_STRIDE, 1]
    low, high = int(sample.min()), int(sample.max())
    margin = (high - low) // 8
    between = (sample > low + margin) & (sample < high - margin)
    return float(between.mean()) < _LEVELS_SHARE


def _bin_floats(plane: FloatPlane, times: int) -> FloatPlane:
    import cv2

    if times == 1:
        return plane
    rows, columns = plane.shape[0] // times, plane.shape[1] // times
    whole = plane[: rows * times, : columns * times]
    return np.asarray(cv2.resize(whole, (columns, rows), interpolation=cv2.INTER_AREA))


def _darkness(light: NDArray[np.uint8]) -> FloatPlane:
    """Paper minus light, in units of the bold lines' darkness and cut off above them."""
    import cv2

    rows, columns = light.shape
    paper = _block_percentile(light, _PAPER_PERCENTILE)
    if min(paper.shape) >= 3:
        paper = np.asarray(cv2.medianBlur(paper, 3), dtype=np.float32)
    smooth = cv2.resize(paper, (columns, rows), interpolation=cv2.INTER_LINEAR)
    plane: FloatPlane = np.asarray(smooth, dtype=np.float32)
    np.subtract(plane, light, out=plane)
    blocks = _block_percentile(plane, _BOLD_PERCENTILE)
    printed = blocks[blocks > _FAINTEST_GREY_LEVELS]
    bold = float(np.median(printed)) if printed.size else _FAINTEST_GREY_LEVELS
    _take_out_pen(plane)
    plane *= 1.0 / bold
    np.clip(plane, _CUT_BELOW_PAPER, _CUT_ABOVE_BOLD, out=plane)
    return plane


def _take_out_pen(plane: FloatPlane) -> None:
    """Put the page's mean where a pen much darker than the grid has drawn, in place.

    A trace cut off at the bold lines' darkness still weighs as much as they do; at the mean
    it weighs nothing. Where the pen is not clearly darker (one bit), nothing is changed.
    """
    import cv2

    sample = plane[::_PEN_STRIDE, ::_PEN_STRIDE].ravel()
    darkest, grid = np.percentile(sample, [_PEN_PERCENTILE, _GRID_PERCENTILE])
    if darkest < _PEN_OVER_GRID * max(float(grid), _FAINTEST_GREY_LEVELS):
        return
    drawn = (plane > _PEN_CORE * darkest).astype(np.uint8)
    drawn = np.asarray(cv2.dilate(drawn, np.ones((3, 3), dtype=np.uint8)), dtype=np.uint8)
    beside = drawn == 0
    plane[~beside] = plane[beside].mean()


def _block_percentile(plane: NDArray[np.uint8] | FloatPlane, percentile: float) -> FloatPlane:
    """Percentile of each square block, from every third pixel both ways."""
    tall, wide = (min(_BLOCK_PX, side) for side in plane.shape)
    rows, columns = plane.shape[0] // tall, plane.shape[1] // wide
    whole = plane[: rows * tall, : columns * wide].reshape(rows, tall, columns, wide)
    sample = whole[:, ::_BLOCK_STRIDE, :, ::_BLOCK_STRIDE].transpose(0, 2, 1, 3)
    flat = sample.reshape(rows, columns, -1)
    index = round((flat.shape[2] - 1) * percentile / 100.0)
    return np.asarray(np.partition(flat, index, axis=2)[:, :, index], dtype=np.float32)
