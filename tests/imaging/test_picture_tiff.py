"""A TIFF whose directory lost its end would be read with defaults: another picture."""

from __future__ import annotations

import numpy as np
import pytest

from imaging import PictureError, picture_from_bytes
from imaging.picture_parts import Refused
from imaging.picture_tiff import check_tiff_directories
from tests.imaging.picture_files import one_of_each, rgb_image, saved, scene, tiff

ALL_WAYS = {
    "little-endian": tiff(scene(), photometric="rgb"),
    "big-endian": tiff(scene(), photometric="rgb", byteorder=">"),
    "BigTIFF": tiff(scene(), photometric="rgb", bigtiff=True),
    "BigTIFF, big-endian": tiff(scene(), photometric="rgb", bigtiff=True, byteorder=">"),
    "directory last": saved(rgb_image(), "TIFF", compression="tiff_lzw"),
    "two pages": one_of_each()["tiff, pages"],
}


def picture_bytes_end(data: bytes) -> int:
    """The longest beginning of a file that is refused for its directories."""
    for length in range(len(data), 7, -1):
        try:
            check_tiff_directories(data[:length])
        except Refused:
            return length
    return 0


@pytest.mark.parametrize("way", ALL_WAYS)
def test_a_whole_file_passes_in_either_byte_order_and_offset_size(way: str) -> None:
    check_tiff_directories(ALL_WAYS[way])
    if way != "BigTIFF, big-endian":  # Pillow 13.0 takes it for an ordinary one and refuses it
        np.testing.assert_array_equal(picture_from_bytes(ALL_WAYS[way], "page").pixels, scene())


@pytest.mark.parametrize("way", ALL_WAYS)
def test_a_file_that_ends_within_its_directories_is_cut_short(way: str) -> None:
    end = picture_bytes_end(ALL_WAYS[way])
    assert end > 100
    for length in (8, 9, end // 2, end - 1, end):
        with pytest.raises(Refused, match="cut short"):
            check_tiff_directories(ALL_WAYS[way][:length])


@pytest.mark.parametrize("way", ALL_WAYS)
def test_no_beginning_of_a_file_opens(way: str) -> None:
    whole = ALL_WAYS[way]
    if way == "two pages":
        whole = whole[: len(whole) // 2 - 100]  # past this the first page is whole
    for length in np.linspace(1, len(whole) - 2, 150).astype(int):
        with pytest.raises(PictureError):
            picture_from_bytes(whole[:length], "page")


def entry_at(data: bytes, tag: int) -> int:
    """Offset of a tag's entry in a little-endian TIFF's first directory."""
    first = int.from_bytes(data[4:8], "little")
    for number in range(int.from_bytes(data[first : first + 2], "little")):
        at = first + 2 + 12 * number
        if int.from_bytes(data[at : at + 2], "little") == tag:
            return at
    raise AssertionError(f"no tag {tag}")


def test_a_value_that_lies_beyond_the_end_is_refused_for_a_tag_of_the_standard_only() -> None:
    data = bytearray(
        tiff(scene(), photometric="rgb", extratags=[(65000, 7, 9, b"makernote", True)])
    )
    private = entry_at(data, 65000)
    data[private + 8 : private + 12] = (10**9).to_bytes(4, "little")
    check_tiff_directories(data)
    np.testing.assert_array_equal(picture_from_bytes(bytes(data), "page").pixels, scene())
    bits = entry_at(data, 258)
    data[bits + 8 : bits + 12] = (10**9).to_bytes(4, "little")
    with pytest.raises(Refused, match="cut short"):
        check_tiff_directories(data)


def test_a_chain_of_pages_that_bites_its_tail_comes_to_an_end() -> None:
    data = bytearray(tiff(scene(), photometric="rgb"))
    first = int.from_bytes(data[4:8], "little")
    count = int.from_bytes(data[first : first + 2], "little")
    data[first + 2 + 12 * count : first + 6 + 12 * count] = first.to_bytes(4, "little")
    check_tiff_directories(data)
    assert picture_from_bytes(bytes(data), "page").page_count == 1


def test_strips_that_reach_beyond_the_end_are_refused_by_page() -> None:
    data = bytearray(one_of_each()["tiff, pages"])
    counts = entry_at(data, 279)
    data[counts + 8 : counts + 12] = (10**9).to_bytes(4, "little")
    with pytest.raises(PictureError, match="cut short"):
        picture_from_bytes(bytes(data), "page", 0)
    assert picture_from_bytes(bytes(data), "page", 1).size_px == (96, 64)
