"""What happens when something goes wrong that nobody foresaw: a log and one sentence."""

from __future__ import annotations

import logging
import sys
import threading
from collections import deque
from collections.abc import Callable
from types import TracebackType

from PySide6.QtCore import QMessageLogContext, QtMsgType, qInstallMessageHandler

from imaging.errors import SmallsquareError

UNEXPECTED = (
    "Something went wrong; your reading is untouched. "
    "If it happens again, send 'Help > Copy technical details' to whoever looks after this program."
)
_LINES_KEPT = 400

_log = logging.getLogger("app.window")
_qt_log = logging.getLogger("app.window.qt")
_QT_LEVELS = {
    QtMsgType.QtDebugMsg: logging.DEBUG,
    QtMsgType.QtInfoMsg: logging.INFO,
    QtMsgType.QtWarningMsg: logging.WARNING,
    QtMsgType.QtCriticalMsg: logging.ERROR,
    QtMsgType.QtFatalMsg: logging.CRITICAL,
}


class MemoryLog(logging.Handler):
    """The last lines of the log, kept in memory only: nothing is written anywhere."""

    def __init__(self) -> None:
        super().__init__()
        self._lines: deque[str] = deque(maxlen=_LINES_KEPT)
        self.setFormatter(logging.Formatter("%(asctime)s %(levelname)s %(name)s: %(message)s"))

    def emit(self, record: logging.LogRecord) -> None:
        self._lines.append(self.format(record))

    def text(self) -> str:
        """The lines kept, oldest first."""
        return "\n".join(self._lines)


def sentence_for(error: BaseException) -> str:
    """One sentence for the reader; what was not foreseen goes to the log with its traceback."""
    if isinstance(error, SmallsquareError):
        return str(error)
    if isinstance(error, MemoryError):
        return "There is not enough memory for this; close other programs and try again."
    _log.error("unexpected", exc_info=error)
    return UNEXPECTED


def install_hooks(tell: Callable[[str], None]) -> None:
    """Send every exception that nothing caught to `tell` as a sentence, on any thread."""

    def hook(kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
        if issubclass(kind, KeyboardInterrupt):
            sys.__excepthook__(kind, error, trace)
            return
        tell(sentence_for(error.with_traceback(trace)))

    def thread_hook(args: threading.ExceptHookArgs) -> None:
        # A message box belongs to the GUI thread, so here only the log is written.
        if args.exc_value is not None:
            sentence_for(args.exc_value)

    sys.excepthook = hook
    threading.excepthook = thread_hook


def send_qt_messages_to_log() -> None:
    """Qt's own warnings become log lines."""
    qInstallMessageHandler(_qt_message)


def keep_log_in_memory() -> MemoryLog:
    """Collect the log in memory instead of printing it where the reader would see it."""
    memory = MemoryLog()
    root = logging.getLogger()
    root.addHandler(memory)
    root.setLevel(logging.INFO)
    return memory


def _qt_message(kind: QtMsgType, context: QMessageLogContext, message: str) -> None:
    _qt_log.log(_QT_LEVELS.get(kind, logging.WARNING), "%s (%s)", message, context.category)
