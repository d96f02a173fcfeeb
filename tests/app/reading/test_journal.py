from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app.reading import ReadingFileError
from app.reading.journal import append_to_journal, discard_journal, journal_path, read_journal
from tests.app.reading_examples import example_reading


@pytest.fixture
def reading_path(tmp_path: Path) -> Path:
    return tmp_path / "sheet.reading.json"


def test_the_last_edit_is_offered(reading_path: Path) -> None:
    append_to_journal(reading_path, example_reading())
    later = replace(example_reading(), reader="later")
    append_to_journal(reading_path, later)
    assert read_journal(reading_path) == later
    assert later.calipers[0].start.step_px > 0.0


def test_a_line_cut_short_loses_only_the_last_edit(reading_path: Path) -> None:
    append_to_journal(reading_path, example_reading())
    append_to_journal(reading_path, replace(example_reading(), reader="later"))
    path = journal_path(reading_path)
    path.write_bytes(path.read_bytes()[:-30])
    assert read_journal(reading_path) == example_reading()


def test_a_journal_of_rubbish_or_none_offers_nothing(reading_path: Path) -> None:
    assert read_journal(reading_path) is None
    journal_path(reading_path).write_bytes(b'\xff\n{"picture": 1}\n')
    assert read_journal(reading_path) is None


def test_an_edit_after_a_line_cut_short_is_kept(reading_path: Path) -> None:
    append_to_journal(reading_path, example_reading())
    path = journal_path(reading_path)
    path.write_bytes(path.read_bytes()[:-30])
    later = replace(example_reading(), reader="later")
    append_to_journal(reading_path, later)
    assert read_journal(reading_path) == later


def test_discarding_twice_is_no_error(reading_path: Path) -> None:
    append_to_journal(reading_path, example_reading())
    discard_journal(reading_path)
    discard_journal(reading_path)
    assert read_journal(reading_path) is None


def test_a_folder_that_refuses_is_a_sentence(tmp_path: Path) -> None:
    with pytest.raises(ReadingFileError, match="save it to another folder"):
        append_to_journal(tmp_path / "gone" / "a.reading.json", example_reading())
