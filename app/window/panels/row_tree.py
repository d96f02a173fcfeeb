"""The worksheet's rows as a tree that is brought up to date in place."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from enum import IntEnum

from PySide6.QtCore import (
    QAbstractItemModel,
    QModelIndex,
    QPersistentModelIndex,
    QPointF,
    QSize,
    Qt,
    QTimer,
    Signal,
)
from PySide6.QtGui import (
    QBrush,
    QColor,
    QFont,
    QFontMetrics,
    QKeyEvent,
    QPainter,
    QPalette,
    QPen,
    QPolygonF,
)
from PySide6.QtWidgets import (
    QComboBox,
    QHeaderView,
    QLineEdit,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTreeWidget,
    QTreeWidgetItem,
    QWidget,
)

from app.window import theme
from app.window.panels.icons import caution_icon
from app.window.panels.lines import Line
from app.window.panels.steady_combo import SteadyCombo
from app.window.panels.worksheet_rows import Row, RowId, shown_unit

AnyIndex = QModelIndex | QPersistentModelIndex


class Column(IntEnum):
    """Columns of the worksheet."""

    NAME = 0
    LEAD = 1
    COUNT = 2
    VALUE = 3
    HAND = 4
    DIFFERENCE = 5


_ROW_HEIGHT_PX = 19
_DEPTH_FIRST = {"beat": 0, "line": 1, "value": 1, "free": 1, "group": 2}
_HEADERS = {
    Column.NAME: ("Line", "What is measured"),
    Column.LEAD: ("Lead", "Click to choose another lead"),
    Column.COUNT: ("n", "Beats or intervals the value rests on"),
    Column.VALUE: (
        "Value ±",
        "± is two standard errors; ? where speed, gain or scale is not confirmed",
    ),
    Column.HAND: ("Colleague", "Click to type a colleague's figure; empty it to remove it"),
    Column.DIFFERENCE: ("Difference", "Mine less the colleague's, and whether that is within ±"),
}
# The longest text each column must show whole, and the room beside it for indent or sign.
_LONGEST = {
    Column.NAME: ("QTc Framingham", 24),
    Column.LEAD: ("aVF", 22),
    Column.COUNT: ("12", 8),
    Column.VALUE: ("−0.999 ± 0.019 mV ?", 24),
    Column.HAND: ("Colleague", 8),
    Column.DIFFERENCE: ("−0.99 outside", 8),
}


class RowItem(QTreeWidgetItem):
    """One row; keeps the text and meaning it shows."""

    def __init__(self, row: Row) -> None:
        super().__init__()
        self.row = row


class RowTree(QTreeWidget):
    """Rows of the worksheet.

    Signals
    -------
    picked(object)
        The Row that became the current one, by mouse or keys; None when there is none.
    opened(object)
        The Row the reader clicked or pressed Enter on.
    hand_typed(object, str)
        A Row and the text typed as the colleague's figure.
    lead_chosen(object, str)
        A Row and the lead chosen for its line.
    """

    picked = Signal(object)
    opened = Signal(object)
    hand_typed = Signal(object, str)
    lead_chosen = Signal(object, str)

    def __init__(
        self, free_leads: Callable[[Line], Sequence[str]], parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self._items: dict[RowId, RowItem] = {}
        self._offered: RowId | None = None
        self._syncing = False
        self.setColumnCount(len(Column))
        self.setHeaderLabels([_HEADERS[column][0] for column in Column])
        for column in Column:
            self.headerItem().setToolTip(column, _HEADERS[column][1])
        self.setIndentation(14)
        self.setRootIsDecorated(False)
        self.setUniformRowHeights(True)
        self.setIconSize(QSize(13, 13))
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setEditTriggers(QTreeWidget.EditTrigger.NoEditTriggers)
        self.setAllColumnsShowFocus(True)
        self.setExpandsOnDoubleClick(False)
        header = self.header()
        header.setSectionsMovable(False)
        header.setMinimumSectionSize(20)
        header.setStretchLastSection(True)
        for column in Column:
            header.setSectionResizeMode(column, QHeaderView.ResizeMode.Interactive)
            header.resizeSection(column, self._needed_px(column))
        palette = self.palette()
        palette.setColor(QPalette.ColorRole.Highlight, QColor(theme.ACCENT_WASH))
        palette.setColor(QPalette.ColorRole.HighlightedText, QColor(theme.INK))
        self.setPalette(palette)
        self.setItemDelegate(CellDelegate(self))
        self._hand_delegate = HandDelegate(self)
        self._lead_delegate = LeadDelegate(self, free_leads)
        self.setItemDelegateForColumn(Column.HAND, self._hand_delegate)
        self.setItemDelegateForColumn(Column.LEAD, self._lead_delegate)
        self.itemClicked.connect(self._clicked)
        self.currentItemChanged.connect(self._current_changed)

    def sizeHint(self) -> QSize:
        """Wide enough for every column and the scroll bar."""
        columns_px = sum(self._needed_px(column) for column in Column)
        bar_px = self.style().pixelMetric(QStyle.PixelMetric.PM_ScrollBarExtent)
        return QSize(columns_px + bar_px + 2 * self.frameWidth(), super().sizeHint().height())

    def show_rows(self, rows: Sequence[Row]) -> None:
        """Bring the tree up to date; what is open, picked or being edited stays so."""
        self._syncing = True
        try:
            kept: set[RowId] = set()
            self._sync(self.invisibleRootItem(), rows, kept)
            gone = [row_id for row_id in self._items if row_id not in kept]
            # Beats first, groups last: with a parent its children are deleted too.
            for row_id in sorted(gone, key=lambda row_id: _DEPTH_FIRST[row_id[0]]):
                self._remove(row_id)
        finally:
            self._syncing = False

    def current_row(self) -> Row | None:
        """The row picked, or None."""
        item = self.currentItem()
        return item.row if isinstance(item, RowItem) else None

    def row(self, row_id: RowId) -> Row | None:
        """The row of that id as it is shown, or None."""
        item = self._items.get(row_id)
        return None if item is None else item.row

    def item_of(self, row_id: RowId) -> RowItem | None:
        """The item that shows a row, or None."""
        return self._items.get(row_id)

    def pick(self, row_id: RowId) -> None:
        """Make a row the current one and bring it into sight."""
        item = self._items.get(row_id)
        if item is not None:
            self.setCurrentItem(item)
            self.scrollToItem(item)

    def offer(self, row_id: RowId | None) -> None:
        """Point out one row as the next to be marked."""
        before, self._offered = self._offered, row_id
        for changed in {before, row_id} - {None}:
            item = self._items.get(changed) if changed is not None else None
            if item is not None:
                self._paint(item)
        item = self._items.get(row_id) if row_id is not None else None
        # Offered before, it must not be pulled into sight from under a reader who looks elsewhere.
        if item is not None and row_id != before:
            self.scrollToItem(item)

    def offered(self) -> RowId | None:
        """The row pointed out as the next."""
        return self._offered

    def edit_hand(self, row_id: RowId) -> None:
        """Open the field for the colleague's figure of a row."""
        item = self._items.get(row_id)
        if item is not None and item.row.hand_key is not None:
            self.editItem(item, Column.HAND)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        row = self.current_row()
        if row is not None and self.state() != QTreeWidget.State.EditingState:
            if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
                self.opened.emit(row)
                return
            if event.key() == Qt.Key.Key_F2:
                self.edit_hand(row.row_id)
                return
        super().keyPressEvent(event)

    def _needed_px(self, column: Column) -> int:
        words, beside_px = _LONGEST[column]
        font = QFont(self.font())
        font.setBold(column is Column.VALUE)
        return QFontMetrics(font).horizontalAdvance(words) + beside_px

    def _clicked(self, item: QTreeWidgetItem, column: int) -> None:
        if not isinstance(item, RowItem):
            return
        types_figure = column == Column.HAND and item.row.hand_key is not None
        chooses_lead = column == Column.LEAD and item.row.line is not None
        if types_figure or chooses_lead:
            self.editItem(item, column)
        else:
            self.opened.emit(item.row)

    def _current_changed(self, item: QTreeWidgetItem | None) -> None:
        if not self._syncing:
            self.picked.emit(item.row if isinstance(item, RowItem) else None)

    def _sync(self, parent: QTreeWidgetItem, rows: Sequence[Row], kept: set[RowId]) -> None:
        for place, row in enumerate(rows):
            kept.add(row.row_id)
            item = self._items.get(row.row_id)
            if item is None:
                item = RowItem(row)
                self._items[row.row_id] = item
                parent.insertChild(place, item)
                if row.row_id[0] == "group":
                    item.setExpanded(True)
                    item.setFirstColumnSpanned(True)
            elif parent.indexOfChild(item) != place:
                was_open = item.isExpanded()
                (item.parent() or self.invisibleRootItem()).removeChild(item)
                parent.insertChild(place, item)
                item.setExpanded(was_open)
            item.row = row
            self._fill(item)
            self._sync(item, row.children, kept)

    def _remove(self, row_id: RowId) -> None:
        item = self._items.pop(row_id)
        parent = item.parent() or self.invisibleRootItem()
        parent.removeChild(item)

    def _fill(self, item: RowItem) -> None:
        row = item.row
        texts = (row.name, row.lead, row.count, row.value, row.hand, row.difference)
        for column, text in zip(Column, texts, strict=True):
            item.setText(column, text)
        flags = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
        if row.hand_key is not None or row.line is not None:
            flags |= Qt.ItemFlag.ItemIsEditable
        if row.row_id[0] == "group":
            flags = Qt.ItemFlag.ItemIsEnabled
        item.setFlags(flags)
        item.setToolTip(Column.NAME, row.name)
        item.setToolTip(Column.VALUE, _value_tip(row))
        item.setToolTip(Column.DIFFERENCE, row.comparison)
        item.setIcon(Column.VALUE, caution_icon(row.other_cautions > 0))
        self._paint(item)

    def _paint(self, item: RowItem) -> None:
        row = item.row
        is_group = row.row_id[0] == "group"
        bold, plain = QFont(self.font()), QFont(self.font())
        bold.setBold(True)
        item.setFont(Column.NAME, bold if is_group else plain)
        item.setForeground(Column.NAME, QColor(theme.ACCENT if is_group else theme.INK))
        item.setFont(Column.VALUE, bold if row.row_id[0] in ("line", "value") else plain)
        item.setForeground(Column.VALUE, QColor(_value_colour(row)))
        colour = theme.STOP_INK if row.within is False else theme.INK
        item.setForeground(Column.DIFFERENCE, QColor(colour))
        offered = row.row_id == self._offered
        if offered:
            item.setText(Column.VALUE, "next")
            item.setForeground(Column.VALUE, QColor(theme.OFFER_INK))
        else:
            item.setText(Column.VALUE, row.value)
        wash = QBrush(QColor(theme.OFFER_WASH)) if offered else QBrush()
        for column in Column:
            item.setBackground(column, wash)


