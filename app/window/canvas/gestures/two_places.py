"""Ask for two places, one after the other, by mouse or by keyboard."""

from __future__ import annotations

from abc import abstractmethod
from dataclasses import replace

from app.reading import PicturePoint
from app.window.canvas.gestures.gesture import Gesture, Host, Pointer
from app.window.canvas.moves import key_refined

DRAG_VIEW_PX = 6.0


class TwoPlaces(Gesture):
    """Click and click, or press, drag and release; arrow keys and Enter do the same.

    It lasts until `is_over`, over many presses and releases of the button.

    Parameters
    ----------
    host : Host
    aim : PicturePoint
        Where it begins.
    axis : int or None
        0 where the places count along the paper, 1 where they count down it, None for both.
    """

    def __init__(self, host: Host, aim: PicturePoint, axis: int | None = None) -> None:
        super().__init__(host)
        self._axis = axis
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
        self._point_at(pointer)
        if self._first is None:
            self._first = self._aim
            self._pressed_first = pointer
        self._show()

    def move(self, pointer: Pointer) -> None:
        """The preview follows, with the button down or not."""
        self._point_at(pointer)
        self._show()

    def end(self, pointer: Pointer) -> None:
        """Take the second place, unless this release ends the click for the first."""
        self._point_at(pointer)
        pressed, self._pressed_first = self._pressed_first, None
        if pressed is not None and pointer.distance_view_px(pressed) < DRAG_VIEW_PX:
            self._show()
        elif self._first is not None:
            self._take(self._first, self._aim)

    def aim_by_key(self, step_mm: tuple[float, float]) -> None:
        """Move the aim by a step on the grid."""
        frame = self._host.frame()
        dx, dy = frame.px_step(*step_mm)
        step_px = self._aim.step_px
        if self._axis is not None:
            step_px = key_refined(step_px, step_mm, self._axis, frame)
        moved = frame.clamped(self._aim.x_px + dx, self._aim.y_px + dy)
        self._aim = replace(moved, step_px=step_px)
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

    def _point_at(self, pointer: Pointer) -> None:
        place = self._host.frame().clamped(pointer.picture.x(), pointer.picture.y())
        self._aim = replace(place, step_px=pointer.step_px)
        self._aimed_by_key = False
