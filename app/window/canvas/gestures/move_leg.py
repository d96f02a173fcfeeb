"""Drag one leg of a caliper, or a tooth of a comb."""

from __future__ import annotations

from app.drawing.shape import measuring_axis
from app.reading import Caliper, PicturePoint
from app.window.canvas.gestures.gesture import CLICK_VIEW_PX, Aim, Gesture, Host, Pointer
from app.window.canvas.moves import leg_moved


class MoveLeg(Gesture):
    """The leg follows the pointer along its measuring axis; the other leg stays."""

    def __init__(self, host: Host, caliper: Caliper, tooth: int) -> None:
        super().__init__(host)
        self._before = self._after = caliper
        self._tooth = tooth
        self._first: Pointer | None = None
        self._dragged = False

    def start(self, pointer: Pointer) -> None:
        """Take hold where the pointer is: the leg does not jump to it."""
        self._first = pointer

    def move(self, pointer: Pointer) -> None:
        """Show where the leg would be."""
        if self._first is None:
            return
        if not self._dragged and pointer.distance_view_px(self._first) < CLICK_VIEW_PX:
            return
        self._dragged = True
        frame, axis = self._host.frame(), measuring_axis(self._before.kind)
        step = pointer.picture - self._first.picture
        origin = frame.px_from_mm(0.0, 0.0)
        there = PicturePoint(origin[0] + step.x(), origin[1] + step.y())
        along_mm = frame.mm_from_px(there)[axis]
        self._after = leg_moved(
            self._before, self._tooth, along_mm, frame, hand_step_px=pointer.step_px
        )
        mark = self._after.start if self._tooth == 0 else self._after.end
        self._host.show_preview((self._after,), Aim(mark, self._before.kind, crosshair=False))

    def end(self, pointer: Pointer) -> None:
        """Write the move as one edit."""
        self.move(pointer)
        self._host.clear_preview()
        reading = self._host.document.reading
        if reading is not None and self._after != self._before:
            self._host.document.edit(reading.with_caliper(self._after), "Move caliper leg")
