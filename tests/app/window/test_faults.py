"""Whatever goes wrong, the reader gets one sentence and the log gets the rest."""

from __future__ import annotations

import logging
import sys
import threading
from collections.abc import Iterator

import pytest
from PySide6.QtCore import QTimer, qInstallMessageHandler, qWarning
from PySide6.QtGui import QGuiApplication
from pytestqt.exceptions import capture_exceptions
from pytestqt.qtbot import QtBot

from app.window.faults import (
    UNEXPECTED,
    MemoryLog,
    install_hooks,
    keep_log_in_memory,
    send_qt_messages_to_log,
    sentence_for,
)
from app.window.main_window import MainWindow
from imaging import PictureError
from tests.app.window.bench import ScriptedAsk


@pytest.fixture
def hooks() -> Iterator[list[str]]:
    """The hooks in place, with what they tell."""
    told: list[str] = []
    before, thread_before = sys.excepthook, threading.excepthook
    install_hooks(told.append)
    yield told
    sys.excepthook, threading.excepthook = before, thread_before


@pytest.fixture
def memory_log() -> Iterator[MemoryLog]:
    """The log kept in memory."""
    root = logging.getLogger()
    level = root.level
    log = keep_log_in_memory()
    yield log
    root.removeHandler(log)
    root.setLevel(level)


def fail() -> None:
    """Something nobody foresaw."""
    raise ZeroDivisionError("a secret detail")


def test_an_error_in_a_slot_is_one_sentence_and_a_log_entry(
    qtbot: QtBot, hooks: list[str], memory_log: MemoryLog
) -> None:
    # pytest-qt would fail the test for this very exception.
    with capture_exceptions():
        install_hooks(hooks.append)
        QTimer.singleShot(0, fail)
        qtbot.waitUntil(lambda: bool(hooks))
    assert hooks == [UNEXPECTED]
    assert "secret" not in hooks[0]
    assert "ZeroDivisionError: a secret detail" in memory_log.text()


def test_a_sentence_made_for_the_reader_is_passed_on(hooks: list[str]) -> None:
    error = PictureError("The picture is empty.")
    sys.excepthook(PictureError, error, None)
    assert hooks == ["The picture is empty."]


def test_a_fault_behind_its_own_box_opens_no_second_one(window: MainWindow) -> None:
    told: list[str] = []

    def tell(_title: str, text: str) -> None:
        told.append(text)
        window.show_fault("again")

    window.ask.tell = tell  # type: ignore[method-assign]
    window.show_fault("once")
    window.show_fault("twice")
    assert told == ["once", "twice"]


def test_lack_of_memory_has_its_own_sentence() -> None:
    assert "memory" in sentence_for(MemoryError())


def test_a_thread_s_error_goes_to_the_log(hooks: list[str], memory_log: MemoryLog) -> None:
    thread = threading.Thread(target=fail)
    thread.start()
    thread.join()
    assert hooks == []
    assert "ZeroDivisionError" in memory_log.text()


def test_qt_s_own_warnings_go_to_the_log(memory_log: MemoryLog) -> None:
    send_qt_messages_to_log()
    try:
        qWarning("a warning of Qt")
    finally:
        qInstallMessageHandler(None)
    assert "WARNING app.window.qt: a warning of Qt" in memory_log.text()


def test_the_log_can_be_copied(qtbot: QtBot, memory_log: MemoryLog, ask: ScriptedAsk) -> None:
    window = MainWindow(ask, memory_log)
    qtbot.addWidget(window)
    logging.getLogger("app.test").warning("something to look into")
    window.actions_table.action("details").trigger()

    assert "something to look into" in QGuiApplication.clipboard().text()
    window.show_fault(UNEXPECTED)
    assert ask.told == [UNEXPECTED]
