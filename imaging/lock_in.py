"""Lock-in: how strongly, and with which phase, a wave runs through each tile of a picture."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.lib.stride_tricks import sliding_window_view
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Tiles:
    """Overlapping square windows on a plane.

    Attributes
    ----------
    side_px, step_px : int
        Side of a window and distance of neighbours, in pixels of the plane.
    shape : (int, int)
        Rows and columns of tiles.
    smooth : bool
        Hann windows (for phases), else plain boxes (for where the grid ends).
    """

    side_px: int
    step_px: int
    shape: tuple[int, int]
    smooth: bool = True

    @classmethod
    def over(
        cls, plane_shape: tuple[int, int], side_px: int, step_px: int, *, smooth: bool = True
    ) -> Tiles:
        """As many whole windows as fit; at least one each way where the plane holds it."""
        side_px = min(side_px, *plane_shape)
        rows, columns = ((length - side_px) // step_px + 1 for length in plane_shape)
        return cls(side_px, step_px, (rows, columns), smooth)

    def window(self) -> FloatArray:
        """Weights along one side, summing to one."""
        if not self.smooth:
            return np.full(self.side_px, 1.0 / self.side_px)
        places = (np.arange(self.side_px) + 0.5) / self.side_px
        hann = 1.0 - np.cos(2.0 * np.pi * places)
        return np.asarray(hann / hann.sum())

    def centres_px(self) -> FloatArray:
        """x and y of the tiles' centres on the plane, shape (rows, columns, 2)."""
        y_px, x_px = (
            np.arange(count) * self.step_px + (self.side_px - 1) / 2.0 for count in self.shape
        )
        return np.stack(np.meshgrid(x_px, y_px), axis=-1)


def lock_in(plane: NDArray[np.float32], waves: FloatArray, tiles: Tiles) -> ComplexArray:
    """Windowed mean of ``plane * exp(-2 pi i wave . (x, y))`` in every tile.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)
    waves : ndarray of float64, shape (K, 2)
        Cycles per pixel along x and y.
    tiles : Tiles

    Returns
    -------
    ndarray of complex128, shape (tile rows, tile columns, K)
        Phases are counted from pixel (0, 0) of the plane.
    """
    window = tiles.window()
    within = np.arange(tiles.side_px)
    turns = np.outer(waves[:, 1], within)
    down = window * np.exp(-2j * np.pi * turns)
    parts = np.concatenate([down.real, down.imag]).astype(np.float32)
    across = np.exp(-2j * np.pi * np.outer(waves[:, 0], np.arange(plane.shape[1])))
    count = len(waves)
    result = np.empty((*tiles.shape, count), dtype=np.complex128)
    for row in range(tiles.shape[0]):
        top = row * tiles.step_px
        columns = parts @ plane[top : top + tiles.side_px]
        turned = (columns[:count] + 1j * columns[count:]) * across
        windows = sliding_window_view(turned, tiles.side_px, axis=1)[:, :: tiles.step_px]
        start = np.exp(-2j * np.pi * waves[:, 1] * top)
        result[row] = (windows @ window).T * start
    return result
