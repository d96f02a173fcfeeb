"""Fixtures of the window's tests."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

# Tests move no real pointer and take nobody's keyboard. Read when the application is made.
os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

import pytest
from PySide6.QtGui import QGuiApplication
from pytestqt.qtbot import QtBot

from app.window import opening
from app.window.main_window import MainWindow
from imaging import GridNotFound, Picture, SheetMap
from tests.app.window.bench import ScriptedAsk, page_map, write_page


@pytest.fixture
def ask() -> ScriptedAsk:
    """The reader's answers."""
    return ScriptedAsk()


@pytest.fixture
def grid_results(monkeypatch: pytest.MonkeyPatch) -> list[SheetMap | GridNotFound]:
    """What the searches for the grid find, in order; the last one again and again.

    The search itself has its own tests; here its answer must be known.
    """
    results: list[SheetMap | GridNotFound] = [page_map()]

    def find(_picture: Picture) -> SheetMap | GridNotFound:
        return results.pop(0) if len(results) > 1 else results[0]

    monkeypatch.setattr(opening, "find_grid_on", find)
    return results


@pytest.fixture
def window(
    qtbot: QtBot, ask: ScriptedAsk, grid_results: list[SheetMap | GridNotFound]
) -> Iterator[MainWindow]:
    """An empty window, shown."""
    window = MainWindow(ask)

    def no_more_questions(_window: MainWindow) -> None:
        ask.test_is_over = True

    qtbot.addWidget(window, before_close_func=no_more_questions)
    window.resize(1366, 740)
    with qtbot.waitExposed(window):
        window.show()
    yield window
    window.jobs.wait_for_all()
    # What a test put there must not outlive the interpreter: Qt would delete it too late.
    QGuiApplication.clipboard().clear()


@pytest.fixture
def page(tmp_path: Path) -> Path:
    """A picture file."""
    return write_page(tmp_path / "sheet 1.png")


@pytest.fixture
def opened(qtbot: QtBot, window: MainWindow, page: Path) -> MainWindow:
    """The window with a picture and its grid."""
    window.opening.open_path(page)
    qtbot.waitUntil(lambda: has_grid(window))
    return window


def has_grid(window: MainWindow) -> bool:
    """Whether a reading with a map is there and nothing is going on."""
    reading = window.document.reading
    return reading is not None and reading.sheet_map is not None and not window.jobs.is_busy()
