"""Decode PNG, TIFF, WebP, GIF, BMP, HEIC and the rarer JPEGs through Pillow.

Pillow's reader classes are called directly: `Image.open` would try formats nobody asked
for and hold the picture against a process-wide pixel limit of its own.
"""

from __future__ import annotations

import io
import logging
import zlib
from typing import TYPE_CHECKING, Any

from imaging.picture_colour import rgb_pixels
from imaging.picture_parts import CUT_SHORT, DAMAGED, Decoded, Refused, check_page, check_size
from imaging.picture_tiff import check_tiff_data, check_tiff_directories

if TYPE_CHECKING:
    from PIL import Image

_log = logging.getLogger(__name__)

_PNG_SIGNATURE = b"\x89PNG\r\n\x1a\n"
_TIFF_SIGNATURES = (b"II*\0", b"MM\0*", b"II+\0", b"MM\0+")
_HEIF_BRANDS = frozenset({b"heic", b"heix", b"heim", b"heis", b"mif1", b"msf1", b"hevc", b"hevx"})

FIRST_FRAME = "The file is animated; its first frame is shown."
HIGH_BYTE = "16 bits per channel reduced to 8 by keeping the high byte (65535 becomes 255)."
TEN_BIT = "More than 8 bits per channel, reduced to 8."
ORIENTATION_UNREADABLE = "The picture's orientation entry is unreadable and was ignored."


def decode_other(data: bytes, page: int, max_pixels: int) -> Decoded:
    """Decode anything but a JPEG or a PDF.

    Raises
    ------
    Refused
        If the format is unknown, or the file is cut short, too large or too small.
    """
    if data.startswith(_PNG_SIGNATURE):
        check_page(page, 1)
        return _decode_png(data, max_pixels)
    if data.startswith(_TIFF_SIGNATURES):
        return _decode_tiff(data, page, max_pixels)
    if data.startswith(b"RIFF") and data[8:12] == b"WEBP":
        check_page(page, 1)
        return _decode_webp(data, max_pixels)
    if data.startswith((b"GIF87a", b"GIF89a")):
        from PIL.GifImagePlugin import GifImageFile

        check_page(page, 1)
        return _decode_plain(GifImageFile(io.BytesIO(data)), max_pixels)
    if data.startswith(b"BM") and len(data) > 26:
        from PIL.BmpImagePlugin import BmpImageFile

        check_page(page, 1)
        return _decode_plain(BmpImageFile(io.BytesIO(data)), max_pixels)
    if data[4:8] == b"ftyp" and _is_heif(data):
        check_page(page, 1)
        return _decode_heif(data, max_pixels)
    raise Refused(
        "is not a picture this program can open; choose a JPEG, PNG, TIFF, WebP, GIF, BMP, "
        "HEIC or PDF file."
    )


def decode_jpeg_with_pillow(data: bytes) -> Decoded:
    """Decode a CMYK JPEG, or a grey one with a colour profile; its size is checked already."""
    from PIL.JpegImagePlugin import JpegImageFile

    return _finish(JpegImageFile(io.BytesIO(data)))


def jpeg_profile(data: bytes) -> bytes | None:
    """The ICC profile of a JPEG, its parts joined; None where it is incomplete."""
    from PIL.JpegImagePlugin import JpegImageFile

    with JpegImageFile(io.BytesIO(data)) as image:
        return _profile(image)


def _decode_plain(image: Any, max_pixels: int) -> Decoded:
    check_size(image.width, image.height, max_pixels)
    animated = getattr(image, "is_animated", False)
    return _finish(image, (FIRST_FRAME,) if animated else ())


def _finish(
    image: Image.Image, notes: tuple[str, ...] = (), page_count: int = 1, **how: bool
) -> Decoded:
    """Load, turn upright, convert."""
    profile = _profile(image)
    image.load()
    image, orientation_notes = _upright(image)
    pixels, colour_notes = rgb_pixels(image, profile, **how)
    return Decoded(pixels, page_count, notes + orientation_notes + colour_notes)


def _profile(image: Image.Image) -> bytes | None:
    profile = image.info.get("icc_profile")
    return profile if isinstance(profile, bytes) else None


def _upright(image: Image.Image) -> tuple[Image.Image, tuple[str, ...]]:
    """Apply the EXIF orientation (JEITA CP-3451, tag 274); Pillow has done so for TIFF."""
    from PIL import Image as PillowImage

    way = PillowImage.Transpose
    turns = {
        2: way.FLIP_LEFT_RIGHT,
        3: way.ROTATE_180,
        4: way.FLIP_TOP_BOTTOM,
        5: way.TRANSPOSE,
        6: way.ROTATE_270,
        7: way.TRANSVERSE,
        8: way.ROTATE_90,
    }
    if image.format == "TIFF":
        return image, ()
    try:
        turn = turns.get(image.getexif().get(0x0112, 1))
    except Exception:  # Pillow's EXIF reader raises many kinds on damaged entries
        _log.info("unreadable EXIF", exc_info=True)
        return image, (ORIENTATION_UNREADABLE,)
    return (image if turn is None else image.transpose(turn)), ()


def _decode_png(data: bytes, max_pixels: int) -> Decoded:
    from PIL.PngImagePlugin import PngImageFile

    # The size stands in the first chunk, so a bomb is refused before anything is unpacked.
    if len(data) < 33 or data[12:16] != b"IHDR":
        raise Refused(CUT_SHORT if len(data) < 33 else DAMAGED)
    width_px, height_px = int.from_bytes(data[16:20], "big"), int.from_bytes(data[20:24], "big")
    check_size(width_px, height_px, max_pixels)
    _check_png_chunks(data)
    notes: tuple[str, ...] = (HIGH_BYTE,) if data[24] == 16 else ()
    image = PngImageFile(io.BytesIO(data))
    if getattr(image, "is_animated", False):
        notes += (FIRST_FRAME,)
    return _finish(image, notes)


