"""Colour profiles are followed, and one that cannot be is said to be ignored."""

from __future__ import annotations

import numpy as np
import pytest
from PIL import Image

import imaging.picture_colour
from imaging import picture_from_bytes
from imaging.picture_colour import PROFILE_IGNORED, convert_rgb_in_place, rgb_pixels
from tests.imaging.picture_files import (
    Pixels,
    cmyk_image,
    corner_colours,
    grey_image,
    heic,
    jpeg,
    linear_grey_profile,
    rgb_image,
    saved,
    scene,
    srgb_profile,
    swapped_profile,
)


def with_profile(profile: bytes) -> dict[str, bytes]:
    image = rgb_image()
    return {
        "jpeg": jpeg(icc_profile=profile),
        "jpeg, progressive": jpeg(icc_profile=profile, progressive=True),
        "png": saved(image, "PNG", icc_profile=profile),
        "tiff": saved(image, "TIFF", icc_profile=profile),
        "webp": saved(image, "WEBP", lossless=True, icc_profile=profile),
        "heic": heic(icc_profile=profile),
    }


KINDS = ["jpeg", "jpeg, progressive", "png", "tiff", "webp", "heic"]


@pytest.mark.parametrize("kind", KINDS)
def test_a_profile_changes_what_the_numbers_mean(kind: str) -> None:
    """With red and blue exchanged in the profile, the red corner is blue."""
    shown = corner_colours(picture_from_bytes(with_profile(swapped_profile())[kind], "p").pixels)
    assert shown["top left"] == pytest.approx((0, 0, 255), abs=4)
    assert shown["bottom left"] == pytest.approx((255, 0, 0), abs=4)
    assert shown["top right"] == pytest.approx((0, 255, 0), abs=4)
    assert shown["middle"] == pytest.approx(corner_colours(scene())["middle"], abs=3)


@pytest.mark.parametrize("kind", ["png", "tiff", "webp"])
def test_an_srgb_profile_changes_nothing_at_all(kind: str) -> None:
    picture = picture_from_bytes(with_profile(srgb_profile())[kind], "p")
    np.testing.assert_array_equal(picture.pixels, scene())
    assert picture.notes == ()


@pytest.mark.parametrize("kind", KINDS)
def test_a_broken_profile_is_ignored_and_said_to_be(kind: str) -> None:
    picture = picture_from_bytes(with_profile(b"no profile at all" * 20)[kind], "p")
    assert corner_colours(picture.pixels)["top left"] == pytest.approx((255, 0, 0), abs=2)
    assert PROFILE_IGNORED in picture.notes


def test_a_profile_for_other_channels_is_ignored_and_said_to_be() -> None:
    for image in (grey_image(), cmyk_image()):
        picture = picture_from_bytes(jpeg(image, icc_profile=srgb_profile()), "p")
        assert PROFILE_IGNORED in picture.notes
        np.testing.assert_array_equal(picture.pixels, picture_from_bytes(jpeg(image), "p").pixels)


@pytest.mark.parametrize("kind", ["jpeg", "png", "tiff"])
def test_a_grey_profile_is_followed_too(kind: str) -> None:
    """Half of the light is 188 of 255 in sRGB (IEC 61966-2-1), computed."""
    half = Image.new("L", (64, 48), 128)
    data = {
        "jpeg": jpeg(half, icc_profile=linear_grey_profile()),
        "png": saved(half, "PNG", icc_profile=linear_grey_profile()),
        "tiff": saved(half, "TIFF", icc_profile=linear_grey_profile()),
    }[kind]
    picture = picture_from_bytes(data, "p")
    assert corner_colours(picture.pixels)["middle"] == pytest.approx((188, 188, 188), abs=1)
    assert picture.notes == ()


def noise(width_px: int, height_px: int) -> Pixels:
    return np.random.default_rng(11).integers(0, 256, (height_px, width_px, 3), dtype=np.uint8)


@pytest.mark.parametrize(("width_px", "height_px"), [(1500, 1500), (40, 30_000), (1_100_000, 1)])
def test_a_picture_of_many_bands_is_the_same_as_in_one(width_px: int, height_px: int) -> None:
    """The bands meet without a gap or an overlap, the last one shorter."""
    pixels = noise(width_px, height_px)
    converted, _ = rgb_pixels(Image.fromarray(pixels), swapped_profile())
    in_place = pixels.copy()
    assert convert_rgb_in_place(in_place, swapped_profile()) == ()
    np.testing.assert_array_equal(converted, in_place)
    lines = [0, height_px // 2, height_px - 1]
    for line in lines:
        alone, _ = rgb_pixels(Image.fromarray(pixels[line : line + 1].copy()), swapped_profile())
        np.testing.assert_array_equal(converted[line], alone[0])
    unconverted, notes = rgb_pixels(Image.fromarray(pixels), None)
    np.testing.assert_array_equal(unconverted, pixels)
    assert notes == ()


def test_a_failure_in_one_band_is_not_lost_between_the_threads(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    def fail(*_: object) -> None:
        raise MemoryError

    monkeypatch.setattr(imaging.picture_colour, "_flat", fail)
    with pytest.raises(MemoryError):
        rgb_pixels(rgb_image(), None)


def test_the_source_picture_is_not_changed() -> None:
    image = rgb_image()
    rgb_pixels(image, swapped_profile())
    np.testing.assert_array_equal(np.asarray(image), scene())
