"""Opening: by name, drop and paste; readings whose picture changed or moved; journals."""

from __future__ import annotations

import shutil
from pathlib import Path

import numpy as np
import pytest
from PIL import Image
from PySide6.QtCore import QMimeData, QPoint, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent, QGuiApplication, QImage
from pytestqt.qtbot import QtBot

from app.reading import load_reading
from app.reading.journal import append_to_journal, journal_path, read_journal
from app.window.main_window import MainWindow
from app.window.panels.worksheet_rows import worksheet_rows
from imaging import GridNotFound, SheetMap
from tests.app.window.bench import ScriptedAsk, measure, page_map, reading_of, write_page
from tests.app.window.conftest import has_grid


def wait_for_grid(qtbot: QtBot, window: MainWindow) -> None:
    """Wait until a picture is there and its grid was found."""
    qtbot.waitUntil(lambda: has_grid(window))


def trouble(window: MainWindow) -> str:
    """What the notice about trouble says."""
    notice = window.notices.notice("trouble")
    return "" if notice is None else notice.label.text()


@pytest.fixture
def saved(opened: MainWindow, ask: ScriptedAsk, page: Path) -> Path:
    """A reading with one caliper, saved beside its picture."""
    measure(opened, "qrs", "II", 300.0, 320.0)
    path = page.with_name("sheet 1.reading.json")
    ask.files.append(path)
    assert opened.saving.save()
    return path


@pytest.fixture
def second(
    qtbot: QtBot, ask: ScriptedAsk, grid_results: list[SheetMap | GridNotFound]
) -> MainWindow:
    """Another window, as after the program was ended and started again."""
    window = MainWindow(ask)
    qtbot.addWidget(window, before_close_func=lambda _w: setattr(ask, "test_is_over", True))
    return window


def test_a_picture_shows_with_its_grid_and_is_not_called_modified(opened: MainWindow) -> None:
    assert opened.view.document.picture is not None
    assert reading_of(opened).sheet_map == page_map()
    assert "Grid found: 8.00 × 7.92 px per small square" in opened._grid_label.text()
    assert opened.document.path is None


def test_another_picture_opens_without_a_question_while_nothing_was_done(
    qtbot: QtBot, opened: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    opened.opening.open_path(write_page(tmp_path / "sheet 2.png", tint=9))
    qtbot.waitUntil(lambda: reading_of(opened).picture.file_name == "sheet 2.png")
    assert ask.asked == []


def test_a_file_that_is_no_picture_is_refused_in_one_sentence(
    qtbot: QtBot, opened: MainWindow, tmp_path: Path
) -> None:
    wrong = tmp_path / "notes.png"
    wrong.write_text("just words")
    before = opened.document.reading
    opened.opening.open_path(wrong)
    qtbot.waitUntil(lambda: trouble(opened) != "")
    assert "notes.png" in trouble(opened)
    assert opened.document.reading is before


def test_a_dropped_file_opens(qtbot: QtBot, window: MainWindow, page: Path) -> None:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(page))])
    copy, left = Qt.DropAction.CopyAction, Qt.MouseButton.LeftButton
    no_keys = Qt.KeyboardModifier.NoModifier
    # Qt hands drag events only to where its own drag manager is, so they go in directly.
    enter = QDragEnterEvent(QPoint(300, 300), copy, data, left, no_keys)
    enter.ignore()
    window.dragEnterEvent(enter)
    assert enter.isAccepted()
    window.dropEvent(QDropEvent(QPointF(300.0, 300.0), copy, data, left, no_keys))
    wait_for_grid(qtbot, window)
    assert reading_of(window).picture.file_name == "sheet 1.png"


def test_words_cannot_be_dropped(window: MainWindow) -> None:
    data = QMimeData()
    data.setText("no picture")
    assert not window.opening.can_take(data)
    window.opening.take(data)
    assert trouble(window).startswith("There is no picture to paste")


def test_a_pasted_picture_is_saved_before_its_reading(
    qtbot: QtBot, window: MainWindow, ask: ScriptedAsk, page: Path, tmp_path: Path
) -> None:
    QGuiApplication.clipboard().setImage(QImage(str(page)))
    window.paste()
    wait_for_grid(qtbot, window)
    picture = window.document.picture
    assert picture is not None
    assert picture.path is None
    measure(window, "qrs", "II", 300.0, 320.0)
    png, reading_path = tmp_path / "from clipboard.png", tmp_path / "from clipboard.reading.json"
    ask.files += [png, reading_path]
    assert window.saving.save()
    assert ask.suggestions[1] == reading_path
    assert png.is_file()
    loaded = load_reading(reading_path)
    assert loaded == window.document.reading
    assert (loaded.picture.file_name, loaded.picture.sha256) == (png.name, picture.sha256)
    again = MainWindow(ask)
    qtbot.addWidget(again)
    again.opening.open_path(reading_path)
    wait_for_grid(qtbot, again)
    assert ask.asked == []


