"""What is said and offered about the grid."""

from __future__ import annotations

import threading
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from app.window import opening
from app.window.dialogs.scale import ScaleDialog
from app.window.main_window import MainWindow
from imaging import GridNotFound, Picture, SheetMap
from tests.app.window.bench import (
    ScriptedAsk,
    drag_picture,
    measure,
    page_map,
    place_of,
    reading_of,
)
from tests.app.window.conftest import has_grid

NOT_FOUND = GridNotFound("No millimetre lines were seen on this picture.", "no_lines")


def grid_notice(window: MainWindow) -> str:
    """What the notice about the grid says."""
    notice = window.notices.notice("grid")
    return "" if notice is None else notice.label.text()


def open_without_grid(qtbot: QtBot, window: MainWindow, page: Path) -> None:
    """Open a picture whose grid is not found."""
    window.opening.open_path(page)
    qtbot.waitUntil(lambda: grid_notice(window) != "")


def test_without_a_grid_a_box_gives_the_scale(
    qtbot: QtBot,
    window: MainWindow,
    ask: ScriptedAsk,
    page: Path,
    grid_results: list[SheetMap | GridNotFound],
) -> None:
    grid_results[:] = [NOT_FOUND]
    open_without_grid(qtbot, window, page)
    notice = window.notices.notice("grid")
    assert notice is not None
    assert notice.label.text() == NOT_FOUND.reason
    assert [button.text() for button in notice.buttons] == [
        "Give the scale by hand",
        "Find the grid again",
    ]
    ask.squares = (10.0, 5.0)
    notice.buttons[0].click()
    assert "box" in window.prompt.text.words()
    drag_picture(window, (100.0, 100.0), (500.0, 300.0))
    sheet_map = reading_of(window).sheet_map
    assert sheet_map is not None
    assert sheet_map.source == "reader"
    view_px = 2.0 / window.view.zoom()
    assert sheet_map.x_pitch_px_per_mm == pytest.approx(8.0, abs=view_px / 50.0)
    assert sheet_map.y_pitch_px_per_mm == pytest.approx(8.0, abs=view_px / 25.0)
    assert window.notices.notice("grid") is None
    assert window._grid_label.text().startswith("Scale given by hand")
    measure(window, "qrs", "II", 300.0, 320.0)
    assert len(reading_of(window).calipers) == 1


def test_counts_that_give_oblong_squares_are_asked_about(
    opened: MainWindow, ask: ScriptedAsk
) -> None:
    before = opened.document.reading
    ask.squares = (10.0, 4.0)
    ask.answers.append("Cancel")
    opened.actions_table.action("scale").trigger()
    drag_picture(opened, (100.0, 100.0), (500.0, 300.0))
    assert "the squares are 25 % higher than wide" in ask.asked[-1]
    assert opened.document.reading is before
    ask.answers.append("Take it all the same")
    opened.actions_table.action("scale").trigger()
    drag_picture(opened, (100.0, 100.0), (500.0, 300.0))
    sheet_map = reading_of(opened).sheet_map
    assert sheet_map is not None
    assert sheet_map.source == "reader"


def test_squares_that_nobody_counted_give_no_scale(qtbot: QtBot) -> None:
    dialog = ScaleDialog()
    qtbot.addWidget(dialog)
    assert dialog.across.text().strip() == ""
    assert not dialog.ok.isEnabled()
    QTest.keyClicks(dialog.across, "52")
    assert not dialog.ok.isEnabled()
    QTest.keyClicks(dialog.down, "20")
    assert dialog.ok.isEnabled()
    assert (dialog.across.value(), dialog.down.value()) == (52.0, 20.0)


def test_no_count_given_changes_nothing(opened: MainWindow, ask: ScriptedAsk, qtbot: QtBot) -> None:
    before = opened.document.reading
    opened.actions_table.action("scale").trigger()
    drag_picture(opened, (100.0, 100.0), (500.0, 300.0))
    assert opened.document.reading is before