def _value_colour(row: Row) -> str:
    if row.given is not None and row.given.value is None:
        return theme.STOP_INK
    return theme.WARN_INK if row.is_unconfirmed else theme.INK


def _value_tip(row: Row) -> str:
    if row.given is None:
        return ""
    lines = [row.given.refusal, *(caution.text for caution in row.given.cautions)]
    return "\n".join(line for line in lines if line)


def _row_at(tree: RowTree, index: AnyIndex) -> Row | None:
    # A delegate may be handed either kind of index; only the plain one leads to an item.
    item = tree.itemFromIndex(tree.model().index(index.row(), index.column(), index.parent()))
    return item.row if isinstance(item, RowItem) else None


class CellDelegate(QStyledItemDelegate):
    """Draws a cell; what is amber or red stays so when its row is picked."""

    def __init__(self, tree: RowTree) -> None:
        super().__init__(tree)
        self._tree = tree

    def initStyleOption(self, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        super().initStyleOption(option, index)
        brush = index.data(Qt.ItemDataRole.ForegroundRole)
        if isinstance(brush, QBrush):
            option.palette.setBrush(QPalette.ColorRole.HighlightedText, brush)

    def sizeHint(self, option: QStyleOptionViewItem, index: AnyIndex) -> QSize:
        size = super().sizeHint(option, index)
        size.setHeight(max(_ROW_HEIGHT_PX, size.height()))
        return size


class HandDelegate(CellDelegate):
    """Types a colleague's figure; the reading, not the cell, takes it."""

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        """The figure, or a line to write on as on a form."""
        super().paint(painter, option, index)
        row = _row_at(self._tree, index)
        if row is not None and row.hand_key is not None and not row.hand:
            y = option.rect.bottom() - 3
            painter.save()
            painter.setPen(QPen(QColor(theme.EDGE), 1.0, Qt.PenStyle.DotLine))
            painter.drawLine(option.rect.left() + 3, y, option.rect.right() - 8, y)
            painter.restore()

    def createEditor(
        self, parent: QWidget, _option: QStyleOptionViewItem, index: AnyIndex
    ) -> QWidget:
        field = QLineEdit(parent)
        row = _row_at(self._tree, index)
        if row is not None:
            field.setPlaceholderText(shown_unit(row.unit))
            field.setAccessibleName(f"Colleague's figure for {row.name}")
        return field

    def setModelData(self, editor: QWidget, _model: QAbstractItemModel, index: AnyIndex) -> None:
        row = _row_at(self._tree, index)
        if row is not None and isinstance(editor, QLineEdit) and editor.text() != row.hand:
            self._tree.hand_typed.emit(row, editor.text())


class LeadDelegate(CellDelegate):
    """Chooses the lead of a line from a list that opens at once."""

    def __init__(self, tree: RowTree, free_leads: Callable[[Line], Sequence[str]]) -> None:
        super().__init__(tree)
        self._free_leads = free_leads

    def createEditor(
        self, parent: QWidget, _option: QStyleOptionViewItem, index: AnyIndex
    ) -> QWidget:
        combo = SteadyCombo(parent)
        row = _row_at(self._tree, index)
        if row is not None and row.line is not None:
            combo.addItems(list(self._free_leads(row.line)))
        combo.view().setMinimumWidth(64)
        combo.activated.connect(lambda: self._take(combo))
        QTimer.singleShot(0, combo.showPopup)
        return combo

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        """The lead, and a small sign that another can be chosen."""
        super().paint(painter, option, index)
        row = _row_at(self._tree, index)
        if row is None or row.line is None:
            return
        cell = option.rect
        tip = QPointF(cell.right() - 6.0, cell.center().y() + 2.5)
        sign = QPolygonF([tip, tip + QPointF(-3.5, -4.0), tip + QPointF(3.5, -4.0)])
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(QColor(theme.EDGE_INK))
        painter.drawPolygon(sign)
        painter.restore()

    def setEditorData(self, editor: QWidget, index: AnyIndex) -> None:
        row = _row_at(self._tree, index)
        if isinstance(editor, QComboBox) and row is not None:
            editor.setCurrentText(row.lead)

    def setModelData(self, editor: QWidget, _model: QAbstractItemModel, index: AnyIndex) -> None:
        row = _row_at(self._tree, index)
        if row is not None and isinstance(editor, QComboBox) and editor.currentText() != row.lead:
            self._tree.lead_chosen.emit(row, editor.currentText())

    def _take(self, combo: QComboBox) -> None:
        self.commitData.emit(combo)
        self.closeEditor.emit(combo)
