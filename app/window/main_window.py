"""The main window: puts the parts together and keeps menus, notices and title up to date."""

from __future__ import annotations

import logging
from dataclasses import replace

from PySide6.QtCore import QPointF, QSize, Qt
from PySide6.QtGui import QCloseEvent, QCursor, QDragEnterEvent, QDropEvent, QGuiApplication
from PySide6.QtWidgets import QLabel, QMainWindow, QSplitter, QVBoxLayout, QWidget

from app.reading.marks import PicturePoint
from app.reading.model import PictureIdentity
from app.window import theme
from app.window.actions import MEASURE, Actions, Situation
from app.window.canvas.sheet_view import SheetView
from app.window.dialogs.ask import Ask
from app.window.document import Document
from app.window.faults import MemoryLog
from app.window.grid_control import GridControl
from app.window.jobs import Jobs
from app.window.opening import Opening
from app.window.panels.notices import Notices
from app.window.panels.prompt import Prompt
from app.window.panels.settings import SettingsStrip
from app.window.panels.worksheet import Worksheet
from app.window.saving import Leaving, Saving
from app.window.statements import (
    coarse_zoom_statement,
    grid_statement,
    pointer_statement,
    unconfirmed_statement,
)
from app.window.walk import Walk

_USUAL_SIZE = QSize(1320, 800)
_log = logging.getLogger(__name__)


