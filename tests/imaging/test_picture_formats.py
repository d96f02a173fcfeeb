"""Each format, bit depth and orientation comes out as the same scene."""

from __future__ import annotations

import io
from typing import Any

import numpy as np
import pytest
from PIL import Image

from imaging import PictureError, picture_from_bytes
from imaging.picture_formats import FIRST_FRAME, HIGH_BYTE, TEN_BIT
from tests.imaging.picture_files import (
    BLOCK_PX,
    CMYK_AS_RGB,
    Pixels,
    bilevel_image,
    cmyk_image,
    corner_colours,
    exif_orientation,
    grey_image,
    grey_scene,
    heic,
    jpeg,
    png,
    png_chunk,
    rgb_image,
    saved,
    scene,
    tiff,
)


def pixels_of(data: bytes, page: int = 0) -> Pixels:
    return picture_from_bytes(data, "page", page).pixels


def notes_of(data: bytes) -> tuple[str, ...]:
    return picture_from_bytes(data, "page").notes


def as_rgb(grey: Pixels) -> Pixels:
    return np.repeat(grey[..., None], 3, axis=2)


def deep(pixels: Pixels) -> np.ndarray[Any, np.dtype[np.uint16]]:
    """16 bits; the low byte is different from the high one, so keeping it would show."""
    return pixels.astype(np.uint16) * 256 + (255 - pixels)


# --- the same scene, exactly

LOSSLESS = {
    "png": saved(rgb_image(), "PNG"),
    "png, optimised palette": saved(rgb_image().quantize(256), "PNG", optimize=True),
    "png, 16-bit": png(deep(scene()), 2),
    "png, opaque alpha": png(np.dstack([scene(), np.full((64, 96), 255, np.uint8)]), 6),
    "tiff": saved(rgb_image(), "TIFF"),
    "tiff, LZW": saved(rgb_image(), "TIFF", compression="tiff_lzw"),
    "tiff, PackBits": saved(rgb_image(), "TIFF", compression="packbits"),
    "tiff, deflate, predictor": tiff(
        scene(), photometric="rgb", compression="zlib", predictor=True
    ),
    "tiff, big-endian": tiff(scene(), photometric="rgb", byteorder=">"),
    "tiff, 64-bit offsets": tiff(scene(), photometric="rgb", bigtiff=True),
    "tiff, planes": tiff(
        np.moveaxis(scene(), -1, 0).copy(), photometric="rgb", planarconfig="separate"
    ),
    "tiff, tiles": tiff(scene(), photometric="rgb", tile=(16, 32)),
    "tiff, deflated tiles that overhang": tiff(
        scene(), photometric="rgb", tile=(48, 80), compression="zlib"
    ),
    "tiff, 16-bit": tiff(deep(scene()), photometric="rgb"),
    "tiff, 16-bit, tiles": tiff(deep(scene()), photometric="rgb", tile=(16, 32)),
    "tiff, 16-bit, big-endian, deflate": tiff(
        deep(scene()), photometric="rgb", byteorder=">", compression="zlib"
    ),
    "webp, lossless": saved(rgb_image(), "WEBP", lossless=True),
    "gif": saved(rgb_image(), "GIF"),
    "gif, interlaced": saved(rgb_image(), "GIF", interlace=1),
    "bmp": saved(rgb_image(), "BMP"),
}


@pytest.mark.parametrize("kind", LOSSLESS)
def test_lossless_colour_keeps_every_pixel(kind: str) -> None:
    np.testing.assert_array_equal(pixels_of(LOSSLESS[kind]), scene())
    assert notes_of(LOSSLESS[kind]) == ((HIGH_BYTE,) if "16-bit" in kind else ())


GREY = {
    "png": saved(grey_image(), "PNG"),
    "png, 16-bit": png(deep(grey_scene()), 0),
    "tiff": saved(grey_image(), "TIFF"),
    "tiff, 16-bit": tiff(deep(grey_scene()), photometric="minisblack"),
    "tiff, 16-bit, big-endian": tiff(deep(grey_scene()), photometric="minisblack", byteorder=">"),
    "tiff, white is zero": tiff(255 - grey_scene(), photometric="miniswhite"),
    "tiff, 16-bit, white is zero": tiff(65535 - deep(grey_scene()), photometric="miniswhite"),
    "gif": saved(grey_image(), "GIF"),
    "bmp": saved(grey_image(), "BMP"),
}


@pytest.mark.parametrize("kind", GREY)
def test_lossless_grey_keeps_every_pixel(kind: str) -> None:
    np.testing.assert_array_equal(pixels_of(GREY[kind]), as_rgb(grey_scene()))


