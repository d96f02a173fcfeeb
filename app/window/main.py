"""Start the window. Nothing heavy is imported here: see `run`."""

from __future__ import annotations

import gc
import sys
import threading
from pathlib import Path
from typing import TYPE_CHECKING

from app.reading.file_format import SUFFIX
from imaging.picture import Picture, open_picture

if TYPE_CHECKING:
    from PySide6.QtWidgets import QApplication

    from app.window.main_window import MainWindow

_COLLECT_AFTER_MS = 1500


class EarlyPicture:
    """A picture being decoded while Qt is still being loaded."""

    def __init__(self, path: Path) -> None:
        self._path = path
        self._picture: Picture | None = None
        self._error: Exception | None = None
        self._thread = threading.Thread(target=self._decode, name="early picture")
        self._thread.start()

    def is_there_within(self, patience_s: float) -> bool:
        """Wait a little; whether `result` would answer at once now."""
        self._thread.join(patience_s)
        return not self._thread.is_alive()

    def result(self) -> Picture:
        """Wait for the picture; raises what `open_picture` raised."""
        self._thread.join()
        if self._error is not None:
            raise self._error
        assert self._picture is not None  # one of the two is set when the thread has ended
        return self._picture

    def _decode(self) -> None:
        try:
            self._picture = open_picture(self._path)
        except Exception as error:
            # Raised again where the window waits for the picture.
            self._error = error


def build(path: str | None, arguments: list[str]) -> tuple[QApplication, MainWindow]:
    """Make the application and its window, with `path` on its way in."""
    # Starting makes many objects and hardly any garbage: looking for it costs a twentieth.
    gc.disable()
    file = None if path is None else Path(path).absolute()
    is_picture = file is not None and not file.name.endswith(SUFFIX)
    early = EarlyPicture(file) if file is not None and is_picture else None
    from PySide6.QtCore import QTimer
    from PySide6.QtWidgets import QApplication

    from app.window import faults
    from app.window.main_window import MainWindow
    from app.window.theme import apply_theme

    memory_log = faults.keep_log_in_memory()
    faults.send_qt_messages_to_log()
    app = QApplication(arguments)
    app.setApplicationName("Smallsquare")
    apply_theme(app)
    window = MainWindow(memory_log=memory_log)
    faults.install_hooks(window.show_fault)
    if file is not None:
        window.opening.open_path(file, early)
    QTimer.singleShot(_COLLECT_AFTER_MS, _collect_again)
    return app, window


def _collect_again() -> None:
    """What is there now stays, so it need not be looked through again and again."""
    gc.freeze()
    gc.enable()


def run(path: str | None) -> int:
    """Open the window, with a picture or reading if one is named; returns the exit code."""
    app, window = build(path, sys.argv[:1])
    window.showMaximized()
    code = app.exec()
    # A desktop session that ends closes no windows, but no thread may outlive the program.
    window.jobs.wait_for_all()
    return code
