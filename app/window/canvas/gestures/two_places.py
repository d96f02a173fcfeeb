"""Ask for two places, one after the other, by mouse or by keyboard."""

from __future__ import annotations

from abc import abstractmethod

from PySide6.QtCore import QPointF

from app.reading import PicturePoint
from app.window.canvas.gestures.gesture import Gesture, Host, Pointer

DRAG_VIEW_PX = 6.0


class TwoPlaces(Gesture):
    """Click and click, or press, drag and release; arrow keys and Enter do the same.

    It lasts until `is_over`, over many presses and releases of the button.
    """

    def __init__(self, host: Host, aim: PicturePoint) -> None:
        super().__init__(host)
        self.is_over = False
        self._first: PicturePoint | None = None
        self._aim = aim
        self._pressed_first: Pointer | None = None
        self._aimed_by_key = False

    @property
    @abstractmethod
    def prompt(self) -> str:
        """What is asked for now."""

    @abstractmethod
    def _show(self) -> None:
        """Draw what would come of the present aim."""

    @abstractmethod
    def _take(self, first: PicturePoint, second: PicturePoint) -> None:
        """Both places are there."""

    @property
    def aim(self) -> PicturePoint:
        """The place the next mark would take."""
        return self._aim

    def start(self, pointer: Pointer) -> None:
        """The first press takes the first place; a later one waits for its release."""
        self._point_at(pointer.picture)
        if self._first is None:
            self._first = self._aim
            self._pressed_first = pointer
        self._show()

    def move(self, pointer: Pointer) -> None:
        """The preview follows, with the button down or not."""
        self._point_at(pointer.picture)
        self._show()

    def end(self, pointer: Pointer) -> None:
        """Take the second place, unless this release ends the click for the first."""
        self._point_at(pointer.picture)
        pressed, self._pressed_first = self._pressed_first, None
        if pressed is not None and pointer.distance_view_px(pressed) < DRAG_VIEW_PX:
            self._show()
        elif self._first is not None:
            self._take(self._first, self._aim)

    def aim_by_key(self, step_mm: tuple[float, float]) -> None:
        """Move the aim by a step on the grid."""
        frame = self._host.frame()
        dx, dy = frame.px_step(*step_mm)
        self._aim = frame.clamped(self._aim.x_px + dx, self._aim.y_px + dy)
        self._aimed_by_key = True
        self._show()

    def enter(self) -> None:
        """The Enter key: take the place aimed at."""
        self._aimed_by_key = False
        if self._first is None:
            self._first = self._aim
            self._show()
        else:
            self._take(self._first, self._aim)

    def double_click(self) -> None:
        """A second click in the same place is not a second place."""

    def step_back(self) -> None:
        """Esc or the right button: ask for the first place again, or give up."""
        self._pressed_first = None
        if self._first is None:
            self.cancel()
        else:
            self._first = None
            self._show()

    def reading_changed(self) -> None:
        """An undo, say, happened in between."""
        self._show()

    def cancel(self) -> None:
        """Give up; what was written before stays."""
        self.is_over = True
        super().cancel()

    def _point_at(self, picture: QPointF) -> None:
        self._aim = self._host.frame().clamped(picture.x(), picture.y())
        self._aimed_by_key = False
