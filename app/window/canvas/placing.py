"""The two places being asked for, from the first prompt to what came of it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt

from app.window.canvas.gestures.draw_scale_box import DrawScaleBox
from app.window.canvas.gestures.place_caliper import PlaceCaliper
from app.window.canvas.gestures.two_places import TwoPlaces
from app.window.canvas.selection import Selection

if TYPE_CHECKING:
    from app.window.canvas.sheet_view import SheetView


class Placing:
    """At most one placing at a time; tells through the view's signals."""

    def __init__(self, view: SheetView) -> None:
        self._view = view
        self._prompt = ""
        self.current: TwoPlaces | None = None

    def begin(self, gesture: TwoPlaces) -> None:
        """Ask for the places of a gesture; nothing else is selected meanwhile."""
        self._view.set_selection(Selection())
        self.current = gesture
        self._view.setFocus(Qt.FocusReason.OtherFocusReason)
        self._view.show_cursor()
        self.after_step()

    def cancel(self) -> None:
        """Give up; of a chain what was placed stays and is told."""
        if self.current is not None:
            self.current.cancel()
            self.after_step()

    def drop(self) -> None:
        """Give up because another reading was put in: what was placed is not in it."""
        if self.current is not None:
            self.current.cancel()
            self._end()
            self._view.placing_cancelled.emit()

    def step_back(self) -> None:
        """Esc or the right button."""
        if self.current is not None:
            self.current.step_back()
            self.after_step()

    def reading_changed(self) -> None:
        """Go on with the reading as it is now."""
        if self.current is not None and not self.current.is_over:
            self.current.reading_changed()
            self.after_step()

    def after_step(self) -> None:
        """Tell what is asked for now, or that it is over."""
        gesture = self.current
        if gesture is None:
            return
        if not gesture.is_over:
            self._set_prompt(gesture.prompt)
            return
        self._end()
        if isinstance(gesture, DrawScaleBox) and gesture.corners is not None:
            self._view.scale_box_drawn.emit(*gesture.corners)
        elif isinstance(gesture, PlaceCaliper) and gesture.placed_ids:
            gesture.select_placed()
            self._view.placing_finished.emit(gesture.placed_ids[-1])
        else:
            self._view.placing_cancelled.emit()

    def _end(self) -> None:
        self.current = None
        self._view.show_cursor()
        self._set_prompt("")

    def _set_prompt(self, prompt: str) -> None:
        if prompt != self._prompt:
            self._prompt = prompt
            self._view.prompt_changed.emit(prompt)
