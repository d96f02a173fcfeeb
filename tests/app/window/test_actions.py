"""The table of actions."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QCursor
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QTableWidget

from app.window.actions import ACTIONS, keys_list
from app.window.dialogs.about import AboutDialog, KeysDialog
from app.window.main_window import MainWindow
from tests.app.window.bench import measure, place_of, reading_of

WITHOUT_PICTURE = {"open", "paste", "quit", "keys", "details", "about"}


def test_names_and_keys_are_used_once() -> None:
    names = [row.name for row in ACTIONS]
    keys = [row.keys for row in ACTIONS if row.keys]
    assert len(set(names)) == len(names)
    assert len(set(keys)) == len(keys)


def test_every_action_does_something() -> None:
    for row in ACTIONS:
        assert bool(row.text) == (row.slot is not None or row.toggle is not None), row.name


def test_without_a_picture_only_what_makes_sense_is_on(window: MainWindow) -> None:
    switched_on = {
        row.name
        for row in ACTIONS
        if row.text and window.actions_table.action(row.name).isEnabled()
    }
    assert switched_on == WITHOUT_PICTURE


def test_undo_and_redo_name_what_they_do(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    undo, redo = opened.actions_table.action("undo"), opened.actions_table.action("redo")
    assert undo.text() == "&Undo place QRS caliper"
    undo.trigger()
    assert reading_of(opened).calipers == ()
    assert redo.text() == "&Redo place QRS caliper"
    assert undo.text() == "&Undo grid found"
    redo.trigger()
    assert len(reading_of(opened).calipers) == 1
    assert not redo.isEnabled()
    assert redo.text() == "&Redo"


def test_delete_is_on_while_something_is_selected(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    delete = opened.actions_table.action("delete")
    assert delete.isEnabled()
    opened.view.select(())
    assert not delete.isEnabled()
    opened.actions_table.action("select_all").trigger()
    QTest.keyClick(opened.view, Qt.Key.Key_Delete)
    assert reading_of(opened).calipers == ()


def test_help_lists_every_key_and_says_what_this_is_not(window: MainWindow) -> None:
    window.actions_table.action("keys").trigger()
    keys = window.findChild(KeysDialog)
    assert isinstance(keys, KeysDialog)
    table = keys.findChild(QTableWidget)
    assert isinstance(table, QTableWidget)
    shown = {table.item(row, 1).text() for row in range(table.rowCount())}
    assert {words for _, words in keys_list()} <= shown
    keys.reject()
    window.actions_table.action("about").trigger()
    about = window.findChild(AboutDialog)
    assert isinstance(about, AboutDialog)
    words = " ".join(label.text() for label in about.findChildren(type(window._grid_label)))
    assert "Licensed clinicians decide" in words
    assert "calculation aid" in words
    about.reject()
    QApplication.processEvents()


def test_view_actions_reach_the_canvas(opened: MainWindow) -> None:
    opened.actions_table.action("actual").trigger()
    assert opened.view.zoom() == 1.0
    assert opened._zoom_label.text() == "100 %"
    opened.actions_table.action("zoom_in").trigger()
    assert opened.view.zoom() > 1.0
    opened.actions_table.action("zoom_out").trigger()
    opened.actions_table.action("fit").trigger()
    assert opened.view.zoom() < 1.0


def test_one_to_one_zooms_at_the_pointer(
    opened: MainWindow, monkeypatch: pytest.MonkeyPatch
) -> None:
    viewport = opened.view.viewport()
    place = place_of(opened, 700.0, 200.0)
    monkeypatch.setattr(QCursor, "pos", lambda: viewport.mapToGlobal(place))
    opened.view.zoom_by(2.0)
    there = opened.view.picture_px_from_view_px(place)
    QTest.keyClick(opened, Qt.Key.Key_1)
    assert opened.view.zoom() == pytest.approx(1.0)
    now = opened.view.picture_px_from_view_px(place)
    assert now.x_px == pytest.approx(there.x_px, abs=2.0)
    assert now.y_px == pytest.approx(there.y_px, abs=2.0)
