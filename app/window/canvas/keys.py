"""What the keys do on the canvas: everything the mouse does, and in finer steps."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent

from app.drawing.frame import Vector
from app.reading import CaliperKind
from app.window.canvas.moves import nudged, with_teeth
from app.window.canvas.selection import Part, Selection, next_selection

if TYPE_CHECKING:
    from app.window.canvas.sheet_view import SheetView

_ARROWS: dict[int, Vector] = {
    Qt.Key.Key_Left: (-1.0, 0.0),
    Qt.Key.Key_Right: (1.0, 0.0),
    Qt.Key.Key_Up: (0.0, -1.0),
    Qt.Key.Key_Down: (0.0, 1.0),
}
_PAN_VIEW_PX = 60.0
_SHIFT_STEPS = 10.0
_CONTROL_STEPS = 50.0
_COMMANDS = (
    Qt.KeyboardModifier.ControlModifier
    | Qt.KeyboardModifier.AltModifier
    | Qt.KeyboardModifier.MetaModifier
)


class Keys:
    """The keyboard on one view; a run of presses that move one thing is one edit."""

    def __init__(self, view: SheetView) -> None:
        self._view = view
        self._in_run = False

    def settle(self) -> None:
        """Something else happened: the next press is an edit of its own."""
        if self._in_run:
            self._in_run = False
            self._view.document.settle()

    def press(self, event: QKeyEvent) -> bool:
        """Act on a key; False leaves it to the window."""
        key = event.key()
        if key == Qt.Key.Key_Escape:
            return self._view.step_back()
        if key in _ARROWS:
            return self._arrow(_ARROWS[key], event.modifiers())
        if self._view.placing is not None:
            return self._key_while_placing(key)
        if key in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace):
            self._view.delete_selected()
            return True
        # With Control, plus and minus are the window's zoom.
        if not event.modifiers() & _COMMANDS:
            if key in (Qt.Key.Key_Plus, Qt.Key.Key_Equal):
                return self._change_teeth(1)
            if key == Qt.Key.Key_Minus:
                return self._change_teeth(-1)
        return False

    def tab(self, forward: bool) -> bool:
        """Select the next leg or caliper; False past the last, or where there is none."""
        reading = self._view.document.reading
        if reading is None or self._view.is_placing():
            return False
        following = next_selection(reading, self._view.selection, backward=not forward)
        self._view.set_selection(following or Selection())
        if following is None:
            return False
        (caliper_id,) = following.ids
        caliper = reading.caliper(caliper_id)
        if caliper is not None:
            at_start = following.part is Part.START
            self._view.keep_in_sight(caliper.start if at_start else caliper.end)
        return True

    def _key_while_placing(self, key: int) -> bool:
        placing = self._view.placing
        if placing is None or key not in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            return False
        placing.enter()
        self._view.after_placing_step()
        return True

    def _arrow(self, way: Vector, modifiers: Qt.KeyboardModifier) -> bool:
        if modifiers & (Qt.KeyboardModifier.AltModifier | Qt.KeyboardModifier.MetaModifier):
            return False
        steps = 1.0
        if modifiers & Qt.KeyboardModifier.ShiftModifier:
            steps = _SHIFT_STEPS
        elif modifiers & Qt.KeyboardModifier.ControlModifier:
            steps = _CONTROL_STEPS
        step_mm = steps * self._view.frame().key_step_mm()
        along_mm = way[0] * step_mm, way[1] * step_mm
        placing = self._view.placing
        if placing is not None:
            placing.aim_by_key(along_mm)
            self._view.keep_in_sight(placing.aim)
        elif not self._nudge(along_mm):
            self._view.pan(-way[0] * _PAN_VIEW_PX, -way[1] * _PAN_VIEW_PX)
        return True

    def _nudge(self, step_mm: Vector) -> bool:
        """Move what is selected; says whether anything is."""
        reading, selection = self._view.document.reading, self._view.selection
        if reading is None or not selection.ids:
            return False
        frame = self._view.frame()
        for caliper in reading.calipers:
            if caliper.caliper_id in selection.ids:
                moved = nudged(caliper, selection.part, step_mm, frame)
                reading = reading.with_caliper(moved)
        ids = ",".join(str(caliper_id) for caliper_id in sorted(selection.ids))
        label = "Move caliper" if selection.part is Part.WHOLE else "Move caliper leg"
        self._view.document.edit(reading, label, merge_key=f"nudge {ids} {selection.part}")
        self._in_run = True
        return True

    def _change_teeth(self, by: int) -> bool:
        """More or fewer teeth; says whether a comb alone is selected."""
        reading, ids = self._view.document.reading, self._view.selection.ids
        if reading is None or len(ids) != 1:
            return False
        (caliper_id,) = ids
        comb = reading.caliper(caliper_id)
        if comb is None or comb.kind is not CaliperKind.COMB:
            return False
        changed = with_teeth(comb, comb.teeth + by, self._view.frame())
        self._view.document.edit(
            reading.with_caliper(changed), "Change comb teeth", merge_key=f"teeth {caliper_id}"
        )
        self._in_run = True
        return True
