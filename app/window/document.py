"""The one thing the window's parts share: the picture and the history of its reading.

Gesture or panel -> `edit` -> `changed` -> redraw; nothing else writes, and nobody keeps a
second copy of the reading.
"""

from __future__ import annotations

from dataclasses import replace
from datetime import UTC, datetime
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from app.reading.file_format import ReadingFileError, save_reading
from app.reading.history import History
from app.reading.journal import append_to_journal, discard_journal
from app.reading.model import Reading
from app.version import software_version
from imaging.picture import Picture


def now_iso() -> str:
    """The present moment, ISO 8601 with offset, to the second."""
    return datetime.now(UTC).isoformat(timespec="seconds")


class Document(QObject):
    """A picture, its reading with undo and redo, and the file the reading lives in.

    Signals
    -------
    changed()
        The reading is another one now: an edit, undo, redo.
    opened()
        Another picture or reading was put in; `changed` follows.
    journal_failed(str)
        An edit could not be set down beside the reading file; one sentence.
    """

    changed = Signal()
    opened = Signal()
    journal_failed = Signal(str)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._picture: Picture | None = None
        self._history: History | None = None
        self._path: Path | None = None

    def open(
        self,
        picture: Picture,
        reading: Reading,
        path: Path | None = None,
        recovered: Reading | None = None,
    ) -> None:
        """Put in a picture with its reading.

        `path` is the file the reading was loaded from, if any; `recovered` is a later state
        from its journal, which becomes the first edit.
        """
        self._picture = picture
        self._path = path
        self._history = History.start(reading, saved=path is not None)
        if recovered is not None:
            self._history = self._history.edited(recovered, "Recovered edits")
        self.opened.emit()
        self.changed.emit()

    @property
    def picture(self) -> Picture | None:
        """The picture on the canvas, or None before one was opened."""
        return self._picture

    @property
    def reading(self) -> Reading | None:
        """The reading as it is now, or None before a picture was opened."""
        return None if self._history is None else self._history.reading

    @property
    def path(self) -> Path | None:
        """The file the reading lives in, or None before the first save."""
        return self._path

    def is_modified(self) -> bool:
        """Whether there are edits no file holds. An untouched new reading has none."""
        if self._history is None:
            return False
        if self._path is None:
            return self._history.index > 0
        return self._history.is_modified()

    def edit(self, reading: Reading, label: str, merge_key: str | None = None) -> None:
        """Make `reading` the present one, as a step of the history named `label`.

        Steps in a row with one `merge_key` count as one (arrow keys).
        """
        if self._history is None:
            raise RuntimeError("there is no picture to edit a reading of")
        if reading == self._history.reading:
            return
        stamped = replace(reading, changed_at=now_iso(), software_version=software_version())
        self._move_to(self._history.edited(stamped, label, merge_key))

    def settle(self) -> None:
        """End a run of merging edits."""
        if self._history is not None:
            self._history = self._history.settled()

    def undo_label(self) -> str | None:
        """What undo would take back, or None."""
        return None if self._history is None else self._history.undo_label()

    def redo_label(self) -> str | None:
        """What redo would make again, or None."""
        return None if self._history is None else self._history.redo_label()

    def undo(self) -> None:
        """Take the last edit back."""
        if self._history is not None and self._history.undo_label() is not None:
            self._move_to(self._history.undone())

    def redo(self) -> None:
        """Make an undone edit again."""
        if self._history is not None and self._history.redo_label() is not None:
            self._move_to(self._history.redone())

    def save(self, path: Path) -> None:
        """Write the reading to `path`; raises ReadingFileError and changes nothing then."""
        if self._history is None or self._picture is None:
            raise RuntimeError("there is no reading to save")
        save_reading(self._history.reading, path, self._picture.path)
        discard_journal(path)
        if self._path is not None and self._path != path:
            discard_journal(self._path)
        self._path = path
        self._history = self._history.marked_saved(self._history.reading)
        self.changed.emit()

    def picture_kept_at(self, path: Path) -> None:
        """A picture that had no file (a pasted one) has one now, byte for byte the same."""
        if self._history is None or self._picture is None:
            raise RuntimeError("there is no picture to keep")
        self._picture = replace(self._picture, path=path, file_name=path.name)
        reading = self._history.reading
        identity = replace(reading.picture, file_name=path.name)
        self.edit(replace(reading, picture=identity), "Save picture")

    def abandon(self) -> None:
        """The reader chose not to keep the edits since the last save."""
        if self._path is not None:
            discard_journal(self._path)

    def _move_to(self, history: History) -> None:
        self._history = history
        if self._path is not None:
            try:
                append_to_journal(self._path, history.reading)
            except ReadingFileError as error:
                self.journal_failed.emit(str(error))
        self.changed.emit()
