from __future__ import annotations

import hashlib
from dataclasses import replace
from pathlib import Path

import pytest

from app.reading import PictureIdentity, PictureState, check_picture

CONTENT = b"the bytes of a picture"
IDENTITY = PictureIdentity("sheet.png", hashlib.sha256(CONTENT).hexdigest(), (40, 30))


@pytest.fixture
def reading_path(tmp_path: Path) -> Path:
    return tmp_path / "sheet.reading.json"


def test_the_same_bytes_beside_the_reading(reading_path: Path) -> None:
    (reading_path.parent / "sheet.png").write_bytes(CONTENT)
    check = check_picture(IDENTITY, reading_path)
    assert check.state is PictureState.SAME
    assert check.path == reading_path.parent / "sheet.png"


def test_the_noted_way_is_tried_and_a_changed_copy_beside_does_not_mislead(
    reading_path: Path,
) -> None:
    (reading_path.parent / "sheet.png").write_bytes(b"another")
    (reading_path.parent / "scans").mkdir()
    (reading_path.parent / "scans" / "sheet.png").write_bytes(CONTENT)
    identity = replace(IDENTITY, relative_path="scans/sheet.png")
    check = check_picture(identity, reading_path)
    assert (check.state, check.path.parent.name) == (PictureState.SAME, "scans")


def test_other_bytes_are_a_changed_picture(reading_path: Path) -> None:
    (reading_path.parent / "sheet.png").write_bytes(CONTENT + b"!")
    check = check_picture(IDENTITY, reading_path)
    assert check.state is PictureState.CHANGED
    assert "has changed" in check.sentence


def test_no_file_or_a_folder_of_that_name_is_a_missing_picture(reading_path: Path) -> None:
    assert check_picture(IDENTITY, reading_path).state is PictureState.MISSING
    (reading_path.parent / "sheet.png").mkdir()
    check = check_picture(IDENTITY, reading_path)
    assert check.state is PictureState.MISSING
    assert "no longer where it was" in check.sentence
