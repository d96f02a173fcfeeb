"""The fitted lattice drawn over the picture, where the grid was seen, to judge by eye."""

from __future__ import annotations

from PySide6.QtCore import QRectF
from PySide6.QtGui import QPainter, QPainterPath
from PySide6.QtWidgets import QGraphicsItem, QStyleOptionGraphicsItem, QWidget

from app.window.canvas import look
from app.window.canvas.lattice_lines import lattice_lines
from imaging.sheet_map import FloatArray, SheetMap

THIN_FROM_VIEW_PX_PER_MM = 5.0
BOLD_FROM_VIEW_PX_PER_MM = 0.8  # from further off they would only veil the picture


class GridOverlay(QGraphicsItem):
    """Bold lines every 5 mm and, close up, thin ones every mm.

    Each weight is laid out when it is first drawn, so that opening a picture does not wait
    for a grid nobody asked to see.
    """

    def __init__(self) -> None:
        super().__init__()
        self._map: SheetMap | None = None
        self._bounds = QRectF()
        self._paths: dict[bool, QPainterPath] = {}

    def set_map(self, sheet_map: SheetMap | None) -> None:
        """Draw another grid, or none."""
        if sheet_map is self._map:
            return
        self.prepareGeometryChange()
        self._map = sheet_map
        self._paths.clear()
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
        """Draw the lines; the painter's own clip keeps to what is exposed."""
        if self._map is None:
            return
        zoom = option.levelOfDetailFromTransform(painter.worldTransform())
        view_px_per_mm = self._map.x_pitch_px_per_mm * zoom
        if view_px_per_mm >= THIN_FROM_VIEW_PX_PER_MM:
            painter.setPen(look.GRID_THIN_PEN)
            painter.drawPath(self._path(self._map, bold=False))
        if view_px_per_mm >= BOLD_FROM_VIEW_PX_PER_MM:
            painter.setPen(look.GRID_BOLD_PEN)
            painter.drawPath(self._path(self._map, bold=True))

    def _path(self, sheet_map: SheetMap, *, bold: bool) -> QPainterPath:
        if bold not in self._paths:
            self._paths[bold] = _path_of(lattice_lines(sheet_map, bold=bold))
        return self._paths[bold]


def _path_of(pieces_px: FloatArray) -> QPainterPath:
    path = QPainterPath()
    for x1, y1, x2, y2 in pieces_px.tolist():
        path.moveTo(x1, y1)
        path.lineTo(x2, y2)
    return path
