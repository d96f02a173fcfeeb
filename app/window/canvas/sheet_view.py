"""The sheet with its calipers: shows the reading, and turns what a hand does into edits."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import replace

from PySide6.QtCore import QEvent, QPoint, QPointF, QRect, QRectF, Qt, Signal
from PySide6.QtGui import (
    QFocusEvent,
    QKeyEvent,
    QMouseEvent,
    QPainter,
    QPaintEvent,
    QRegion,
    QResizeEvent,
    QTransform,
    QWheelEvent,
)
from PySide6.QtWidgets import QFrame, QGraphicsScene, QGraphicsView, QWidget

from app.drawing.frame import SheetFrame, frame_of
from app.drawing.ink_map import InkMap
from app.reading import Caliper, CaliperKind, PicturePoint
from app.reading import quantity as quantity_of
from app.window.canvas import look
from app.window.canvas.aim_mark import AimMark
from app.window.canvas.camera import Camera
from app.window.canvas.gestures.draw_scale_box import DrawScaleBox
from app.window.canvas.gestures.gesture import Aim, Pointer
from app.window.canvas.gestures.place_caliper import PlaceCaliper, PlaceChain
from app.window.canvas.gestures.two_places import TwoPlaces
from app.window.canvas.grid_overlay import GridOverlay
from app.window.canvas.hit_test import Hit
from app.window.canvas.keys import Keys
from app.window.canvas.mouse import Mouse
from app.window.canvas.overlay import Overlay
from app.window.canvas.painting import paint_box, paint_calipers, paint_lines
from app.window.canvas.picture_item import PictureItem
from app.window.canvas.placing import Placing
from app.window.canvas.selection import Selection
from app.window.document import Document


class SheetView(QGraphicsView):
    """A view of one document's picture, with calipers placed and moved by hand.

    Parameters
    ----------
    document : Document
        Shown as it is; every edit goes through it.

    Signals
    -------
    prompt_changed(str)
        What the canvas asks for; empty when nothing is.
    placing_finished(int)
        A placing gesture is over; the id of the last caliper placed (a chain may have placed
        several).
    placing_cancelled()
        A placing gesture, or the scale box, is over and nothing came of it.
    selection_changed()
    pointer_moved(object)
        PicturePoint under the pointer, None off the picture.
    scale_box_drawn(object, object)
        Two opposite corners, PicturePoint each.
    zoom_changed(float)
        View px per picture px.
    """

    prompt_changed = Signal(str)
    placing_finished = Signal(int)
    placing_cancelled = Signal()
    selection_changed = Signal()
    pointer_moved = Signal(object)
    scale_box_drawn = Signal(object, object)
    zoom_changed = Signal(float)

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self._selection = Selection()
        self._box: QRectF | None = None
        self._exposed = QRegion()
        self._set_up_view()
        self._picture_item = PictureItem()
        self._grid = GridOverlay()
        self._grid.setVisible(False)
        self.scene().addItem(self._picture_item)
        self.scene().addItem(self._grid)
        self._overlay = Overlay(self.devicePixelRatioF())
        self._aim_mark = AimMark(self)
        self._mouse = Mouse(self)
        self._keys = Keys(self)
        self._placing = Placing(self)
        self._camera = Camera(self)
        self._camera.moved.connect(self._camera_moved)
        self._camera.panned.connect(self._follow_view)
        document.opened.connect(self._picture_opened)
        document.changed.connect(self._reading_changed)
        if document.picture is not None:
            self._picture_opened()
            self._reading_changed()

    def _set_up_view(self) -> None:
        self.setScene(QGraphicsScene(self))
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setTransformationAnchor(QGraphicsView.ViewportAnchor.NoAnchor)
        self.setResizeAnchor(QGraphicsView.ViewportAnchor.NoAnchor)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.viewport().setMouseTracking(True)
        # `drawBackground` leaves nothing bare: filling it all before would be done in vain.
        self.viewport().setAutoFillBackground(False)
        self.viewport().setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.setAccessibleName("Sheet")
        self.setAccessibleDescription(
            "The picture with its calipers. Tab goes through calipers and legs, "
            "arrow keys move the selected one, Delete removes it."
        )

    # What gestures and keys ask of the view

    @property
    def document(self) -> Document:
        """The document shown."""
        return self._document

    def frame(self) -> SheetFrame:
        """The grid of the present reading."""
        reading = self._document.reading
        if reading is None:
            return SheetFrame((0.0, 0.0), (1.0, 0.0), (0.0, 1.0), (1, 1), has_grid=False)
        return frame_of(reading)

    def show_preview(self, calipers: Sequence[Caliper], aim: Aim | None) -> None:
        """Draw calipers as they would be; nothing is written."""
        before = self._moving_bounds()
        self._box = None
        self._aim_mark.set_aim(aim)
        everything = self._overlay.set_previews(calipers)
        self._lay_out_aim()
        self._repaint(None if everything else before.united(self._moving_bounds()))

    def show_box(self, corner: PicturePoint, opposite: PicturePoint) -> None:
        """Draw a box as it would be."""
        before = self._moving_bounds()
        corners = QPointF(corner.x_px, corner.y_px), QPointF(opposite.x_px, opposite.y_px)
        self._box = QRectF(*corners).normalized()
        self._repaint(before.united(self._moving_bounds()))

    def clear_preview(self) -> None:
        """Draw the reading as it is."""
        self.show_preview((), None)
        self._repaint(None)

    def set_selection(self, selection: Selection) -> None:
        """Select calipers, or one leg."""
        self._keys.settle()
        if selection == self._selection:
            return
        self._selection = selection
        self._overlay.set_selection(selection)
        self.viewport().update()
        self.selection_changed.emit()

    def pan(self, dx: float, dy: float) -> None:
        """Move the picture by view px."""
        self._camera.pan(dx, dy)

    # Selection

    def selected_ids(self) -> frozenset[int]:
        """Ids of the selected calipers."""
        return self._selection.ids

    @property
    def selection(self) -> Selection:
        """The selected calipers, and what of them the arrow keys move."""
        return self._selection

    def select(self, ids: Iterable[int]) -> None:
        """Select calipers; unknown ids are passed over."""
        self.set_selection(Selection(frozenset(ids)).kept_in(self._document.reading))

    def select_all(self) -> None:
        """Select every caliper."""
        reading = self._document.reading
        if reading is not None:
            self.select(caliper.caliper_id for caliper in reading.calipers)

    def delete_selected(self) -> None:
        """Remove the selected calipers, as one edit."""
        reading, ids = self._document.reading, self._selection.ids
        if reading is None or not ids:
            return
        self._keys.settle()
        label = "Delete caliper" if len(ids) == 1 else f"Delete {len(ids)} calipers"
        self._document.edit(reading.without_calipers(ids), label)

    # Zoom and turn

    def fit_sheet(self) -> None:
        """Show the whole picture."""
        self._camera.fit()

    def zoom_by(self, factor: float) -> None:
        """Zoom about the middle of the view."""
        self._camera.zoom_to(self._camera.zoom * factor)

    def zoom_at(self, factor: float, view_point: QPointF) -> None:
        """Zoom while what is at a view point stays there."""
        self._camera.zoom_to(self._camera.zoom * factor, view_point)

    def zoom_actual(self) -> None:
        """One picture px on one view px."""
        self._camera.zoom_to(1.0)

    def zoom(self) -> float:
        """View px per picture px."""
        return self._camera.zoom

    def screen_px_per_picture_px(self) -> float:
        """The zoom in pixels of the screen, of which a view px may have several."""
        return self._camera.zoom * self.devicePixelRatioF()

    def set_grid_visible(self, visible: bool) -> None:
        """Draw the fitted grid over the picture, or not."""
        self._grid.setVisible(visible)

    def grid_visible(self) -> bool:
        """Whether the fitted grid is drawn."""
        return self._grid.isVisible()

    def set_loupe_visible(self, visible: bool) -> None:
        """Magnify what is being placed, or not."""
        self._aim_mark.set_loupe_wanted(visible)
        self._lay_out_aim()

    def view_px_from_picture_px(self, point: PicturePoint) -> QPoint:
        """The view px that shows a picture point."""
        view_point = self.viewportTransform().map(QPointF(point.x_px, point.y_px))
        return QPoint(math.floor(view_point.x()), math.floor(view_point.y()))

    def picture_px_from_view_px(self, point: QPoint) -> PicturePoint:
        """The picture point under the middle of a view px; may lie off the picture."""
        scene_point = self.pointer_at(QPointF(point)).picture
        return PicturePoint(scene_point.x(), scene_point.y())

    def keep_in_sight(self, point: PicturePoint) -> None:
        """Pan just so far that a place is in view."""
        if self._camera.keep_in_sight(self.view_px_from_picture_px(point)):
            self._lay_out_aim()

    # Placing

    def begin_placing(self, kind: CaliperKind, quantity: str | None, lead: str | None) -> None:
        """Ask for a caliper's two places; what was being placed before is given up."""
        if self._document.reading is None:
            return
        self.cancel_gesture()
        known = None if quantity is None else quantity_of(quantity)
        placing_class = PlaceChain if known is not None and known.chained else PlaceCaliper
        self._placing.begin(placing_class(self, self._first_aim(), kind, quantity, lead))

    def begin_scale_box(self) -> None:
        """Ask for a box over a known number of large squares."""
        if self._document.reading is None:
            return
        self.cancel_gesture()
        self._placing.begin(DrawScaleBox(self, self._first_aim()))

    def cancel_gesture(self) -> None:
        """Leave a drag or a placing as if it had not begun; placed calipers stay."""
        self._mouse.cancel_drag()
        self._placing.cancel()

    def _first_aim(self) -> PicturePoint:
        """Under the pointer, or in the middle of the view."""
        view_point = self._mouse.view_point
        if view_point is None or not self.viewport().rect().contains(view_point.toPoint()):
            view_point = QPointF(self.viewport().rect().center())
        pointer = self.pointer_at(view_point)
        place = self.frame().clamped(pointer.picture.x(), pointer.picture.y())
        return replace(place, step_px=pointer.step_px)

    def after_placing_step(self) -> None:
        """Tell what is asked for now, or that it is over."""
        self._placing.after_step()

    def show_cursor(self) -> None:
        """The cursor that fits what a press would do."""
        self._mouse.show_cursor()

    # Keys

    @property
    def placing(self) -> TwoPlaces | None:
        """What two places are being asked for, if anything."""
        return self._placing.current

    def is_placing(self) -> bool:
        """Whether two places are being asked for."""
        return self._placing.current is not None

    def step_back(self) -> bool:
        """Esc: restore a drag, step back in placing, or let go of the selection."""
        if self._mouse.is_dragging():
            self._mouse.cancel_drag()
        elif self.is_placing():
            self._placing.step_back()
        elif self._selection.ids:
            self.set_selection(Selection())
        else:
            return False
        return True

    def focusNextPrevChild(self, forward: bool) -> bool:
        """Tab goes through the calipers and past the last one to the next widget."""
        return self._keys.tab(forward) or super().focusNextPrevChild(forward)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """See `keys.py`; the space bar held down pans."""
        if event.key() == Qt.Key.Key_Space:
            if not event.isAutoRepeat():
                self._mouse.hold_space(True)
        elif not self._keys.press(event):
            event.ignore()

    def keyReleaseEvent(self, event: QKeyEvent) -> None:
        """The space bar came up."""
        if event.key() == Qt.Key.Key_Space and not event.isAutoRepeat():
            self._mouse.hold_space(False)
        else:
            event.ignore()

    # Pointer

    def pointer_at(self, view_point: QPointF) -> Pointer:
        """What a pointer event at a view point means: the middle of that screen pixel."""
        half = 0.5 / self.devicePixelRatioF()
        middle = QPointF(view_point.x() + half, view_point.y() + half)
        step_px = 1.0 / self.screen_px_per_picture_px()
        return Pointer(view_point, self._camera.scene_from_view(middle), step_px)

    def hit(self, view_point: QPointF) -> Hit | None:
        """The caliper, or leg of one, at a view point."""
        return self._overlay.hit(view_point - self._canvas_offset())

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """A button went down."""
        self._keys.settle()
        self._mouse.press(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """The pointer moved."""
        self._mouse.move(event)
        picture = self.pointer_at(event.position()).picture
        inside = self._picture_item.sceneBoundingRect().contains(picture)
        self.pointer_moved.emit(PicturePoint(picture.x(), picture.y()) if inside else None)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """A button came up."""
        self._mouse.release(event)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """The second of two quick presses."""
        self._mouse.double_click(event)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom or pan."""
        self._mouse.wheel(event)
        event.accept()

    def leaveEvent(self, event: QEvent) -> None:
        """The pointer left the view."""
        self.pointer_moved.emit(None)
        super().leaveEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:
        """A key released elsewhere is not seen here."""
        self._mouse.hold_space(False)
        super().focusOutEvent(event)

    # Following the document, and painting

    def _picture_opened(self) -> None:
        picture = self._document.picture
        self._mouse.cancel_drag()
        self._placing.drop()
        self.set_selection(Selection())
        self._picture_item.set_picture(picture)
        self._overlay.set_ink(None if picture is None else InkMap(picture.pixels))
        if picture is not None:
            self._camera.set_picture_size(*picture.size_px)
        self._follow_turn()
        self.fit_sheet()

    def _reading_changed(self) -> None:
        reading = self._document.reading
        self._mouse.cancel_drag()
        self._grid.set_map(None if reading is None else reading.sheet_map)
        if self._follow_turn():
            self.fit_sheet()
        kept = self._selection.kept_in(reading)
        self._overlay.set_reading(reading, kept)
        self._placing.reading_changed()
        self._repaint(None)
        if kept != self._selection:
            self._selection = kept
            self.selection_changed.emit()

    def _follow_turn(self) -> bool:
        reading, frame = self._document.reading, self.frame()
        turn_deg = 0
        if reading is not None and reading.sheet_map is not None:
            turn_deg = reading.sheet_map.turn_deg
        (xx, xy), (yx, yy) = frame.x_step_px, frame.y_step_px
        return self._camera.set_turn(turn_deg, mirrored=xx * yy - xy * yx < 0.0)

    def _camera_moved(self, zoom: float) -> None:
        self._picture_item.suit_zoom(zoom)
        self._overlay.set_transform(self.transform(), self._view_box())
        self._lay_out_aim()
        self._repaint(None)
        self.zoom_changed.emit(zoom)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the sheet fitted, or where it was."""
        super().resizeEvent(event)
        self._camera.resized()
        self._follow_view()

    def _follow_view(self) -> None:
        """The same zoom shows another part: labels at its edge stay in view."""
        for changed in self._overlay.show_in(self._view_box()):
            self._repaint(changed)

    def _canvas_offset(self) -> QPointF:
        """From canvas px to view px."""
        whole, unscrolled = self.viewportTransform(), self.transform()
        return QPointF(whole.dx() - unscrolled.dx(), whole.dy() - unscrolled.dy())

    def _lay_out_aim(self) -> None:
        pixmap = self._picture_item.full_pixmap()
        offset, labels = self._canvas_offset(), self._overlay.moving_labels()
        self._aim_mark.lay_out(self.frame(), self.transform(), offset, pixmap, labels)

    def _view_box(self) -> QRectF:
        """What the view shows, in canvas px."""
        return QRectF(self.viewport().rect()).translated(-self._canvas_offset())

    def _moving_bounds(self) -> QRectF:
        """What previews, cross and box cover, in canvas px."""
        bounds = self._aim_mark.bounds()
        for drawn in self._overlay.moving:
            bounds = bounds.united(drawn.bounds)
        if self._box is not None:
            bounds = bounds.united(self.transform().mapRect(self._box))
        return bounds.adjusted(-4.0, -4.0, 4.0, 4.0)

    def _repaint(self, canvas_box: QRectF | None) -> None:
        """Paint a part anew soon, or everything."""
        if canvas_box is None:
            self.viewport().update()
        else:
            self.viewport().update(canvas_box.translated(self._canvas_offset()).toAlignedRect())

    def drawBackground(self, painter: QPainter, rect: QRectF | QRect) -> None:
        """The desk, where the picture does not cover it."""
        exposed = QRectF(rect)
        if not self._picture_item.sceneBoundingRect().contains(exposed):
            painter.fillRect(exposed, look.DESK)

    def paintEvent(self, event: QPaintEvent) -> None:
        """Note which pieces are to be painted: `drawForeground` is told of one box around all."""
        self._exposed = event.region()
        super().paintEvent(event)

    def drawForeground(self, painter: QPainter, rect: QRectF | QRect) -> None:  # noqa: ARG002
        """The calipers, in canvas px; only what is exposed."""
        self._overlay.suit_screen(self.devicePixelRatioF())
        offset = self._canvas_offset()
        exposed = self._exposed.translated(-offset.toPoint())
        painter.save()
        painter.setWorldTransform(QTransform.fromTranslate(offset.x(), offset.y()))
        paint_calipers(painter, self._overlay.settled, exposed)
        paint_calipers(painter, self._overlay.moving, exposed)
        paint_lines(painter, self._aim_mark.lines, look.AIM_PEN)
        if self._box is not None:
            paint_box(painter, self.transform().mapRect(self._box))
        painter.restore()
