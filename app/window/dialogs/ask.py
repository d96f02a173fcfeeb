"""Every question and file chooser of the window behind one object, which a test replaces."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QInputDialog, QMessageBox, QPushButton, QWidget

from app.window.dialogs.scale import ScaleDialog

PICTURES_AND_READINGS = (
    "Pictures and readings (*.jpg *.jpeg *.png *.tif *.tiff *.webp *.bmp *.gif *.heic *.heif "
    "*.pdf *.reading.json);;Readings (*.reading.json);;All files (*)"
)
PICTURES = (
    "Pictures (*.jpg *.jpeg *.png *.tif *.tiff *.webp *.bmp *.gif *.heic *.heif *.pdf);;"
    "All files (*)"
)


class Ask:
    """Asks the reader; every method waits for the answer."""

    def __init__(self, parent: QWidget | None = None) -> None:
        self._parent = parent

    def choose(self, title: str, text: str, answers: Sequence[str], detail: str = "") -> int:
        """Index of the answer chosen; the last answer is also what closing the box means."""
        box = QMessageBox(self._parent)
        box.setIcon(QMessageBox.Icon.Question)
        box.setWindowTitle(title)
        box.setText(text)
        box.setInformativeText(detail)
        buttons: list[QPushButton] = []
        for index, answer in enumerate(answers):
            last = index == len(answers) - 1
            role = QMessageBox.ButtonRole.RejectRole if last else QMessageBox.ButtonRole.ActionRole
            buttons.append(box.addButton(answer, role))
        box.setDefaultButton(buttons[0])
        box.setEscapeButton(buttons[-1])
        box.exec()
        clicked = box.clickedButton()
        return next((i for i, button in enumerate(buttons) if button is clicked), len(answers) - 1)

    def tell(self, title: str, text: str) -> None:
        """Say something that must be read."""
        QMessageBox.warning(self._parent, title, text)

    def open_file(self, title: str, folder: Path | None, kinds: str) -> Path | None:
        """A file to open, or None."""
        name, _ = QFileDialog.getOpenFileName(
            self._parent, title, "" if folder is None else str(folder), kinds
        )
        return Path(name) if name else None

    def save_file(self, title: str, suggestion: Path, kinds: str) -> Path | None:
        """A place to write to, or None. Whether it may replace a file is asked by the caller."""
        name, _ = QFileDialog.getSaveFileName(
            self._parent,
            title,
            str(suggestion),
            kinds,
            options=QFileDialog.Option.DontConfirmOverwrite,
        )
        return Path(name) if name else None

    def page(self, file_name: str, page_count: int) -> int | None:
        """Which page of a file to open, from 0, or None."""
        number, accepted = QInputDialog.getInt(
            self._parent,
            "Choose a page",
            f"{file_name} has {page_count} pages. Which one holds the ECG?",
            1,
            1,
            page_count,
        )
        return number - 1 if accepted else None

    def squares_in_box(self) -> tuple[float, float] | None:
        """How many large squares a drawn box spans, across and down, or None."""
        return ScaleDialog(self._parent).ask()
