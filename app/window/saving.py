"""What leaves the window: the reading, the annotated picture, the values.

Nothing is replaced unasked, and the picture itself is never written to.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from dataclasses import dataclass
from enum import Enum, auto
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from app.reading.file_format import SUFFIX, write_whole
from app.window.dialogs.ask import Ask
from app.window.document import Document
from app.window.faults import sentence_for
from app.window.jobs import Jobs
from app.window.statements import holds_work
from imaging import SmallsquareError

ANNOTATED_SUFFIX = ".annotated.png"
VALUES_JSON_SUFFIX = ".values.json"
VALUES_CSV_SUFFIX = ".values.csv"
_KINDS = {
    SUFFIX: f"Readings (*{SUFFIX})",
    ANNOTATED_SUFFIX: "PNG pictures (*.png)",
    VALUES_JSON_SUFFIX: "JSON (*.json)",
    VALUES_CSV_SUFFIX: "CSV (*.csv)",
    ".png": "PNG pictures (*.png)",
}


class Leaving(Enum):
    """What becomes of the present reading when another is opened or the window closes."""

    CLEAN = auto()
    DISCARD = auto()
    STAY = auto()


@dataclass(frozen=True, slots=True)
class Place:
    """Where to write, and whether the reader said that what is there may be replaced."""

    path: Path
    may_replace: bool


class Saving(QObject):
    """Writes files, after asking where.

    Signals
    -------
    saved(str)
        Something was written; one sentence.
    failed(str)
        Nothing was written; one sentence.
    """

    saved = Signal(str)
    failed = Signal(str)

    def __init__(
        self,
        document: Document,
        jobs: Jobs,
        ask: Ask,
        commit_pending: Callable[[], None],
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._jobs = jobs
        self._ask = ask
        self._commit_pending = commit_pending
        self._pasted_png: bytes | None = None
        self._file_state: tuple[int, int] | None = None
        document.opened.connect(self._opened)

    def hold_pasted(self, png: bytes) -> None:
        """Keep the bytes of the pasted picture until they have a file."""
        self._pasted_png = png

    def leave(self) -> Leaving:
        """Ask what becomes of unsaved edits, and save them if that is wanted."""
        self._commit_pending()
        reading = self._document.reading
        if reading is None or not self._document.is_modified():
            return Leaving.CLEAN
        if self._document.path is None and not holds_work(reading):
            return Leaving.CLEAN
        answer = self._ask.choose(
            "Unsaved edits",
            f"The reading of {reading.picture.file_name} has edits that are not saved.",
            ["Save", "Discard", "Cancel"],
        )
        if answer == 0:
            return Leaving.CLEAN if self.save() else Leaving.STAY
        return Leaving.DISCARD if answer == 1 else Leaving.STAY

    def save(self) -> bool:
        """Save the reading to its file, or ask for one; False if it was not saved."""
        self._commit_pending()
        path = self._document.path
        if path is None:
            return self.save_as()
        if _state_of(path) != self._file_state:
            answer = self._ask.choose(
                "Save the reading",
                f"{path.name} was changed or removed by somebody else since it was opened here.",
                ["Save under another name", "Save in its place", "Cancel"],
            )
            if answer == 0:
                return self.save_as()
            if answer == 2:
                return False
        return self._write_reading(path)

    def save_as(self) -> bool:
        """Save the reading under a name that is asked for."""
        self._commit_pending()
        if self._document.reading is None or not self._settle_pasted():
            return False
        place = self._place("Save the reading", SUFFIX)
        return place is not None and self._write_reading(place.path)

    def save_annotated(self) -> None:
        """Write the annotated picture under a name that is asked for."""
        self._commit_pending()
        picture, reading = self._document.picture, self._document.reading
        place = self._place("Save the annotated picture", ANNOTATED_SUFFIX)
        if picture is None or reading is None or place is None:
            return

        def write() -> Path:
            from app.chart import write_annotated

            write_annotated(picture, reading, place.path, overwrite=place.may_replace)
            return place.path

        self._jobs.start(
            "Writing the annotated picture", write, self._written, self._not_written, must_end=True
        )

    def save_values_json(self) -> None:
        """Write the values as JSON."""
        from app.chart import write_values_json

        self._save_values(VALUES_JSON_SUFFIX, write_values_json)

    def save_values_csv(self) -> None:
        """Write the values as CSV."""
        from app.chart import write_values_csv

        self._save_values(VALUES_CSV_SUFFIX, write_values_csv)

    def _save_values(self, suffix: str, write: Callable[..., object]) -> None:
        self._commit_pending()
        reading = self._document.reading
        place = self._place("Save the values", suffix)
        if reading is None or place is None:
            return
        try:
            write(reading, place.path, overwrite=place.may_replace)
        except SmallsquareError as error:
            self.failed.emit(str(error))
            return
        self._written(place.path)

    def _write_reading(self, path: Path) -> bool:
        try:
            self._document.save(path)
        except SmallsquareError as error:
            self.failed.emit(str(error))
            return False
        self._file_state = _state_of(path)
        self._written(path)
        return True

    def _settle_pasted(self) -> bool:
        """Give a pasted picture a file, so that the reading has a picture to be found again."""
        picture, reading = self._document.picture, self._document.reading
        if picture is None or reading is None or picture.path is not None:
            return True
        if self._pasted_png is None:
            return True
        place = self._place("First save the pasted picture", ".png")
        if place is None:
            return False
        try:
            write_whole(place.path, self._pasted_png)
        except SmallsquareError as error:
            self.failed.emit(str(error))
            return False
        self._document.picture_kept_at(place.path)
        return True

    def _place(self, title: str, suffix: str) -> Place | None:
        """Ask for a place to write to until it is free, may be replaced, or nothing is wanted."""
        suggestion = self._suggestion(suffix)
        while True:
            chosen = self._ask.save_file(title, suggestion, _KINDS[suffix])
            if chosen is None:
                return None
            path = suggestion = with_suffix(chosen, suffix)
            if self._is_picture(path):
                self._ask.tell(
                    title,
                    "That is the picture itself, which is never written to: choose a "
                    "different name.",
                )
                continue
            # A link that leads nowhere is something that is there, too.
            if not os.path.lexists(path):
                return Place(path, may_replace=False)
            if path == self._document.path:
                return Place(path, may_replace=True)
            answer = self._ask.choose(
                title,
                f"{path.name} is there already.",
                ["Choose another name", "Replace it", "Cancel"],
            )
            if answer == 1:
                return Place(path, may_replace=True)
            if answer == 2:
                return None

    def _suggestion(self, suffix: str) -> Path:
        picture, reading_path = self._document.picture, self._document.path
        if picture is not None and picture.path is not None:
            return beside(picture.path, suffix, picture.page)
        folder = Path.home() if reading_path is None else reading_path.parent
        return folder / f"Pasted picture{suffix}"

    def _is_picture(self, path: Path) -> bool:
        picture = self._document.picture
        if picture is None or picture.path is None:
            return False
        try:
            return path.resolve() == picture.path.resolve() or path.samefile(picture.path)
        except OSError:
            return False

    def _written(self, path: Path) -> None:
        self.saved.emit(f"Saved {path.name} in {path.parent}")

    def _not_written(self, error: Exception) -> None:
        self.failed.emit(sentence_for(error))

    def _opened(self) -> None:
        self._pasted_png = None
        path = self._document.path
        self._file_state = None if path is None else _state_of(path)


def _state_of(path: Path) -> tuple[int, int] | None:
    """What tells that a file is another one now: when it was written, and its size."""
    try:
        status = path.stat()
    except OSError:
        return None
    return status.st_mtime_ns, status.st_size


def beside(picture_path: Path, suffix: str, page: int = 0) -> Path:
    """The name suggested for a file about a picture: beside it, with its stem."""
    page_words = f".page{page + 1}" if page else ""
    return picture_path.with_name(f"{picture_path.stem}{page_words}{suffix}")


def with_suffix(path: Path, suffix: str) -> Path:
    """Complete a name that was typed without its ending.

    An annotated picture may be called anything that ends in the last part (``.png``), a
    reading must carry its whole ending.
    """
    last = "." + suffix.rpartition(".")[2]
    if path.name.endswith(suffix) or (suffix != SUFFIX and path.name.endswith(last)):
        return path
    return path.with_name(path.name.removesuffix(last) + suffix)
