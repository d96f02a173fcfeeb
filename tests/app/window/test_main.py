"""Starting: what is loaded, and what a file named on the command line becomes."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from app.window.main import EarlyPicture
from imaging import PictureError

REPOSITORY = Path(__file__).resolve().parent.parent.parent.parent


def run_python(script: str, *arguments: str) -> str:
    """What a fresh interpreter prints."""
    finished = subprocess.run(
        [sys.executable, "-c", script, *arguments],
        cwd=REPOSITORY,
        env={**os.environ, "QT_QPA_PLATFORM": "offscreen"},
        capture_output=True,
        text=True,
        timeout=60.0,
        check=True,
    )
    return finished.stdout.strip()


def test_the_window_loads_no_heavy_library() -> None:
    script = """
import sys
import app.window.main_window
heavy = ("cv2", "scipy", "skimage", "pypdfium2", "pillow_heif", "PIL", "app.chart")
print([name for name in heavy if name in sys.modules])
"""
    assert run_python(script) == "[]"


def test_the_way_in_loads_no_qt() -> None:
    script = "import sys, app.window.main; print('PySide6' in sys.modules)"
    assert run_python(script) == "False"


def test_a_picture_named_is_there_before_the_window_shows(page: Path) -> None:
    script = """
import sys
from app.window.main import build
app, window = build(sys.argv[1], sys.argv[:1])
print(window.isVisible(), window.document.reading.picture.file_name)
window.close()
"""
    assert run_python(script, str(page)) == "False sheet 1.png"


def test_a_file_that_is_not_there_is_said_in_the_window(tmp_path: Path) -> None:
    script = """
import sys
from app.window.main import build
app, window = build(sys.argv[1], sys.argv[:1])
print(window.document.reading, window.notices.notice("trouble").label.text())
"""
    said = run_python(script, str(tmp_path / "nowhere.jpg"))
    assert said.startswith("None “nowhere.jpg” was not found")


def test_a_picture_that_takes_long_does_not_keep_the_window_away(page: Path) -> None:
    script = """
import sys, threading
import app.window.main
from PySide6.QtTest import QTest
decode, go_on = app.window.main.open_picture, threading.Event()
def slow(path):
    assert go_on.wait(20.0)
    return decode(path)
app.window.main.open_picture = slow
application, window = app.window.main.build(sys.argv[1], sys.argv[:1])
window.show()
print(window.document.picture, window.prompt.busy.text(), window.prompt.cancel.isVisible())
go_on.set()
while window.document.picture is None:
    QTest.qWait(20)
print(window.document.picture.file_name)
window.close()
"""
    lines = run_python(script, str(page)).splitlines()
    assert lines == ["None Opening sheet 1.png True", "sheet 1.png"]


def test_an_error_while_decoding_early_comes_out_where_it_is_waited_for(tmp_path: Path) -> None:
    wrong = tmp_path / "notes.png"
    wrong.write_text("just words")
    early = EarlyPicture(wrong)
    with pytest.raises(PictureError, match=r"notes\.png"):
        early.result()


def test_garbage_is_collected_again_once_the_window_is_there(page: Path) -> None:
    script = """
import gc, sys
from PySide6.QtTest import QTest
from app.window.main import build
app, window = build(sys.argv[1], sys.argv[:1])
while not gc.isenabled():
    QTest.qWait(50)
print("collecting")
window.close()
"""
    assert run_python(script, str(page)) == "collecting"
