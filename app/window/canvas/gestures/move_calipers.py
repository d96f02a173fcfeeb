"""Drag whole calipers."""

from __future__ import annotations

from app.reading import Caliper
from app.window.canvas.gestures.gesture import CLICK_VIEW_PX, Gesture, Host, Pointer
from app.window.canvas.moves import whole_moved


class MoveCalipers(Gesture):
    """The calipers follow the pointer, each at most to the picture's edge."""

    def __init__(self, host: Host, calipers: tuple[Caliper, ...]) -> None:
        super().__init__(host)
        self._before = self._after = calipers
        self._first: Pointer | None = None
        self._dragged = False

    def start(self, pointer: Pointer) -> None:
        """Take hold."""
        self._first = pointer

    def move(self, pointer: Pointer) -> None:
        """Show where they would be."""
        if self._first is None:
            return
        if not self._dragged and pointer.distance_view_px(self._first) < CLICK_VIEW_PX:
            return
        self._dragged = True
        step = pointer.picture - self._first.picture
        frame = self._host.frame()
        self._after = tuple(
            whole_moved(caliper, (step.x(), step.y()), frame, hand_step_px=pointer.step_px)
            for caliper in self._before
        )
        self._host.show_preview(self._after, None)

    def end(self, pointer: Pointer) -> None:
        """Write the move as one edit, however many they are."""
        self.move(pointer)
        self._host.clear_preview()
        reading = self._host.document.reading
        if reading is None or self._after == self._before:
            return
        for caliper in self._after:
            reading = reading.with_caliper(caliper)
        label = "Move caliper" if len(self._after) == 1 else "Move calipers"
        self._host.document.edit(reading, label)
