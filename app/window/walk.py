"""The walk along the worksheet: pick a line, mark it, take another beat or go on."""

from __future__ import annotations

from PySide6.QtCore import QObject, Signal

from app.reading.marks import Caliper, CaliperKind
from app.window.canvas.sheet_view import SheetView
from app.window.document import Document
from app.window.jobs import Jobs
from app.window.panels.lines import Line
from app.window.panels.worksheet import Worksheet
from app.window.panels.worksheet_rows import Row, RowId


class Walk(QObject):
    """Holds worksheet and canvas together.

    Signals
    -------
    idle_words(str)
        What the reader may do next, while no gesture is going on.
    moved()
        Another line is current, or placing began or ended.
    """

    idle_words = Signal(str)
    moved = Signal()

    def __init__(
        self,
        document: Document,
        view: SheetView,
        worksheet: Worksheet,
        jobs: Jobs,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._view = view
        self._worksheet = worksheet
        self._jobs = jobs
        self._line_id: int | None = None
        self._following = False
        worksheet.row_opened.connect(self._opened)
        worksheet.row_picked.connect(self._picked)
        worksheet.another_wanted.connect(self.another_beat)
        worksheet.next_wanted.connect(self.next_line)
        worksheet.line_added.connect(self.begin)
        worksheet.refreshed.connect(self._refreshed)
        view.placing_finished.connect(self._placed)
        view.placing_cancelled.connect(self._refreshed)
        view.selection_changed.connect(self._selection_changed)
        jobs.busy_changed.connect(self._say)
        document.opened.connect(self._forget)

    @property
    def line(self) -> Line | None:
        """The line the reader is at."""
        return None if self._line_id is None else self._worksheet.lines.line(self._line_id)

    @property
    def is_placing(self) -> bool:
        """Whether the canvas waits for a place."""
        return self._view.is_placing()

    def following_line(self) -> Line | None:
        """The line that 'next' would go to."""
        return self._worksheet.lines.next_to_mark(self.line, self._document.reading)

    def begin(self, line: Line) -> None:
        """Ask the canvas for the two places of a line."""
        reading = self._document.reading
        if reading is None or reading.sheet_map is None:
            self._say()
            return
        # A chain that was going on ends here and reports itself before the new line begins.
        self._view.cancel_gesture()
        self._line_id = line.line_id
        self._show_row(("line", line.line_id, None))
        self._view.begin_placing(line.quantity.kind, line.key, line.lead)
        self._refreshed()

    def begin_free(self, kind: CaliperKind) -> None:
        """Ask the canvas for a caliper that belongs to no line."""
        self._view.begin_placing(kind, None, None)
        self._refreshed()

    def another_beat(self) -> None:
        """Mark the present line once more."""
        if self.line is not None:
            self.begin(self.line)

    def next_line(self) -> None:
        """Go to the next line without marks."""
        line = self.following_line()
        if line is not None:
            self.begin(line)

    def _opened(self, row: Row) -> None:
        """A click on an empty line begins marking; one on a marked line shows its marks.

        Either way what was being placed for another line is given up: the sheet must not ask
        for one line while another is the current one.
        """
        if row.line is None:
            return
        if not row.caliper_ids:
            self.begin(row.line)
            return
        self._view.cancel_gesture()
        self._line_id = row.line.line_id
        self._show_row(row.row_id)
        self._select(row.caliper_ids)
        self._refreshed()

    def _picked(self, row: Row | None) -> None:
        if row is None or self._following or self.is_placing:
            return
        if row.line is not None:
            self._line_id = row.line.line_id
        self._select(row.caliper_ids)
        self._refreshed()

    def _select(self, caliper_ids: tuple[int, ...]) -> None:
        self._following = True
        try:
            self._view.select(caliper_ids)
        finally:
            self._following = False

    def _placed(self, caliper_id: int) -> None:
        self._worksheet.refresh()
        reading = self._document.reading
        caliper = None if reading is None else reading.caliper(caliper_id)
        if caliper is not None:
            self._show_row(self._row_of(caliper))
        self._refreshed()

    def _forget(self) -> None:
        self._line_id = None

    def _selection_changed(self) -> None:
        """Show on the worksheet what was picked on the canvas."""
        if self._following or self.is_placing:
            return
        reading, ids = self._document.reading, list(self._view.selected_ids())
        if reading is None or len(ids) != 1:
            return
        caliper = reading.caliper(ids[0])
        if caliper is not None:
            self._show_row(self._row_of(caliper))
            self._refreshed()

    def _row_of(self, caliper: Caliper) -> RowId:
        if caliper.quantity is None:
            return ("free", caliper.caliper_id, None)
        line = self._worksheet.lines.find(caliper.quantity, caliper.lead)
        if line is None:
            return ("beat", caliper.caliper_id, None)
        self._line_id = line.line_id
        row_id: RowId = ("line", line.line_id, None)
        item = self._worksheet.tree.item_of(row_id)
        if item is not None and item.isExpanded():
            return ("beat", caliper.caliper_id, None)
        return row_id

    def _show_row(self, row_id: RowId) -> None:
        self._following = True
        try:
            self._worksheet.tree.pick(row_id)
        finally:
            self._following = False

    def _refreshed(self) -> None:
        """Bring the offer and the two buttons up to date."""
        sheet = self._worksheet
        reading = self._document.reading
        can_mark = reading is not None and reading.sheet_map is not None
        following = self.following_line() if can_mark else None
        offered = None if following is None or self.is_placing else following
        sheet.tree.offer(None if offered is None else ("line", offered.line_id, None))
        sheet.another.setEnabled(can_mark and self.line is not None)
        sheet.another.setText(self._another_words())
        sheet.next.setEnabled(following is not None)
        sheet.next.setText("Next line  (N)" if following is None else _next_words(following))
        self._say()
        self.moved.emit()

    def _another_words(self) -> str:
        reading, line = self._document.reading, self.line
        if reading is None or line is None:
            return "Another beat  (B)"
        is_marked = bool(reading.calipers_of(line.key, line.lead))
        verb = "Another" if is_marked else "Mark"
        return f"{verb} {line.quantity.label} {line.lead or ''}".rstrip() + "  (B)"

    def _say(self) -> None:
        self.idle_words.emit(self._words())

    def _words(self) -> str:
        reading = self._document.reading
        if reading is None:
            return "Open a picture of a paper ECG, or drop one here."
        if reading.sheet_map is None:
            if self._jobs.is_busy():
                return "The grid is being looked for."
            return "The grid is not known, so nothing can be measured."
        following = self.following_line()
        line = self.line
        marked = line is not None and bool(reading.calipers_of(line.key, line.lead))
        if line is None or not marked:
            if following is None:
                return "Every line has its marks."
            return f"Pick a line on the worksheet, or press N for {following.name}."
        go_on = (
            "every line has its marks" if following is None else f"N goes on to {following.name}"
        )
        return f"{line.name} is marked.  B marks another beat, {go_on}."


def _next_words(line: Line) -> str:
    return f"Next: {line.quantity.label} {line.lead or ''}".rstrip() + "  (N)"