BILEVEL = {
    "png": saved(bilevel_image(), "PNG"),
    "tiff": saved(bilevel_image(), "TIFF"),
    "tiff, fax G4": saved(bilevel_image(), "TIFF", compression="group4"),
    "tiff, fax G3": saved(bilevel_image(), "TIFF", compression="group3"),
    "bmp": saved(bilevel_image(), "BMP"),
}


@pytest.mark.parametrize("kind", BILEVEL)
def test_one_bit_is_black_and_white(kind: str) -> None:
    black_and_white = np.where(grey_scene() > 127, 255, 0).astype(np.uint8)
    np.testing.assert_array_equal(pixels_of(BILEVEL[kind]), as_rgb(black_and_white))


LOSSY = {
    "jpeg": jpeg(),
    "jpeg, subsampled": jpeg(subsampling=2),
    "jpeg, progressive": jpeg(progressive=True),
    "jpeg, RGB not YCbCr": jpeg(keep_rgb=True),
    "tiff, JPEG": saved(rgb_image(), "TIFF", compression="jpeg", quality=95),
    "webp": saved(rgb_image(), "WEBP", quality=95),
    "heic": heic(),
}


@pytest.mark.parametrize("kind", LOSSY)
def test_lossy_colour_stays_within_two_levels_inside_flat_parts(kind: str) -> None:
    shown, meant = corner_colours(pixels_of(LOSSY[kind])), corner_colours(scene())
    for place, colour in meant.items():
        assert shown[place] == pytest.approx(colour, abs=2), place


def test_lossy_grey_stays_within_two_levels() -> None:
    for data in (jpeg(grey_image()), heic(grey_image())):
        shown = corner_colours(pixels_of(data))
        for place, colour in corner_colours(as_rgb(grey_scene())).items():
            assert shown[place] == pytest.approx(colour, abs=2), place


# --- depth, alpha, animation


def test_16_bits_run_from_black_to_white() -> None:
    ramp = np.linspace(0, 65535, 40 * 40).astype(np.uint16).reshape(40, 40)
    for data in (png(ramp, 0), tiff(ramp, photometric="minisblack")):
        shown = pixels_of(data)[..., 0]
        np.testing.assert_array_equal(shown, ramp >> 8)
        assert (shown.min(), shown.max()) == (0, 255)


def with_alpha(colour: Pixels) -> Pixels:
    """A clear corner at the top left, a half-clear one at the top right."""
    alpha = np.full(colour.shape[:2], 255, dtype=np.uint8)
    alpha[:BLOCK_PX, :BLOCK_PX], alpha[:BLOCK_PX, -BLOCK_PX:] = 0, 128
    return np.dstack([colour, alpha])


@pytest.mark.parametrize(
    "data",
    [
        png(with_alpha(scene()), 6),
        png(deep(with_alpha(scene())), 6),
        saved(Image.fromarray(with_alpha(scene())), "TIFF"),
        saved(Image.fromarray(with_alpha(scene())), "WEBP", lossless=True, exact=True),
    ],
    ids=["png", "png, 16-bit", "tiff", "webp"],
)
def test_clear_parts_are_shown_over_white_paper(data: bytes) -> None:
    picture = picture_from_bytes(data, "page")
    assert "Transparent parts are shown over white." in picture.notes
    shown = corner_colours(picture.pixels)
    assert shown["top left"] == (255, 255, 255)
    assert shown["top right"] == pytest.approx((127, 255, 127), abs=1)
    assert shown["bottom left"] == (0, 0, 255)


def test_clear_parts_of_grey_and_of_a_palette_are_white_too() -> None:
    grey = png(with_alpha(grey_scene()), 4)
    assert corner_colours(pixels_of(grey))["top left"] == (255, 255, 255)
    assert corner_colours(pixels_of(grey))["top right"] == pytest.approx((127,) * 3, abs=1)
    paletted = rgb_image().quantize(256)
    red = paletted.getpixel((2, 2))
    shown = corner_colours(pixels_of(saved(paletted, "PNG", transparency=red)))
    assert shown["top left"] == (255, 255, 255)
    assert shown["bottom left"] == (0, 0, 255)


def test_a_wholly_opaque_alpha_is_no_matter_of_note() -> None:
    opaque = np.dstack([scene(), np.full((64, 96), 255, np.uint8)])
    assert notes_of(png(opaque, 6)) == ()


