"""Whether a TIFF is all there.

Pillow passes over entries whose values it cannot find, and then takes the defaults: another
colour, another size. So the directories are walked here before it sees them.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

from imaging.picture_parts import CUT_SHORT, Refused

if TYPE_CHECKING:
    from PIL import TiffImagePlugin

_BYTES_OF_TYPE = {
    1: 1, 2: 1, 3: 2, 4: 4, 5: 8, 6: 1, 7: 1, 8: 2, 9: 4, 10: 8, 11: 4, 12: 8,
    13: 4, 16: 8, 17: 8, 18: 8,
}  # fmt: skip
"""TIFF 6.0, section 2; 13 and 16 to 18 from its supplements for sub-directories and BigTIFF."""

_FIRST_PRIVATE_TAG = 32768
"""A maker's own notes may be lost without harm to the picture (TIFF 6.0, section 8)."""


def check_tiff_directories(data: bytes) -> None:
    """Refuse a TIFF whose directories, or the values they point to, reach beyond its end.

    Parameters
    ----------
    data : bytes
        The whole file, with a TIFF or BigTIFF signature.

    Raises
    ------
    Refused
        Also for a page other than the one wanted: how many pages there are is part of a file.
    """
    is_big = 43 in data[2:4]  # 42 in an ordinary TIFF
    count_bytes, entry_bytes, offset_bytes = (8, 20, 8) if is_big else (2, 12, 4)
    order: Literal["little", "big"] = "little" if data.startswith(b"II") else "big"

    def number(at: int, size: int) -> int:
        if at + size > len(data):
            raise Refused(CUT_SHORT)
        return int.from_bytes(data[at : at + size], order)

    at, seen = number(offset_bytes, offset_bytes), set[int]()
    while at and at not in seen:  # Pillow ends a chain that bites its tail in the same way
        seen.add(at)
        first = at + count_bytes
        last = first + entry_bytes * number(at, count_bytes)
        at = number(last, offset_bytes)
        for entry in range(first, last, entry_bytes):
            size = _BYTES_OF_TYPE.get(number(entry + 2, 2), 0) * number(entry + 4, offset_bytes)
            if size > offset_bytes and number(entry, 2) < _FIRST_PRIVATE_TAG:
                place = number(entry + 4 + offset_bytes, offset_bytes)
                if place + size > len(data):
                    raise Refused(CUT_SHORT)


def check_tiff_data(image: TiffImagePlugin.TiffImageFile, file_bytes: int) -> None:
    """Refuse a page whose strips or tiles reach beyond the file's end.

    StripOffsets, StripByteCounts, TileOffsets, TileByteCounts: TIFF 6.0, sections 8 and 15.

    Raises
    ------
    Refused
        If any of them does.
    """
    for offsets_tag, counts_tag in ((273, 279), (324, 325)):
        offsets, counts = image.tag_v2.get(offsets_tag), image.tag_v2.get(counts_tag)
        if offsets is None or counts is None:
            continue
        if any(offset + count > file_bytes for offset, count in zip(offsets, counts, strict=False)):
            raise Refused(CUT_SHORT)
