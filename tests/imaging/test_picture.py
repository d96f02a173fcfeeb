"""Opening a file: what the picture says of itself, and one sentence for everything refused."""

from __future__ import annotations

import hashlib
import os
import tracemalloc
from dataclasses import FrozenInstanceError
from pathlib import Path

import numpy as np
import pytest
from PIL import Image

import imaging.picture
from imaging import Picture, PictureError, SmallsquareError, open_picture, picture_from_bytes
from tests.imaging.picture_files import (
    heic,
    jpeg,
    locked_pdf,
    one_of_each,
    pdf,
    pdf_drawing,
    png_of_size,
    rgb_image,
    saved,
    scene,
    tiff,
)


def refusal(data: bytes, name: str = "page.png", page: int = 0) -> str:
    """The sentence a file is refused with; it is one, and names the file."""
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(data, name, page)
    return checked_sentence(caught.value, name)


def checked_sentence(error: PictureError, name: str) -> str:
    sentence = str(error)
    assert sentence.startswith(f"“{name}” ")
    assert sentence.endswith(".")
    assert ". " not in sentence
    assert "\n" not in sentence
    assert len(sentence) < 250
    assert sentence.isprintable()
    return sentence


@pytest.fixture
def page_file(tmp_path: Path) -> Path:
    path = tmp_path / "page.png"
    path.write_bytes(saved(rgb_image(), "PNG"))
    return path


# --- what is right


def test_a_picture_holds_the_files_pixels_and_says_where_they_came_from(page_file: Path) -> None:
    picture = open_picture(page_file)
    np.testing.assert_array_equal(picture.pixels, scene())
    assert picture.file_name == "page.png"
    assert picture.path == page_file
    assert picture.sha256 == hashlib.sha256(page_file.read_bytes()).hexdigest()
    assert (picture.page, picture.page_count, picture.notes) == (0, 1, ())
    assert picture.size_px == (96, 64)


def test_a_path_may_be_text(page_file: Path) -> None:
    assert open_picture(str(page_file)).path == page_file


@pytest.mark.parametrize("kind", one_of_each())
def test_pixels_of_every_kind_are_contiguous_read_only_bytes(kind: str) -> None:
    pixels = picture_from_bytes(one_of_each()[kind], kind).pixels
    assert pixels.dtype == np.uint8
    assert pixels.ndim == 3
    assert pixels.shape[2] == 3
    assert pixels.flags.c_contiguous
    with pytest.raises(ValueError, match="read-only"):
        pixels[0, 0, 0] = 1


def test_a_picture_is_not_changed_afterwards(page_file: Path) -> None:
    picture = open_picture(page_file)
    with pytest.raises(FrozenInstanceError):
        picture.sha256 = ""  # type: ignore[misc]


def test_a_pasted_picture_has_a_name_and_a_hash_but_no_path() -> None:
    data = jpeg()
    picture = picture_from_bytes(data, "folder/pasted.jpg")
    assert (picture.file_name, picture.path) == ("pasted.jpg", None)
    assert picture.sha256 == hashlib.sha256(data).hexdigest()


@pytest.mark.parametrize("kind", one_of_each())
def test_the_content_says_what_a_file_is_and_not_its_name(kind: str, tmp_path: Path) -> None:
    wrongly_named = tmp_path / "page.txt"
    wrongly_named.write_bytes(one_of_each()[kind])
    assert isinstance(open_picture(wrongly_named), Picture)


@pytest.mark.parametrize(
    "name",
    ["ЭКГ пациента № 1.png", "心电图 第一页.png", "تخطيط القلب.png", "a  b 'c' \"d\" %20 #1.png"],
)
def test_names_with_spaces_and_foreign_letters_open(name: str, tmp_path: Path) -> None:
    for kind in ("png", "jpeg", "pdf", "heic", "tiff, LZW"):
        path = tmp_path / name
        path.write_bytes(one_of_each()[kind])
        assert open_picture(path).file_name == name


def test_a_file_is_only_read(page_file: Path) -> None:
    before, times = page_file.read_bytes(), page_file.stat()
    open_picture(page_file)
    assert page_file.read_bytes() == before
    assert page_file.stat().st_mtime_ns == times.st_mtime_ns
    assert list(page_file.parent.iterdir()) == [page_file]


# --- what is refused before it is read


def opening(path: Path) -> str:
    """The sentence for a path, and proof that nothing was written beside it."""
    there_before = sorted(path.parent.iterdir()) if path.parent.is_dir() else []
    with pytest.raises(PictureError) as caught:
        open_picture(path)
    assert (sorted(path.parent.iterdir()) if path.parent.is_dir() else []) == there_before
    return checked_sentence(caught.value, path.name)


