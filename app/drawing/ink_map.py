"""How much of the drawn line lies in a box of the picture: labels keep clear of it."""

from __future__ import annotations

from functools import cached_property
from math import ceil, floor

import numpy as np
from numpy.typing import NDArray

Box = tuple[float, float, float, float]

_STEP_PX = 4
_DARKER_THAN_PAPER = 110  # common practice, no source: pen ink, not the printed grid


class InkMap:
    """Shares of dark pixels in boxes, each in constant time.

    Parameters
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        Not modified. Every second pixel is looked at and the darkest of 4 by 4 counts, so that
        a thin pen is not missed; of the channels the brightest, because a coloured grid is
        bright in its own.

    Notes
    -----
    A summed-area table: Crow, "Summed-area tables for texture mapping", SIGGRAPH 1984.
    """

    def __init__(self, pixels: NDArray[np.uint8]) -> None:
        self._pixels = pixels

    @cached_property
    def _sums(self) -> NDArray[np.int64]:
        """Made when the first label asks: a picture must not wait for it to be shown."""
        sampled = self._pixels[::2, ::2]
        brightest = np.maximum(np.maximum(sampled[..., 0], sampled[..., 1]), sampled[..., 2])
        rows, columns = (length // 2 * 2 for length in brightest.shape)
        blocks = brightest[:rows, :columns].reshape(rows // 2, 2, columns // 2, 2)
        darkest = blocks.min(axis=(1, 3))
        paper = int(np.percentile(darkest, 80)) if darkest.size else 255
        ink = darkest < paper - _DARKER_THAN_PAPER
        sums = np.zeros((ink.shape[0] + 1, ink.shape[1] + 1), dtype=np.int64)
        sums[1:, 1:] = ink.cumsum(axis=0).cumsum(axis=1)
        return sums

    def share(self, box_px: Box) -> float:
        """The share, 0 to 1, of a box (left, top, right, bottom) in picture_px that is inked."""
        rows, columns = self._sums.shape[0] - 1, self._sums.shape[1] - 1
        # Outwards to whole cells: a thin box between two of them holds what they hold.
        left, top = (max(floor(place / _STEP_PX), 0) for place in box_px[:2])
        right = min(ceil(box_px[2] / _STEP_PX), columns)
        bottom = min(ceil(box_px[3] / _STEP_PX), rows)
        if right <= left or bottom <= top:
            return 0.0
        sums = self._sums
        inked = sums[bottom, right] - sums[top, right] - sums[bottom, left] + sums[top, left]
        return float(inked / ((right - left) * (bottom - top)))
