"""Push the picture about; on an empty place a mere click lets go of the selection."""

from __future__ import annotations

from app.window.canvas.gestures.gesture import CLICK_VIEW_PX, Gesture, Host, Pointer
from app.window.canvas.selection import Selection


class Pan(Gesture):
    """Drag the picture.

    Parameters
    ----------
    host : Host
    click_deselects : bool
        Whether a press and release in one place ends the selection.
    """

    def __init__(self, host: Host, *, click_deselects: bool = False) -> None:
        super().__init__(host)
        self._click_deselects = click_deselects
        self._first: Pointer | None = None
        self._last: Pointer | None = None
        self._panned = False

    def start(self, pointer: Pointer) -> None:
        """Take hold."""
        self._first = self._last = pointer

    def move(self, pointer: Pointer) -> None:
        """Follow the pointer, once it is no click any more."""
        if self._first is None or self._last is None:
            return
        if not self._panned and pointer.distance_view_px(self._first) < CLICK_VIEW_PX:
            return
        self._panned = True
        step = pointer.view - self._last.view
        self._last = pointer
        self._host.pan(step.x(), step.y())

    def end(self, pointer: Pointer) -> None:
        """Let go."""
        self.move(pointer)
        if self._click_deselects and not self._panned:
            self._host.set_selection(Selection())

    def cancel(self) -> None:
        """Nothing was written, so there is nothing to restore."""
