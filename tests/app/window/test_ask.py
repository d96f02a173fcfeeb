"""The questions as they are really asked."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest
from PySide6.QtCore import Qt, QTimer
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QApplication,
    QDialog,
    QFileDialog,
    QInputDialog,
    QMessageBox,
    QPushButton,
    QSpinBox,
    QWidget,
)
from pytestqt.qtbot import QtBot

from app.window.dialogs.ask import PICTURES, Ask
from app.window.dialogs.scale import ScaleDialog

ANSWERS = ["Save", "Discard", "Cancel"]


def when_asked(hand: Callable[[QWidget], None]) -> None:
    """What the reader does with the next box."""

    def look() -> None:
        box = QApplication.activeModalWidget()
        if box is None:
            QTimer.singleShot(20, look)
        else:
            hand(box)

    QTimer.singleShot(0, look)


def press(words: str) -> Callable[[QWidget], None]:
    """Click the button with these words."""

    def hand(box: QWidget) -> None:
        (button,) = (b for b in box.findChildren(QPushButton) if b.text() == words)
        QTest.mouseClick(button, Qt.MouseButton.LeftButton)

    return hand


@pytest.mark.parametrize("words", ANSWERS)
def test_the_answer_chosen_comes_back(qtbot: QtBot, words: str) -> None:
    when_asked(press(words))
    assert ANSWERS[Ask().choose("Unsaved edits", "Keep them?", ANSWERS)] == words


@pytest.mark.parametrize(
    ("key", "words"), [(Qt.Key.Key_Escape, "Cancel"), (Qt.Key.Key_Return, "Save")]
)
def test_enter_is_the_first_answer_and_esc_the_last(qtbot: QtBot, key: Qt.Key, words: str) -> None:
    when_asked(lambda box: QTest.keyClick(box, key))
    assert ANSWERS[Ask().choose("Unsaved edits", "Keep them?", ANSWERS)] == words


def test_what_must_be_read_waits_for_its_reader(qtbot: QtBot) -> None:
    read: list[str] = []

    def hand(box: QWidget) -> None:
        assert isinstance(box, QMessageBox)
        read.append(box.text())
        box.accept()

    when_asked(hand)
    Ask().tell("Smallsquare", "The disk is full.")
    assert read == ["The disk is full."]


@pytest.mark.parametrize("accepted", [True, False])
def test_pages_are_counted_from_one_for_the_reader(qtbot: QtBot, accepted: bool) -> None:
    def hand(box: QWidget) -> None:
        assert isinstance(box, QInputDialog)
        (number,) = box.findChildren(QSpinBox)
        assert (number.minimum(), number.maximum()) == (1, 4)
        number.setValue(3)
        box.done(QDialog.DialogCode.Accepted if accepted else QDialog.DialogCode.Rejected)

    when_asked(hand)
    assert Ask().page("scan.pdf", 4) == (2 if accepted else None)


@pytest.mark.parametrize("accepted", [True, False])
def test_the_counts_of_a_box_are_typed(qtbot: QtBot, accepted: bool) -> None:
    def hand(box: QWidget) -> None:
        assert isinstance(box, ScaleDialog)
        QTest.keyClicks(box.across, "10")
        QTest.keyClicks(box.down, "5")
        QTest.keyClick(box, Qt.Key.Key_Return if accepted else Qt.Key.Key_Escape)

    when_asked(hand)
    assert Ask().squares_in_box() == ((10.0, 5.0) if accepted else None)


def test_no_file_chosen_is_no_file(qtbot: QtBot, monkeypatch: pytest.MonkeyPatch) -> None:
    """The chooser may be the system's own, which no test can press: only its answer is played."""
    monkeypatch.setattr(QFileDialog, "getOpenFileName", lambda *_: ("", ""))
    monkeypatch.setattr(QFileDialog, "getSaveFileName", lambda *_, **__: ("", ""))
    assert Ask().open_file("Open", None, PICTURES) is None
    assert Ask().save_file("Save", Path("a.png"), PICTURES) is None


def test_a_file_chosen_to_be_replaced_is_not_asked_about_twice(
    qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whether a file may be replaced is the window's own question."""
    options: list[object] = []

    def choose(*_: object, **named: object) -> tuple[str, str]:
        options.append(named["options"])
        return "/somewhere/a.png", ""

    monkeypatch.setattr(QFileDialog, "getSaveFileName", choose)
    assert Ask().save_file("Save", Path("a.png"), PICTURES) == Path("/somewhere/a.png")
    assert options == [QFileDialog.Option.DontConfirmOverwrite]
