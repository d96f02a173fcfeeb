"""Labels drawn once and kept: painting one is then a single copy."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen, QPixmap

from app.window.canvas import look
from app.window.canvas.label_layout import Size


@dataclass(frozen=True, slots=True)
class LabelText:
    """A quiet name and a strong value; either may be empty."""

    name: str
    value: str
    chosen: bool = False


class LabelPixmaps:
    """Pictures of labels by their text.

    Parameters
    ----------
    device_pixel_ratio : float
        Of the screen they are for.
    """

    _KEPT = 400

    def __init__(self, device_pixel_ratio: float) -> None:
        self.device_pixel_ratio = device_pixel_ratio
        self._pixmaps: dict[LabelText, QPixmap] = {}

    def size(self, text: LabelText) -> Size:
        """Width and height in view px."""
        size = self.pixmap(text).deviceIndependentSize()
        return size.width(), size.height()

    def pixmap(self, text: LabelText) -> QPixmap:
        """The label, drawn at the first call."""
        pixmap = self._pixmaps.get(text)
        if pixmap is None:
            if len(self._pixmaps) >= self._KEPT:
                self._pixmaps.clear()  # a drag makes a new text at every step
            pixmap = self._pixmaps[text] = _draw(text, self.device_pixel_ratio)
        return pixmap


def _draw(text: LabelText, ratio: float) -> QPixmap:
    quiet, strong = look.label_font(), look.label_font(strong=True)
    name_width = QFontMetricsF(quiet).horizontalAdvance(text.name)
    value_width = QFontMetricsF(strong).horizontalAdvance(text.value)
    gap = 6.0 if text.name and text.value else 0.0
    line_height = QFontMetricsF(strong).height()
    width = round(name_width + gap + value_width + 2 * look.LABEL_PADDING_X_PX)
    height = round(line_height + 2 * look.LABEL_PADDING_Y_PX)
    pixmap = QPixmap(round(width * ratio), round(height * ratio))
    pixmap.setDevicePixelRatio(ratio)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.setPen(QPen(look.ORANGE if text.chosen else look.PLATE_EDGE, 1.0))
    painter.setBrush(look.ORANGE if text.chosen else look.PLATE)
    painter.drawRoundedRect(QRectF(0.5, 0.5, width - 1.0, height - 1.0), 3.0, 3.0)
    painter.setPen(look.ON_ORANGE if text.chosen else QColor(look.TEAL))
    baseline = look.LABEL_PADDING_Y_PX + QFontMetricsF(strong).ascent()
    painter.setFont(quiet)
    painter.drawText(QPointF(look.LABEL_PADDING_X_PX, baseline), text.name)
    painter.setFont(strong)
    painter.drawText(QPointF(look.LABEL_PADDING_X_PX + name_width + gap, baseline), text.value)
    painter.end()
    return pixmap
