"""Lock-in: how strongly, and with which phase, a wave runs through each tile of a picture."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True, slots=True, eq=False)
class Tiles:
    """Overlapping square windows on a plane.

    Attributes
    ----------
    step_px : int
        Distance of neighbours in pixels of the plane; a window is two steps wide.
    shape : (int, int)
        Rows and columns of tiles.
    smooth : bool
        Hann windows (for phases), else plain boxes (for where the grid ends).
    """

    step_px: int
    shape: tuple[int, int]
    smooth: bool = True

    @classmethod
    def over(cls, plane_shape: tuple[int, int], side_px: int, *, smooth: bool = True) -> Tiles:
        """As many whole windows as fit; at least one each way, smaller if it must be."""
        step_px = max(1, min(side_px, *plane_shape) // 2)
        rows, columns = (length // step_px - 1 for length in plane_shape)
        return cls(step_px, (rows, columns), smooth)

    def halves(self) -> FloatArray:
        """Weights of a window's first and second half, shape (2, step), summing to one."""
        side_px = 2 * self.step_px
        if not self.smooth:
            return np.full((2, self.step_px), 1.0 / side_px)
        hann = 1.0 - np.cos(2.0 * np.pi * (np.arange(side_px) + 0.5) / side_px)
        return np.asarray((hann / hann.sum()).reshape(2, self.step_px))

    def centres_px(self) -> FloatArray:
        """x and y of the tiles' centres on the plane, shape (rows, columns, 2)."""
        y_px, x_px = (np.arange(1, count + 1) * self.step_px - 0.5 for count in self.shape)
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
    step, (rows, columns) = tiles.step_px, tiles.shape
    halves = tiles.halves()
    # Rows first: each strip of one step is met with both halves of the window.
    down = _phasors(waves[:, 1], step) * halves[:, np.newaxis]
    parts = np.concatenate([down.real, down.imag]).reshape(-1, step).astype(np.float32)
    across = _phasors(waves[:, 0], (columns + 1) * step).astype(np.complex64)
    weights = halves.T.astype(np.complex64)
    strips = np.empty((rows + 1, 2, len(waves), columns + 1, 2), dtype=np.complex64)
    for row in range(rows + 1):
        strip = plane[row * step : (row + 1) * step, : (columns + 1) * step]
        real, imaginary = (parts @ strip).reshape(2, 2, len(waves), -1)
        turned = (real + np.complex64(1j) * imaginary) * across
        strips[row] = turned.reshape(2, len(waves), columns + 1, step) @ weights
    starts = _phasors(waves[:, 1] * step, rows + 1).T[:, :, np.newaxis]
    upper, lower = (strips[:, half, :, :-1, 0] + strips[:, half, :, 1:, 1] for half in (0, 1))
    found = upper[:-1] * starts[:-1] + lower[1:] * starts[1:]
    return np.asarray(found.transpose(0, 2, 1), dtype=np.complex128)


def _phasors(cycles_per_px: FloatArray, count: int) -> ComplexArray:
    """``exp(-2 pi i f n)`` for each wave and n = 0 .. count - 1, shape (K, count)."""
    turns = np.outer(cycles_per_px, np.arange(count))
    return np.asarray(np.exp(-2j * np.pi * turns))
