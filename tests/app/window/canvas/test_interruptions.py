"""Gestures that something else gets in the way of: none edits a reading it did not begin on."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest
from PySide6.QtCore import QEvent, QPoint, Qt
from PySide6.QtGui import QFocusEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from app.reading import CaliperKind
from app.window.canvas import SheetView
from app.window.canvas.selection import Part, Selection
from app.window.document import Document
from tests.app.reading_examples import example_map
from tests.app.window.canvas.hands import (
    LEFT,
    MIDDLE,
    RIGHT,
    blank_picture,
    caliper_of,
    click,
    drag,
    hover,
    key,
    place,
    press,
    reading_of,
    release,
    time_caliper,
    wheel,
)


def other_edit(document: Document) -> None:
    """Somebody types a name on the worksheet."""
    assert document.reading is not None
    document.edit(replace(document.reading, reader="Somebody"), "Name the reader")


def other_grid(document: Document) -> None:
    """The search for the grid comes to its end."""
    assert document.reading is not None
    found = example_map(px_per_mm=9.0)
    document.edit(replace(document.reading, sheet_map=found), "Find grid")


def other_picture(document: Document) -> None:
    picture = blank_picture()
    document.open(picture, reading_of(picture, time_caliper()))


INTERRUPTIONS = [other_edit, other_grid, other_picture]


@pytest.mark.parametrize("interrupt", INTERRUPTIONS)
@pytest.mark.parametrize("what", ["leg", "whole"])
def test_a_drag_ends_with_nothing_written_when_the_reading_changes(
    view: SheetView, document: Document, what: str, interrupt: Callable[[Document], None]
) -> None:
    start = place(view, 560.0, 400.0)
    if what == "whole":
        view.select([1])
        label = view._overlay.settled[0].label
        assert label is not None
        start = (label[0] + view._canvas_offset()).toPoint() + QPoint(5, 5)
    press(view, start)
    hover(view, start + QPoint(60, 0))
    interrupt(document)
    there = document.reading
    hover(view, start + QPoint(90, 0))
    release(view, start + QPoint(90, 0))
    assert document.reading is there
    assert caliper_of(document) == time_caliper()


@pytest.mark.parametrize("interrupt", [other_edit, other_grid])
def test_a_placing_goes_on_from_its_first_place_and_loses_nothing_that_was_written_meanwhile(
    view: SheetView, document: Document, interrupt: Callable[[Document], None]
) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    interrupt(document)
    there = document.reading
    click(view, place(view, 340.0, 500.0))
    assert there is not None
    assert document.reading is not None
    assert document.reading.calipers[:3] == there.calipers
    assert document.reading.reader == there.reader
    assert document.reading.sheet_map is there.sheet_map
    (caliper,) = document.reading.calipers[3:]
    assert caliper.start.x_px == pytest.approx(300.0, abs=1.0)


def test_another_picture_ends_a_placing(view: SheetView, document: Document, qtbot: QtBot) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    with qtbot.waitSignal(view.placing_cancelled):
        other_picture(document)
    there = document.reading
    click(view, place(view, 700.0, 200.0))
    assert document.reading is there


def test_a_key_during_a_drag_takes_the_drags_place(view: SheetView, document: Document) -> None:
    """The arrow key is the edit; the drag it interrupted writes nothing on top."""
    leg = place(view, 560.0, 400.0)
    press(view, leg)
    hover(view, leg + QPoint(60, 0))
    key(view, Qt.Key.Key_Right)
    release(view, leg + QPoint(60, 0))
    assert caliper_of(document).end.x_px == pytest.approx(560.8)
    document.undo()
    assert document.undo_label() is None


def test_deleting_what_is_dragged(view: SheetView, document: Document) -> None:
    leg = place(view, 560.0, 400.0)
    press(view, leg)
    hover(view, leg + QPoint(60, 0))
    key(view, Qt.Key.Key_Delete)
    release(view, leg + QPoint(60, 0))
    assert document.reading is not None
    assert document.reading.caliper(1) is None
    document.undo()
    assert caliper_of(document) == time_caliper()


def test_zooming_during_a_drag_keeps_the_leg_under_the_pointer(
    view: SheetView, document: Document
) -> None:
    leg = place(view, 560.0, 400.0)
    press(view, leg)
    hover(view, leg + QPoint(40, 0))
    wheel(view, leg + QPoint(40, 0), QPoint(0, 240))
    release(view, leg + QPoint(40, 0))
    assert caliper_of(document).end.x_px == pytest.approx(600.0, abs=1.0)


def test_a_second_button_does_not_begin_a_second_gesture(
    view: SheetView, document: Document
) -> None:
    leg = place(view, 560.0, 400.0)
    press(view, leg)
    hover(view, leg + QPoint(40, 0))
    press(view, leg + QPoint(40, 0), MIDDLE)
    release(view, leg + QPoint(40, 0), MIDDLE)
    assert caliper_of(document) == time_caliper()
    release(view, leg + QPoint(40, 0))
    assert caliper_of(document).end.x_px == pytest.approx(600.0, abs=0.1)


def test_the_right_button_does_nothing_by_itself(view: SheetView, document: Document) -> None:
    before, scroll = document.reading, place(view, 0.0, 0.0)
    view.set_selection(Selection(frozenset({1}), Part.END))
    drag(view, place(view, 560.0, 400.0), place(view, 640.0, 420.0), RIGHT)
    assert document.reading is before
    assert place(view, 0.0, 0.0) == scroll
    assert view.selection == Selection(frozenset({1}), Part.END)


def test_the_right_button_in_the_middle_of_dragging_out_a_caliper(
    view: SheetView, document: Document
) -> None:
    before = document.reading
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    press(view, place(view, 300.0, 500.0))
    hover(view, place(view, 340.0, 500.0))
    press(view, place(view, 340.0, 500.0), RIGHT)
    release(view, place(view, 340.0, 500.0), RIGHT)
    release(view, place(view, 340.0, 500.0), LEFT)
    assert document.reading is before
    assert view.is_placing()  # asking for the first place again


def test_a_space_bar_released_in_another_window_is_released(
    view: SheetView, document: Document
) -> None:
    QTest.keyPress(view, Qt.Key.Key_Space)
    QApplication.sendEvent(view, QFocusEvent(QEvent.Type.FocusOut))
    drag(view, place(view, 560.0, 400.0), place(view, 600.0, 400.0))
    assert caliper_of(document).end.x_px == pytest.approx(600.0, abs=1.0)


def test_panning_with_the_space_bar_while_placing_places_nothing(
    view: SheetView, document: Document
) -> None:
    before = document.reading
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    QTest.keyPress(view, Qt.Key.Key_Space)
    under = view.picture_px_from_view_px(QPoint(500, 400))
    drag(view, QPoint(500, 400), QPoint(450, 430))
    QTest.keyRelease(view, Qt.Key.Key_Space)
    assert view.picture_px_from_view_px(QPoint(450, 430)) == under
    assert document.reading is before
    assert view.is_placing()
