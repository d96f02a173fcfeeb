"""Long work off the GUI thread, one piece at a time, with a name and a way to give it up."""

from __future__ import annotations

import logging
from collections.abc import Callable
from functools import partial
from typing import Any, TypeVar

from PySide6.QtCore import QObject, QThread, QTimer, Signal

T = TypeVar("T")

_log = logging.getLogger(__name__)


class _Worker(QThread):
    """Runs one function; what it gave or raised is read after `finished`."""

    def __init__(
        self,
        work: Callable[[], Any],
        done: Callable[[Any], None],
        failed: Callable[[Exception], None],
        *,
        must_end: bool,
    ) -> None:
        super().__init__()
        self._work = work
        self.done = done
        self.failed = failed
        self.must_end = must_end
        self.result: Any = None
        self.error: Exception | None = None

    def run(self) -> None:
        try:
            self.result = self._work()
        except Exception as error:
            # Handed over to the GUI thread, which tells the reader.
            self.error = error


class Jobs(QObject):
    """At most one running job that anybody waits for.

    A job that was given up runs on to its end, since nothing may stop a thread half-way,
    but what it brings is dropped. A job that must end (it writes a file) is reported whatever
    has begun since.

    Signals
    -------
    busy_changed(str, bool)
        What is being done now, in words, and whether it may be given up; empty when nothing is.
    """

    busy_changed = Signal(str, bool)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._threads: set[_Worker] = set()
        self._awaited: _Worker | None = None

    def is_busy(self) -> bool:
        """Whether somebody waits for a job."""
        return self._awaited is not None

    def start(
        self,
        title: str,
        work: Callable[[], T],
        done: Callable[[T], None],
        failed: Callable[[Exception], None],
        *,
        delay_ms: int = 0,
        must_end: bool = False,
    ) -> None:
        """Run `work` on a thread, then `done` or `failed` on this one.

        A job still awaited is given up first. `delay_ms` lets what is waiting to be painted
        be painted first: Python threads take turns.
        """
        self.give_up()
        worker = _Worker(work, done, failed, must_end=must_end)
        # A bound method of a QObject, so that Qt calls it on this object's own thread.
        worker.finished.connect(self._sweep)
        self._threads.add(worker)
        self._awaited = worker
        self.busy_changed.emit(title, not must_end)
        if delay_ms:
            # Counted from the next turn of the event loop: at the start of the program there
            # is none yet, and building the window takes its time.
            later = partial(QTimer.singleShot, delay_ms, lambda: self._set_off(worker))
            QTimer.singleShot(0, later)
        else:
            worker.start()

    def give_up(self) -> None:
        """Wait no longer for the present job."""
        if self._awaited is not None:
            self._awaited = None
            self.busy_changed.emit("", False)

    def wait_for_all(self) -> None:
        """Give up and wait until every thread has ended: none may outlive the program."""
        self.give_up()
        for worker in list(self._threads):
            worker.wait()
        self._sweep()

    def _set_off(self, worker: _Worker) -> None:
        if worker is self._awaited:
            worker.start()
        else:
            self._threads.discard(worker)

    def _sweep(self) -> None:
        for worker in [worker for worker in self._threads if worker.isFinished()]:
            worker.wait()
            self._threads.discard(worker)
            self._end(worker)

    def _end(self, worker: _Worker) -> None:
        if worker is self._awaited:
            self.give_up()
        elif not worker.must_end:
            _log.info("a job that was given up has ended")
            return
        if worker.error is not None:
            worker.failed(worker.error)
        else:
            worker.done(worker.result)
