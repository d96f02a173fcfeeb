"""Open a picture file as pixels."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray


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


def open_picture(path: Path | str, page: int = 0) -> Picture:
    raise NotImplementedError


def picture_from_bytes(data: bytes, file_name: str, page: int = 0) -> Picture:
    raise NotImplementedError
