"""The annotated picture: the picture whole, the calipers where they are, never over a file."""

from __future__ import annotations

import hashlib
import json
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image

from app.chart import (
    FileExistsRefused,
    PictureDiffers,
    TargetRefused,
    annotate,
    values_as_json,
    write_annotated,
)
from app.reading import Reading, ReadingFileError
from imaging import Picture
from tests.app.chart.chart_examples import (
    SIZE_PX,
    beats,
    blank_picture,
    caliper,
    confirmed_calibration,
    full_reading,
    picture_file,
    reading_of,
    upright_map,
)

_TEAL = (11, 85, 99)


def shown(picture: Picture, reading: Reading) -> NDArray[np.uint8]:
    """The part of the annotated picture that is the picture."""
    width_px, height_px = picture.size_px
    return np.asarray(annotate(picture, reading))[:height_px, :width_px]


def test_an_empty_reading_leaves_every_pixel_as_it_was() -> None:
    rng = np.random.default_rng(7)
    pixels = rng.integers(0, 256, (600, 1500, 3), dtype=np.uint8)
    picture = Picture(pixels, "noise.png", None, "ef" * 32)
    image = annotate(picture, reading_of(picture))
    assert np.array_equal(np.asarray(image)[:600], pixels)
    assert image.mode == "RGB"
    assert image.width == 1500
    assert image.height > 800


def test_pixels_away_from_the_calipers_stay_as_they_were() -> None:
    picture = blank_picture()
    changed = (shown(picture, reading_of(picture, beats(3))) != picture.pixels).any(axis=2)
    assert changed[250:500, 90:520].any()
    assert not changed[:, 700:].any()
    assert not changed[800:].any()


@pytest.mark.parametrize("x_px", [300.0, 300.4, 300.7])
def test_a_leg_is_drawn_where_the_reader_put_it(x_px: float) -> None:
    picture = blank_picture()
    item = caliper(1, (x_px, 400.0), (x_px + 180.0, 400.0))
    pixels = shown(picture, reading_of(picture, (item,)))
    # Between mark and bar, the red channel: teal is dark there, paper and rim are bright.
    row = np.clip(236.0 - pixels[390, 290:312, 0].astype(np.float64), 0.0, None)
    centre_px = 290.0 + float(row @ np.arange(row.size) / row.sum())
    assert centre_px == pytest.approx(x_px, abs=0.15)


def test_the_label_stands_on_a_plate_in_our_colours() -> None:
    picture = blank_picture()
    item = caliper(1, (300.0, 400.0), (480.0, 400.0))
    pixels = shown(picture, reading_of(picture, (item,)))
    plate = (pixels == (250, 253, 253)).all(axis=2)
    assert plate.sum() > 1000
    rows, columns = np.nonzero(plate)
    inside = pixels[rows.min() : rows.max(), columns.min() : columns.max()]
    assert (inside == _TEAL).all(axis=2).sum() > 20


def test_lines_end_with_the_picture() -> None:
    picture = blank_picture((600, 200))
    item = caliper(1, (580.0, 190.0), (598.0, 190.0), kind=beats(1)[0].kind)
    image = np.asarray(annotate(picture, reading_of(picture, (item,))))
    beside = image[:200, 600:]
    assert (beside == beside[0, 0]).all()


@pytest.mark.parametrize("size_px", [(32, 32), (40, 900), (5000, 60), (61, 47)])
def test_small_and_odd_pictures_work(size_px: tuple[int, int]) -> None:
    picture = blank_picture(size_px)
    marks = (caliper(1, (5.0, 20.0), (25.0, 20.0)), caliper(2, (5.0, 10.0), (31.0, 25.0), beat=2))
    image = annotate(picture, reading_of(picture, marks))
    assert image.width >= max(size_px[0], 1000)
    assert image.height > size_px[1] + 300


@pytest.mark.parametrize(
    "change", [{"sheet_map": None}, {"calipers": beats(20)}, {"reader": "李\u202e\n" * 30}]
)
def test_odd_readings_work(change: dict[str, object]) -> None:
    picture = blank_picture()
    reading = replace(full_reading(picture), **change)  # type: ignore[arg-type]
    assert annotate(picture, reading).height > SIZE_PX[1] + 300


def test_a_sheet_on_its_side_is_drawn_along_its_own_directions() -> None:
    picture = blank_picture()
    turned = upright_map().turned(1)
    item = caliper(1, (400.0, 300.0), (400.0, 480.0))
    pixels = shown(picture, replace(reading_of(picture, (item,)), sheet_map=turned))
    teal = (np.abs(pixels.astype(int) - _TEAL).sum(axis=2) < 60).sum
    assert teal(axis=1)[300] > 20
    assert teal(axis=1)[480] > 20