def test_a_missing_file_is_refused(tmp_path: Path) -> None:
    assert "was not found" in opening(tmp_path / "gone.png")
    assert "was not found" in opening(tmp_path / "no folder" / "gone.png")


def test_a_folder_is_refused(tmp_path: Path) -> None:
    (tmp_path / "scans").mkdir()
    assert "is a folder" in opening(tmp_path / "scans")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="this system has no named pipes")
def test_a_pipe_is_refused_without_waiting_for_a_writer(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.png")
    assert "is not an ordinary file" in opening(tmp_path / "pipe.png")


@pytest.mark.skipif(
    not hasattr(os, "geteuid") or os.geteuid() == 0, reason="the superuser may read every file"
)
def test_a_file_without_permission_is_refused(page_file: Path) -> None:
    page_file.chmod(0)
    assert "may not be read by this user account" in opening(page_file)


@pytest.mark.parametrize(
    ("error", "words"),
    [
        (PermissionError(13, "denied"), "may not be read by this user account"),
        (OSError(5, "Input/output error"), "could not be read; check the disk"),
    ],
)
def test_a_file_the_system_will_not_give_is_refused(
    error: OSError, words: str, page_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_: object, **__: object) -> None:
        raise error

    monkeypatch.setattr(Path, "open", refuse)
    assert words in opening(page_file)


def test_a_path_no_system_could_have_is_refused() -> None:
    with pytest.raises(PictureError, match="could not be read"):
        open_picture("pa\0ge.png")


def test_a_file_of_more_than_a_gibibyte_is_refused_unread(tmp_path: Path) -> None:
    path = tmp_path / "huge.tif"
    with path.open("wb") as file:
        file.truncate((1 << 30) + 1)  # a hole: no disk is used
    tracemalloc.start()
    assert "is larger than 1 GiB" in opening(path)
    peak_bytes = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    assert peak_bytes < 1 << 20


def test_bytes_and_a_file_that_grew_are_held_to_the_same_limit(
    page_file: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(imaging.picture, "MAX_FILE_BYTES", 200)
    assert "is larger than 1 GiB" in refusal(bytes(201), "pasted.png")
    assert page_file.stat().st_size > 200
    real_stat = page_file.stat()
    smaller = os.stat_result((*real_stat[:6], 100, *real_stat[7:]))
    monkeypatch.setattr(Path, "stat", lambda *_, **__: smaller)
    with pytest.raises(PictureError, match="is larger than 1 GiB"):
        open_picture(page_file)


# --- what is refused for its content


@pytest.mark.parametrize("name", ["page.png", "page.jpg", "page.tif", "page.pdf", "page.heic"])
def test_an_empty_file_is_refused(name: str, tmp_path: Path) -> None:
    (tmp_path / name).touch()
    assert "is empty (0 bytes)" in opening(tmp_path / name)


@pytest.mark.parametrize(
    "content",
    [
        b"Rate 72, PR 160 ms.\n",
        b"\0",
        b"\xff\xd8",
        b"BM",
        b"RIFF\0\0\0\0WAVE",
        b"\x89PNG",
        b"<svg xmlns='http://www.w3.org/2000/svg'/>",
        b"\0\0\0\x18ftypisom\0\0\0\0isommp42",
    ],
)
def test_text_and_other_kinds_of_file_are_refused(content: bytes) -> None:
    assert "is not a picture this program can open; choose a JPEG, PNG" in refusal(content)


def test_a_picture_of_one_pixel_is_refused() -> None:
    for kind in ("PNG", "JPEG", "TIFF", "WEBP", "GIF", "BMP"):
        assert "has only 1 × 1 pixels" in refusal(saved(Image.new("RGB", (1, 1)), kind))


def small_files(width_px: int, height_px: int) -> dict[str, bytes]:
    image = rgb_image().resize((width_px, height_px))
    kinds = ("PNG", "JPEG", "TIFF", "WEBP", "GIF", "BMP")
    files = {kind: saved(image, kind) for kind in kinds}
    return files | {"HEIC": heic(image), "PDF": pdf(image)}


@pytest.mark.parametrize("kind", ["PNG", "JPEG", "TIFF", "WEBP", "GIF", "BMP", "HEIC", "PDF"])
def test_each_side_needs_32_pixels(kind: str) -> None:
    assert "each side needs at least 32" in refusal(small_files(31, 90)[kind])
    assert "each side needs at least 32" in refusal(small_files(90, 31)[kind])
    assert picture_from_bytes(small_files(32, 32)[kind], kind).size_px == (32, 32)


def peak_bytes_of_refusing(data: bytes, words: str) -> int:
    refusal(b"")  # whatever is loaded once is loaded now
    tracemalloc.start()
    try:
        assert words in refusal(data)
        return tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()


def headers_of_size(width_px: int, height_px: int) -> dict[str, bytes]:
    """Files of a few hundred bytes that promise a size."""
    jpeg_file = jpeg()
    frame = jpeg_file.find(b"\xff\xc0")
    sides = height_px.to_bytes(2, "big") + width_px.to_bytes(2, "big")
    tiff_file = bytearray(tiff(scene(), photometric="rgb"))
    for tag, value in ((256, width_px), (257, height_px)):
        at = tiff_file.find(tag.to_bytes(2, "little") + b"\4\0\1\0\0\0") + 8
        tiff_file[at : at + 4] = value.to_bytes(4, "little")
    gif = bytearray(saved(rgb_image(), "GIF"))
    gif[6:10] = width_px.to_bytes(2, "little") + height_px.to_bytes(2, "little")
    bmp = bytearray(saved(rgb_image(), "BMP"))
    bmp[18:26] = width_px.to_bytes(4, "little") + height_px.to_bytes(4, "little")
    canvas = (width_px - 1).to_bytes(3, "little") + (height_px - 1).to_bytes(3, "little")
    webp_body = b"WEBPVP8X" + (10).to_bytes(4, "little") + bytes(4) + canvas + bytes(8)
    return {
        "PNG": png_of_size(width_px, height_px),
        "JPEG": jpeg_file[: frame + 5] + sides + jpeg_file[frame + 9 :],
        "TIFF": bytes(tiff_file),
        "GIF": bytes(gif),
        "BMP": bytes(bmp),
        "WebP": b"RIFF" + len(webp_body).to_bytes(4, "little") + webp_body,
        "PDF": pdf_drawing(b"", (14400.0, 14400.0)),
    }


@pytest.mark.parametrize("kind", ["PNG", "JPEG", "TIFF", "GIF", "BMP", "WebP", "PDF"])
def test_a_header_of_60000_by_60000_is_refused_without_allocating(kind: str) -> None:
    data = headers_of_size(60_000, 60_000)[kind]
    assert len(data) < 50_000
    size = "60000 × 60000" if kind != "PDF" else "pixels"
    assert size in refusal(data)
    assert peak_bytes_of_refusing(data, "more than the 250 million allowed") < 5_000_000


def test_the_pixel_limit_may_be_lowered(page_file: Path) -> None:
    assert open_picture(page_file, max_pixels=96 * 64).size_px == (96, 64)
    with pytest.raises(PictureError, match="has 96 × 64 pixels, more than"):
        open_picture(page_file, max_pixels=96 * 64 - 1)


def test_a_locked_pdf_is_refused() -> None:
    assert "is locked with a password; save a copy without one" in refusal(locked_pdf(b"secret"))


@pytest.mark.parametrize("kind", one_of_each())
def test_a_page_that_is_not_there_is_refused(kind: str) -> None:
    data = one_of_each()[kind]
    pages = 2 if "pages" in kind else 1
    choice = "choose a page from 1 to 2" if pages == 2 else "choose page 1"
    for page in (-1, pages, 10**6):
        sentence = refusal(data, page=page)
        assert f"so there is no page {page + 1}" in sentence
        assert choice in sentence


def test_a_long_or_unprintable_name_is_shown_within_reason() -> None:
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(b"", "x" * 300 + ".png")
    assert str(caught.value).startswith("“" + "x" * 50 + "…")
    assert len(str(caught.value)) < 200
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(b"", "a\nb\x1b[31m\udcff.png")
    assert str(caught.value).startswith("“a�b�[31m�.png” is empty")


def test_bytes_without_a_name_are_called_the_picture() -> None:
    with pytest.raises(PictureError, match="“The picture” is empty"):
        picture_from_bytes(b"", "")


def test_no_memory_is_one_sentence(page_file: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def no_memory(*_: object) -> None:
        raise MemoryError

    monkeypatch.setattr(imaging.picture, "_decode", no_memory)
    assert "needs more memory than is free" in opening(page_file)


def test_a_picture_error_is_one_of_the_programs_own() -> None:
    assert issubclass(PictureError, SmallsquareError)
