"""From command to first picture on the screen, beside a bare viewer of the same file.

Run it for the figures: ``python -m tests.bench.bench_startup [PICTURE]``. Each run is a fresh
process on an X server of its own; the two take turns, so that a busy machine slows both down.
"""

from __future__ import annotations

import statistics
import subprocess
import sys
import time
from dataclasses import dataclass
from pathlib import Path

from tests.bench.screen import virtual_screen

REPOSITORY = Path(__file__).resolve().parent.parent.parent
SAMPLE = REPOSITORY / "sample_scans" / "twelve_lead_25.jpg"
SCREEN = "1366x768x24"

# Both programs tell the time of the first paint that had the picture to paint.
_FIRST_PAINT = """
import os, time
from PySide6.QtCore import QEvent, QObject

class FirstPaint(QObject):
    def __init__(self, is_there):
        super().__init__()
        self._is_there = is_there
    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint and self._is_there():
            # Seen before the paint: let it happen, then tell the time.
            watched.removeEventFilter(self)
            watched.repaint()
            print(time.time(), flush=True)
            os._exit(0)
        return False
"""

_BARE_VIEWER = f"""
import sys
from PySide6.QtGui import QPixmap
from PySide6.QtWidgets import QApplication, QGraphicsScene, QGraphicsView
from PySide6.QtCore import Qt
{_FIRST_PAINT}
app = QApplication(sys.argv)
scene = QGraphicsScene()
view = QGraphicsView(scene)
scene.addPixmap(QPixmap(sys.argv[1]))
first = FirstPaint(lambda: True)
view.viewport().installEventFilter(first)
view.showMaximized()
view.fitInView(view.sceneRect(), Qt.AspectRatioMode.KeepAspectRatio)
app.exec()
"""

# The whole way of the command; only what `run` does after building the window is watched.
_SMALLSQUARE = f"""
import sys
from app.command_line import main
import app.window.main
def run(path):
    app_, window = app.window.main.build(path, sys.argv[:1])
    {_FIRST_PAINT.replace(chr(10), chr(10) + "    ")}
    first = FirstPaint(lambda: window.document.picture is not None)
    window.view.viewport().installEventFilter(first)
    window.showMaximized()
    return app_.exec()
app.window.main.run = run
sys.exit(main(sys.argv[1:]))
"""


@dataclass(frozen=True, slots=True)
class Startup:
    """Median seconds from command to first picture."""

    bare_s: float
    smallsquare_s: float

    @property
    def ratio(self) -> float:
        """Smallsquare's over the bare viewer's."""
        return self.smallsquare_s / self.bare_s


def measure_startup(picture: Path = SAMPLE, runs: int = 7) -> Startup:
    """Start both programs `runs` times in turn, after one start of each that fills caches."""
    seconds: dict[str, list[float]] = {_BARE_VIEWER: [], _SMALLSQUARE: []}
    with virtual_screen(SCREEN) as environment:
        for run in range(runs + 1):
            for script, times in seconds.items():
                taken_s = _seconds_to_first_picture(script, picture, environment)
                if run > 0:
                    times.append(taken_s)
    bare, smallsquare = (statistics.median(times) for times in seconds.values())
    return Startup(bare, smallsquare)


def _seconds_to_first_picture(script: str, picture: Path, environment: dict[str, str]) -> float:
    # As installed: compiled once, not at every start.
    environment = {k: v for k, v in environment.items() if k != "PYTHONDONTWRITEBYTECODE"}
    begun = time.time()
    finished = subprocess.run(
        [sys.executable, "-c", script, str(picture)],
        cwd=REPOSITORY,
        env=environment,
        capture_output=True,
        text=True,
        timeout=60.0,
        check=False,
    )
    assert finished.returncode == 0, finished.stderr
    return float(finished.stdout.split()[-1]) - begun


if __name__ == "__main__":
    measured = measure_startup(Path(sys.argv[1]) if len(sys.argv) > 1 else SAMPLE)
    print(
        f"bare viewer {measured.bare_s:.3f} s, smallsquare {measured.smallsquare_s:.3f} s, "
        f"ratio {measured.ratio:.2f}"
    )
