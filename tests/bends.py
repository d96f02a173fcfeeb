"""Bent maps for tests, from closed formulas."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend
from imaging.sheet_map import SheetMap

FloatArray = NDArray[np.float64]


def curved_mm(points_px: FloatArray, px_per_mm: float = 8.0) -> FloatArray:
    """A tilted, gently curled sheet: sheet_mm of picture points, (N, 2) -> (N, 2)."""
    x, y = ((points_px - (600.0, 450.0)) / px_per_mm).T
    deep = 1.0 + 8e-4 * x - 6e-4 * y
    return np.column_stack([x / deep + 60.0 + np.sin(y / 30.0), y / deep + 50.0 + x**2 / 900.0])


def curved_bend(
    size_px: tuple[int, int] = (1200, 900), pitch_px: float = 32.0, error_mm: float = 0.01
) -> Bend:
    """`curved_mm` at nodes over a picture."""
    columns, rows = (int(np.ceil(side / pitch_px)) + 1 for side in size_px)
    x, y = np.meshgrid(np.arange(columns) * pitch_px, np.arange(rows) * pitch_px)
    places = curved_mm(np.column_stack([x.ravel(), y.ravel()]))
    x_mm, y_mm = places.T.reshape(2, rows, columns)
    return Bend((0.0, 0.0), pitch_px, x_mm, y_mm, np.full(x_mm.shape, error_mm))


def bent(flat: SheetMap, error_mm: float = 0.01) -> SheetMap:
    """A flat map of about 8 px to a mm with the curved sheet's bend."""
    return replace(flat, bend=curved_bend(flat.picture_size_px, error_mm=error_mm))
