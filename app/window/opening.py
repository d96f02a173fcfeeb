"""From a file, a drop or the clipboard to a reading on the canvas."""

from __future__ import annotations

import logging
from collections.abc import Callable
from dataclasses import replace
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QBuffer, QByteArray, QIODevice, QMimeData, QObject, Signal
from PySide6.QtGui import QImage, QImageWriter

from app.reading import (
    PictureCheck,
    PictureState,
    Reading,
    check_picture,
    load_reading,
    new_reading,
)
from app.reading.file_format import SUFFIX
from app.reading.journal import discard_journal, read_journal
from app.version import software_version
from app.window.dialogs.ask import PICTURES, PICTURES_AND_READINGS, Ask
from app.window.document import Document, now_iso
from app.window.faults import sentence_for
from app.window.jobs import Jobs
from app.window.saving import Leaving, Saving, beside
from imaging import (
    GridNotFound,
    Picture,
    PictureError,
    SheetMap,
    SmallsquareError,
    open_picture,
    picture_from_bytes,
)
from imaging import find_grid as find_grid_on

if TYPE_CHECKING:
    from app.window.main import EarlyPicture

PASTED_NAME = "Pasted picture"
_PAINT_FIRST_MS = 100
_PATIENCE_S = 0.6
_log = logging.getLogger(__name__)


