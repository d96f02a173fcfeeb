"""The worksheet: colleague's figures, leads, added lines, names, cautions."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QFontMetrics
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QComboBox, QLabel, QLineEdit
from pytestqt.qtbot import QtBot

from app.reading import HandFigure
from app.window.main_window import MainWindow
from app.window.panels.row_tree import Column
from tests.app.window.bench import (
    cell,
    click_cell,
    click_picture,
    line_of,
    measure,
    pick_line,
    reading_of,
)


def type_figure(window: MainWindow, key: str, lead: str, text: str) -> None:
    """Type into the colleague's column and press Enter."""
    click_cell(window, key, lead, Column.HAND)
    fields = window.worksheet.tree.viewport().findChildren(QLineEdit)
    (field,) = (field for field in fields if field.isVisible())
    field.selectAll()
    QTest.keyClick(field, Qt.Key.Key_Delete)
    QTest.keyClicks(field, text)
    QTest.keyClick(field, Qt.Key.Key_Return)
    # Qt takes what was typed in a later turn of the event loop.
    QApplication.processEvents()
    window.worksheet.refresh()


def test_a_figure_typed_is_kept_and_compared(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    type_figure(opened, "qrs", "II", "200")
    assert reading_of(opened).hand_figure("qrs", "II") == HandFigure("qrs", 200.0, "II")
    assert cell(opened, "qrs", "II", Column.HAND) == "200 ms"
    assert cell(opened, "qrs", "II", Column.DIFFERENCE).endswith("outside")
    type_figure(opened, "qrs", "II", "100 ms")
    assert cell(opened, "qrs", "II", Column.DIFFERENCE).endswith("within")


def test_an_emptied_figure_is_removed(opened: MainWindow) -> None:
    type_figure(opened, "qt", "II", "380")
    assert reading_of(opened).hand_figure("qt", "II") is not None
    type_figure(opened, "qt", "II", "")
    assert reading_of(opened).hand_figures == ()
    assert opened.document.undo_label() == "Colleague's QT"


def test_letters_are_typed_and_are_no_shortcuts(opened: MainWindow) -> None:
    type_figure(opened, "qt", "II", "tbn")
    assert not opened.walk.is_placing
    assert reading_of(opened).hand_figures == ()
    notice = opened.notices.notice("trouble")
    assert notice is not None
    assert notice.label.text() == "'tbn' is not a figure in ms: type the number alone."


def test_the_rr_line_is_compared_with_its_mean(opened: MainWindow) -> None:
    type_figure(opened, "rr", "II", "800")
    assert reading_of(opened).hand_figure("rr_mean", "II") is not None
    assert cell(opened, "rr", "II", Column.HAND) == "800 ms"


def test_a_lead_chosen_moves_the_line_with_its_marks_and_figure(opened: MainWindow) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    type_figure(opened, "qt", "II", "500")
    line_id = line_of(opened, "qt", "II").line_id
    click_cell(opened, "qt", "II", Column.LEAD)
    combo = opened.worksheet.tree.viewport().findChild(QComboBox)
    assert combo is not None
    combo.setCurrentText("V5")
    combo.activated.emit(combo.currentIndex())
    QApplication.processEvents()
    reading = reading_of(opened)
    assert [c.lead for c in reading.calipers] == ["V5"]
    assert reading.hand_figure("qt", "V5") is not None
    assert reading.hand_figure("qt", "II") is None
    assert line_of(opened, "qt", "V5").line_id == line_id
    opened.document.undo()
    opened.worksheet.refresh()
    assert line_of(opened, "qt", "II").line_id == line_id
    assert cell(opened, "qt", "II", Column.HAND) == "500 ms"


def test_an_added_line_is_asked_for_at_once(opened: MainWindow) -> None:
    opened.worksheet.add_line("qt", "V2")
    assert opened.walk.line == line_of(opened, "qt", "V2")
    assert opened.walk.is_placing
    assert "lead V2" in opened.prompt.text.words()


def test_values_worked_out_stand_in_the_trade_s_order(opened: MainWindow) -> None:
    measure(opened, "rr", "II", 100.0, 260.0)
    QTest.keyClick(opened.view, Qt.Key.Key_Return)
    measure(opened, "qt", "II", 100.0, 176.0)
    root = opened.worksheet.tree.invisibleRootItem()
    names = []
    for place in range(root.childCount()):
        group = root.child(place)
        names += [group.child(row).text(Column.NAME) for row in range(group.childCount())]
    assert names == [
        *("RR", "P", "PR", "QRS", "QT"),
        *("Q depth", "R height", "S depth", "Q depth", "R height", "S depth"),
        *("Rate", "RR spread"),
        *("QTc Bazett", "QTc Fridericia", "QTc Framingham", "QTc Hodges", "QRS axis"),
    ]


def test_cautions_stand_below_the_value_picked_and_unfold(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    cautions = opened.worksheet.cautions
    assert cautions.title.text().startswith("QRS II:")
    line = next(line for line in cautions.lines if "confirmed" in line.line.text())
    assert not line.more.isVisible()
    line.button.click()
    assert line.more.isVisible()
    assert "Source:" in line.more.text()


def test_a_line_without_marks_says_from_where_to_where(opened: MainWindow) -> None:
    pick_line(opened, "qt", "II")
    words = [label.text() for label in opened.worksheet.cautions.findChildren(QLabel)]
    assert any(text.endswith("to where the T wave ends.") for text in words)


def test_names_are_kept_in_the_reading(opened: MainWindow) -> None:
    QTest.keyClicks(opened.worksheet.names.reader, "N. Reader")
    QTest.keyClick(opened.worksheet.names.reader, Qt.Key.Key_Return)
    QTest.keyClicks(opened.worksheet.names.colleague, "B. Other")
    opened.worksheet.commit_pending()
    assert (reading_of(opened).reader, reading_of(opened).colleague) == ("N. Reader", "B. Other")


def test_a_name_half_typed_outlives_another_edit(qtbot: QtBot, opened: MainWindow) -> None:
    opened.worksheet.names.reader.setFocus()
    QTest.keyClicks(opened.worksheet.names.reader, "N. Re")
    opened.settings.speed.confirm.click()
    assert opened.worksheet.names.reader.text() == "N. Re"


@pytest.mark.parametrize("width_px", [1366, 1920])
def test_nothing_of_the_worksheet_is_cut_off(opened: MainWindow, width_px: int) -> None:
    opened.resize(width_px, 740)
    measure(opened, "rr", "II", 100.0, 260.0)
    QTest.keyClick(opened.view, Qt.Key.Key_Return)
    type_figure(opened, "rr", "II", "1000")
    pick_line(opened, "s_height", "aVF")
    click_picture(opened, 300.0, 300.0)
    click_picture(opened, 310.0, 420.0)
    type_figure(opened, "s_height", "aVF", "-0.25")
    assert opened.width() == width_px
    tree = opened.worksheet.tree
    beside_px = {Column.VALUE: tree.iconSize().width()}
    seen = 0
    for item in tree.findItems("*", Qt.MatchFlag.MatchWildcard | Qt.MatchFlag.MatchRecursive):
        for column in Column:
            if item.isFirstColumnSpanned():
                continue
            words_px = QFontMetrics(item.font(column)).horizontalAdvance(item.text(column))
            room_px = tree.columnWidth(column) - beside_px.get(column, 0)
            assert words_px < room_px, (column, item.text(column))
            seen += "±" in item.text(column)
    assert seen >= 4
    assert sum(tree.columnWidth(column) for column in Column) <= tree.viewport().width()


def test_a_row_is_marked_and_its_figure_typed_from_the_keyboard(opened: MainWindow) -> None:
    tree = opened.worksheet.tree
    tree.setFocus()
    tree.pick(("line", line_of(opened, "pr", "II").line_id, None))
    QTest.keyClick(tree, Qt.Key.Key_F2)
    fields = [field for field in tree.viewport().findChildren(QLineEdit) if field.isVisible()]
    assert len(fields) == 1
    QTest.keyClicks(fields[0], "160")
    QTest.keyClick(fields[0], Qt.Key.Key_Return)
    QApplication.processEvents()
    figure = reading_of(opened).hand_figure("pr", "II")
    assert figure is not None
    assert figure.value == 160.0
    QTest.keyClick(tree, Qt.Key.Key_Return)
    assert opened.walk.is_placing
    assert opened.walk.line == line_of(opened, "pr", "II")


def test_a_figure_in_another_unit_is_refused_in_one_sentence(opened: MainWindow) -> None:
    type_figure(opened, "pr", "II", "0.16 s")
    assert reading_of(opened).hand_figure("pr", "II") is None
    notice = opened.notices.notice("trouble")
    assert notice is not None
    assert notice.label.text() == "'0.16 s' is not a figure in ms: type the number alone."


def test_a_row_picked_below_stays_in_sight(opened: MainWindow) -> None:
    """The row offered as the next one lies far above it."""
    opened.resize(1366, 420)
    tree = opened.worksheet.tree
    row_id = ("value", "qrs_axis", None)
    item = tree.item_of(row_id)
    assert item is not None
    tree.scrollToItem(item)
    place = tree.visualItemRect(item).center()
    QTest.mouseClick(tree.viewport(), Qt.MouseButton.LeftButton, pos=place)
    assert tree.offered() == ("line", line_of(opened, "rr", "II").line_id, None)
    assert tree.viewport().rect().contains(tree.visualItemRect(item).center())