def test_a_picture_of_another_size_is_refused() -> None:
    with pytest.raises(PictureDiffers, match="as large as"):
        annotate(blank_picture((800, 600)), full_reading())


def test_a_changed_picture_of_the_same_size_is_said() -> None:
    reading = reading_of(calibration=confirmed_calibration())
    same = annotate(blank_picture(), reading)
    other = annotate(replace(blank_picture(), sha256="cd" * 32), reading)
    assert other.height > same.height


def test_the_same_reading_gives_the_same_picture() -> None:
    picture = blank_picture()
    first, again = (annotate(picture, full_reading(picture)) for _ in range(2))
    assert first.tobytes() == again.tobytes()


def test_the_file_is_a_png_that_carries_its_values(tmp_path: Path) -> None:
    picture = picture_file(tmp_path / "scan.png")
    reading = full_reading(picture)
    write_annotated(picture, reading, tmp_path / "out.png")
    with Image.open(tmp_path / "out.png") as image:
        image.load()
        assert image.format == "PNG"
        assert image.width == annotate(picture, reading).width
        assert json.loads(image.text["smallsquare values"]) == json.loads(values_as_json(reading))
        assert picture.sha256 in image.text["Source"]
        assert "diagnoses nothing" in image.text["Disclaimer"]
    assert {path.name for path in tmp_path.iterdir()} == {"scan.png", "out.png"}


def test_an_odd_file_name_does_not_stop_the_writing(tmp_path: Path) -> None:
    picture = replace(blank_picture(), file_name="scan\udcff\x1b.png")
    write_annotated(picture, full_reading(picture), tmp_path / "out.png")
    with Image.open(tmp_path / "out.png") as image:
        assert "\\udcff" in image.text["Source"]


def test_no_file_is_replaced_unasked(tmp_path: Path) -> None:
    picture = picture_file(tmp_path / "scan.png", (64, 48))
    there = tmp_path / "out.png"
    there.write_bytes(b"precious")
    with pytest.raises(FileExistsRefused, match=r"out\.png is there already"):
        write_annotated(picture, reading_of(picture), there)
    assert there.read_bytes() == b"precious"
    write_annotated(picture, reading_of(picture), there, overwrite=True)
    with Image.open(there) as image:
        assert image.format == "PNG"


def test_nothing_is_drawn_for_a_place_that_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("app.chart.annotated.annotate", lambda *_: pytest.fail("drawn in vain"))
    (tmp_path / "out.png").touch()
    picture = blank_picture((64, 48))
    with pytest.raises(FileExistsRefused):
        write_annotated(picture, reading_of(picture), tmp_path / "out.png")


def test_a_file_that_appears_while_we_draw_is_not_replaced(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    picture = picture_file(tmp_path / "scan.png", (64, 48))
    there = tmp_path / "out.png"
    drawing = annotate

    def meanwhile(*things: object) -> Image.Image:
        there.write_bytes(b"precious")
        return drawing(picture, reading_of(picture))

    monkeypatch.setattr("app.chart.annotated.annotate", meanwhile)
    with pytest.raises(FileExistsRefused):
        write_annotated(picture, reading_of(picture), there)
    assert there.read_bytes() == b"precious"


@pytest.mark.parametrize("disguise", ["itself", "symbolic", "hard"])
def test_the_picture_is_never_written_to(tmp_path: Path, disguise: str) -> None:
    picture = picture_file(tmp_path / "scan.png", (64, 48))
    assert picture.path is not None
    path = picture.path if disguise == "itself" else tmp_path / "other.png"
    if disguise == "symbolic":
        path.symlink_to(picture.path)
    elif disguise == "hard":
        path.hardlink_to(picture.path)
    before = (picture.path.stat().st_mtime_ns, sorted(tmp_path.iterdir()))
    with pytest.raises(TargetRefused, match="the picture itself"):
        write_annotated(picture, reading_of(picture), path, overwrite=True)
    assert hashlib.sha256(picture.path.read_bytes()).hexdigest() == picture.sha256
    assert (picture.path.stat().st_mtime_ns, sorted(tmp_path.iterdir())) == before


def test_a_folder_that_is_not_there_is_one_sentence(tmp_path: Path) -> None:
    picture = blank_picture((64, 48))
    with pytest.raises(ReadingFileError, match="could not be written"):
        write_annotated(picture, reading_of(picture), tmp_path / "nowhere" / "out.png")
