from __future__ import annotations

import copy
import json
import os
import stat
from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.reading import Reading, ReadingFileError, file_format, load_reading, save_reading
from app.reading.codec import reading_from_json, reading_to_json
from app.reading.file_format import reading_from_bytes
from tests.app.reading_examples import example_reading


@pytest.fixture
def saved(tmp_path: Path) -> Path:
    path = tmp_path / "sheet 1.reading.json"
    save_reading(example_reading(), path)
    return path


def test_a_saved_reading_comes_back_identical(saved: Path) -> None:
    assert load_reading(saved) == example_reading()


def test_a_reading_without_map_or_chest_gain_comes_back_identical(tmp_path: Path) -> None:
    reading = example_reading()
    bare = replace(
        reading,
        sheet_map=None,
        calibration=replace(reading.calibration, chest_gain_mm_per_mv=None),
    )
    save_reading(bare, tmp_path / "bare.reading.json")
    assert load_reading(tmp_path / "bare.reading.json") == bare


@given(
    st.floats(-1e6, 1e6),
    st.floats(-1e6, 1e6),
    st.text(st.characters(exclude_categories=["Cs"]), max_size=20),
)
def test_any_place_and_name_survive_exactly(x_px: float, y_px: float, name: str) -> None:
    reading = example_reading()
    caliper = reading.calipers[0]
    moved = replace(caliper, start=replace(caliper.start, x_px=x_px, y_px=y_px))
    reading = replace(reading.with_caliper(moved), reader=name)
    text = json.dumps(reading_to_json(reading))
    assert reading_from_json(json.loads(text)) == reading


def test_unknown_fields_at_every_level_survive_a_round_trip(saved: Path) -> None:
    body = json.loads(saved.read_text("utf-8"))
    levels = [
        body,
        body["picture"],
        body["sheet_map"],
        body["calibration"],
        body["calibration"]["paper_speed_mm_per_s"],
        body["calipers"][1],
        body["hand_figures"][0],
    ]
    for index, level in enumerate(levels):
        level["from_a_later_version"] = {"level": index}
    saved.write_text(json.dumps(body), "utf-8")
    save_reading(load_reading(saved), saved)
    assert json.loads(saved.read_text("utf-8")) == body


def test_the_step_of_each_mark_is_kept_and_none_is_read_from_older_files(saved: Path) -> None:
    body = json.loads(saved.read_text("utf-8"))
    first = body["calipers"][0]
    assert (first["start_step_px"], first["end_step_px"]) == (2.5, 0.25)
    for name in ("start_step_px", "end_step_px"):
        first.pop(name)
    saved.write_text(json.dumps(body), "utf-8")
    older, untouched = load_reading(saved).calipers
    assert (older.start.step_px, older.end.step_px) == (0.0, 0.0)
    assert (older.start.x_px, older.extra) == (100.0, {})
    assert (untouched.start.step_px, untouched.end.step_px) == (2.5, 0.25)


def test_the_way_to_the_picture_is_noted_but_makes_no_other_reading(tmp_path: Path) -> None:
    (tmp_path / "scans").mkdir()
    path = tmp_path / "sheet.reading.json"
    save_reading(example_reading(), path, tmp_path / "scans" / "sheet éñ 1.png")
    loaded = load_reading(path)
    assert loaded.picture.relative_path == os.path.join("scans", "sheet éñ 1.png")  # noqa: PTH118
    assert loaded == example_reading()


def test_saving_replaces_the_file_whole_and_leaves_nothing_else(saved: Path) -> None:
    saved.chmod(0o640)
    save_reading(replace(example_reading(), reader="another"), saved)
    assert load_reading(saved).reader == "another"
    assert list(saved.parent.iterdir()) == [saved]
    assert stat.S_IMODE(saved.stat().st_mode) == 0o640


