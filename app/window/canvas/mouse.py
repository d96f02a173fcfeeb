"""Which gesture a press begins, and where its moves and its release go."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QInputDevice, QMouseEvent, QWheelEvent

from app.reading import CaliperKind
from app.window.canvas.gestures.gesture import Gesture, Pointer
from app.window.canvas.gestures.move_calipers import MoveCalipers
from app.window.canvas.gestures.move_leg import MoveLeg
from app.window.canvas.gestures.pan import Pan
from app.window.canvas.hit_test import Hit
from app.window.canvas.selection import Part, Selection

if TYPE_CHECKING:
    from app.window.canvas.sheet_view import SheetView

_WHEEL_FACTOR = 1.2
_WHEEL_PAN_VIEW_PX = 80.0
_TOGGLE = Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier


class Mouse:
    """The pointer on one view; at most one drag at a time."""

    def __init__(self, view: SheetView) -> None:
        self._view = view
        self._drag: Gesture | None = None
        self._drag_button = Qt.MouseButton.NoButton
        self._placing_pressed = False
        self._pan_by_space = False
        self.view_point: QPointF | None = None

    def is_dragging(self) -> bool:
        """Whether something is held."""
        return self._drag is not None

    def cancel_drag(self) -> None:
        """Leave what is held where it was."""
        drag, self._drag = self._drag, None
        if drag is not None:
            drag.cancel()
            self.show_cursor()

    def hold_space(self, held: bool) -> None:
        """While the space bar is down, the left button pans."""
        self._pan_by_space = held
        self.show_cursor()

    def press(self, event: QMouseEvent) -> None:
        """Begin what this press means, unless something is held already."""
        pointer = self._pointer(event)
        if event.button() == Qt.MouseButton.RightButton:
            if self._drag is not None or self._view.is_placing():
                self._view.step_back()
            return
        if self._drag is not None:
            return
        if event.button() == Qt.MouseButton.MiddleButton:
            self._begin(Pan(self._view), event.button(), pointer)
        elif event.button() == Qt.MouseButton.LeftButton:
            self._press_left(pointer, event.modifiers())

    def _press_left(self, pointer: Pointer, modifiers: Qt.KeyboardModifier) -> None:
        left = Qt.MouseButton.LeftButton
        if self._pan_by_space:
            self._begin(Pan(self._view), left, pointer)
            return
        placing = self._view.placing
        if placing is not None:
            self._placing_pressed = True
            placing.start(pointer)
            self._view.after_placing_step()
            return
        hit = self._view.hit(pointer.view)
        if hit is None:
            self._begin(Pan(self._view, click_deselects=True), left, pointer)
        elif modifiers & _TOGGLE:
            self._view.set_selection(self._view.selection.toggled(hit.caliper_id))
        else:
            gesture = self._grasp(hit)
            if gesture is not None:
                self._begin(gesture, left, pointer)

    def _grasp(self, hit: Hit) -> Gesture | None:
        """Select what was hit, and the gesture that moves it."""
        view, reading = self._view, self._view.document.reading
        caliper = None if reading is None else reading.caliper(hit.caliper_id)
        if reading is None or caliper is None:
            return None
        alone = frozenset((hit.caliper_id,))
        if hit.tooth is not None:
            part = Part.START if hit.tooth == 0 else Part.END
            view.set_selection(Selection(alone, part))
            return MoveLeg(view, caliper, hit.tooth)
        ids = view.selection.ids if hit.caliper_id in view.selection.ids else alone
        view.set_selection(Selection(ids))
        return MoveCalipers(view, tuple(c for c in reading.calipers if c.caliper_id in ids))

    def _begin(self, gesture: Gesture, button: Qt.MouseButton, pointer: Pointer) -> None:
        self._drag, self._drag_button = gesture, button
        gesture.start(pointer)
        self.show_cursor()

    def move(self, event: QMouseEvent) -> None:
        """Go on with what is held, or show what could be."""
        pointer = self._pointer(event)
        if self._drag is not None:
            self._drag.move(pointer)
        elif self._view.placing is not None:
            self._view.placing.move(pointer)
        else:
            self.show_cursor()

    def release(self, event: QMouseEvent) -> None:
        """End what is held; only now anything is written."""
        pointer = self._pointer(event)
        if self._drag is not None and event.button() == self._drag_button:
            # Let go before the edit: the change it brings is not an interruption.
            drag, self._drag = self._drag, None
            drag.end(pointer)
            self.show_cursor()
        elif event.button() == Qt.MouseButton.LeftButton and self._placing_pressed:
            self._placing_pressed = False
            if self._view.placing is not None:
                self._view.placing.end(pointer)
                self._view.after_placing_step()

    def double_click(self, event: QMouseEvent) -> None:
        """End a chain, or select a whole caliper."""
        if event.button() != Qt.MouseButton.LeftButton:
            self.press(event)
        elif self._view.placing is not None:
            self._view.placing.double_click()
            self._view.after_placing_step()
        else:
            hit = self._view.hit(self._pointer(event).view)
            if hit is not None:
                self._view.set_selection(Selection(frozenset((hit.caliper_id,))))

    def wheel(self, event: QWheelEvent) -> None:
        """Zoom at the pointer; two fingers on a trackpad and Shift with the wheel pan."""
        modifiers, angle, pixels = event.modifiers(), event.angleDelta(), event.pixelDelta()
        if modifiers & Qt.KeyboardModifier.ControlModifier:
            self._zoom(angle.y(), event.position())
        elif not pixels.isNull() and _is_trackpad(event):
            self._view.pan(pixels.x(), pixels.y())
        elif modifiers & Qt.KeyboardModifier.ShiftModifier:
            notches = (angle.y() or angle.x()) / 120.0
            self._view.pan(notches * _WHEEL_PAN_VIEW_PX, 0.0)
        else:
            self._zoom(angle.y(), event.position())

    def _zoom(self, angle: int, view_point: QPointF) -> None:
        if angle:
            self._view.zoom_at(_WHEEL_FACTOR ** (angle / 120.0), view_point)

    def show_cursor(self) -> None:
        """The cursor that fits what a press would do."""
        self._view.viewport().setCursor(self._cursor())

    def _cursor(self) -> Qt.CursorShape:
        if isinstance(self._drag, Pan):
            return Qt.CursorShape.ClosedHandCursor
        if self._pan_by_space:
            return Qt.CursorShape.OpenHandCursor
        if self._view.is_placing():
            return Qt.CursorShape.CrossCursor
        hit = None if self.view_point is None else self._view.hit(self.view_point)
        if hit is None:
            return Qt.CursorShape.ArrowCursor
        if hit.tooth is None:
            return Qt.CursorShape.SizeAllCursor
        reading = self._view.document.reading
        caliper = None if reading is None else reading.caliper(hit.caliper_id)
        upright = caliper is not None and caliper.kind is not CaliperKind.HEIGHT
        return Qt.CursorShape.SizeHorCursor if upright else Qt.CursorShape.SizeVerCursor

    def _pointer(self, event: QMouseEvent) -> Pointer:
        self.view_point = event.position()
        return self._view.pointer_at(event.position())


def _is_trackpad(event: QWheelEvent) -> bool:
    """Some mice on X11 report pixel steps too, but no phases."""
    touch_pad = QInputDevice.DeviceType.TouchPad
    return event.phase() != Qt.ScrollPhase.NoScrollPhase or event.device().type() == touch_pad
