"""Undo the wrapping of phases on a lattice of tiles, the surest neighbours first."""

from __future__ import annotations

import heapq

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


def unwrapped(
    cycles: FloatArray, quality: FloatArray, largest_step: float
) -> tuple[FloatArray, BoolArray]:
    """Add whole numbers so that neighbours agree, over the largest region that holds together.

    Parameters
    ----------
    cycles : ndarray of float64, shape (rows, columns)
        Phases, each known but for a whole number.
    quality : ndarray of float64, shape (rows, columns)
        Zero where there is no phase; the higher, the earlier its neighbours are joined.
    largest_step : float
        Neighbours that differ by more are not joined, in cycles (below a half).

    Returns
    -------
    cycles : ndarray of float64, shape (rows, columns)
        NaN outside the region. Its median lies within half a cycle of zero.
    region : ndarray of bool, shape (rows, columns)
    """
    best = np.full(cycles.shape, np.nan)
    best_sum = 0.0
    free = quality > 0.0
    while free.any():
        seed = np.unravel_index(int(np.argmax(np.where(free, quality, -1.0))), cycles.shape)
        grown = _grown(cycles, quality, (int(seed[0]), int(seed[1])), free, largest_step)
        inside = np.isfinite(grown)
        free &= ~inside
        total = float(quality[inside].sum())
        if total > best_sum:
            best, best_sum = grown, total
        if float(quality[free].sum()) <= best_sum:
            break  # what is left could not be larger
    region = np.isfinite(best)
    if region.any():
        best = best - np.round(float(np.median(best[region])))
    return best, region


def _grown(
    cycles: FloatArray,
    quality: FloatArray,
    seed: tuple[int, int],
    free: BoolArray,
    largest_step: float,
) -> FloatArray:
    """One region from its seed; each tile is held against the mean of its joined neighbours."""
    result = np.full(cycles.shape, np.nan)
    queue = [(-quality[seed], seed, cycles[seed])]
    while queue:
        _, place, expected = heapq.heappop(queue)
        if np.isfinite(result[place]):
            continue
        row, column = place
        near = result[max(row - 1, 0) : row + 2, max(column - 1, 0) : column + 2]
        joined = near[np.isfinite(near)]
        if joined.size:
            expected = float(joined.mean())
        value = cycles[place] - np.round(cycles[place] - expected)
        if abs(value - expected) > largest_step:
            continue
        result[place] = value
        for down, across in ((0, 1), (0, -1), (1, 0), (-1, 0)):
            beside = (row + down, column + across)
            if not (0 <= beside[0] < cycles.shape[0] and 0 <= beside[1] < cycles.shape[1]):
                continue
            if free[beside] and not np.isfinite(result[beside]):
                heapq.heappush(queue, (-quality[beside], beside, value))
    return result
