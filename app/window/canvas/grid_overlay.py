"""The fitted lattice drawn over the picture, where the grid was seen, to judge by eye."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QRectF
from PySide6.QtGui import QPainter, QPainterPath
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.window.canvas import look
from imaging.sheet_map import SheetMap

THIN_FROM_VIEW_PX_PER_MM = 5.0
_BLOCK_PX = 512


class GridOverlay(QGraphicsItem):
    """Bold lines every 5 mm and, close up, thin ones every mm, in blocks of the picture.

    Only blocks that are to be painted anew are looked at, so that panning stays quick.
    """

    def __init__(self) -> None:
        super().__init__()
        self.setFlag(QGraphicsItem.GraphicsItemFlag.ItemUsesExtendedStyleOption)
        self._map: SheetMap | None = None
        self._bounds = QRectF()
        self._blocks: dict[tuple[int, int], tuple[QPainterPath, QPainterPath]] = {}

    def set_map(self, sheet_map: SheetMap | None) -> None:
        """Draw another grid, or none."""
        if sheet_map is self._map:
            return
        self.prepareGeometryChange()
        self._map = sheet_map
        self._blocks.clear()
        width_px, height_px = (0, 0) if sheet_map is None else sheet_map.picture_size_px
        self._bounds = QRectF(-0.5, -0.5, width_px, height_px)
        self.update()

    def boundingRect(self) -> QRectF:
        """The whole picture."""
        return self._bounds

    def paint(
        self,
        painter: QPainter,
        option: QStyleOptionGraphicsItem,
        widget: QWidget | None = None,  # noqa: ARG002  (Qt's signature)
    ) -> None:
        """Draw the blocks that are exposed."""
        if self._map is None:
            return
        exposed = option.exposedRect
        view_px_per_px = option.levelOfDetailFromTransform(painter.worldTransform())
        thin = self._map.x_pitch_px_per_mm * view_px_per_px >= THIN_FROM_VIEW_PX_PER_MM
        for row in _block_range(exposed.top(), exposed.bottom(), self._bounds.height()):
            for column in _block_range(exposed.left(), exposed.right(), self._bounds.width()):
                bold_path, thin_path = self._block(self._map, column, row)
                if thin:
                    painter.setPen(look.GRID_THIN_PEN)
                    painter.drawPath(thin_path)
                painter.setPen(look.GRID_BOLD_PEN)
                painter.drawPath(bold_path)

    def _block(
        self, sheet_map: SheetMap, column: int, row: int
    ) -> tuple[QPainterPath, QPainterPath]:
        if (column, row) not in self._blocks:
            left, top = column * _BLOCK_PX - 0.5, row * _BLOCK_PX - 0.5
            right = min(left + _BLOCK_PX, self._bounds.right())
            bottom = min(top + _BLOCK_PX, self._bounds.bottom())
            box = (left, top, right, bottom)
            self._blocks[column, row] = lattice_paths(sheet_map, box)
        return self._blocks[column, row]


def lattice_paths(
    sheet_map: SheetMap, box_px: tuple[float, float, float, float]
) -> tuple[QPainterPath, QPainterPath]:
    """Bold and thin lattice lines within an upright box of the picture, where covered."""
    left, top, right, bottom = box_px
    corners_px = np.array([[left, top], [right, top], [right, bottom], [left, bottom]])
    corners_mm = sheet_map.to_mm(corners_px)
    step_mm = sheet_map.coverage.cell_px / 2.0 / sheet_map.x_pitch_px_per_mm
    paths = QPainterPath(), QPainterPath()
    for axis in (0, 1):
        low, high = corners_mm[:, axis].min(), corners_mm[:, axis].max()
        other_low, other_high = corners_mm[:, 1 - axis].min(), corners_mm[:, 1 - axis].max()
        along_mm = np.arange(other_low, other_high + step_mm, step_mm)
        for line_mm in range(math.ceil(low), math.floor(high) + 1):
            points_mm = np.empty((len(along_mm), 2))
            points_mm[:, axis], points_mm[:, 1 - axis] = line_mm, along_mm
            points_px = sheet_map.to_px(points_mm)
            seen = sheet_map.covers(points_px) & _inside(points_px, box_px)
            _add_runs(paths[0 if line_mm % 5 == 0 else 1], points_px, seen)
    return paths


def _inside(
    points_px: NDArray[np.float64], box_px: tuple[float, float, float, float]
) -> NDArray[np.bool_]:
    low, high = np.array(box_px[:2]), np.array(box_px[2:])
    inside: NDArray[np.bool_] = (points_px >= low) & (points_px <= high)
    return inside[:, 0] & inside[:, 1]


def _add_runs(path: QPainterPath, points_px: NDArray[np.float64], seen: NDArray[np.bool_]) -> None:
    """A straight piece for each run of points that were seen."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], seen, [False])).astype(np.int8)))
    for first, after in zip(edges[::2], edges[1::2], strict=True):
        path.moveTo(*points_px[first])
        path.lineTo(*points_px[after - 1])


def _block_range(low: float, high: float, size: float) -> range:
    last = max(0, math.ceil(size / _BLOCK_PX) - 1)
    first_block = min(max(int(low // _BLOCK_PX), 0), last)
    return range(first_block, min(max(int(high // _BLOCK_PX), 0), last) + 1)