def test_the_search_can_be_given_up_and_begun_again(
    qtbot: QtBot, window: MainWindow, page: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    go_on = threading.Event()

    def slow(_picture: Picture) -> SheetMap:
        assert go_on.wait(20.0)
        return page_map()

    monkeypatch.setattr(opening, "find_grid_on", slow)
    window.opening.open_path(page)
    qtbot.waitUntil(lambda: window.prompt.busy.text() == "Finding the grid")
    # The picture is there while the search goes on.
    assert window.document.picture is not None
    assert window.prompt.bar.isVisible()
    window.prompt.cancel.click()
    assert not window.prompt.bar.isVisible()
    assert "No grid is known" in grid_notice(window)
    go_on.set()
    window.jobs.wait_for_all()
    QTest.qWait(1)
    assert reading_of(window).sheet_map is None
    window.actions_table.action("find_grid").trigger()
    qtbot.waitUntil(lambda: has_grid(window))


def test_a_search_that_fails_is_said_without_a_traceback(
    qtbot: QtBot, window: MainWindow, page: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(_picture: Picture) -> SheetMap:
        raise ZeroDivisionError("inside the search")

    monkeypatch.setattr(opening, "find_grid_on", broken)
    open_without_grid(qtbot, window, page)
    assert grid_notice(window).startswith("The search for the grid ended with an error")
    assert "ZeroDivision" not in grid_notice(window)


def test_an_uncertain_scale_is_said_until_confirmed(
    qtbot: QtBot,
    window: MainWindow,
    page: Path,
    grid_results: list[SheetMap | GridNotFound],
) -> None:
    grid_results[:] = [replace(page_map(), scale_is_certain=False)]
    open_without_grid(qtbot, window, page)
    assert "1 mm or 5 mm" in grid_notice(window)
    assert "NOT certain" in window._grid_label.text()
    notice = window.notices.notice("grid")
    assert notice is not None
    notice.buttons[0].click()
    assert grid_notice(window) == ""
    sheet_map = reading_of(window).sheet_map
    assert sheet_map is not None
    assert sheet_map.scale_is_certain
    assert sheet_map.evidence[-1] == "The reader confirmed the size of a square."


def test_a_second_search_that_finds_nothing_leaves_the_scale(
    qtbot: QtBot, opened: MainWindow, grid_results: list[SheetMap | GridNotFound]
) -> None:
    grid_results[:] = [NOT_FOUND]
    before = reading_of(opened).sheet_map
    opened.actions_table.action("find_grid").trigger()
    qtbot.waitUntil(lambda: opened.notices.notice("grid search") is not None)
    assert reading_of(opened).sheet_map is before
    # Later edits neither lose nor repeat what was said.
    opened.settings.speed.confirm.click()
    notice = opened.notices.notice("grid search")
    assert notice is not None
    assert notice.label.text() == f"{NOT_FOUND.reason} The scale is as it was."
    notice.buttons[-1].click()
    opened.settings.gain.confirm.click()
    assert opened.notices.notice("grid search") is None


def test_turning_the_sheet_is_an_edit_and_outlives_a_new_search(
    qtbot: QtBot, opened: MainWindow
) -> None:
    opened.actions_table.action("turn_right").trigger()
    sheet_map = reading_of(opened).sheet_map
    assert sheet_map == page_map().turned(1)
    opened.actions_table.action("find_grid").trigger()
    qtbot.waitUntil(lambda: not opened.jobs.is_busy())
    assert reading_of(opened).sheet_map == sheet_map
    opened.actions_table.action("turn_left").trigger()
    turned_back = reading_of(opened).sheet_map
    assert turned_back is not None
    assert turned_back.turn_deg == 0


def test_the_pointer_s_place_is_told_in_millimetres(opened: MainWindow) -> None:
    QTest.mouseMove(opened.view.viewport(), place_of(opened, 412.0, 405.0))
    # (412 - 12) / 8 and (405 - 9) / 7.92, to the view px.
    assert opened._pointer_label.text().startswith(("x 49.", "x 50."))
    assert "mm" in opened._pointer_label.text()


def test_the_overlay_is_switched_by_its_key(opened: MainWindow) -> None:
    QTest.keyClick(opened, Qt.Key.Key_G)
    assert opened.view.grid_visible()
    QTest.keyClick(opened, Qt.Key.Key_G)
    assert not opened.view.grid_visible()