@pytest.mark.parametrize("kind", ["GIF", "WEBP", "PNG"])
def test_an_animated_file_opens_at_its_first_frame(kind: str) -> None:
    turned = rgb_image().transpose(Image.Transpose.ROTATE_180)
    how = {"lossless": True} if kind == "WEBP" else {}
    data = saved(rgb_image(), kind, save_all=True, append_images=[turned, turned], **how)
    picture = picture_from_bytes(data, "page")
    np.testing.assert_array_equal(picture.pixels, scene())
    assert picture.notes == (FIRST_FRAME,)
    assert picture.page_count == 1


def test_a_phones_ten_bit_picture_is_reduced_and_says_so() -> None:
    import pillow_heif

    samples = (scene().astype(np.uint16) << 2).astype("<u2")
    file = io.BytesIO()
    heif = pillow_heif.from_bytes("RGB;10", (96, 64), samples.tobytes())
    heif.save(file, quality=100, chroma=444)
    picture = picture_from_bytes(file.getvalue(), "page")
    assert picture.notes == (TEN_BIT,)
    for place, colour in corner_colours(scene()).items():
        assert corner_colours(picture.pixels)[place] == pytest.approx(colour, abs=3), place


def test_of_several_pictures_in_a_heic_the_main_one_is_shown() -> None:
    import pillow_heif

    heif = pillow_heif.from_pillow(Image.new("RGB", (40, 40), "red"))
    heif.add_from_pillow(rgb_image())
    file = io.BytesIO()
    heif.save(file, quality=100, chroma=444, primary_index=1)
    picture = picture_from_bytes(file.getvalue(), "page")
    assert picture.size_px == (96, 64)
    assert picture.notes == ("The file holds several pictures; its main one is shown.",)


def test_each_page_of_a_tiff_has_its_own_size_and_depth() -> None:
    small = Image.new("RGB", (40, 50), "red")
    first, second = bilevel_image(), small
    data = saved(first, "TIFF", save_all=True, append_images=[second])
    pages = [picture_from_bytes(data, "page", number) for number in (0, 1)]
    assert [page.size_px for page in pages] == [(96, 64), (40, 50)]
    assert [(page.page, page.page_count) for page in pages] == [(0, 2), (1, 2)]
    assert (pages[1].pixels == (255, 0, 0)).all()


# --- orientation

UPRIGHT = {
    1: lambda a: a,
    2: lambda a: a[:, ::-1],
    3: lambda a: a[::-1, ::-1],
    4: lambda a: a[::-1],
    5: lambda a: a.swapaxes(0, 1),
    6: lambda a: np.rot90(a, -1),
    7: lambda a: a[::-1, ::-1].swapaxes(0, 1),
    8: np.rot90,
}
"""JEITA CP-3451, table 4, tag 274: what the stored rows and columns are of the picture."""


def oriented_files(value: int) -> dict[str, bytes]:
    exif = exif_orientation(value)
    return {
        "jpeg": jpeg(exif=exif),
        "jpeg, progressive": jpeg(progressive=True, exif=exif),
        "png": saved(rgb_image(), "PNG", exif=exif),
        "webp": saved(rgb_image(), "WEBP", lossless=True, exif=exif),
        "tiff": tiff(scene(), photometric="rgb", extratags=[(274, 3, 1, value, True)]),
        "heic": heic(exif=exif),
    }


@pytest.mark.parametrize("value", range(1, 9))
@pytest.mark.parametrize("kind", ["jpeg", "jpeg, progressive", "png", "webp", "tiff", "heic"])
def test_all_eight_orientations_are_turned_upright(kind: str, value: int) -> None:
    pixels = pixels_of(oriented_files(value)[kind])
    meant = UPRIGHT[value](scene())
    assert pixels.shape == meant.shape
    assert pixels.flags.c_contiguous
    for place, colour in corner_colours(meant).items():
        assert corner_colours(pixels)[place] == pytest.approx(colour, abs=2), place


def test_a_grey_and_a_cmyk_jpeg_are_turned_too() -> None:
    exif = exif_orientation(6)
    grey = corner_colours(pixels_of(jpeg(grey_image(), exif=exif)))
    assert grey["top right"] == pytest.approx((96, 96, 96), abs=2)  # was at the top left
    cmyk = corner_colours(pixels_of(jpeg(cmyk_image(), exif=exif)))
    assert cmyk["top right"] == pytest.approx(CMYK_AS_RGB["top left"], abs=2)


@pytest.mark.parametrize("kind", ["jpeg", "png", "webp", "tiff"])
@pytest.mark.parametrize("value", [0, 9, 65535])
def test_an_orientation_that_means_nothing_is_left_alone(kind: str, value: int) -> None:
    assert pixels_of(oriented_files(value)[kind]).shape == (64, 96, 3)


