from __future__ import annotations

from dataclasses import replace

import pytest

from app.reading import History
from tests.app.reading_examples import example_reading

FIRST = example_reading()
SECOND = replace(FIRST, reader="second")
THIRD = replace(FIRST, reader="third")


@pytest.fixture
def history() -> History:
    return History.start(FIRST, saved=True)


def test_undo_and_redo_bring_back_the_same_readings(history: History) -> None:
    edited = history.edited(SECOND, "Name reader").edited(THIRD, "Name reader again")
    assert edited.undone().reading == SECOND
    assert edited.undone().undone().reading == FIRST
    assert edited.undone().undone().redone().reading == SECOND
    assert (edited.undo_label(), edited.redo_label()) == ("Name reader again", None)
    assert edited.undone().redo_label() == "Name reader again"


def test_the_ends_of_the_history_hold(history: History) -> None:
    assert history.undone() == history
    assert history.redone() == history
    assert history.undo_label() is None


def test_an_edit_that_changes_nothing_is_no_step(history: History) -> None:
    assert history.edited(FIRST, "Nothing") is history


def test_an_edit_after_undo_drops_what_was_undone(history: History) -> None:
    branched = history.edited(SECOND, "one").undone().edited(THIRD, "other")
    assert branched.redo_label() is None
    assert branched.undone().reading == FIRST


def test_a_run_with_one_merge_key_is_one_step(history: History) -> None:
    run = history.edited(SECOND, "Nudge", "leg 1").edited(THIRD, "Nudge", "leg 1")
    assert run.reading == THIRD
    assert run.undone().reading == FIRST


def test_another_key_or_a_settled_run_is_a_new_step(history: History) -> None:
    assert history.edited(SECOND, "N", "a").edited(THIRD, "N", "b").undone().reading == SECOND
    settled = history.edited(SECOND, "N", "a").settled().edited(THIRD, "N", "a")
    assert settled.undone().reading == SECOND


def test_modified_means_different_from_the_file(history: History) -> None:
    edited = history.edited(SECOND, "one")
    assert not history.is_modified()
    assert edited.is_modified()
    assert not edited.undone().is_modified()
    assert not edited.marked_saved(SECOND).is_modified()
    assert edited.marked_saved(SECOND).undone().is_modified()


def test_a_run_that_was_saved_midway_can_be_undone_to_what_was_saved(history: History) -> None:
    saved = history.edited(SECOND, "Nudge", "leg").marked_saved(SECOND)
    assert saved.edited(THIRD, "Nudge", "leg").undone().reading == SECOND


def test_a_reading_in_no_file_is_modified() -> None:
    assert History.start(FIRST, saved=False).is_modified()
