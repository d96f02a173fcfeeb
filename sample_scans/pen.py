"""The pen: antialiased lines whose centre is where it is said to be."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

LONGEST_PIECE_PX = 4.0
PIECES_AT_ONCE = 4096


def line_overlap(distance_px: NDArray[np.float32], width_px: float) -> NDArray[np.float32]:
    """Darkness, 0 to 1, of a pixel at this distance from the centre of a line of this width.

    The pixel sees with a tent two pixels wide, measured along the line's normal. A tent and
    not a box, because a line thinner than a pixel moved within one box looks the same: with
    the tent, the sampled centroid of a line along the pixel axes is its centre for any
    width (the tent's spectrum has double zeros at the sampling frequency).
    """
    half = np.float32(width_px / 2.0)
    overlap = _tent_integral(distance_px + half)
    overlap -= _tent_integral(distance_px - half)
    return overlap


def _tent_integral(x_px: NDArray[np.float32]) -> NDArray[np.float32]:
    """Area of the unit tent on [-1, 1] left of x; `x_px` is a scratch array and is used up."""
    np.clip(x_px, -1.0, 1.0, out=x_px)
    bow = np.abs(x_px)
    bow *= x_px
    bow *= np.float32(-0.5)
    bow += x_px
    bow += np.float32(0.5)
    return bow


def draw_pen_lines(
    layer: NDArray[np.float32], points_px: NDArray[np.float64], width_px: float
) -> None:
    """Draw a polyline with round ends into a coverage layer, in place.

    Parameters
    ----------
    layer : ndarray of float32, shape (height, width)
        Coverage from 0 to 1; where lines overlap the larger coverage stays.
    points_px : ndarray of float64, shape (N, 2)
        In picture_px.
    width_px : float
        Width of the pen.
    """
    start_px, end_px = _short_pieces(points_px)
    reach_px = int(np.ceil((LONGEST_PIECE_PX + width_px) / 2.0 + 1.5))
    offsets = np.arange(-reach_px, reach_px + 1)
    for first in range(0, len(start_px), PIECES_AT_ONCE):
        chosen = slice(first, first + PIECES_AT_ONCE)
        _draw_pieces(layer, start_px[chosen], end_px[chosen], width_px, offsets)


def _short_pieces(
    points_px: NDArray[np.float64],
) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Cut a polyline's segments so that none is longer than LONGEST_PIECE_PX."""
    start, change = points_px[:-1], np.diff(points_px, axis=0)
    counts = np.maximum(np.ceil(np.hypot(*change.T) / LONGEST_PIECE_PX).astype(int), 1)
    segment = np.repeat(np.arange(len(start)), counts)
    within = np.arange(len(segment)) - np.repeat(np.cumsum(counts) - counts, counts)
    step = change[segment] / counts[segment][:, None]
    begin = start[segment] + step * within[:, None]
    return begin, begin + step


def _draw_pieces(
    layer: NDArray[np.float32],
    start_px: NDArray[np.float64],
    end_px: NDArray[np.float64],
    width_px: float,
    offsets: NDArray[np.int64],
) -> None:
    corner = np.rint((start_px + end_px) / 2.0).astype(np.int64)
    column = corner[:, None, None, 0] + offsets[None, None, :]
    row = corner[:, None, None, 1] + offsets[None, :, None]
    along = end_px - start_px
    length_sq = np.maximum((along**2).sum(axis=1), 1e-12)
    x = column - start_px[:, None, None, 0]
    y = row - start_px[:, None, None, 1]
    along_x, along_y = along[:, None, None, 0], along[:, None, None, 1]
    share = np.clip((x * along_x + y * along_y) / length_sq[:, None, None], 0.0, 1.0)
    distance = np.hypot(x - share * along_x, y - share * along_y).astype(np.float32)
    coverage = line_overlap(distance, width_px)
    height_px, width_of_layer_px = layer.shape
    row, column = np.broadcast_arrays(row, column)
    drawn = (coverage > 0.0) & (row >= 0) & (row < height_px)
    drawn &= (column >= 0) & (column < width_of_layer_px)
    np.maximum.at(layer, (row[drawn], column[drawn]), coverage[drawn])
