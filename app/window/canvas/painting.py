"""Put what was laid out on the screen; nothing is measured or laid out here."""

from __future__ import annotations

from collections.abc import Iterable

from PySide6.QtCore import QLineF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QRegion

from app.window.canvas import look
from app.window.canvas.overlay import Drawn


def paint_calipers(painter: QPainter, drawn: Iterable[Drawn], exposed: QRegion) -> None:
    """Draw those that touch what is exposed; labels last, the selected on top."""
    shown = [item for item in drawn if exposed.intersects(item.bounds.toAlignedRect())]
    if not shown:
        return
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    for chosen, style in ((False, look.PLAIN), (True, look.CHOSEN)):
        alike = [item for item in shown if item.chosen is chosen]
        bars = [line for item in alike for line in item.bar]
        paint_lines(painter, bars, style.rim)
        paint_lines(painter, bars + [leg for item in alike for leg in item.legs], style.pen)
    paint_lines(painter, [leg for item in shown for leg in item.held_legs], look.HELD_PEN)
    _paint_handles(painter, shown)
    for item in sorted(shown, key=lambda item: item.chosen):
        if item.label is not None:
            painter.drawPixmap(*item.label)


def paint_lines(painter: QPainter, lines: list[QLineF], pen: QPen) -> None:
    """Lines, if there are any."""
    if lines:
        painter.setPen(pen)
        painter.drawLines(lines)


def _paint_handles(painter: QPainter, shown: Iterable[Drawn]) -> None:
    radius = look.HANDLE_RADIUS_PX
    for item in shown:
        if not item.handles:
            continue
        # Rings: what is under a mark must stay to be seen.
        painter.setPen(QPen(look.ORANGE, 1.6))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        for place in item.handles:
            painter.drawEllipse(place, radius, radius)


def paint_box(painter: QPainter, box: QRectF) -> None:
    """A box being drawn, in canvas px."""
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setBrush(QColor(184, 67, 11, 28))
    painter.setPen(look.CHOSEN.rim)
    painter.drawRect(box)
    painter.setPen(look.box_pen())
    painter.drawRect(box)