class MainWindow(QMainWindow):
    """The bench: canvas in the middle, worksheet at the side, settings above."""

    document: Document
    view: SheetView
    opening: Opening
    saving: Saving
    walk: Walk
    grid: GridControl

    def __init__(self, ask: Ask | None = None, memory_log: MemoryLog | None = None) -> None:
        super().__init__()
        self._memory_log = memory_log
        self._is_telling = False
        self._is_closing = False
        self.ask = ask or Ask(self)
        self.document = Document(self)
        self.jobs = Jobs(self)
        self.view = SheetView(self.document)
        self.settings = SettingsStrip(self.document)
        self.prompt = Prompt()
        self.notices = Notices()
        self.worksheet = Worksheet(self.document)
        self.saving = Saving(
            self.document, self.jobs, self.ask, self.worksheet.commit_pending, self
        )
        self.opening = Opening(self.document, self.jobs, self.ask, self.saving, self)
        self.grid = GridControl(
            self.document, self.view, self.jobs, self.opening, self.notices, self.ask, self
        )
        self.walk = Walk(self.document, self.view, self.worksheet, self.jobs, self)
        self._pointer_label = QLabel()
        self._zoom_label = QLabel()
        self._grid_label = QLabel()
        self._lay_out()
        self.actions_table = Actions(self, self.menuBar())
        self.actions_table.menus[MEASURE].addSeparator()
        self.actions_table.menus[MEASURE].addMenu(self.worksheet.lines_menu)
        self._connect()
        self.setAcceptDrops(True)
        self._follow()
        self.worksheet.refresh()

    def show_fault(self, sentence: str) -> None:
        """Tell of something unforeseen, one box at a time.

        What goes wrong while painting would go wrong again behind its own box.
        """
        if self._is_telling:
            return
        self._is_telling = True
        try:
            self.ask.tell("Smallsquare", sentence)
        finally:
            self._is_telling = False

    def paste(self) -> None:
        """Open the picture or file on the clipboard."""
        self.opening.take(QGuiApplication.clipboard().mimeData())

    def save(self) -> None:
        """Save the reading."""
        self.saving.save()

    def save_as(self) -> None:
        """Save the reading under another name."""
        self.saving.save_as()

    def quit(self) -> None:
        """Close the window, which ends the program."""
        self.close()

    def turn_sheet(self, quarter_turns: int) -> None:
        """Turn the sheet clockwise, so that +x becomes the reading direction."""
        reading = self.document.reading
        if reading is not None and reading.sheet_map is not None:
            turned = reading.sheet_map.turned(quarter_turns)
            self.document.edit(replace(reading, sheet_map=turned), "Turn sheet")

    def zoom_actual(self) -> None:
        """One picture pixel on one screen pixel; what is under the pointer stays there."""
        viewport = self.view.viewport()
        pointer = viewport.mapFromGlobal(QCursor.pos())
        if viewport.rect().contains(pointer):
            self.view.zoom_at(1.0 / self.view.zoom(), QPointF(pointer))
        else:
            self.view.zoom_actual()

    def show_keys(self) -> None:
        """List every key."""
        from app.window.dialogs.about import KeysDialog

        KeysDialog(self).open()

    def show_about(self) -> None:
        """Say what the program is and what it is not."""
        from app.window.dialogs.about import AboutDialog

        AboutDialog(self).open()

    def copy_details(self) -> None:
        """Put the log on the clipboard."""
        text = "" if self._memory_log is None else self._memory_log.text()
        QGuiApplication.clipboard().setText(text or "The log is empty.")
        self.statusBar().showMessage("The technical details are on the clipboard.", 6000)

    def closeEvent(self, event: QCloseEvent) -> None:
        leaving = self.saving.leave()
        if leaving is Leaving.STAY:
            event.ignore()
            return
        if leaving is Leaving.DISCARD:
            self.document.abandon()
        # A search that goes on is waited for out of sight.
        self.hide()
        self._is_closing = True
        self.jobs.wait_for_all()
        event.accept()

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        if self.opening.can_take(event.mimeData()):
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        event.acceptProposedAction()
        self.opening.take(event.mimeData())

    def _lay_out(self) -> None:
        bench = QSplitter(Qt.Orientation.Horizontal)
        bench.addWidget(_stacked(self.prompt, self.view))
        bench.addWidget(self.worksheet)
        bench.setStretchFactor(0, 1)
        bench.setStretchFactor(1, 0)
        bench.setChildrenCollapsible(False)
        worksheet_px = self.worksheet.sizeHint().width()
        bench.setSizes([2 * worksheet_px, worksheet_px])
        self.setCentralWidget(_stacked(self.settings, self.notices, bench))
        # Drops go to the window, whatever the canvas makes of them.
        self.view.setAcceptDrops(False)
        bar = self.statusBar()
        bar.setContentsMargins(10, 0, 4, 0)
        bar.addWidget(self._grid_label, 1)
        bar.addPermanentWidget(self._pointer_label)
        bar.addPermanentWidget(self._zoom_label)
        self._pointer_label.setMinimumWidth(150)
        self._zoom_label.setMinimumWidth(56)
        self.resize(_USUAL_SIZE.boundedTo(self.screen().availableSize()))

    def _connect(self) -> None:
        self.document.changed.connect(self._follow)
        self.document.opened.connect(self._opened)
        self.document.journal_failed.connect(self._journal_failed)
        self.jobs.busy_changed.connect(self._busy)
        self.prompt.cancel_wanted.connect(self.jobs.give_up)
        self.view.prompt_changed.connect(self.prompt.set_gesture)
        self.view.selection_changed.connect(self._follow_actions)
        self.view.pointer_moved.connect(self._pointer)
        self.view.zoom_changed.connect(self._zoom)
        self.walk.idle_words.connect(self.prompt.set_idle)
        self.walk.moved.connect(self._follow_actions)
        self.walk.moved.connect(self._hint)
        self.opening.failed.connect(self._refused)
        self.saving.failed.connect(self._refused)
        self.worksheet.refused.connect(self._refused)
        self.saving.saved.connect(self._saved)

    def _follow(self) -> None:
        """Bring title, menus, notices and status bar up to date with the document."""
        reading, picture = self.document.reading, self.document.picture
        name = "" if reading is None else reading.picture.file_name
        if self.document.path is not None:
            name = self.document.path.name
        self.setWindowTitle(f"{name}[*]" if name else "Smallsquare[*]")
        self.setWindowModified(self.document.is_modified())
        sheet_map = None if reading is None else reading.sheet_map
        self._grid_label.setText("" if reading is None else grid_statement(sheet_map))
        doubtful = sheet_map is not None and (
            sheet_map.source == "reader" or not sheet_map.scale_is_certain
        )
        self._grid_label.setStyleSheet(f"color: {theme.WARN_INK};" if doubtful else "")
        unconfirmed = "" if reading is None else unconfirmed_statement(reading.calibration)
        if unconfirmed:
            self.notices.put("unconfirmed", "warn", unconfirmed)
        else:
            self.notices.take_away("unconfirmed")
        if reading is not None and picture is not None:
            self._follow_picture(reading.picture.sha256 == picture.sha256)
        self._follow_actions()

    def _follow_picture(self, is_the_same: bool) -> None:
        if is_the_same:
            self.notices.take_away("picture")
            return
        self.notices.put(
            "picture",
            "stop",
            "This is not the picture that was read: check that every mark still lies where it "
            "belongs. The reading goes on naming the old picture until you say otherwise.",
            [("Take this picture as the reading's own", self._adopt_picture)],
        )

    def _adopt_picture(self) -> None:
        reading, picture = self.document.reading, self.document.picture
        if reading is not None and picture is not None:
            identity = PictureIdentity.of(picture)
            self.document.edit(replace(reading, picture=identity), "Take changed picture")

    def _follow_actions(self) -> None:
        reading = self.document.reading
        has_map = reading is not None and reading.sheet_map is not None
        undo, redo = self.document.undo_label(), self.document.redo_label()
        now = Situation(
            has_picture=reading is not None,
            has_map=has_map,
            has_selection=bool(list(self.view.selected_ids())),
            has_line=self.walk.line is not None,
            has_next_line=has_map and self.walk.following_line() is not None,
            can_undo=undo is not None,
            can_redo=redo is not None,
            is_busy=self.jobs.is_busy(),
        )
        self.actions_table.follow(now)
        for action_name, word, label in (("undo", "&Undo", undo), ("redo", "&Redo", redo)):
            text = word if label is None else f"{word} {label[0].lower()}{label[1:]}"
            self.actions_table.action(action_name).setText(text)

    def _opened(self) -> None:
        self.notices.take_away("trouble")
        self.notices.take_away("journal")
        picture = self.document.picture
        if picture is not None and picture.notes:
            self.notices.put("notes", "tell", " ".join(picture.notes), closable=True)
        else:
            self.notices.take_away("notes")
        self.statusBar().clearMessage()

    def _busy(self, title: str, can_be_given_up: bool) -> None:
        self.prompt.set_busy(title, can_be_given_up=can_be_given_up)
        self._follow_actions()

    def _refused(self, sentence: str) -> None:
        _log.info("refused: %s", sentence)
        if self._is_closing:
            # Something the window still had to write was not written, and no notice is seen.
            self.ask.tell("Smallsquare", sentence)
        self.notices.put("trouble", "stop", sentence, closable=True)

    def _saved(self, sentence: str) -> None:
        self.notices.take_away("trouble")
        self.notices.take_away("journal")
        self.statusBar().showMessage(sentence, 8000)

    def _journal_failed(self, sentence: str) -> None:
        self.notices.put("journal", "warn", sentence, closable=True)

    def _pointer(self, point: PicturePoint | None) -> None:
        reading = self.document.reading
        sheet_map = None if reading is None else reading.sheet_map
        self._pointer_label.setText(pointer_statement(point, sheet_map))

    def _zoom(self, factor: float) -> None:
        is_there = self.document.picture is not None
        self._zoom_label.setText(f"{100.0 * factor:.0f} %" if is_there else "")
        self._hint()

    def _hint(self) -> None:
        """While marks are placed, say when the screen shows them too coarsely."""
        reading = self.document.reading
        sheet_map = None if reading is None else reading.sheet_map
        is_placing = self.view.is_placing()
        zoom = self.view.screen_px_per_picture_px()
        words = coarse_zoom_statement(zoom, sheet_map) if is_placing else ""
        self.prompt.set_hint(words)


def _stacked(*widgets: QWidget) -> QWidget:
    """Widgets one below the other without gaps; the last takes the room that is left."""
    whole = QWidget()
    layout = QVBoxLayout(whole)
    layout.setContentsMargins(0, 0, 0, 0)
    layout.setSpacing(0)
    for widget in widgets:
        layout.addWidget(widget)
    layout.setStretch(len(widgets) - 1, 1)
    return whole