class Opening(QObject):
    """Opens pictures and readings, and finds the grid of what was opened.

    Signals
    -------
    failed(str)
        Nothing was opened; one sentence.
    grid_missing(str)
        No grid was found on the picture; the reason.
    """

    failed = Signal(str)
    grid_missing = Signal(str)

    def __init__(
        self,
        document: Document,
        jobs: Jobs,
        ask: Ask,
        saving: Saving,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._document = document
        self._jobs = jobs
        self._ask = ask
        self._saving = saving
        self._left: Reading | None = None
        self._leaving = Leaving.CLEAN

    def choose(self) -> None:
        """Let the reader choose a picture or a reading, and open it."""
        picture = self._document.picture
        folder = None if picture is None or picture.path is None else picture.path.parent
        path = self._ask.open_file("Open a picture or a reading", folder, PICTURES_AND_READINGS)
        if path is not None:
            self.open_path(path)

    def open_path(self, path: Path, early: EarlyPicture | None = None) -> None:
        """Open a picture or a reading.

        `early` is the picture with its decoding begun already. One that is soon there is
        opened at once, so that a window not shown yet is painted only one time, with the
        picture.
        """
        if not self._may_leave():
            return
        path = path.absolute()
        if path.name.endswith(SUFFIX):
            self._open_reading(path)
            return
        reading_path = beside(path, SUFFIX)
        if reading_path.exists():
            answer = self._ask.choose(
                "There is a reading of this picture",
                f"{reading_path.name} lies beside the picture.",
                ["Open that reading", "Begin a new one", "Cancel"],
            )
            if answer == 0:
                self._open_reading(reading_path)
            if answer != 1:
                return
        if early is None or not early.is_there_within(_PATIENCE_S):
            work = partial(open_picture, path) if early is None else early.result
            self._decode(path.name, work, self._first_page)
            return
        try:
            picture = early.result()
        except SmallsquareError as error:
            self._not_opened(error)
            return
        self._first_page(picture)

    def can_take(self, data: QMimeData) -> bool:
        """Whether something dragged or copied can be opened."""
        return data.hasImage() or any(url.isLocalFile() for url in data.urls())

    def take(self, data: QMimeData) -> None:
        """Open what was dropped or pasted: a file before a bare image."""
        files = [url.toLocalFile() for url in data.urls() if url.isLocalFile()]
        if files:
            self.open_path(Path(files[0]))
        elif data.hasImage():
            self._open_image(QImage(data.imageData()))
        else:
            self.failed.emit("There is no picture to paste: copy a picture or a file first.")

    def find_grid(self) -> None:
        """Look for the grid of the present picture on a worker thread."""
        picture = self._document.picture
        if picture is None:
            return
        self._jobs.start(
            "Finding the grid",
            partial(find_grid_on, picture),
            partial(self._grid_found, picture),
            self._grid_search_failed,
            delay_ms=_PAINT_FIRST_MS,
        )

    def _may_leave(self) -> bool:
        self._leaving = self._saving.leave()
        self._left = self._document.reading
        return self._leaving is not Leaving.STAY

    def _decode(
        self, name: str, work: Callable[[], Picture], done: Callable[[Picture], None]
    ) -> None:
        self._jobs.start(f"Opening {name}", work, done, self._not_opened)

    def _not_opened(self, error: Exception) -> None:
        self.failed.emit(sentence_for(error))

    def _first_page(self, picture: Picture) -> None:
        if picture.page_count == 1 or picture.path is None:
            self._begin_reading(picture)
            return
        page = self._ask.page(picture.file_name, picture.page_count)
        if page == picture.page:
            self._begin_reading(picture)
        elif page is not None:
            work = partial(open_picture, picture.path, page)
            self._decode(picture.file_name, work, self._begin_reading)

    def _begin_reading(self, picture: Picture) -> None:
        before = self._document.reading
        reading = new_reading(
            picture,
            now=now_iso(),
            software_version=software_version(),
            reader="" if before is None else before.reader,
        )
        if self._put_in(picture, reading):
            self.find_grid()

    def _open_image(self, image: QImage) -> None:
        """Open a bare image; its PNG bytes are its identity, so they are made only once."""
        if not self._may_leave():
            return
        png = _png_bytes(image)
        if not png:
            self.failed.emit("The copied picture cannot be read: save it to a file and open that.")
            return

        def begin(picture: Picture) -> None:
            self._begin_reading(picture)
            self._saving.hold_pasted(png)

        self._decode(PASTED_NAME, partial(picture_from_bytes, png, PASTED_NAME), begin)

    def _open_reading(self, path: Path) -> None:
        if self._leaving is Leaving.DISCARD and path == self._document.path:
            # Otherwise the edits just discarded would be offered again from the journal.
            self._document.abandon()
        try:
            reading = load_reading(path)
        except SmallsquareError as error:
            self.failed.emit(str(error))
            return
        later = read_journal(path)
        recovered: Reading | None = None
        drop_journal = False
        if later is not None and later != reading:
            answer = self._ask.choose(
                "Edits after the last save",
                f"Edits made after {path.name} was last saved were found.",
                ["Take them", "Drop them and open as saved", "Cancel"],
                f"They were made at {_readable(later.changed_at)}; the saved reading is of "
                f"{_readable(reading.changed_at)}.",
            )
            if answer == 2:
                return
            recovered, drop_journal = (later, False) if answer == 0 else (None, True)
        opened = _OpenedReading(path, reading, recovered, drop_journal)
        self._look_for_picture(opened, check_picture(reading.picture, path))

    def _look_for_picture(self, opened: _OpenedReading, check: PictureCheck) -> None:
        work = partial(open_picture, check.path, opened.reading.picture.page)
        if check.state is PictureState.SAME:
            self._decode(check.path.name, work, partial(self._picture_found, opened))
            return
        answers = ["Choose the picture…", "Cancel"]
        if check.state is PictureState.CHANGED:
            answers.insert(1, "Open the changed picture all the same")
        answer = self._ask.choose(
            "The picture of this reading",
            check.sentence,
            answers,
            "The reading itself is whole and stays as it is.",
        )
        if answer == len(answers) - 1:
            return
        if answer == 1:
            self._decode(check.path.name, work, partial(self._picture_found, opened))
            return
        chosen = self._ask.open_file("Choose the picture", opened.path.parent, PICTURES)
        if chosen is not None:
            work = partial(open_picture, chosen, opened.reading.picture.page)
            self._decode(chosen.name, work, partial(self._picture_chosen, opened))

    def _picture_chosen(self, opened: _OpenedReading, picture: Picture) -> None:
        """The reader chose a picture: the same one opens, another is asked about."""
        if picture.sha256 == opened.reading.picture.sha256 or picture.path is None:
            self._picture_found(opened, picture)
            return
        sentence = (
            f"{picture.file_name} is not the picture that was read: its content is different."
        )
        self._look_for_picture(opened, PictureCheck(PictureState.CHANGED, picture.path, sentence))

    def _picture_found(self, opened: _OpenedReading, picture: Picture) -> None:
        size_px = opened.reading.picture.size_px
        if picture.size_px != size_px:
            self.failed.emit(
                f"{picture.file_name} is {picture.size_px[0]} × {picture.size_px[1]} px and the "
                f"picture that was read {size_px[0]} × {size_px[1]} px, so the marks would lie "
                "in the wrong places; nothing was opened or changed."
            )
            return
        if not self._put_in(picture, opened.reading, opened.path, opened.recovered):
            return
        if opened.drop_journal:
            discard_journal(opened.path)

    def _put_in(
        self,
        picture: Picture,
        reading: Reading,
        path: Path | None = None,
        recovered: Reading | None = None,
    ) -> bool:
        """Open in the document, unless edits made meanwhile are to be kept."""
        if self._document.reading is not self._left and not self._may_leave():
            return False
        if self._leaving is Leaving.DISCARD and path != self._document.path:
            self._document.abandon()
        self._document.open(picture, reading, path, recovered)
        return True

    def _grid_found(self, picture: Picture, result: SheetMap | GridNotFound) -> None:
        reading = self._document.reading
        present = self._document.picture
        if reading is None or present is None or present.pixels is not picture.pixels:
            return
        if isinstance(result, GridNotFound):
            _log.info("no grid: %s", result.code)
            self.grid_missing.emit(result.reason)
            return
        self._document.edit(
            replace(reading, sheet_map=_turned_as(result, reading.sheet_map)), "Grid found"
        )

    def _grid_search_failed(self, error: Exception) -> None:
        sentence_for(error)
        self.grid_missing.emit(
            "The search for the grid ended with an error, so nothing is known of the scale."
            if not isinstance(error, PictureError)
            else str(error)
        )


class _OpenedReading:
    """A reading on its way in, while its picture is being looked for."""

    def __init__(
        self, path: Path, reading: Reading, recovered: Reading | None, drop_journal: bool
    ) -> None:
        self.path = path
        self.reading = reading
        self.recovered = recovered
        self.drop_journal = drop_journal


def _readable(moment: str) -> str:
    """An ISO 8601 moment with a space where people expect one."""
    return moment.replace("T", " ", 1)


def _turned_as(found: SheetMap, before: SheetMap | None) -> SheetMap:
    """Keep the reader's turn of the sheet when its grid is found once more."""
    if before is None:
        return found
    return found.turned((found.turn_deg - before.turn_deg) // 90 % 4)


def _png_bytes(image: QImage) -> bytes:
    data = QByteArray()
    buffer = QBuffer(data)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    # A null image cannot be written; the caller sees that nothing came out.
    QImageWriter(buffer, b"PNG").write(image)
    return bytes(data.data())
