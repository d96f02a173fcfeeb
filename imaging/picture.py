"""Open a picture file as pixels.

The format is told from the file's content, never from its name. Anything that cannot be
shown whole and as it was meant is refused: half a page, shown, could be measured.
"""

from __future__ import annotations

import hashlib
import logging
import stat
import warnings
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from imaging.errors import PictureError
from imaging.picture_parts import MAX_FILE_BYTES, MAX_PIXELS, Decoded, Refused, check_size

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

_log = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, eq=False)
class Picture:
    """A picture as loaded, EXIF orientation applied; never changed afterwards.

    Attributes
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        sRGB, read-only; ``pixels[y, x]``, (0, 0) is the centre of the first pixel.
    file_name : str
        Name without folder (a pasted picture: the name it was given).
    path : Path or None
        Where it was opened from; None for a pasted picture.
    sha256 : str
        Of the file's bytes, lower-case hexadecimal.
    page, page_count : int
        Page shown (0-based) and pages in the file (1 for a plain picture).
    notes : tuple of str
        What was changed on loading, one sentence each ("16-bit grey reduced to 8 bits").
    """

    pixels: NDArray[np.uint8]
    file_name: str
    path: Path | None
    sha256: str
    page: int = 0
    page_count: int = 1
    notes: tuple[str, ...] = ()

    @property
    def size_px(self) -> tuple[int, int]:
        """Width and height."""
        return self.pixels.shape[1], self.pixels.shape[0]


def open_picture(path: Path | str, page: int = 0, *, max_pixels: int = MAX_PIXELS) -> Picture:
    """Open one page of a picture file; the file itself is only ever read.

    Parameters
    ----------
    path : Path or str
        JPEG, PNG, TIFF, WebP, GIF, BMP, HEIC or PDF.
    page : int
        0-based; only a TIFF or a PDF has more than one.
    max_pixels : int
        Larger pictures are refused from their header, before they are decoded.

    Raises
    ------
    PictureError
        For every failure, with one sentence on what to do.

    Notes
    -----
    May be called on any thread.
    """
    path = Path(path)
    name = path.name or str(path)
    try:
        data = _read_whole_file(path)
        return _decode_checked(data, name, path, page, max_pixels)
    except Refused as refusal:
        raise PictureError(_sentence(name, refusal)) from refusal


def picture_from_bytes(
    data: bytes, file_name: str, page: int = 0, *, max_pixels: int = MAX_PIXELS
) -> Picture:
    """The same for a picture that has no file, such as a pasted one.

    Parameters
    ----------
    data : bytes
        A whole file's content in one of the formats of `open_picture`.
    file_name : str
        What to call it; any folder is dropped.
    page, max_pixels : int
        As for `open_picture`.

    Raises
    ------
    PictureError
        For every failure, with one sentence on what to do.
    """
    name = Path(file_name).name or "The picture"
    try:
        if len(data) > MAX_FILE_BYTES:
            raise Refused(_TOO_LARGE_A_FILE)
        return _decode_checked(data, name, None, page, max_pixels)
    except Refused as refusal:
        raise PictureError(_sentence(name, refusal)) from refusal


_TOO_LARGE_A_FILE = "is larger than 1 GiB; save or scan it again as an ordinary JPEG or PNG."


def _read_whole_file(path: Path) -> bytes:
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise Refused("is a folder; choose a picture file inside it.")
        if not stat.S_ISREG(status.st_mode):
            # Opening a pipe would wait for ever for somebody to write to it.
            raise Refused("is not an ordinary file; choose a picture file.")
        with path.open("rb") as file:
            if status.st_size > MAX_FILE_BYTES:
                raise Refused(_TOO_LARGE_A_FILE)
            # The file may grow between the two looks at it.
            data = file.read(MAX_FILE_BYTES + 1)
    except FileNotFoundError as error:
        raise Refused("was not found; check that it was not moved or renamed.") from error
    except PermissionError as error:
        raise Refused(
            "may not be read by this user account; copy it to a folder of yours and open the copy."
        ) from error
    except (OSError, ValueError) as error:
        _log.info("reading %r failed", path, exc_info=True)
        raise Refused(
            "could not be read; check the disk or network drive and try again."
        ) from error
    if len(data) > MAX_FILE_BYTES:
        raise Refused(_TOO_LARGE_A_FILE)
    return data


def _decode_checked(
    data: bytes, name: str, path: Path | None, page: int, max_pixels: int
) -> Picture:
    """Decode; whatever a decoder may throw at a damaged file comes out as a `Refused`."""
    if not data:
        raise Refused("is empty (0 bytes); copy the file again or scan the page again.")
    try:
        with warnings.catch_warnings():
            # They are printed on the terminal and say nothing a reader could act on.
            warnings.filterwarnings("ignore", module=r"(PIL|pillow_heif)\b")
            decoded = _decode(data, page, max_pixels)
        height_px, width_px = decoded.pixels.shape[:2]
        check_size(width_px, height_px, max_pixels)
    except Refused:
        raise
    except MemoryError as error:
        _log.info("no memory to decode %r", name, exc_info=True)
        raise Refused(
            "needs more memory than is free; close other programs or scan at 300 dots per inch."
        ) from error
    except Exception as error:
        # The decoders raise dozens of kinds on damaged files; none may reach the reader.
        # Below warning level, or logging that nobody set up would print the traceback.
        _log.info("decoding %r failed", name, exc_info=True)
        raise Refused(
            "is damaged, cut short or of a rare kind; copy it again, or save it as an ordinary PNG."
        ) from error
    decoded.pixels.setflags(write=False)
    return Picture(
        pixels=decoded.pixels,
        file_name=name,
        path=path,
        sha256=hashlib.sha256(data).hexdigest(),
        page=page,
        page_count=decoded.page_count,
        notes=decoded.notes,
    )


def _decode(data: bytes, page: int, max_pixels: int) -> Decoded:
    if data.startswith(b"\xff\xd8\xff"):
        from imaging.picture_jpeg import decode_jpeg

        return decode_jpeg(data, page, max_pixels)
    if b"%PDF-" in data[:1024]:  # ISO 32000-1 annex H.3.4.1: within the first 1024 bytes
        from imaging.picture_pdf import decode_pdf_page

        return decode_pdf_page(data, page, max_pixels)
    from imaging.picture_formats import decode_other

    return decode_other(data, page, max_pixels)


def _sentence(name: str, refusal: Refused) -> str:
    """Put the file's name, made printable and of bearable length, before the reason."""
    shown = "".join(
        letter if letter.isprintable() else "\N{REPLACEMENT CHARACTER}" for letter in name
    )
    if len(shown) > 80:
        shown = f"{shown[:50]}…{shown[-25:]}"
    return f"“{shown}” {refusal}"
