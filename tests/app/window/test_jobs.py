"""Work off the GUI thread."""

from __future__ import annotations

import threading

import pytest
from pytestqt.qtbot import QtBot

from app.window.jobs import Jobs


def never(_what: object) -> None:
    """A way out that must not be taken."""
    pytest.fail("this must not be called")


def test_work_is_done_elsewhere_and_handed_over_here(qtbot: QtBot) -> None:
    jobs = Jobs()
    threads: list[threading.Thread] = []
    titles: list[str] = []
    jobs.busy_changed.connect(lambda title, _: titles.append(title))
    done: list[threading.Thread] = []
    jobs.start(
        "Working",
        lambda: threads.append(threading.current_thread()),
        lambda _result: done.append(threading.current_thread()),
        never,
    )
    assert jobs.is_busy()
    qtbot.waitUntil(lambda: bool(done))
    assert threads[0] is not threading.current_thread()
    assert done == [threading.current_thread()]
    assert titles == ["Working", ""]


def test_what_is_raised_is_handed_over(qtbot: QtBot) -> None:
    jobs = Jobs()
    errors: list[Exception] = []

    def fail() -> None:
        raise ValueError("inside")

    jobs.start("Working", fail, never, errors.append)
    qtbot.waitUntil(lambda: bool(errors))
    assert isinstance(errors[0], ValueError)
    assert not jobs.is_busy()


def test_what_a_job_given_up_brings_is_dropped(qtbot: QtBot) -> None:
    jobs = Jobs()
    go_on = threading.Event()
    done: list[str] = []
    jobs.start("Slow", lambda: go_on.wait(20.0), never, never)
    jobs.start("Quick", lambda: "quick", done.append, never)
    go_on.set()
    qtbot.waitUntil(lambda: done == ["quick"])
    jobs.wait_for_all()
    qtbot.wait(1)
    assert done == ["quick"]


def test_a_job_that_must_end_is_reported_whatever_has_begun_since(qtbot: QtBot) -> None:
    jobs = Jobs()
    go_on = threading.Event()
    may_be_given_up: list[bool] = []
    jobs.busy_changed.connect(lambda title, may: may_be_given_up.append(may) if title else None)
    done: list[str] = []
    jobs.start("Writing", lambda: "written" * go_on.wait(20.0), done.append, never, must_end=True)
    jobs.start("Quick", lambda: "quick", done.append, never)
    assert may_be_given_up == [False, True]
    qtbot.waitUntil(lambda: done == ["quick"])
    go_on.set()
    jobs.wait_for_all()
    assert done == ["quick", "written"]


def test_waiting_for_all_leaves_no_thread(qtbot: QtBot) -> None:
    jobs = Jobs()
    before = threading.active_count()
    jobs.start("Slow", lambda: threading.Event().wait(0.05), never, never)
    jobs.wait_for_all()
    assert not jobs.is_busy()
    qtbot.waitUntil(lambda: threading.active_count() <= before)
