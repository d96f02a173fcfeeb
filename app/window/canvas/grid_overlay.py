"""The fitted lattice drawn over the picture, where the grid was seen, to judge by eye."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QRectF
from PySide6.QtGui import QPainter, QPainterPath
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.window.canvas import look
from app.window.canvas.ink_map import Box
from imaging.sheet_map import FloatArray, SheetMap

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


def lattice_paths(sheet_map: SheetMap, box_px: Box) -> tuple[QPainterPath, QPainterPath]:
    """Bold and thin lattice lines within an upright box of the picture, where covered."""
    left, top, right, bottom = box_px
    corners_px = np.array([[left, top], [right, top], [right, bottom], [left, bottom]])
    corners_mm = sheet_map.to_mm(corners_px)
    steps_px = np.array([sheet_map.x_step_px, sheet_map.y_step_px])
    paths = QPainterPath(), QPainterPath()
    for axis in (0, 1):
        low, high = corners_mm[:, axis].min(), corners_mm[:, axis].max()
        for line_mm in range(math.ceil(low), math.floor(high) + 1):
            through_px = np.asarray(sheet_map.origin_px) + line_mm * steps_px[axis]
            points_px = _clipped_line(through_px, steps_px[1 - axis], box_px, sheet_map)
            path = paths[0 if line_mm % 5 == 0 else 1]
            _add_runs(path, points_px, sheet_map.covers(points_px))
    return paths


def _clipped_line(
    through_px: FloatArray, along_px: FloatArray, box_px: Box, sheet_map: SheetMap
) -> FloatArray:
    """Points on a line from edge to edge of a box, close enough to meet every coverage cell."""
    enter, leave = -math.inf, math.inf
    for axis in (0, 1):
        if along_px[axis] == 0.0:
            if not box_px[axis] <= through_px[axis] <= box_px[axis + 2]:
                return np.empty((0, 2))
            continue
        edges = (np.array([box_px[axis], box_px[axis + 2]]) - through_px[axis]) / along_px[axis]
        enter, leave = max(enter, edges.min()), min(leave, edges.max())
    if enter >= leave:
        return np.empty((0, 2))
    length_px = (leave - enter) * math.hypot(*along_px)
    count = 2 + math.ceil(2.0 * length_px / sheet_map.coverage.cell_px)
    points_px = through_px + np.linspace(enter, leave, count)[:, np.newaxis] * along_px
    # Just inside: the edge itself belongs to the next cell, which may not exist.
    return np.clip(points_px, np.array(box_px[:2]) + 1e-6, np.array(box_px[2:]) - 1e-6)


def _add_runs(path: QPainterPath, points_px: FloatArray, seen: NDArray[np.bool_]) -> None:
    """A straight piece for each run of points that were seen."""
    edges = np.flatnonzero(np.diff(np.concatenate(([False], seen, [False])).astype(np.int8)))
    for first, after in zip(edges[::2], edges[1::2], strict=True):
        path.moveTo(*points_px[first])
        path.lineTo(*points_px[after - 1])


def _block_range(low: float, high: float, size: float) -> range:
    last = max(0, math.ceil(size / _BLOCK_PX) - 1)
    first_block = min(max(int(low // _BLOCK_PX), 0), last)
    return range(first_block, min(max(int(high // _BLOCK_PX), 0), last) + 1)
