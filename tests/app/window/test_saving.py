"""Saving: names suggested, nothing replaced unasked, the picture never written to."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

import pytest
from PIL import Image
from pytestqt.qtbot import QtBot

from app.reading import load_reading
from app.reading.file_format import SUFFIX, ReadingFileError
from app.window.main_window import MainWindow
from app.window.saving import beside, with_suffix
from tests.app.window.bench import ScriptedAsk, measure, reading_of


@pytest.fixture
def marked(opened: MainWindow) -> MainWindow:
    """The window with a reading that has a QRS."""
    measure(opened, "qrs", "II", 300.0, 320.0)
    return opened


def test_the_first_save_asks_and_the_second_does_not(
    marked: MainWindow, ask: ScriptedAsk, page: Path
) -> None:
    path = page.with_name("sheet 1.reading.json")
    ask.files.append(path)
    marked.actions_table.action("save").trigger()
    assert ask.suggestions == [path]
    assert load_reading(path) == reading_of(marked)
    assert not marked.isWindowModified()
    measure(marked, "qt", "II", 300.0, 400.0)
    assert marked.isWindowModified()
    marked.actions_table.action("save").trigger()
    assert len(load_reading(path).calipers) == 2


@pytest.mark.parametrize(("answer", "calipers_in_file"), [("Cancel", 1), ("Save in its place", 2)])
def test_a_file_somebody_else_changed_is_not_replaced_unasked(
    marked: MainWindow, ask: ScriptedAsk, tmp_path: Path, answer: str, calipers_in_file: int
) -> None:
    path = tmp_path / "a.reading.json"
    ask.files.append(path)
    assert marked.saving.save()
    path.write_text(path.read_text(encoding="utf-8") + "\n", encoding="utf-8")
    measure(marked, "qt", "II", 300.0, 400.0)
    ask.answers.append(answer)
    assert marked.saving.save() == (answer != "Cancel")
    assert "somebody else" in ask.asked[-1]
    assert len(load_reading(path).calipers) == calipers_in_file


def test_what_is_being_typed_is_saved_too(
    marked: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    marked.worksheet.names.reader.setText("N. Reader")
    ask.files.append(tmp_path / "a.reading.json")
    marked.actions_table.action("save").trigger()
    assert load_reading(tmp_path / "a.reading.json").reader == "N. Reader"


def test_a_file_there_already_is_replaced_only_when_asked(
    marked: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    there = tmp_path / "old.reading.json"
    there.write_text("precious")
    free = tmp_path / "new.reading.json"
    ask.files += [there, free]
    ask.answers.append("Choose another name")
    assert marked.saving.save_as()
    assert there.read_text() == "precious"
    assert free.is_file()
    ask.files.append(there)
    ask.answers.append("Cancel")
    assert not marked.saving.save_as()
    assert there.read_text() == "precious"
    ask.files.append(there)
    ask.answers.append("Replace it")
    assert marked.saving.save_as()
    assert load_reading(there) == reading_of(marked)


def test_the_picture_is_never_written_to(
    qtbot: QtBot, marked: MainWindow, ask: ScriptedAsk, page: Path
) -> None:
    before = page.read_bytes()
    ask.files += [page, None]
    marked.saving.save_annotated()
    assert ask.told == [
        "That is the picture itself, which is never written to: choose a different name."
    ]
    assert page.read_bytes() == before


def test_the_annotated_picture_is_written_beside(
    qtbot: QtBot, marked: MainWindow, ask: ScriptedAsk, page: Path
) -> None:
    path = page.with_name("sheet 1.annotated.png")
    ask.files.append(path)
    with qtbot.waitSignal(marked.saving.saved, timeout=20000):
        marked.actions_table.action("save_annotated").trigger()
    assert ask.suggestions == [path]
    with Image.open(path) as image:
        assert image.width >= 960
        assert image.height >= 640


def test_a_file_that_came_meanwhile_is_left_and_that_is_said(
    qtbot: QtBot,
    marked: MainWindow,
    ask: ScriptedAsk,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """Between the question and the writing somebody else may write there."""
    path = tmp_path / "filed.png"
    ask.files.append(path)
    start = marked.jobs.start

    def somebody_is_quicker(*arguments: Any, **options: Any) -> None:
        path.write_bytes(b"precious")
        start(*arguments, **options)

    monkeypatch.setattr(marked.jobs, "start", somebody_is_quicker)
    with qtbot.waitSignal(marked.saving.failed, timeout=20000):
        marked.saving.save_annotated()
    assert path.read_bytes() == b"precious"
    notice = marked.notices.notice("trouble")
    assert notice is not None
    assert "is there already" in notice.label.text()


def test_what_cannot_be_written_while_closing_is_said(
    qtbot: QtBot,
    marked: MainWindow,
    ask: ScriptedAsk,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def full(*_arguments: Any, **_options: Any) -> None:
        raise ReadingFileError("a.png could not be written: the disk is full.")

    monkeypatch.setattr("app.chart.write_annotated", full)
    ask.files.append(tmp_path / "a.png")
    marked.saving.save_annotated()
    # Nobody may stop a file half-way, so nothing offers to.
    assert not marked.prompt.cancel.isVisible()
    ask.answers.append("Discard")
    assert marked.close()
    assert ask.told == ["a.png could not be written: the disk is full."]


def test_values_are_written_as_json_and_csv(
    marked: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    as_json, as_csv = tmp_path / "v.json", tmp_path / "v.csv"
    ask.files += [as_json, as_csv]
    marked.actions_table.action("save_json").trigger()
    marked.actions_table.action("save_csv").trigger()
    assert "qrs" in json.dumps(json.loads(as_json.read_text(encoding="utf-8")))
    with as_csv.open(encoding="utf-8-sig", newline="") as file:
        assert any("qrs" in row for row in csv.reader(file))


def test_a_folder_that_refuses_is_one_sentence(marked: MainWindow, ask: ScriptedAsk) -> None:
    ask.files.append(Path("/proc/nowhere.reading.json"))
    assert not marked.saving.save_as()
    notice = marked.notices.notice("trouble")
    assert notice is not None
    assert "could not be written" in notice.label.text()
    assert marked.document.path is None


def test_edits_that_no_journal_takes_are_said(
    marked: MainWindow, ask: ScriptedAsk, tmp_path: Path
) -> None:
    folder = tmp_path / "share"
    folder.mkdir()
    ask.files.append(folder / "a.reading.json")
    assert marked.saving.save_as()
    (folder / "a.reading.json").unlink()
    folder.rmdir()
    measure(marked, "qt", "II", 300.0, 400.0)
    notice = marked.notices.notice("journal")
    assert notice is not None
    assert "save it to another folder" in notice.label.text()


@pytest.mark.parametrize(
    ("typed", "suffix", "completed"),
    [
        ("a", SUFFIX, "a.reading.json"),
        ("a.json", SUFFIX, "a.reading.json"),
        ("a.reading.json", SUFFIX, "a.reading.json"),
        ("a.b", SUFFIX, "a.b.reading.json"),
        ("a", ".annotated.png", "a.annotated.png"),
        ("a.png", ".annotated.png", "a.png"),
        ("a.csv", ".values.csv", "a.csv"),
    ],
)
def test_endings_are_completed(typed: str, suffix: str, completed: str) -> None:
    assert with_suffix(Path("folder") / typed, suffix) == Path("folder") / completed


def test_a_further_page_has_a_name_of_its_own() -> None:
    assert beside(Path("a/scan.pdf"), SUFFIX) == Path("a/scan.reading.json")
    assert beside(Path("a/scan.pdf"), SUFFIX, page=2) == Path("a/scan.page3.reading.json")
