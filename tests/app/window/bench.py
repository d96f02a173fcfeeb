"""The window under test: a reader who answers from a script, and hands that click and type."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import numpy as np
from PIL import Image
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest

from app.reading import PicturePoint, Reading
from app.window.dialogs.ask import Ask
from app.window.main_window import MainWindow
from app.window.panels.lines import Line
from app.window.panels.row_tree import Column
from imaging import SheetMap
from tests.app.reading_examples import example_map

SIZE_PX = (960, 640)
PX_PER_MM = 8.0


class ScriptedAsk(Ask):
    """Answers in the order scripted; a question nobody foresaw fails the test.

    Attributes
    ----------
    answers : list of str
        Words of the buttons to press, in order.
    files : list of Path or None
        What the file choosers give, in order.
    asked, told : list of str
        The questions met and the things said.
    suggestions : list of Path
        Names the save choosers proposed.
    """

    def __init__(self) -> None:
        super().__init__()
        self.answers: list[str] = []
        self.files: list[Path | None] = []
        self.pages: list[int | None] = []
        self.squares: tuple[float, float] | None = None
        self.asked: list[str] = []
        self.told: list[str] = []
        self.suggestions: list[Path] = []
        self.test_is_over = False

    def choose(self, _title: str, text: str, answers: Sequence[str], _detail: str = "") -> int:
        if self.test_is_over:
            return list(answers).index("Discard")
        self.asked.append(text)
        assert self.answers, f"nobody foresaw the question: {text}"
        return list(answers).index(self.answers.pop(0))

    def tell(self, _title: str, text: str) -> None:
        self.told.append(text)

    def open_file(self, _title: str, _folder: Path | None, _kinds: str) -> Path | None:
        return self.files.pop(0)

    def save_file(self, _title: str, suggestion: Path, _kinds: str) -> Path | None:
        self.suggestions.append(suggestion)
        return self.files.pop(0)

    def page(self, _file_name: str, _page_count: int) -> int | None:
        return self.pages.pop(0)

    def squares_in_box(self) -> tuple[float, float] | None:
        return self.squares


def page_map() -> SheetMap:
    """The map that belongs to `write_page`."""
    return example_map(SIZE_PX, PX_PER_MM)


def write_page(path: Path, *, tint: int = 0, size_px: tuple[int, int] = SIZE_PX) -> Path:
    """A small page with a grid of 8 px; `tint` makes it another picture."""
    pixels = np.full((size_px[1], size_px[0], 3), 250 - tint, dtype=np.uint8)
    pixels[9 :: int(PX_PER_MM)] = (240, 170, 170)
    pixels[:, 12 :: int(PX_PER_MM)] = (240, 170, 170)
    Image.fromarray(pixels).save(path)
    return path


def reading_of(window: MainWindow) -> Reading:
    """The present reading, which there must be."""
    reading = window.document.reading
    assert reading is not None
    return reading


def line_of(window: MainWindow, key: str, lead: str) -> Line:
    """A line of the worksheet, which there must be."""
    line = window.worksheet.lines.find(key, lead)
    assert line is not None
    return line


def pick_line(window: MainWindow, key: str, lead: str) -> None:
    """Click on a line's name."""
    click_cell(window, key, lead, Column.NAME)


def click_cell(window: MainWindow, key: str, lead: str, column: Column) -> None:
    """Click into one cell of a line."""
    tree = window.worksheet.tree
    item = tree.item_of(("line", line_of(window, key, lead).line_id, None))
    assert item is not None
    tree.scrollToItem(item)
    index = tree.indexFromItem(item, column)
    place = tree.visualRect(index).center()
    QTest.mouseClick(tree.viewport(), Qt.MouseButton.LeftButton, pos=place)


def cell(window: MainWindow, key: str, lead: str, column: Column) -> str:
    """What stands in one cell of a line."""
    item = window.worksheet.tree.item_of(("line", line_of(window, key, lead).line_id, None))
    assert item is not None
    return item.text(column)


def place_of(window: MainWindow, x_px: float, y_px: float) -> QPoint:
    """Where a picture point is on the canvas."""
    return window.view.view_px_from_picture_px(PicturePoint(x_px, y_px))


def click_picture(window: MainWindow, x_px: float, y_px: float) -> None:
    """Click on the canvas at a picture point."""
    place = place_of(window, x_px, y_px)
    QTest.mouseMove(window.view.viewport(), place)
    QTest.mouseClick(window.view.viewport(), Qt.MouseButton.LeftButton, pos=place)


def drag_picture(
    window: MainWindow, first_px: tuple[float, float], second_px: tuple[float, float]
) -> None:
    """Drag on the canvas from one picture point to another."""
    viewport, left = window.view.viewport(), Qt.MouseButton.LeftButton
    QTest.mousePress(viewport, left, pos=place_of(window, *first_px))
    QTest.mouseMove(viewport, place_of(window, *second_px))
    QTest.mouseRelease(viewport, left, pos=place_of(window, *second_px))


def measure(window: MainWindow, key: str, lead: str, start_px: float, end_px: float) -> None:
    """Pick a line and mark it."""
    pick_line(window, key, lead)
    click_picture(window, start_px, 300.0)
    click_picture(window, end_px, 300.0)
