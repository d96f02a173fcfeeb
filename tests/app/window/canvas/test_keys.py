"""Arrow keys, Tab and Esc on what was placed."""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtWidgets import QLineEdit, QVBoxLayout, QWidget
from pytestqt.qtbot import QtBot

from app.window.canvas import SheetView
from app.window.canvas.selection import Part, Selection
from app.window.document import Document
from tests.app.window.canvas.hands import (
    CONTROL,
    SHIFT,
    caliper_of,
    drag,
    key,
    place,
)

PX_PER_MM = 8.0
START, END, WHOLE = (Selection(frozenset({1}), part) for part in (Part.START, Part.END, Part.WHOLE))


@pytest.mark.parametrize(("modifier", "step_mm"), [(None, 0.1), (SHIFT, 1.0), (CONTROL, 5.0)])
def test_arrows_move_the_selected_leg_by_steps_of_the_grid(
    view: SheetView, document: Document, modifier: Qt.KeyboardModifier | None, step_mm: float
) -> None:
    before = caliper_of(document)
    view.set_selection(END)
    key(view, Qt.Key.Key_Right, *(() if modifier is None else (modifier,)))
    after = caliper_of(document)
    assert after.start == before.start
    assert after.end.x_px - before.end.x_px == pytest.approx(step_mm * PX_PER_MM)


def test_up_and_down_leave_the_leg_of_a_time_caliper(view: SheetView, document: Document) -> None:
    before = document.reading
    view.set_selection(START)
    key(view, Qt.Key.Key_Up)
    assert document.reading is before


def test_up_raises_the_leg_of_a_height(view: SheetView, document: Document) -> None:
    before = caliper_of(document, 2)
    view.set_selection(Selection(frozenset({2}), Part.END))
    key(view, Qt.Key.Key_Up, SHIFT)
    assert caliper_of(document, 2).end.y_px == pytest.approx(before.end.y_px - 7.92)


def test_arrows_move_a_whole_caliper_both_ways(view: SheetView, document: Document) -> None:
    before = caliper_of(document)
    view.select([1])
    key(view, Qt.Key.Key_Down, SHIFT)
    after = caliper_of(document)
    assert after.start.y_px - before.start.y_px == pytest.approx(7.92)
    assert after.end.y_px - before.end.y_px == pytest.approx(7.92)


def test_a_run_of_arrows_is_one_step(view: SheetView, document: Document) -> None:
    before = caliper_of(document)
    view.set_selection(END)
    for _ in range(5):
        key(view, Qt.Key.Key_Right)
    assert caliper_of(document).end.x_px == pytest.approx(before.end.x_px + 4.0)
    document.undo()
    assert caliper_of(document) == before
    assert document.undo_label() is None


def test_another_leg_begins_another_step(view: SheetView, document: Document) -> None:
    view.set_selection(END)
    key(view, Qt.Key.Key_Right)
    moved_once = caliper_of(document)
    view.set_selection(START)
    key(view, Qt.Key.Key_Right)
    document.undo()
    assert caliper_of(document) == moved_once


def test_a_run_broken_by_something_else_is_two_steps(view: SheetView, document: Document) -> None:
    view.set_selection(END)
    key(view, Qt.Key.Key_Right)
    moved_once = caliper_of(document)
    drag(view, QPoint(700, 100), QPoint(690, 110))  # a pan writes nothing, but it is a break
    key(view, Qt.Key.Key_Right)
    assert caliper_of(document) != moved_once
    document.undo()
    assert caliper_of(document) == moved_once


def test_without_a_grid_the_step_is_a_quarter_of_a_pixel(
    view: SheetView, document: Document
) -> None:
    assert document.reading is not None
    document.edit(replace(document.reading, sheet_map=None), "Drop the grid")
    before = caliper_of(document)
    view.set_selection(END)
    key(view, Qt.Key.Key_Right)
    assert caliper_of(document).end.x_px - before.end.x_px == pytest.approx(0.25)


def test_with_nothing_selected_the_arrows_pan(view: SheetView, document: Document) -> None:
    reading, before = document.reading, place(view, 600.0, 450.0)
    key(view, Qt.Key.Key_Right)
    assert place(view, 600.0, 450.0).x() < before.x()
    assert document.reading is reading


def test_tab_goes_through_every_leg_and_caliper_and_then_on(view: SheetView, qtbot: QtBot) -> None:
    seen = []
    for _ in range(9):
        key(view, Qt.Key.Key_Tab)
        seen.append((*view.selected_ids(), view.selection.part))
    parts = (Part.START, Part.END, Part.WHOLE)
    assert seen == [(caliper_id, part) for caliper_id in (1, 2, 3) for part in parts]
    key(view, Qt.Key.Key_Tab)
    assert view.selected_ids() == frozenset()


def test_shift_tab_goes_backward(view: SheetView) -> None:
    key(view, Qt.Key.Key_Backtab, SHIFT)
    assert view.selection == Selection(frozenset({3}), Part.WHOLE)
    key(view, Qt.Key.Key_Backtab, SHIFT)
    assert view.selection == Selection(frozenset({3}), Part.END)


def test_tab_is_no_trap(document: Document, qtbot: QtBot) -> None:
    """Past the last caliper the keyboard reaches the rest of the window."""
    window, field = QWidget(), QLineEdit()
    qtbot.addWidget(window)
    view = SheetView(document)
    layout = QVBoxLayout(window)
    layout.addWidget(view)
    layout.addWidget(field)
    with qtbot.waitExposed(window):
        window.show()
    window.activateWindow()
    view.setFocus()
    for _ in range(10):
        key(view, Qt.Key.Key_Tab)
    assert window.focusWidget() is field


def test_tab_brings_the_leg_into_sight(view: SheetView) -> None:
    view.zoom_by(6.0)
    key(view, Qt.Key.Key_Tab)
    assert view.viewport().rect().contains(place(view, 400.0, 400.0))


def test_escape_lets_go_of_the_selection_and_then_is_the_windows(
    view: SheetView, qtbot: QtBot
) -> None:
    view.select([1])
    key(view, Qt.Key.Key_Escape)
    assert view.selected_ids() == frozenset()
    assert not view.step_back()