def test_a_failed_write_leaves_the_old_file_and_no_scrap(
    saved: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = saved.read_bytes()

    def full_disk(handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(file_format.os, "fsync", full_disk)
    with pytest.raises(ReadingFileError, match="could not be written"):
        save_reading(replace(example_reading(), reader="another"), saved)
    assert saved.read_bytes() == before
    assert list(saved.parent.iterdir()) == [saved]


def test_a_folder_that_is_not_there_is_a_sentence(tmp_path: Path) -> None:
    with pytest.raises(ReadingFileError, match="could not be written"):
        save_reading(example_reading(), tmp_path / "gone" / "a.reading.json")


def test_a_reading_cannot_be_saved_over_a_picture(tmp_path: Path) -> None:
    picture = tmp_path / "sheet.png"
    picture.write_bytes(b"pixels")
    with pytest.raises(ReadingFileError, match=r"ends in \.reading\.json"):
        save_reading(example_reading(), picture)
    assert picture.read_bytes() == b"pixels"


Change = Callable[[dict[str, Any]], object]


@pytest.mark.parametrize(
    ("change", "named"),
    [
        (lambda b: b.pop("calipers"), "'calipers' is not there"),
        (lambda b: b.update(calipers={}), "'calipers' is not a list"),
        (lambda b: b["calipers"][0].update(start_px=[1.0]), r"start_px' is not a pair"),
        (lambda b: b["calipers"][0].update(start_px=["1", 2]), r"start_px\[0\]' is not a number"),
        (lambda b: b["calipers"][0].update(end_step_px=-1), "end_step_px' is not zero or more"),
        (lambda b: b["calipers"][0].update(end_step_px="1"), "end_step_px' is not a number"),
        (lambda b: b["calipers"][0].update(kind="ruler"), "kind of caliper"),
        (lambda b: b["calipers"][0].update(teeth=1), "two teeth"),
        (lambda b: b["calipers"][0].update(teeth=2.5), "whole number"),
        (lambda b: b["calipers"][0].update(caliper_id=2), "numbered one by one"),
        (lambda b: b.update(next_caliper_id=1), "numbered one by one"),
        (lambda b: b.update(reader=5), "'reader' is not text"),
        (lambda b: b.update(picture=None), "'picture' is not an object"),
        (lambda b: b["picture"].update(size_px=[0, 5]), "a width and a height"),
        (lambda b: b["picture"].update(size_px=[1200, 901]), "the size of the picture"),
        (lambda b: b["sheet_map"].update(scale_is_certain=1), "true or false"),
        (lambda b: b["sheet_map"].update(y_step_px=[8.0, 0.01]), "parallel"),
        (lambda b: b["sheet_map"].update(covariance=[[1.0]]), "shape"),
        (lambda b: b["sheet_map"]["coverage"].update(rows=["10", "1"]), "equal rows"),
        (lambda b: b["calibration"]["gain_mm_per_mv"].update(evidence="guess"), "evidence"),
        (lambda b: b["calibration"]["gain_mm_per_mv"].update(value=0), "positive number"),
        (lambda b: b["calibration"]["gain_mm_per_mv"].update(value=True), "a number"),
        (lambda b: b.update(schema_version=0), "a known file version"),
        (lambda b: b.update(schema_version=True), "a known file version"),
    ],
)
def test_a_damaged_file_is_named_and_left_untouched(
    saved: Path, change: Change, named: str
) -> None:
    body = copy.deepcopy(json.loads(saved.read_text("utf-8")))
    change(body)
    saved.write_text(json.dumps(body), "utf-8")
    before = saved.read_bytes()
    with pytest.raises(ReadingFileError, match=named):
        load_reading(saved)
    assert saved.read_bytes() == before


def test_a_newer_file_is_refused_by_name(saved: Path) -> None:
    body = json.loads(saved.read_text("utf-8"))
    body.update(schema_version=2, software_version="Smallsquare 9.0")
    with pytest.raises(ReadingFileError, match=r"newer Smallsquare \(Smallsquare 9\.0"):
        reading_from_bytes(json.dumps(body).encode(), "a.reading.json")


@pytest.mark.parametrize(
    "data",
    [b"", b"\xff\xd8\xff\xe0 picture", b"[1, 2]", b'{"kind": "else"}', b"[" * 100_000],
)
def test_a_foreign_file_is_said_to_be_no_reading(data: bytes) -> None:
    with pytest.raises(ReadingFileError, match="is not a Smallsquare reading"):
        reading_from_bytes(data, "a.reading.json")


def test_a_file_cut_short_is_said_to_be_damaged(saved: Path) -> None:
    with pytest.raises(ReadingFileError, match="is damaged"):
        reading_from_bytes(saved.read_bytes()[:-40], "a.reading.json")


def test_nan_is_no_number(saved: Path) -> None:
    text = saved.read_text("utf-8").replace("0.001", "NaN")
    with pytest.raises(ReadingFileError, match="is damaged"):
        reading_from_bytes(text.encode(), "a.reading.json")


@given(st.data())
def test_a_byte_changed_anywhere_is_a_reading_or_a_sentence(data: st.DataObject) -> None:
    body = {
        "kind": "smallsquare reading",
        "schema_version": 1,
        **reading_to_json(example_reading()),
    }
    raw = bytearray(json.dumps(body).encode())
    place = data.draw(st.integers(0, len(raw) - 1))
    raw[place] = data.draw(st.integers(0, 255))
    # Any other exception than the one sentence fails the test.
    with suppress(ReadingFileError):
        assert isinstance(reading_from_bytes(bytes(raw), "a.reading.json"), Reading)


def test_a_missing_file_and_a_folder_are_sentences(tmp_path: Path) -> None:
    for path in (tmp_path / "none.reading.json", tmp_path):
        with pytest.raises(ReadingFileError, match="cannot be read"):
            load_reading(path)


def test_a_huge_file_is_not_read(saved: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(file_format, "LARGEST_FILE_BYTES", 100)
    with pytest.raises(ReadingFileError, match="too large"):
        load_reading(saved)


def test_a_picture_on_another_drive_has_no_way_to_it(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def another_drive(path: Path, start: Path) -> str:
        raise ValueError("path is on mount 'C:', start on mount 'D:'")

    monkeypatch.setattr(file_format.os.path, "relpath", another_drive)
    save_reading(example_reading(), tmp_path / "a.reading.json", tmp_path / "a.png")
    assert load_reading(tmp_path / "a.reading.json").picture.relative_path is None


def test_where_folders_cannot_be_opened_the_rename_is_enough(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    synced: list[int] = []
    monkeypatch.setattr(file_format.os, "fsync", synced.append)
    file_format.write_whole(tmp_path / "a.reading.json", b"{}")
    with_folder = len(synced)
    monkeypatch.setattr(file_format, "_CAN_SYNC_FOLDERS", False)
    file_format.write_whole(tmp_path / "a.reading.json", b"{}")
    assert (with_folder, len(synced)) == (2, 3)
