"""Where something may be written."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from app.chart import FileExistsRefused, TargetRefused
from app.chart.targets import check_target
from app.reading import PictureIdentity, save_reading
from imaging import Picture, SmallsquareError
from tests.app.chart.chart_examples import picture_file, reading_of


@pytest.fixture
def picture(tmp_path: Path) -> Picture:
    return picture_file(tmp_path / "scan.png", (64, 48))


def refusal(path: Path, picture: Picture, *, overwrite: bool = True, known: bool = True) -> str:
    """The sentence that refuses a place; empty where it may be written."""
    try:
        check_target(
            path,
            PictureIdentity.of(picture),
            ending=".png",
            overwrite=overwrite,
            picture_path=picture.path if known else None,
        )
    except SmallsquareError as error:
        return str(error)
    return ""


def test_a_free_name_may_be_written(tmp_path: Path, picture: Picture) -> None:
    assert refusal(tmp_path / "out.png", picture, overwrite=False) == ""
    assert refusal(tmp_path / "OUT.PNG", picture, overwrite=False) == ""


def test_what_is_there_may_be_replaced_only_when_said(tmp_path: Path, picture: Picture) -> None:
    there = tmp_path / "out.png"
    there.write_bytes(b"precious")
    with pytest.raises(FileExistsRefused, match=r"out\.png is there already"):
        check_target(there, PictureIdentity.of(picture), ending=".png")
    assert refusal(there, picture) == ""


def test_a_link_that_leads_nowhere_is_something_there(tmp_path: Path, picture: Picture) -> None:
    link = tmp_path / "out.png"
    link.symlink_to(tmp_path / "gone.png")
    assert "is there already" in refusal(link, picture, overwrite=False)


def test_a_link_in_a_circle_is_refused_without_an_error(tmp_path: Path, picture: Picture) -> None:
    link = tmp_path / "out.png"
    link.symlink_to(link)
    assert "is there already" in refusal(link, picture, overwrite=False)


@pytest.mark.parametrize(
    "lead_to", [Path.symlink_to, Path.hardlink_to, lambda link, target: shutil.copy(target, link)]
)
@pytest.mark.parametrize("known", [True, False])
def test_the_picture_is_refused_under_every_name(
    tmp_path: Path, picture: Picture, lead_to: Callable[[Path, Path], object], known: bool
) -> None:
    assert picture.path is not None
    other = tmp_path / "other.png"
    lead_to(other, picture.path)
    for path in (picture.path, other, tmp_path / "nowhere" / ".." / "scan.png"):
        if path.exists():
            assert "the picture itself" in refusal(path, picture, known=known)


def test_the_picture_is_refused_even_if_it_has_changed(tmp_path: Path, picture: Picture) -> None:
    assert picture.path is not None
    picture.path.write_bytes(b"another picture now")
    assert "the picture itself" in refusal(picture.path, picture)
    # Told by its content alone it is no longer the one that was read.
    assert refusal(picture.path, picture, known=False) == ""


def test_a_reading_is_refused_by_name_and_by_content(tmp_path: Path, picture: Picture) -> None:
    reading = tmp_path / "scan.reading.json"
    assert "reading" in refusal(reading, picture)
    save_reading(reading_of(picture), reading)
    renamed = tmp_path / "renamed.png"
    reading.rename(renamed)
    with pytest.raises(TargetRefused, match="reading"):
        check_target(renamed, PictureIdentity.of(picture), ending=".png", overwrite=True)


def test_another_ending_is_refused(tmp_path: Path, picture: Picture) -> None:
    assert r"ends in .png" in refusal(tmp_path / "out.jpg", picture)
    assert r"ends in .png" in refusal(tmp_path / "png", picture)


def test_a_file_that_may_not_be_read_is_still_a_file(
    tmp_path: Path, picture: Picture, monkeypatch: pytest.MonkeyPatch
) -> None:
    there = tmp_path / "out.png"
    there.write_bytes(b"precious")

    def refuse(*_: object) -> None:
        raise PermissionError("not for you")

    monkeypatch.setattr(Path, "open", refuse)
    assert "is there already" in refusal(there, picture, overwrite=False)
    assert refusal(there, picture) == ""
