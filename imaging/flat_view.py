"""A sheet drawn flat by a first map, and how far its lines still lie off that map."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend

FloatArray = NDArray[np.float64]
FloatPlane = NDArray[np.float32]
BoolArray = NDArray[np.bool_]

_EVERY_PX = 16
_MOST_SIDE_PX = 9000


@dataclass(frozen=True, slots=True, eq=False)
class FlatView:
    """A plane drawn flat: pixel (x, y) shows the place ``first + (x, y) / px_per_unit``.

    Attributes
    ----------
    plane : ndarray of float32, shape (rows, columns)
        Zero, as plain paper, where the sheet is not on the picture.
    first : ndarray of float64, shape (2,)
        Place of pixel (0, 0), in the map's units.
    px_per_unit : ndarray of float64, shape (2,)
        Along x and y.
    """

    plane: FloatPlane
    first: FloatArray
    px_per_unit: FloatArray


def flat_view(
    plane: FloatPlane,
    bend: Bend,
    low: FloatArray,
    high: FloatArray,
    px_per_unit: FloatArray,
) -> FlatView | None:
    """Draw the places from `low` to `high` of a map over `plane` flat; None if that is too much."""
    import cv2

    size_px = np.ceil((high - low) * px_per_unit).astype(int) + 1
    if (size_px > _MOST_SIDE_PX).any() or (size_px < _EVERY_PX).any():
        return None
    columns, rows = (int(side) // _EVERY_PX + 2 for side in size_px)
    x, y = np.meshgrid(np.arange(columns) * _EVERY_PX, np.arange(rows) * _EVERY_PX)
    places = low + np.column_stack([x.ravel(), y.ravel()]) / px_per_unit
    points_px = bend.to_px(places, _guess_px(bend, places))
    coarse = points_px.reshape(rows, columns, 2)
    coarse = np.where(np.isfinite(coarse), coarse, -1e4).astype(np.float32)
    # Corner nodes at pixel centres 0, 16, 32...: a plain affine enlargement between them.
    enlarge = np.array([[1.0 / _EVERY_PX, 0.0, 0.0], [0.0, 1.0 / _EVERY_PX, 0.0]])
    full = cv2.warpAffine(
        coarse,
        enlarge,
        (int(size_px[0]), int(size_px[1])),
        flags=cv2.INTER_LINEAR | cv2.WARP_INVERSE_MAP,
        borderMode=cv2.BORDER_REPLICATE,
    )
    drawn = cv2.remap(
        plane, full[:, :, 0], full[:, :, 1], cv2.INTER_CUBIC, borderMode=cv2.BORDER_CONSTANT
    )
    return FlatView(np.asarray(drawn, dtype=np.float32), low, px_per_unit)


def _guess_px(bend: Bend, places: FloatArray) -> FloatArray:
    """The point of the nearest affine map."""
    rows, columns = bend.x_mm.shape
    x, y = np.meshgrid(np.arange(columns), np.arange(rows))
    points_px = np.asarray(bend.first_px) + bend.pitch_px * np.column_stack([x.ravel(), y.ravel()])
    nodes = np.column_stack([np.ones(x.size), bend.x_mm.ravel(), bend.y_mm.ravel()])
    affine = np.linalg.lstsq(nodes, points_px, rcond=None)[0]
    return np.asarray(np.column_stack([np.ones(len(places)), places]) @ affine)
