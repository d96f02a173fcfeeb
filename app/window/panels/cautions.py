"""What belongs beside the value picked: its cautions, its method, its source."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import (
    QFrame,
    QGridLayout,
    QLabel,
    QScrollArea,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.calculator.display import shown_number
from app.window.panels.worksheet_rows import Row, shown_unit

_FOLD_PX = 17


class FoldLine(QWidget):
    """A short line that unfolds to more."""

    def __init__(self, text: str, more: str) -> None:
        super().__init__()
        self.button = QToolButton()
        self.button.setArrowType(Qt.ArrowType.RightArrow)
        self.button.setObjectName("fold")
        self.button.setFixedSize(_FOLD_PX, _FOLD_PX)
        self.button.setCheckable(True)
        self.button.setAccessibleName(f"More about: {text}")
        self.button.toggled.connect(self._unfold)
        self.line = _words(text)
        self.line.setCursor(Qt.CursorShape.PointingHandCursor)
        self.more = _words(more)
        self.more.setObjectName("quiet")
        self.more.setVisible(False)
        layout = QGridLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setHorizontalSpacing(4)
        layout.setVerticalSpacing(1)
        layout.addWidget(self.button, 0, 0, Qt.AlignmentFlag.AlignTop)
        layout.addWidget(self.line, 0, 1)
        layout.addWidget(self.more, 1, 1)
        layout.setColumnStretch(1, 1)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        self.button.toggle()
        event.accept()

    def _unfold(self, is_open: bool) -> None:
        self.more.setVisible(is_open)
        arrow = Qt.ArrowType.DownArrow if is_open else Qt.ArrowType.RightArrow
        self.button.setArrowType(arrow)


class Cautions(QScrollArea):
    """The part of the worksheet below the lines."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._shown: Row | None = None
        self.lines: list[FoldLine] = []
        self.title = QLabel()
        self.show_row(None)

    def show_row(self, row: Row | None) -> None:
        """Show what belongs to a row; what was unfolded stays so while nothing changed."""
        if row is not None and row == self._shown:
            return
        self._shown = row
        self.lines = []
        page = QWidget()
        layout = QVBoxLayout(page)
        layout.setContentsMargins(2, 4, 2, 4)
        layout.setSpacing(4)
        self.title = _words(_title(row))
        has_value = row is not None and row.row_id[0] != "group"
        self.title.setObjectName("detailTitle" if has_value else "quiet")
        layout.addWidget(self.title)
        for widget in _below_title(row):
            layout.addWidget(widget)
            if isinstance(widget, FoldLine):
                self.lines.append(widget)
        layout.addStretch(1)
        self.setWidget(page)


def _title(row: Row | None) -> str:
    if row is None or row.row_id[0] == "group":
        return "Pick a line to see what its value rests on."
    name = f"{row.name} {row.lead}".strip()
    return f"{name}:  {row.value}" if row.value else name


def _below_title(row: Row | None) -> list[QWidget]:
    if row is None:
        return []
    widgets: list[QWidget] = []
    if row.comparison:
        widgets.append(_words(row.comparison))
    value = row.given
    if value is None:
        if row.line is not None:
            places = row.line.quantity
            widgets.append(_quiet(f"From {places.first_place} to {places.second_place}."))
        return widgets
    if value.refusal:
        widgets.append(_words(value.refusal))
    for caution in value.cautions:
        widgets.append(FoldLine(caution.text, f"{caution.reason}\nSource: {caution.source}"))
    if value.spread is not None:
        widgets.append(
            _quiet(
                f"Spread (standard deviation, n = {value.n}): "
                f"{shown_number(value.spread, value.plus_minus or value.spread)} "
                f"{shown_unit(value.unit)}"
            )
        )
    widgets.append(_quiet(f"Method: {value.method}"))
    widgets.append(_quiet(f"Source: {value.source}"))
    return widgets


def _words(text: str) -> QLabel:
    label = QLabel(text)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setWordWrap(True)
    return label


def _quiet(text: str) -> QLabel:
    label = _words(text)
    label.setObjectName("quiet")
    label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    return label