def test_unreadable_exif_leaves_the_picture_as_stored() -> None:
    broken = b"MM\0*\0\0\0\xff" + b"x" * 30
    for data in (
        jpeg(exif=b"Exif\0\0" + broken),
        saved(rgb_image(), "PNG", exif=broken),
        saved(rgb_image(), "WEBP", lossless=True, exif=broken),
    ):
        assert corner_colours(pixels_of(data))["top left"] == pytest.approx((255, 0, 0), abs=2)


def test_exif_that_is_no_exif_is_said_to_be_ignored() -> None:
    data = saved(rgb_image(), "PNG", exif=b"nonsense")
    assert notes_of(data) == ("The picture's orientation entry is unreadable and was ignored.",)


# --- CMYK


@pytest.mark.parametrize(
    "data",
    [
        jpeg(cmyk_image()),
        jpeg(cmyk_image(), progressive=True),
        saved(cmyk_image(), "TIFF"),
        saved(cmyk_image(), "TIFF", compression="tiff_lzw"),
        tiff(deep(np.asarray(cmyk_image())), photometric="separated"),
    ],
    ids=["jpeg, Adobe", "jpeg, progressive", "tiff", "tiff, LZW", "tiff, 16-bit"],
)
def test_inks_are_shown_as_ink_on_white_paper(data: bytes) -> None:
    picture = picture_from_bytes(data, "page")
    shown = corner_colours(picture.pixels)
    for place, colour in CMYK_AS_RGB.items():
        assert shown[place] == pytest.approx(colour, abs=3), place
    assert picture.notes[-1].startswith("CMYK without a colour profile")


# --- what cannot be shown as it was meant


def refusal(data: bytes) -> str:
    with pytest.raises(PictureError) as caught:
        picture_from_bytes(data, "page")
    return str(caught.value)


@pytest.mark.parametrize("dtype", [np.float32, np.int32, np.int16, np.uint32])
def test_numbers_that_are_no_picture_are_refused(dtype: type[Any]) -> None:
    assert "not a picture" in refusal(tiff(grey_scene().astype(dtype)))


@pytest.mark.parametrize("byteorder", ["<", ">"])
def test_uncompressed_16_bit_planes_are_refused(byteorder: str) -> None:
    """Pillow would read them at double width: a wrong picture, not an error."""
    planes = np.moveaxis(deep(scene()), -1, 0).copy()
    how = {"photometric": "rgb", "planarconfig": "separate", "byteorder": byteorder}
    assert "separate planes" in refusal(tiff(planes, **how))
    deflated = pixels_of(tiff(planes, compression="zlib", **how))
    np.testing.assert_array_equal(deflated, scene())


def test_an_avif_is_not_taken_for_a_heic() -> None:
    brands = b"\0\0\0\x1cftypavif\0\0\0\0avifmif1miaf"
    assert "is not a picture this program can open" in refusal(brands + bytes(100))


def test_boxes_of_a_heic_are_counted_to_the_end() -> None:
    """ISO/IEC 14496-12, 4.2: a size of 1 is followed by 64 bits, 0 means to the end."""
    whole = heic()
    long_box = b"\0\0\0\1free" + (20).to_bytes(8, "big") + bytes(4)
    open_box = b"\0\0\0\0free and whatever follows"
    for data in (whole + long_box, whole + open_box, whole + long_box + open_box):
        np.testing.assert_array_equal(pixels_of(data), pixels_of(whole))
    assert "is cut short" in refusal(whole + long_box[:-1])
    assert "is damaged" in refusal(whole + b"\0\0\0\5free")


def test_a_png_whose_pixels_were_altered_is_refused() -> None:
    data = bytearray(saved(rgb_image(), "PNG"))
    data[data.find(b"IDAT") + 30] ^= 1
    assert "is damaged" in refusal(bytes(data))


def test_a_png_with_a_remark_opens_and_with_a_damaged_one_is_refused() -> None:
    remark = bytearray(png_chunk(b"tEXt", b"Comment\0page one"))
    np.testing.assert_array_equal(pixels_of(png(scene(), 2, bytes(remark))), scene())
    remark[-1] ^= 1
    assert "is damaged" in refusal(png(scene(), 2, bytes(remark)))


def test_a_png_that_begins_with_something_else_is_refused() -> None:
    whole = saved(rgb_image(), "PNG")
    assert "is damaged" in refusal(whole[:8] + png_chunk(b"IDAT", bytes(40)) + whole[8:])
