"""Draw a box over a known number of large squares, where no grid was found."""

from __future__ import annotations

from app.reading import PicturePoint
from app.window.canvas import prompts
from app.window.canvas.gestures.gesture import Aim
from app.window.canvas.gestures.two_places import TwoPlaces

_SMALLEST_SIDE_PX = 4.0


class DrawScaleBox(TwoPlaces):
    """Two opposite corners; nothing is written, the box is handed on as `corners`."""

    corners: tuple[PicturePoint, PicturePoint] | None = None

    @property
    def prompt(self) -> str:
        """What is asked for now."""
        return prompts.SCALE_BOX_FIRST if self._first is None else prompts.SCALE_BOX_SECOND

    def _show(self) -> None:
        self._host.show_preview((), Aim(self._aim, None))
        if self._first is not None:
            self._host.show_box(self._first, self._aim)

    def _take(self, first: PicturePoint, second: PicturePoint) -> None:
        across_px, down_px = abs(second.x_px - first.x_px), abs(second.y_px - first.y_px)
        if min(across_px, down_px) < _SMALLEST_SIDE_PX:
            return
        self.corners = (first, second)
        self.is_over = True
        self._host.clear_preview()
