"""Small drawn signs."""

from __future__ import annotations

from functools import cache

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QColor, QFont, QIcon, QPainter, QPixmap, QPolygonF

from app.window import theme

_SIDE_PX = 28  # drawn large, shown at 14


@cache
def caution_icon(shown: bool) -> QIcon:
    """A triangle with an exclamation mark, or as much empty room, so that columns align."""
    pixmap = QPixmap(_SIDE_PX, _SIDE_PX)
    pixmap.fill(Qt.GlobalColor.transparent)
    if shown:
        painter = QPainter(pixmap)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setBrush(QColor(theme.WARN_EDGE))
        painter.setPen(Qt.PenStyle.NoPen)
        painter.drawPolygon(QPolygonF([QPointF(14, 2), QPointF(27, 26), QPointF(1, 26)]))
        font = QFont()
        font.setPixelSize(19)
        font.setBold(True)
        painter.setFont(font)
        painter.setPen(QColor(theme.INK))
        painter.drawText(pixmap.rect().adjusted(0, 5, 0, 0), Qt.AlignmentFlag.AlignCenter, "!")
        painter.end()
    return QIcon(pixmap)
