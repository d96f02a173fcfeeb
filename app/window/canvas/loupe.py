"""A magnified square beside the pointer, so that a leg can be put within a small square."""

from __future__ import annotations

import math
from collections.abc import Sequence

from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPaintEvent, QPen, QPixmap, QTransform
from PySide6.QtWidgets import QWidget

from app.window.canvas import look

SIDE_PX = 160
MAGNIFICATION = 3.0
_LEAST_ZOOM = 2.0
_NOT_NEEDED_FROM_ZOOM = 8.0
_AWAY_PX = 44


class Loupe(QWidget):
    """Shows the picture around one place; lets every mouse event through."""

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self._parent = parent
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setFixedSize(SIDE_PX, SIDE_PX)
        self.hide()
        self._pixmap = QPixmap()
        self._transform = QTransform()
        self._arms: list[QLineF] = []

    def show_place(
        self, pixmap: QPixmap, aim: QPointF, view_transform: QTransform, arms: list[QLineF]
    ) -> None:
        """Magnify around `aim`; `arms` are lines through it, all in picture_px."""
        linear = view_transform
        turned = QTransform(linear.m11(), linear.m12(), linear.m21(), linear.m22(), 0.0, 0.0)
        zoom = math.sqrt(abs(turned.determinant()))
        if zoom >= _NOT_NEEDED_FROM_ZOOM:
            self.hide()
            return
        factor = max(MAGNIFICATION, _LEAST_ZOOM / zoom)
        magnified = turned * QTransform.fromScale(factor, factor)
        centre = magnified.map(aim)
        half = SIDE_PX / 2.0
        self._pixmap = pixmap
        self._transform = magnified * QTransform.fromTranslate(half - centre.x(), half - centre.y())
        self._arms = [self._transform.map(arm) for arm in arms]
        self.show()
        self.update()

    def keep_beside(self, view_point: QPointF, labels: Sequence[QRectF]) -> None:
        """Stand beside a point of the parent, where there is room and no label is hidden."""
        room = QRectF(self._parent.rect())
        near, far = _AWAY_PX, -_AWAY_PX - SIDE_PX
        corners = [view_point + QPointF(dx, dy) for dx in (near, far) for dy in (far, near)]

        def faults(number: int) -> tuple[int, int, int]:
            box = QRectF(corners[number].x(), corners[number].y(), SIDE_PX, SIDE_PX)
            return not room.contains(box), sum(box.intersects(label) for label in labels), number

        self.move(corners[min(range(len(corners)), key=faults)].toPoint())

    def paintEvent(self, event: QPaintEvent) -> None:  # noqa: ARG002  (Qt's signature)
        """The magnified picture, the arms, a ring around the place and the frame."""
        painter = QPainter(self)
        painter.fillRect(self.rect(), look.DESK)
        painter.setTransform(self._transform)
        wanted = self._transform.inverted()[0].mapRect(QRectF(self.rect())).toAlignedRect()
        # Pixmap coordinates begin at the corner of the first pixel, picture_px at its centre.
        source = wanted.adjusted(-1, -1, 2, 2).intersected(self._pixmap.rect())
        painter.drawPixmap(QPointF(source.left() - 0.5, source.top() - 0.5), self._pixmap, source)
        painter.resetTransform()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(look.AIM_PEN)
        painter.drawLines(self._arms)
        painter.setPen(QPen(QColor(look.ORANGE), 1.0))
        half = SIDE_PX / 2.0
        painter.drawEllipse(QPointF(half, half), 9.0, 9.0)
        painter.setPen(QPen(QColor(look.TEAL), 2.0))
        painter.drawRect(QRectF(1.0, 1.0, SIDE_PX - 2.0, SIDE_PX - 2.0))
