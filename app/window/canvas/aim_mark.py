"""The cross at the place a mark would take, and the loupe around it."""

from __future__ import annotations

from collections.abc import Iterable

from PySide6.QtCore import QLineF, QPointF, QRectF
from PySide6.QtGui import QPixmap, QTransform
from PySide6.QtWidgets import QWidget

from app.drawing.frame import SheetFrame
from app.drawing.shape import aim_segments
from app.window.canvas.gestures.gesture import Aim
from app.window.canvas.loupe import Loupe


class AimMark:
    """Follows one place at a time; shows nothing while there is none."""

    def __init__(self, view: QWidget) -> None:
        self._loupe = Loupe(view)
        self._loupe_wanted = True
        self._aim: Aim | None = None
        self.lines: list[QLineF] = []

    def set_loupe_wanted(self, wanted: bool) -> None:
        """Whether the loupe may be shown."""
        self._loupe_wanted = wanted
        if not wanted:
            self._loupe.hide()

    def set_aim(self, aim: Aim | None) -> None:
        """Follow another place, or none."""
        self._aim = aim
        if aim is None:
            self.lines = []
            self._loupe.hide()

    def lay_out(
        self,
        frame: SheetFrame,
        transform: QTransform,
        offset: QPointF,
        pixmap: QPixmap,
        labels: Iterable[QRectF],
    ) -> None:
        """Draw for a zoom and a scroll position.

        `offset` leads from canvas px to view px; `labels`, in canvas px, are not to be hidden.
        """
        aim = self._aim
        if aim is None:
            return
        arms = [QLineF(*segment) for segment in aim_segments(frame, aim.place, aim.kind)]
        self.lines = [transform.map(arm) for arm in arms] if aim.crosshair else []
        if self._loupe_wanted:
            place = QPointF(aim.place.x_px, aim.place.y_px)
            self._loupe.show_place(pixmap, place, transform, arms)
            self._loupe.keep_beside(
                transform.map(place) + offset, [label.translated(offset) for label in labels]
            )

    def bounds(self) -> QRectF:
        """What the cross covers, in canvas px."""
        bounds = QRectF()
        for line in self.lines:
            bounds = bounds.united(QRectF(line.p1(), line.p2()).normalized())
        return bounds