def _check_png_chunks(data: bytes) -> None:
    """Refuse a PNG without its end, or with a damaged chunk that matters.

    Each chunk ends with a CRC over its type and data (ISO/IEC 15948, 5.3); an upper-case
    first letter marks a critical chunk (5.4). Pillow does not check those of the pixels.
    """
    at, view = 8, memoryview(data)
    while True:
        length, kind = int.from_bytes(view[at : at + 4], "big"), bytes(view[at + 4 : at + 8])
        end = at + 12 + length
        if end > len(data):
            raise Refused(CUT_SHORT)
        stored = int.from_bytes(view[end - 4 : end], "big")
        if kind[:1].isupper() and zlib.crc32(view[at + 4 : end - 4]) != stored:
            raise Refused(DAMAGED)
        if kind == b"IEND":
            return
        at = end


def _decode_tiff(data: bytes, page: int, max_pixels: int) -> Decoded:
    from PIL.TiffImagePlugin import TiffImageFile

    check_tiff_directories(data)
    image = TiffImageFile(io.BytesIO(data))
    page_count = image.n_frames
    check_page(page, page_count)
    image.seek(page)
    check_size(image.width, image.height, max_pixels)
    check_tiff_data(image, len(data))
    bits = image.tag_v2.get(258, (1,))
    if image.mode in ("I", "F"):
        raise Refused(
            "holds signed, 32-bit or floating-point values, not a picture; "
            "save it again with 8 bits per channel."
        )
    is_uncompressed, is_planar = image.tag_v2.get(259, 1) == 1, image.tag_v2.get(284) == 2
    if max(bits) == 16 and len(bits) > 1 and is_uncompressed and is_planar:
        # Pillow takes the two bytes of a sample for two pixels (seen in 13.0).
        raise Refused(
            "keeps its 16-bit colours in separate planes, which cannot be read; "
            "save it again with 8 bits per channel."
        )
    notes = (HIGH_BYTE,) if max(bits) == 16 else ()
    white_is_zero = image.tag_v2.get(262) == 0 and max(bits) == 16
    return _finish(image, notes, page_count, white_is_zero=white_is_zero)


def _decode_webp(data: bytes, max_pixels: int) -> Decoded:
    from PIL.WebPImagePlugin import WebPImageFile

    width_px, height_px = _webp_size_px(data)
    check_size(width_px, height_px, max_pixels)
    if int.from_bytes(data[4:8], "little") + 8 > len(data):
        raise Refused(CUT_SHORT)
    return _decode_plain(WebPImageFile(io.BytesIO(data)), max_pixels)


def _webp_size_px(data: bytes) -> tuple[int, int]:
    """Width and height from the first chunk (RFC 9649, 2.5 to 2.7).

    Read here because Pillow's decoder sets the memory aside as soon as it is made.
    """
    if len(data) < 30:
        raise Refused(CUT_SHORT)
    kind = data[12:16]
    if kind == b"VP8X":
        return 1 + int.from_bytes(data[24:27], "little"), 1 + int.from_bytes(data[27:30], "little")
    if kind == b"VP8L":
        packed = int.from_bytes(data[21:25], "little")
        return 1 + (packed & 0x3FFF), 1 + (packed >> 14 & 0x3FFF)
    if kind == b"VP8 ":
        sides = data[26:28], data[28:30]
        width_px, height_px = (int.from_bytes(side, "little") & 0x3FFF for side in sides)
        return width_px, height_px
    raise Refused(DAMAGED)


def _is_heif(data: bytes) -> bool:
    """Whether the major or a compatible brand is HEIF's (ISO/IEC 23008-12, 10.2)."""
    length = min(int.from_bytes(data[:4], "big"), 256)
    brands = {data[8:12]} | {data[at : at + 4] for at in range(16, length, 4)}
    return not _HEIF_BRANDS.isdisjoint(brands) and data[8:12] not in (b"avif", b"avis")


def _decode_heif(data: bytes, max_pixels: int) -> Decoded:
    """The file's main picture; libheif has turned it upright, so EXIF must not turn it again."""
    import pillow_heif

    _check_boxes(data)
    heif = pillow_heif.open_heif(io.BytesIO(data))
    width_px, height_px = heif.size
    check_size(width_px, height_px, max_pixels)
    notes: tuple[str, ...] = (TEN_BIT,) if heif.info.get("bit_depth", 8) > 8 else ()
    if len(heif) > 1:
        notes += ("The file holds several pictures; its main one is shown.",)
    pixels, colour_notes = rgb_pixels(heif.to_pillow(), heif.info.get("icc_profile"))
    return Decoded(pixels, notes=notes + colour_notes)


def _check_boxes(data: bytes) -> None:
    """Refuse a HEIF whose outermost boxes reach beyond its end (ISO/IEC 14496-12, 4.2)."""
    at = 0
    while at < len(data):
        size = int.from_bytes(data[at : at + 4], "big")
        if size == 1:
            size = int.from_bytes(data[at + 8 : at + 16], "big")
        if size == 0:  # the box runs to the end of the file
            return
        if size < 8:
            raise Refused(DAMAGED)
        at += size
    if at > len(data):
        raise Refused(CUT_SHORT)
