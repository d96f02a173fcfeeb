"""Where on a picture the found grid is really printed."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.lock_in import ComplexArray, Tiles, lock_in

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

_SEEN_SHARE = 0.5
_LEAST_SHARE = 0.25
_MOST_SHARE = 2.5
_CLOSED_CELLS = 5
_FEWEST_CELLS = 9


@dataclass(frozen=True, slots=True, eq=False)
class Comb:
    """The waves of one family: ``sum A exp(2 pi i (k . (x, y)))`` on the plane.

    Attributes
    ----------
    waves : ndarray of float64, shape (K, 2)
        Cycles per pixel of the plane.
    amplitudes : ndarray of complex128, shape (K,)
        Phases counted from pixel (0, 0).
    """

    waves: FloatArray
    amplitudes: ComplexArray


def seen_cells(
    plane: NDArray[np.float32], combs: tuple[Comb, Comb], window_px: float
) -> tuple[BoolArray, int]:
    """Cells of the plane in which both families are printed as on the rest of the page.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)
    combs : (Comb, Comb)
        Upright and level lines.
    window_px : float
        One period of the grid, so that its waves do not disturb each other.

    Returns
    -------
    cells : ndarray of bool, shape (cell rows, cell columns)
        Cells of half a window; the first begins at the plane's corner. True beneath a trace.
    cell_px : int
    """
    import cv2

    cell_px = max(1, round(window_px / 2.0))
    before = cell_px // 2
    shape = tuple(int(np.ceil(side / cell_px)) for side in plane.shape)
    after = (np.array(shape) + 1) * cell_px - before - plane.shape
    padded = np.pad(plane, ((before, int(after[0])), (before, int(after[1]))))
    tiles = Tiles.over(padded.shape, 2 * cell_px, smooth=False)
    shares = np.stack([_share(padded, comb, tiles, before) for comb in combs])
    # Words beside the grid may chance upon one family's waves, hardly upon both.
    seen = (shares.mean(axis=0) > _SEEN_SHARE) & (shares.min(axis=0) > _LEAST_SHARE)
    seen &= shares.max(axis=0) < _MOST_SHARE
    closing = cv2.getStructuringElement(cv2.MORPH_RECT, (_CLOSED_CELLS, _CLOSED_CELLS))
    # Closed on a border of its own, or the picture's edge would count as grid.
    wide = np.pad(seen.astype(np.uint8), _CLOSED_CELLS)
    wide = np.asarray(cv2.morphologyEx(wide, cv2.MORPH_CLOSE, closing), dtype=np.uint8)
    cells = wide[_CLOSED_CELLS:-_CLOSED_CELLS, _CLOSED_CELLS:-_CLOSED_CELLS]
    return _without_crumbs(cells), cell_px


def _share(plane: NDArray[np.float32], comb: Comb, tiles: Tiles, before: int) -> FloatArray:
    """How much of the family's usual strength each window has, in step with the map."""
    found = lock_in(plane, comb.waves, tiles)
    # The plane was padded: its pixel (before, before) is the comb's (0, 0).
    expected = comb.amplitudes * np.exp(-2j * np.pi * comb.waves.sum(axis=1) * before)
    power = float((np.abs(expected) ** 2).sum())
    return np.asarray((found @ np.conj(expected)).real / power)


def _without_crumbs(cells: NDArray[np.uint8]) -> BoolArray:
    """Leave out groups of cells too small to hold a caliper."""
    import cv2

    _, labels, stats, _ = cv2.connectedComponentsWithStats(cells, connectivity=4)
    large = stats[:, cv2.CC_STAT_AREA] >= _FEWEST_CELLS
    large[0] = False
    return np.asarray(large[labels])
