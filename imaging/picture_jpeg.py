"""Decode a JPEG, and make sure that it is all there.

libjpeg paints what is missing from a damaged file grey and only mutters a warning that
neither OpenCV nor Pillow passes on, so completeness is checked here.
"""

from __future__ import annotations

import io
import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from imaging.picture_parts import CUT_SHORT, DAMAGED, Decoded, Refused, check_page, check_size

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray
    from PIL import Image

# ITU-T T.81 (1992), table B.1.
_SOI, _EOI, _SOS, _TEM, _APP2 = 0xD8, 0xD9, 0xDA, 0x01, 0xE2
_FRAMES = frozenset(range(0xC0, 0xD0)) - {0xC4, 0xC8, 0xCC}
_PROGRESSIVE = frozenset({0xC2, 0xC6, 0xCA, 0xCE})
_SCAN_END = re.compile(rb"\xff[^\x00\xd0-\xd7\xff]", re.DOTALL)
_RESTART = re.compile(rb"(?=\xff[\xd0-\xd7])", re.DOTALL)
_PADDING = bytes([0x55, 0x36, 0xA9, 0x4D, 0xB2, 0x6B, 0x95, 0xD4]) * 16


@dataclass(frozen=True, slots=True)
class JpegLayout:
    """Where the parts of the first picture in a JPEG file lie.

    Attributes
    ----------
    width_px, height_px, components : int
        As the frame header states, before EXIF orientation.
    is_progressive, has_profile : bool
        Coded in several passes; an ICC profile is embedded.
    scans : tuple of (int, int)
        Begin and end of each run of coded data, as offsets in bytes.
    """

    width_px: int
    height_px: int
    components: int
    is_progressive: bool
    has_profile: bool
    scans: tuple[tuple[int, int], ...]


def jpeg_layout(data: bytes) -> JpegLayout:
    """Walk the markers of a JPEG (ITU-T T.81, annex B) up to its end-of-image marker.

    What follows that marker (a second picture, a film clip) is not looked at.

    Raises
    ------
    Refused
        If the file ends before its end-of-image marker, or is no sequence of markers.
    """
    frame: tuple[int, int, int, bool] | None = None
    has_profile, scans, at = False, [], 2
    while True:
        marker, at = _next_marker(data, at)
        if marker == _EOI:
            break
        if marker in (_SOI, _TEM) or 0xD0 <= marker <= 0xD7:  # these stand alone
            continue
        length = int.from_bytes(data[at : at + 2], "big")
        if length < 2:
            raise Refused(DAMAGED if at + 2 <= len(data) else CUT_SHORT)
        body = data[at + 2 : at + min(length, 20)]
        if marker in _FRAMES and len(body) >= 6:
            height_px, width_px = int.from_bytes(body[1:3], "big"), int.from_bytes(body[3:5], "big")
            frame = width_px, height_px, body[5], marker in _PROGRESSIVE
        has_profile |= marker == _APP2 and body.startswith(b"ICC_PROFILE\0")
        at += length
        if marker == _SOS:
            end = _SCAN_END.search(data, at)
            if end is None:
                raise Refused(CUT_SHORT)
            scans.append((at, end.start()))
            at = end.start()
    if frame is None or not scans:
        raise Refused(DAMAGED)
    return JpegLayout(*frame, has_profile, tuple(scans))


def _next_marker(data: bytes, at: int) -> tuple[int, int]:
    """The marker's code and the offset after it; stray bytes before it are skipped."""
    while True:
        at = data.find(b"\xff", at)
        if at < 0 or at + 1 >= len(data):
            raise Refused(CUT_SHORT)
        code = data[at + 1]
        if code == 0xFF:  # a fill byte
            at += 1
        elif code == 0x00:
            at += 2
        else:
            return code, at + 2


def decode_jpeg(data: bytes, page: int, max_pixels: int) -> Decoded:
    """Decode a JPEG of any usual kind, EXIF orientation applied.

    Raises
    ------
    Refused
        If it is cut short, damaged so that part of it would be grey, too large or too small.
    """
    check_page(page, 1)
    layout = jpeg_layout(data)
    check_size(layout.width_px, layout.height_px, max_pixels)
    is_left_to_pillow = layout.components not in (1, 3) or (
        layout.components == 1 and layout.has_profile
    )
    if is_left_to_pillow:
        from imaging.picture_formats import decode_jpeg_with_pillow

        decoded = decode_jpeg_with_pillow(data)
        pixels, notes = decoded.pixels, decoded.notes
    else:
        pixels, notes = _decode_rgb(data), ()
    # In several passes, or other colours, a block without data has no colour to know it by.
    if layout.is_progressive or is_left_to_pillow or _may_be_painted_grey(pixels):
        _refuse_missing_data(data, layout)
    if layout.components == 3 and layout.has_profile:
        from imaging.picture_colour import convert_rgb_in_place
        from imaging.picture_formats import jpeg_profile

        notes = convert_rgb_in_place(pixels, jpeg_profile(data))
    return Decoded(pixels, notes=notes)


def _decode_rgb(data: bytes) -> NDArray[np.uint8]:
    """OpenCV writes straight into the array, with no copy of the picture between."""
    import cv2
    import numpy as np

    pixels = cv2.imdecode(np.frombuffer(data, np.uint8), cv2.IMREAD_COLOR_RGB)
    if pixels is None:
        raise Refused(DAMAGED)
    return np.asarray(pixels, dtype=np.uint8)


def _may_be_painted_grey(pixels: NDArray[np.uint8]) -> bool:
    """Whether four neighbours on a 4 px raster have the exact grey of a block without data.

    Every 8 × 8 px block holds such a group, whichever way the picture was turned.
    """
    raster = pixels[::4, ::4]
    grey = (raster[..., 0] == 128) & (raster[..., 1] == 128) & (raster[..., 2] == 128)
    return bool((grey[:-1, :-1] & grey[:-1, 1:] & grey[1:, :-1] & grey[1:, 1:]).any())


def _refuse_missing_data(data: bytes, layout: JpegLayout) -> None:
    """Refuse a JPEG whose coded data end before its last block does.

    Bytes put after the data are skipped by the decoder where all blocks were coded, and
    read as blocks where some were missing. So: if padding changes the picture, it has holes.
    """
    from PIL import ImageChops

    parts, at = [], 0
    for begin, end in layout.scans:
        parts += [data[at:begin], _RESTART.sub(_PADDING, data[begin:end]), _PADDING]
        at = end
    parts.append(data[at:])
    before, after = _half_size(data), _half_size(b"".join(parts))
    if ImageChops.difference(before, after).getbbox() is not None:
        raise Refused(CUT_SHORT)


def _half_size(data: bytes) -> Image.Image:
    """Pillow's decoder, as OpenCV's would print a warning for every padding it skips."""
    from PIL.JpegImagePlugin import JpegImageFile

    image = JpegImageFile(io.BytesIO(data))
    image.draft(image.mode, (image.width // 2, image.height // 2))
    image.load()
    return image
