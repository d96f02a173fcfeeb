"""What the program is and is not, and its keys."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QLabel,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.version import software_version
from app.window.actions import keys_list

_ROW_HEIGHT_PX = 23
_CANVAS_KEYS = (
    ("Arrow keys", "Move the picked leg by 0.1 mm (Shift: 1 mm, Ctrl: 5 mm)"),
    ("Tab", "Pick the next leg or caliper on the sheet"),
    ("+  −", "More or fewer teeth of the picked comb"),
    ("Enter", "Take the place aimed at, or end a row of RR intervals"),
    ("Esc", "One step back in what the sheet asks for"),
    ("Wheel", "Zoom at the pointer (with Shift: pan)"),
    ("Space and drag", "Pan; so does dragging on an empty place"),
    ("Enter on a line", "Mark it, if it has no marks yet"),
    ("F2 on a line", "Type a colleague's figure"),
)
_ABOUT = (
    "Measures paper ECGs from a scan or photograph: the reader places calipers on the "
    "millimetre grid and gets rate, intervals, axis and QTc, each with its uncertainty and "
    "its cautions.\n\n"
    "It is a calculation aid and nothing more. It diagnoses nothing, it is not a monitor, and "
    "it knows nothing of the patient. Licensed clinicians decide, by their local guidelines.\n\n"
    "± is two standard errors of the grid and the marks. It does not contain a recorder whose "
    "speed or gain is off, nor two readers' different idea of where a wave ends.\n\n"
    "It uses no network and writes nothing but the files you choose, and beside a saved reading "
    "a journal of the edits since."
)


class AboutDialog(QDialog):
    """What the program is, and what it is not."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("About Smallsquare")
        title = QLabel(software_version())
        title.setObjectName("detailTitle")
        words = QLabel(_ABOUT)
        words.setWordWrap(True)
        _close_below(self, title, words)
        self.setMinimumWidth(520)


class KeysDialog(QDialog):
    """Every key."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keys")
        rows = [*keys_list(), *_CANVAS_KEYS]
        table = QTableWidget(len(rows), 2)
        table.setHorizontalHeaderLabels(["Key", "What it does"])
        table.verticalHeader().hide()
        table.setEditTriggers(QTableWidget.EditTrigger.NoEditTriggers)
        table.setSelectionMode(QTableWidget.SelectionMode.NoSelection)
        table.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        table.setShowGrid(False)
        table.verticalHeader().setDefaultSectionSize(_ROW_HEIGHT_PX)
        for place, (key, words) in enumerate(rows):
            table.setItem(place, 0, QTableWidgetItem(key))
            table.setItem(place, 1, QTableWidgetItem(words))
        table.resizeColumnToContents(0)
        table.horizontalHeader().setStretchLastSection(True)
        _close_below(self, table)
        self.resize(520, 560)


def _close_below(dialog: QDialog, *widgets: QWidget) -> None:
    buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
    buttons.rejected.connect(dialog.reject)
    layout = QVBoxLayout(dialog)
    for widget in (*widgets, buttons):
        layout.addWidget(widget)
