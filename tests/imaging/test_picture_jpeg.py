"""A JPEG is shown whole or not at all: libjpeg would paint what is missing grey."""

from __future__ import annotations

import numpy as np
import pytest
from PIL import Image

from imaging import PictureError, picture_from_bytes
from imaging.picture_jpeg import jpeg_layout
from imaging.picture_parts import Refused
from tests.imaging.picture_files import (
    Pixels,
    cmyk_image,
    corner_colours,
    exif_orientation,
    grey_image,
    jpeg,
    rgb_image,
    saved,
    srgb_profile,
    swapped_profile,
)

END = b"\xff\xd9"


def refusal(data: bytes) -> str:
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(data, "page")
    return str(caught.value)


def busy() -> Pixels:
    """Many bytes of coded data in every block; shape (160, 120, 3)."""
    random = np.random.default_rng(20)
    coarse = Image.fromarray(random.integers(0, 256, (40, 30, 3), dtype=np.uint8))
    return np.asarray(coarse.resize((120, 160)))


WAYS = {
    "plain": {},
    "subsampled": {"subsampling": 2},
    "progressive": {"progressive": True},
    "restart markers": {"restart_marker_blocks": 4},
    "progressive, restart markers": {"progressive": True, "restart_marker_blocks": 4},
}
KINDS = {
    "RGB": Image.fromarray(busy()),
    "grey": Image.fromarray(busy()[..., 0]),
    "CMYK": Image.fromarray(np.dstack([busy(), busy()[..., 0] // 4]), mode="CMYK"),
}


# --- layout


def test_the_layout_tells_size_kind_and_where_the_coded_data_lie() -> None:
    data = jpeg()
    layout = jpeg_layout(data)
    assert (layout.width_px, layout.height_px, layout.components) == (96, 64, 3)
    assert (layout.is_progressive, layout.has_profile) == (False, False)
    [(begin, end)] = layout.scans
    assert data[end:] == END
    assert 0 < begin < end


def test_a_progressive_jpeg_has_several_scans_in_order() -> None:
    layout = jpeg_layout(jpeg(progressive=True))
    assert layout.is_progressive
    assert len(layout.scans) > 1
    assert all(a[1] < b[0] for a, b in zip(layout.scans, layout.scans[1:], strict=False))


def test_a_profile_and_a_channel_count_are_seen() -> None:
    assert jpeg_layout(jpeg(icc_profile=srgb_profile())).has_profile
    assert jpeg_layout(jpeg(grey_image())).components == 1
    assert jpeg_layout(jpeg(cmyk_image())).components == 4


def test_fill_bytes_and_stray_bytes_between_parts_are_skipped() -> None:
    """ITU-T T.81, B.1.1.2: any marker may be preceded by fill bytes of FF."""
    data = jpeg()
    filled = data[:2] + b"\xff\xff\xff" + data[2:]
    stray = data[:2] + b"\x01\x02\xff\x00" + data[2:]
    for changed in (filled, stray):
        assert jpeg_layout(changed).width_px == 96


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (b"\xff\xd8\xff", "cut short"),
        (b"\xff\xd8\xff\xe0", "cut short"),
        (b"\xff\xd8\xff\xe0\x00", "cut short"),
        (b"\xff\xd8\xff\xe0\x00\x01", "damaged"),
        (b"\xff\xd8\xff\xd9", "damaged"),  # nothing between beginning and end
        (b"\xff\xd8\xff\xd0\xff\x01\xff\xd9", "damaged"),  # nothing but lone markers
        (b"\xff\xd8\xff\xda\x00\x02abc", "cut short"),
        (b"\xff\xd8\xff\xda\x00\x02abc\xff\xd9", "damaged"),  # data without a frame
    ],
)
def test_what_is_no_sequence_of_parts_is_refused(data: bytes, words: str) -> None:
    with pytest.raises(Refused, match=words):
        jpeg_layout(data)


# --- completeness


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("kind", KINDS)
def test_a_whole_jpeg_opens(kind: str, way: str) -> None:
    shown = picture_from_bytes(jpeg(KINDS[kind], **WAYS[way]), "page").pixels
    meant = np.asarray(KINDS[kind].convert("RGB")).astype(int)
    assert np.abs(shown - meant).mean() < 8


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("kind", KINDS)
@pytest.mark.parametrize("share", [0.4, 0.7, 0.9, 0.97])
def test_a_jpeg_that_lost_its_end_is_refused_even_with_an_end_marker(
    kind: str, way: str, share: float
) -> None:
    """Programs that mend a broken file put the end marker back, not the picture."""
    whole = jpeg(KINDS[kind], **WAYS[way])
    cut = whole[: int(share * len(whole))].rstrip(b"\xff")
    assert "is cut short" in refusal(cut)
    assert "is " in refusal(cut + END)


def test_a_turned_jpeg_that_lost_its_end_is_refused() -> None:
    for value in range(2, 9):
        whole = jpeg(KINDS["RGB"], exif=exif_orientation(value))
        assert "is cut short" in refusal(whole[: len(whole) * 3 // 4] + END)


def test_a_jpeg_with_a_profile_that_lost_its_end_is_refused() -> None:
    for kind, profile in (("RGB", swapped_profile()), ("grey", srgb_profile())):
        whole = jpeg(KINDS[kind], icc_profile=profile)
        assert "is cut short" in refusal(whole[: len(whole) * 3 // 4] + END)


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("mode", ["L", "RGB"])
def test_paper_of_the_very_grey_of_missing_blocks_opens(mode: str, way: str) -> None:
    flat = Image.new(mode, (96, 64), 128 if mode == "L" else (128, 128, 128))
    assert (picture_from_bytes(jpeg(flat, **WAYS[way]), "page").pixels == 128).all()


def test_what_follows_the_end_is_not_looked_at() -> None:
    np.testing.assert_array_equal(
        picture_from_bytes(jpeg() + b"\xff\xd8 and a film clip", "page").pixels,
        picture_from_bytes(jpeg(), "page").pixels,
    )
    two = saved(rgb_image(), "MPO", save_all=True, append_images=[grey_image().convert("RGB")])
    shown = corner_colours(picture_from_bytes(two, "page").pixels)
    assert shown["top left"] == pytest.approx((255, 0, 0), abs=4)


def test_a_small_picture_inside_the_exif_does_not_stand_in_for_the_page() -> None:
    thumbnail = jpeg(rgb_image().resize((40, 40)))
    data = jpeg(exif=b"Exif\0\0II*\0\x08\0\0\0\0\0" + thumbnail)
    assert picture_from_bytes(data, "page").size_px == (96, 64)
    assert "is cut short" in refusal(data[:-2])


def test_damage_that_no_decoder_gets_past_is_refused() -> None:
    data = bytearray(jpeg())
    tables = data.find(b"\xff\xc4")
    data[tables + 5 : tables + 21] = bytes([255] * 16)
    assert "is damaged" in refusal(bytes(data))


def test_lossless_and_arithmetic_coding_are_refused_in_a_sentence() -> None:
    for frame in (b"\xff\xc3", b"\xff\xc5", b"\xff\xcb"):
        data = jpeg().replace(b"\xff\xc0", frame)
        assert "is damaged" in refusal(data)


def test_two_channels_are_refused_in_a_sentence() -> None:
    data = bytearray(jpeg())
    data[data.find(b"\xff\xc0") + 9] = 2
    assert "is " in refusal(bytes(data))


def test_the_pixels_are_those_of_an_ordinary_decoder() -> None:
    import cv2

    data = jpeg(Image.fromarray(busy()), subsampling=2)
    ordinary = cv2.imdecode(np.frombuffer(data, np.uint8), cv2.IMREAD_COLOR_RGB)
    np.testing.assert_array_equal(picture_from_bytes(data, "page").pixels, ordinary)
