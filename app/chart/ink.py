"""Where the drawn line is, so that bars and labels keep clear of it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Box = tuple[float, float, float, float]

_CELL_PX = 4
_DARKER_THAN_PAPER = 110  # common practice, no source: pen ink, not the printed grid


class Ink:
    """Shares of inked cells in boxes, each in constant time.

    Parameters
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        Not modified. Of the channels the brightest counts, because a coloured grid is bright
        in its own; every second pixel is looked at, and the darkest of a cell counts.

    Notes
    -----
    A summed-area table: Crow, "Summed-area tables for texture mapping", SIGGRAPH 1984.
    """

    def __init__(self, pixels: NDArray[np.uint8]) -> None:
        height_px, width_px = (length // _CELL_PX * _CELL_PX for length in pixels.shape[:2])
        sampled = pixels[:height_px:2, :width_px:2]
        brightest = np.maximum(np.maximum(sampled[..., 0], sampled[..., 1]), sampled[..., 2])
        darkest = brightest.reshape(height_px // _CELL_PX, 2, width_px // _CELL_PX, 2).min((1, 3))
        paper = int(np.percentile(darkest, 80)) if darkest.size else 255
        ink = darkest < paper - _DARKER_THAN_PAPER
        self._sums = np.zeros((ink.shape[0] + 1, ink.shape[1] + 1), dtype=np.int64)
        self._sums[1:, 1:] = ink.cumsum(axis=0).cumsum(axis=1)

    def share(self, box_px: Box) -> float:
        """The share, 0 to 1, of a box (left, top, right, bottom) that is inked."""
        rows, columns = self._sums.shape[0] - 1, self._sums.shape[1] - 1
        left = min(max(int(box_px[0] // _CELL_PX), 0), columns)
        top = min(max(int(box_px[1] // _CELL_PX), 0), rows)
        right = min(max(int(-(-box_px[2] // _CELL_PX)), 0), columns)
        bottom = min(max(int(-(-box_px[3] // _CELL_PX)), 0), rows)
        area = (right - left) * (bottom - top)
        if area <= 0:
            return 0.0
        sums = self._sums
        inked = sums[bottom, right] - sums[top, right] - sums[bottom, left] + sums[top, left]
        return float(inked / area)
