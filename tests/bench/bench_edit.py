"""From letting go of a caliper's leg to its value on the worksheet, on a sheet with 24 calipers.

Run it for the figures: ``python -m tests.bench.bench_edit``. The reading has a file, so that
each edit is also set down in the journal, and the disk waited for.
"""

from __future__ import annotations

import os
import statistics
import tempfile
import time
from dataclasses import replace
from pathlib import Path

# Nothing here depends on a screen. Read when the application is made.
os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

import numpy as np
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.reading import Caliper, CaliperKind, PicturePoint, Reading, new_reading
from app.window.main_window import MainWindow
from app.window.theme import apply_theme
from imaging.picture import Picture
from tests.app.reading_examples import example_map

SIZE_PX = (1200, 900)
CALIPERS = 24
EDITS = 30
_LINES = (
    ("rr", "II"),
    ("p_duration", "II"),
    ("pr", "II"),
    ("qrs", "II"),
    ("qt", "II"),
    ("qt", "V5"),
    ("r_height", "I"),
    ("r_height", "aVF"),
)
_DRAG_PX = 6


def measure_edits() -> list[float]:
    """Milliseconds of each edit, from the release of the button to all of it painted."""
    app = QApplication.instance() or QApplication([])
    assert isinstance(app, QApplication)
    apply_theme(app)
    with tempfile.TemporaryDirectory() as folder:
        window = _marked_window(Path(folder))
        taken_ms = [_drag_ms(app, window, number % CALIPERS) for number in range(EDITS)]
        window.document.save(Path(folder) / "a.reading.json")
        window.close()
    return taken_ms


def _marked_window(folder: Path) -> MainWindow:
    pixels = np.full((SIZE_PX[1], SIZE_PX[0], 3), 250, dtype=np.uint8)
    picture = Picture(pixels, "a.png", None, "0" * 64)
    window = MainWindow()
    window.resize(1366, 740)
    window.show()
    window.document.open(picture, _marked_reading(picture))
    window.document.save(folder / "a.reading.json")
    window.view.zoom_actual()
    QTest.qWait(300)
    return window


def _marked_reading(picture: Picture) -> Reading:
    reading = new_reading(picture, now="2026-01-01T00:00:00+00:00", software_version="")
    reading = replace(reading, sheet_map=example_map())
    for number in range(CALIPERS):
        key, lead = _LINES[number % len(_LINES)]
        is_height = key.endswith("height")
        start = PicturePoint(120.0 + 30.0 * number, 300.0 + 5.0 * number)
        end = PicturePoint(start.x_px + 40.0, start.y_px - (60.0 if is_height else 0.0))
        kind = CaliperKind.HEIGHT if is_height else CaliperKind.TIME
        beat = 1 + number // len(_LINES)
        reading = reading.with_caliper(Caliper(number + 1, kind, start, end, key, lead, beat))
    return reading


def _drag_ms(app: QApplication, window: MainWindow, number: int) -> float:
    """Drag the second leg of a caliper; how long the release took."""
    before = window.document.reading
    assert before is not None
    caliper = before.calipers[number]
    view, left = window.view, Qt.MouseButton.LeftButton
    view.select([caliper.caliper_id])
    view.keep_in_sight(caliper.end)
    app.processEvents()
    place = view.view_px_from_picture_px(caliper.end)
    QTest.mouseMove(view.viewport(), place)
    QTest.mousePress(view.viewport(), left, pos=place)
    for step in range(1, _DRAG_PX + 1):
        QTest.mouseMove(view.viewport(), place + QPoint(step, -step))
        app.processEvents()
    begun = time.perf_counter()
    QTest.mouseRelease(view.viewport(), left, pos=place + QPoint(_DRAG_PX, -_DRAG_PX))
    app.processEvents()
    taken_ms = 1000.0 * (time.perf_counter() - begun)
    assert window.document.reading is not before, "the drag moved nothing"
    return taken_ms


if __name__ == "__main__":
    times_ms = measure_edits()
    print(
        f"{CALIPERS} calipers: median {statistics.median(times_ms):.0f} ms, "
        f"slowest of {EDITS} {max(times_ms):.0f} ms"
    )
