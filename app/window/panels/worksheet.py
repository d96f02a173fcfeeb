"""The worksheet: the lines a reader walks, what they give, and a colleague's figures."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QAction
from PySide6.QtWidgets import (
    QHBoxLayout,
    QMenu,
    QPushButton,
    QSplitter,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.reading.model import HandFigure
from app.reading.quantities import LEADS, QUANTITIES
from app.window.document import Document
from app.window.panels.cautions import Cautions
from app.window.panels.lines import Line, Lines
from app.window.panels.names import Names
from app.window.panels.row_tree import RowTree
from app.window.panels.worksheet_rows import Row, hand_figure_from_text, worksheet_rows


class Worksheet(QWidget):
    """The panel at the side.

    Signals
    -------
    row_picked(object), row_opened(object)
        As in RowTree.
    another_wanted(), next_wanted()
        The two buttons below the lines.
    line_added(object)
        A Line the reader asked for.
    refused(str)
        Something typed or chosen cannot be taken; one sentence.
    refreshed()
        The rows show the present reading.

    Attributes
    ----------
    lines_menu : QMenu
        Every quantity with its leads; picking one adds its line.
    """

    row_picked = Signal(object)
    row_opened = Signal(object)
    another_wanted = Signal()
    next_wanted = Signal()
    line_added = Signal(object)
    refused = Signal(str)
    refreshed = Signal()

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self.lines = Lines()
        self.names = Names(document)
        self.tree = RowTree(self.lines.free_leads)
        self.cautions = Cautions()
        self.another = QPushButton("Another beat  (B)")
        self.next = QPushButton("Next line  (N)")
        self.add = QToolButton()
        self.lines_menu = self._lines_menu()
        self._build()
        self._timer = QTimer(self)
        self._timer.setSingleShot(True)
        self._timer.timeout.connect(self.refresh)
        self.tree.picked.connect(self._picked)
        self.tree.opened.connect(self.row_opened)
        self.tree.hand_typed.connect(self._hand_typed)
        self.tree.lead_chosen.connect(self._lead_chosen)
        self.another.clicked.connect(self.another_wanted)
        self.next.clicked.connect(self.next_wanted)
        document.opened.connect(self.lines.start_afresh)
        # Several edits in one turn of the event loop are worked out once.
        document.changed.connect(lambda: self._timer.start(0))
        self.refresh()

    def refresh(self) -> None:
        """Work everything out anew and show it."""
        self._timer.stop()
        reading = self._document.reading
        self.setEnabled(reading is not None)
        if reading is not None:
            self.lines.follow(reading)
            self.tree.show_rows(worksheet_rows(reading, self.lines.in_order()))
        self.cautions.show_row(self.tree.current_row())
        self.refreshed.emit()

    def commit_pending(self) -> None:
        """Take what is still being typed into the reading."""
        self.names.commit()
        field = self.tree.focusWidget()
        if field is not None and self.tree.isAncestorOf(field):
            field.clearFocus()

    def add_line(self, key: str, lead: str) -> Line:
        """Add a line (or find it) and show it."""
        line = self.lines.add(key, lead)
        self.refresh()
        self.tree.pick(("line", line.line_id, None))
        self.line_added.emit(line)
        return line

    def _lines_menu(self) -> QMenu:
        """A menu of quantities, each with its leads."""
        menu = QMenu("Add &line", self)
        for item in QUANTITIES:
            leads = menu.addMenu(item.label)
            for lead in LEADS:
                action = QAction(lead, leads)
                action.triggered.connect(
                    lambda _=False, key=item.key, lead=lead: self.add_line(key, lead)
                )
                leads.addAction(action)
        return menu

    def _build(self) -> None:
        self.add.setText("Add line ")
        self.add.setToolTip("Measure a quantity in a further lead")
        self.add.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.add.setMenu(self.lines_menu)
        for button in (self.another, self.next):
            button.setProperty("leading", True)
        buttons = QHBoxLayout()
        buttons.setContentsMargins(0, 0, 0, 0)
        buttons.addWidget(self.another, 1)
        buttons.addWidget(self.next, 1)
        buttons.addWidget(self.add)
        upper = QWidget()
        layout = QVBoxLayout(upper)
        layout.setContentsMargins(0, 0, 0, 4)
        layout.addWidget(self.tree, 1)
        layout.addLayout(buttons)
        splitter = QSplitter(Qt.Orientation.Vertical)
        splitter.addWidget(upper)
        splitter.addWidget(self.cautions)
        splitter.setStretchFactor(0, 1)
        splitter.setStretchFactor(1, 0)
        splitter.setChildrenCollapsible(False)
        splitter.setSizes([560, 155])
        whole = QVBoxLayout(self)
        whole.setContentsMargins(6, 6, 6, 6)
        whole.addWidget(self.names)
        whole.addWidget(splitter, 1)

    def _picked(self, row: Row | None) -> None:
        self.cautions.show_row(row)
        self.row_picked.emit(row)

    def _hand_typed(self, row: Row, text: str) -> None:
        reading = self._document.reading
        if reading is None or row.hand_key is None:
            return
        key, lead = row.hand_key
        try:
            value = hand_figure_from_text(text, row.unit)
        except ValueError as error:
            self.refused.emit(str(error))
            return
        if value is None:
            changed = reading.without_hand_figure(key, lead)
        else:
            changed = reading.with_hand_figure(HandFigure(key, value, lead))
        self._document.edit(changed, f"Colleague's {row.name}")

    def _lead_chosen(self, row: Row, lead: str) -> None:
        """Move a line with its marks and the colleague's figure to another lead."""
        reading = self._document.reading
        line = None if row.line is None else self.lines.line(row.line.line_id)
        if reading is None or line is None:
            return
        try:
            self.lines.move(line.line_id, lead)
        except ValueError:
            self.refused.emit(f"There is a line {line.quantity.label} in lead {lead} already.")
            return
        moved = {item.caliper_id for item in reading.calipers_of(line.key, line.lead)}
        calipers = tuple(
            replace(item, lead=lead) if item.caliper_id in moved else item
            for item in reading.calipers
        )
        changed = replace(reading, calipers=calipers)
        figure = reading.hand_figure(line.value_key, line.lead)
        if figure is not None:
            changed = changed.without_hand_figure(line.value_key, line.lead)
            changed = changed.with_hand_figure(replace(figure, lead=lead))
        self._document.edit(changed, f"Lead of {line.quantity.label}")
        self.refresh()
