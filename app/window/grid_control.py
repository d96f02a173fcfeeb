"""What the window says and offers about the grid: found, uncertain, missing, given by hand."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import QObject

from app.reading.marks import PicturePoint
from app.window.canvas.sheet_view import SheetView
from app.window.dialogs.ask import Ask
from app.window.document import Document
from app.window.jobs import Jobs
from app.window.opening import Opening
from app.window.panels.notices import Notices
from app.window.statements import miscount_statement
from imaging import SheetMap, sheet_map_from_box

_SUBJECT = "grid"
_SEARCH = "grid search"
_BY_HAND = "Give the scale by hand"
_COUNT_ANSWERS = ["Count again", "Take it all the same", "Cancel"]
_STOPPED = "No grid is known for this picture, so nothing can be measured yet."
_UNCERTAIN = (
    "The lines found may be 1 mm or 5 mm apart: switch the grid overlay on (G) and count. "
    "Until that is settled every value may be off five times."
)


class GridControl(QObject):
    """Keeps the notice about the grid, and takes a scale given by hand."""

    def __init__(
        self,
        document: Document,
        view: SheetView,
        jobs: Jobs,
        opening: Opening,
        notices: Notices,
        ask: Ask,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._view = view
        self._jobs = jobs
        self._opening = opening
        self._notices = notices
        self._ask = ask
        self._reason = ""
        document.opened.connect(self._forget)
        document.changed.connect(self._show)
        jobs.busy_changed.connect(self._show)
        opening.grid_missing.connect(self._missing)
        view.scale_box_drawn.connect(self._box_drawn)

    def begin_box(self) -> None:
        """Ask for a box over a known number of large squares."""
        self._jobs.give_up()
        self._view.begin_scale_box()

    def confirm_scale(self) -> None:
        """The reader has counted: one small square of the map is one of the paper."""
        reading = self._document.reading
        if reading is None or reading.sheet_map is None:
            return
        sheet_map = replace(
            reading.sheet_map,
            scale_is_certain=True,
            evidence=(*reading.sheet_map.evidence, "The reader confirmed the size of a square."),
        )
        self._document.edit(replace(reading, sheet_map=sheet_map), "Confirm scale")

    def _box_drawn(self, corner: PicturePoint, opposite: PicturePoint) -> None:
        sheet_map = self._map_of_box(corner, opposite)
        reading = self._document.reading
        if sheet_map is not None and reading is not None:
            self._document.edit(replace(reading, sheet_map=sheet_map), "Give scale by hand")

    def _map_of_box(self, corner: PicturePoint, opposite: PicturePoint) -> SheetMap | None:
        """Ask for the counts until they give squares as high as wide, or nothing is wanted."""
        picture = self._document.picture
        while picture is not None and (squares := self._ask.squares_in_box()) is not None:
            try:
                sheet_map = sheet_map_from_box(
                    picture.size_px,
                    (corner.x_px, corner.y_px),
                    (opposite.x_px, opposite.y_px),
                    *squares,
                    # Drawn no more finely than the screen shows the picture.
                    corner_error_px=max(1.0, 1.0 / self._view.zoom()),
                )
            except ValueError as error:
                self._ask.tell(_BY_HAND, f"No scale was set: {error}.")
                return None
            doubt = miscount_statement(sheet_map)
            if not doubt:
                return sheet_map
            answer = self._ask.choose(_BY_HAND, doubt, _COUNT_ANSWERS)
            if answer != 0:
                return sheet_map if answer == 1 else None
        return None

    def _forget(self) -> None:
        self._reason = ""
        self._notices.take_away(_SEARCH)

    def _missing(self, reason: str) -> None:
        reading = self._document.reading
        if reading is not None and reading.sheet_map is not None:
            text = f"{reason} The scale is as it was."
            self._notices.put(_SEARCH, "warn", text, closable=True)
        else:
            self._reason = reason
            self._show()

    def _show(self) -> None:
        reading = self._document.reading
        by_hand = (_BY_HAND, self.begin_box)
        if reading is None or self._jobs.is_busy():
            self._notices.take_away(_SUBJECT)
        elif reading.sheet_map is None:
            again = ("Find the grid again", self._opening.find_grid)
            self._notices.put(_SUBJECT, "stop", self._reason or _STOPPED, [by_hand, again])
        elif not reading.sheet_map.scale_is_certain:
            right = ("One small square is 1 mm", self.confirm_scale)
            self._notices.put(_SUBJECT, "warn", _UNCERTAIN, [right, by_hand])
        else:
            self._notices.take_away(_SUBJECT)
