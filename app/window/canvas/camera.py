"""Zoom, turn and pan of a view whose scene is picture_px."""

from __future__ import annotations

from PySide6.QtCore import QObject, QPoint, QPointF, QRectF, Signal
from PySide6.QtGui import QTransform
from PySide6.QtWidgets import QGraphicsView

LARGEST_ZOOM = 40.0
_FIT_MARGIN_VIEW_PX = 12.0
_KEPT_IN_SIGHT = 0.15
_IN_SIGHT_VIEW_PX = 48


class Camera(QObject):
    """Holds the zoom and keeps a chosen point where it is while it changes.

    Signals
    -------
    moved(float)
        The transform is another one; its zoom, view px per picture px.
    panned()
        The transform is the same and shows another part.
    """

    moved = Signal(float)
    panned = Signal()

    def __init__(self, view: QGraphicsView) -> None:
        super().__init__(view)
        self._view = view
        self._picture = QRectF(-0.5, -0.5, 1.0, 1.0)
        self._turn = QTransform()
        self._zoom = 1.0
        self._fits = True

    @property
    def zoom(self) -> float:
        """View px per picture px."""
        return self._zoom

    def set_picture_size(self, width_px: int, height_px: int) -> None:
        """Look at a picture of another size."""
        self._picture = QRectF(-0.5, -0.5, width_px, height_px)

    def set_turn(self, turn_deg: int, *, mirrored: bool) -> bool:
        """Turn so that the paper's own right is on the right; says whether that is new."""
        turn = QTransform().rotate((360 - turn_deg) % 360)
        if mirrored:
            turn *= QTransform.fromScale(1.0, -1.0)
        if turn == self._turn:
            return False
        self._turn = turn
        return True

    def fit(self) -> None:
        """Show the whole picture, and go on doing so when the window changes size."""
        turned = self._turn.mapRect(self._picture)
        room = self._view.viewport().size()
        zoom = min(
            max(16.0, room.width() - 2 * _FIT_MARGIN_VIEW_PX) / turned.width(),
            max(16.0, room.height() - 2 * _FIT_MARGIN_VIEW_PX) / turned.height(),
        )
        self._apply(zoom, self._picture.center(), self._view_centre())
        self._fits = True

    def resized(self) -> None:
        """The viewport has another size."""
        if self._fits:
            self.fit()
        else:
            self._limit_scrolling()

    def zoom_to(self, zoom: float, view_point: QPointF | None = None) -> None:
        """Zoom while the picture point under `view_point` (the centre) stays there."""
        view_point = self._view_centre() if view_point is None else view_point
        scene_point = self.scene_from_view(view_point)
        self._apply(min(max(zoom, self._smallest_zoom()), LARGEST_ZOOM), scene_point, view_point)

    def pan(self, dx: float, dy: float) -> None:
        """Move the picture by view px."""
        self._fits = False
        for bar, step in (
            (self._view.horizontalScrollBar(), dx),
            (self._view.verticalScrollBar(), dy),
        ):
            bar.setValue(bar.value() - round(step))
        self.panned.emit()

    def keep_in_sight(self, place: QPoint) -> bool:
        """Pan just so far that a viewport point comes off the edge; says whether it had to."""
        room = self._view.viewport().rect()
        edge = min(_IN_SIGHT_VIEW_PX, room.width() // 4, room.height() // 4)
        kept = room.adjusted(edge, edge, -edge, -edge)
        dx = min(max(place.x(), kept.left()), kept.right()) - place.x()
        dy = min(max(place.y(), kept.top()), kept.bottom()) - place.y()
        if dx or dy:
            self.pan(dx, dy)
        return bool(dx or dy)

    def scene_from_view(self, view_point: QPointF) -> QPointF:
        """The picture_px under a viewport point."""
        return self._view.viewportTransform().inverted()[0].map(view_point)

    def _smallest_zoom(self) -> float:
        room = self._view.viewport().size()
        longest = max(self._picture.width(), self._picture.height())
        return min(1.0, 0.25 * max(64, min(room.width(), room.height())) / longest)

    def _view_centre(self) -> QPointF:
        return QRectF(self._view.viewport().rect()).center()

    def _apply(self, zoom: float, scene_point: QPointF, view_point: QPointF) -> None:
        self._zoom = zoom
        self._fits = False
        scaled = self._turn * QTransform.fromScale(zoom, zoom)
        # The picture's corner falls on a whole view px: at 1:1 pixels are copied, not blended.
        corner = scaled.map(QPointF(-0.5, -0.5))
        transform = scaled * QTransform.fromTranslate(-corner.x(), -corner.y())
        self._view.setTransform(transform)
        self._limit_scrolling()
        target = transform.map(scene_point)
        self._view.horizontalScrollBar().setValue(round(target.x() - view_point.x()))
        self._view.verticalScrollBar().setValue(round(target.y() - view_point.y()))
        self.moved.emit(zoom)

    def _limit_scrolling(self) -> None:
        """Room around the picture for any point to stay under the pointer, but not to lose it."""
        room = self._view.viewport().size()
        share = (1.0 - _KEPT_IN_SIGHT) / self._zoom
        across, down = room.width() * share, room.height() * share
        if self._turn.m11() == 0.0:
            across, down = down, across
        self._view.setSceneRect(self._picture.adjusted(-across, -down, across, down))