def test_a_pasted_file_opens_as_that_file(qtbot: QtBot, window: MainWindow, page: Path) -> None:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(page))])
    QGuiApplication.clipboard().setMimeData(data)
    window.paste()
    wait_for_grid(qtbot, window)
    assert window.document.picture is not None
    assert window.document.picture.path == page


def test_the_page_is_asked_for(
    qtbot: QtBot, window: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    pages = [Image.fromarray(np.full((640, 960, 3), shade, np.uint8)) for shade in (250, 200)]
    path = tmp_path / "two.tif"
    pages[0].save(path, save_all=True, append_images=pages[1:])
    ask.pages.append(1)
    window.opening.open_path(path)
    wait_for_grid(qtbot, window)
    assert reading_of(window).picture.page == 1
    assert window.document.picture is not None
    assert int(window.document.picture.pixels[0, 0, 0]) == 200


def test_no_page_chosen_opens_nothing(
    qtbot: QtBot, window: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    pages = [Image.fromarray(np.full((64, 96, 3), shade, np.uint8)) for shade in (250, 200)]
    path = tmp_path / "two.tif"
    pages[0].save(path, save_all=True, append_images=pages[1:])
    ask.pages.append(None)
    window.opening.open_path(path)
    qtbot.waitUntil(lambda: not ask.pages)
    assert window.document.reading is None


def test_a_saved_reading_comes_back_the_same(
    qtbot: QtBot, opened: MainWindow, second: MainWindow, saved: Path
) -> None:
    before = reading_of(opened)
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert reading_of(second) == before
    lines = opened.worksheet.lines.in_order()
    assert worksheet_rows(reading_of(second), lines) == worksheet_rows(before, lines)
    assert not second.document.is_modified()
    assert second.windowTitle().startswith("sheet 1.reading.json")


def test_a_picture_with_a_reading_beside_it_offers_that(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path, page: Path
) -> None:
    ask.answers.append("Open that reading")
    second.opening.open_path(page)
    wait_for_grid(qtbot, second)
    assert second.document.path == saved


def test_edits_after_the_last_save_are_offered_and_taken(
    qtbot: QtBot, opened: MainWindow, second: MainWindow, ask: ScriptedAsk, saved: Path
) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    killed = reading_of(opened)
    ask.answers.append("Take them")
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert reading_of(second).calipers == killed.calipers
    assert second.document.is_modified()
    second.document.undo()
    assert reading_of(second) == load_reading(saved)


def test_edits_after_the_last_save_stay_until_they_are_dropped(
    qtbot: QtBot, opened: MainWindow, second: MainWindow, ask: ScriptedAsk, saved: Path
) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    ask.answers.append("Cancel")
    second.opening.open_path(saved)
    assert second.document.reading is None
    assert read_journal(saved) is not None
    ask.answers.append("Drop them and open as saved")
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert reading_of(second) == load_reading(saved)
    assert not journal_path(saved).exists()


def test_a_journal_that_holds_the_saved_reading_is_no_question(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path
) -> None:
    append_to_journal(saved, load_reading(saved))
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert ask.asked == []


def test_a_moved_picture_is_asked_for_and_taken(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path, page: Path, tmp_path: Path
) -> None:
    elsewhere = tmp_path / "elsewhere"
    elsewhere.mkdir()
    moved = Path(shutil.move(page, elsewhere / "renamed.png"))
    ask.answers.append("Choose the picture…")
    ask.files.append(moved)
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert "no longer where it was" in ask.asked[-1]
    assert reading_of(second) == load_reading(saved)
    assert second.notices.notice("picture") is None


def test_a_changed_picture_is_never_taken_unasked(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path, page: Path
) -> None:
    bytes_before = saved.read_bytes()
    write_page(page, tint=20)
    ask.answers.append("Cancel")
    second.opening.open_path(saved)
    assert "has changed since" in ask.asked[-1]
    assert second.document.reading is None
    ask.answers.append("Open the changed picture all the same")
    second.opening.open_path(saved)
    wait_for_grid(qtbot, second)
    assert reading_of(second) == load_reading(saved)
    notice = second.notices.notice("picture")
    assert notice is not None
    assert saved.read_bytes() == bytes_before
    notice.buttons[0].click()
    assert second.document.picture is not None
    assert reading_of(second).picture.sha256 == second.document.picture.sha256
    assert second.notices.notice("picture") is None


def test_a_changed_picture_of_another_size_is_refused(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path, page: Path
) -> None:
    write_page(page, size_px=(800, 600))
    ask.answers.append("Open the changed picture all the same")
    second.opening.open_path(saved)
    qtbot.waitUntil(lambda: trouble(second) != "")
    assert "800 × 600 px" in trouble(second)
    assert second.document.reading is None


def test_a_wrong_picture_chosen_is_asked_about_again(
    qtbot: QtBot, second: MainWindow, ask: ScriptedAsk, saved: Path, page: Path, tmp_path: Path
) -> None:
    page.unlink()
    other = write_page(tmp_path / "other.png", tint=30)
    ask.answers += ["Choose the picture…", "Cancel"]
    ask.files.append(other)
    second.opening.open_path(saved)
    qtbot.waitUntil(lambda: not ask.answers)
    assert "is not the picture that was read" in ask.asked[-1]
    assert second.document.reading is None


def test_a_damaged_reading_is_one_sentence_and_left_alone(
    opened: MainWindow, tmp_path: Path
) -> None:
    damaged = tmp_path / "broken.reading.json"
    damaged.write_text('{"kind": "smallsquare reading", "schema_version": 1')
    opened.opening.open_path(damaged)
    assert "damaged" in trouble(opened)
    assert damaged.read_text() == '{"kind": "smallsquare reading", "schema_version": 1'


@pytest.mark.parametrize(
    ("answer", "reading_kept"), [("Cancel", True), ("Discard", False), ("Save", False)]
)
def test_unsaved_edits_are_asked_about(
    qtbot: QtBot,
    opened: MainWindow,
    ask: ScriptedAsk,
    page: Path,
    tmp_path: Path,
    answer: str,
    reading_kept: bool,
) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    marked = reading_of(opened)
    reading_path = tmp_path / "sheet 1.reading.json"
    ask.answers.append(answer)
    ask.files.append(reading_path)
    opened.opening.open_path(write_page(tmp_path / "sheet 2.png", tint=9))
    if reading_kept:
        assert reading_of(opened) is marked
    else:
        qtbot.waitUntil(lambda: reading_of(opened).picture.file_name == "sheet 2.png")
    assert reading_path.exists() == (answer == "Save")


def test_discarded_edits_are_not_offered_again(
    qtbot: QtBot, opened: MainWindow, ask: ScriptedAsk, saved: Path
) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    ask.answers.append("Discard")
    opened.opening.open_path(saved)
    qtbot.waitUntil(lambda: not opened.document.is_modified())
    assert reading_of(opened) == load_reading(saved)
    assert ask.answers == []


def test_discarded_edits_are_not_offered_by_way_of_the_picture_either(
    qtbot: QtBot, opened: MainWindow, ask: ScriptedAsk, saved: Path, page: Path
) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    ask.answers += ["Discard", "Open that reading"]
    opened.opening.open_path(page)
    qtbot.waitUntil(lambda: not opened.document.is_modified())
    assert reading_of(opened) == load_reading(saved)


def test_closing_asks_and_may_be_called_off(opened: MainWindow, ask: ScriptedAsk) -> None:
    measure(opened, "qrs", "II", 300.0, 320.0)
    ask.answers.append("Cancel")
    assert not opened.close()
    assert opened.isVisible()


def test_closing_with_discard_leaves_no_journal(
    opened: MainWindow, ask: ScriptedAsk, saved: Path
) -> None:
    measure(opened, "qt", "II", 300.0, 400.0)
    assert journal_path(saved).exists()
    ask.answers.append("Discard")
    assert opened.close()
    assert not journal_path(saved).exists()


def test_the_reader_s_name_is_kept_for_the_next_picture(
    qtbot: QtBot, opened: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    opened.worksheet.names.reader.setText("N. Reader")
    opened.worksheet.names.commit()
    ask.answers.append("Discard")
    opened.opening.open_path(write_page(tmp_path / "sheet 2.png", tint=9))
    qtbot.waitUntil(lambda: reading_of(opened).picture.file_name == "sheet 2.png")
    assert reading_of(opened).reader == "N. Reader"
