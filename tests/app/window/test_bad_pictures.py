"""What is no good picture: one sentence in the window, nothing opened, nothing written."""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path

import pytest
from PIL import Image
from PySide6.QtCore import QMimeData, QUrl
from pytestqt.qtbot import QtBot

from app.window.main_window import MainWindow
from tests.app.window.bench import write_page
from tests.app.window.conftest import has_grid
from tests.imaging.picture_files import (
    jpeg,
    locked_pdf,
    pdf,
    png_of_size,
    rgb_image,
    saved,
)

BAD: dict[str, Callable[[], bytes]] = {
    "nothing.png": bytes,
    "half.jpg": lambda: jpeg()[: len(jpeg()) // 2],
    "half.png": lambda: saved(rgb_image(), "PNG")[:-40],
    "half.tif": lambda: saved(rgb_image(), "TIFF")[:200],
    "half.pdf": lambda: pdf(rgb_image())[:300],
    "locked.pdf": lambda: locked_pdf(b"secret"),
    "words.png": lambda: b"just words",
    "bomb.png": lambda: png_of_size(60000, 60000),
}


def drop(window: MainWindow, path: Path) -> None:
    """Drop a file on the window."""
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    window.opening.take(data)


def sentence_about(qtbot: QtBot, window: MainWindow, path: Path) -> str:
    """What the window says when a file is dropped that does not open."""
    drop(window, path)
    qtbot.waitUntil(lambda: window.notices.notice("trouble") is not None)
    notice = window.notices.notice("trouble")
    assert notice is not None
    assert window.document.picture is None
    assert not window.jobs.is_busy()
    return notice.label.text()


@pytest.mark.parametrize("name", BAD)
def test_a_bad_picture_is_one_sentence(
    qtbot: QtBot, window: MainWindow, tmp_path: Path, name: str
) -> None:
    path = tmp_path / name
    path.write_bytes(BAD[name]())
    said = sentence_about(qtbot, window, path)
    assert path.name in said
    assert "Traceback" not in said
    assert "\n" not in said
    assert [item.name for item in tmp_path.iterdir()] == [name]


def test_a_folder_is_one_sentence(qtbot: QtBot, window: MainWindow, tmp_path: Path) -> None:
    folder = tmp_path / "scans"
    folder.mkdir()
    assert "folder" in sentence_about(qtbot, window, folder)


@pytest.mark.skipif(os.geteuid() == 0, reason="whoever is root may read everything")
def test_a_picture_that_may_not_be_read_is_one_sentence(
    qtbot: QtBot, window: MainWindow, page: Path
) -> None:
    page.chmod(0)
    assert page.name in sentence_about(qtbot, window, page)


def test_the_next_picture_opens_after_a_bad_one(
    qtbot: QtBot, window: MainWindow, tmp_path: Path
) -> None:
    bad = tmp_path / "words.png"
    bad.write_bytes(b"just words")
    sentence_about(qtbot, window, bad)
    drop(window, write_page(tmp_path / "ЭКГ der 2. Aufnahme – 心電図.png"))
    qtbot.waitUntil(lambda: has_grid(window))
    assert window.notices.notice("trouble") is None
    assert window.windowTitle().startswith("ЭКГ der 2. Aufnahme – 心電図.png")


def test_an_animation_opens_with_its_first_frame_and_says_so(
    qtbot: QtBot, window: MainWindow, tmp_path: Path
) -> None:
    path = tmp_path / "moving.gif"
    frames = [Image.new("RGB", (200, 100), colour) for colour in ("white", "black")]
    frames[0].save(path, save_all=True, append_images=frames[1:])
    drop(window, path)
    qtbot.waitUntil(lambda: window.document.picture is not None)
    notice = window.notices.notice("notes")
    assert notice is not None
    assert "first frame" in notice.label.text()
