"""What the picture decoders share: their result, their refusal and their limits."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

MAX_PIXELS = 250_000_000
"""An A4 page at 1200 dots per inch is 139 million; common practice, no source."""

MAX_FILE_BYTES = 1 << 30

MIN_SIDE_PX = 32
"""Below this no two large squares could be told apart; common practice, no source."""

CUT_SHORT = "is cut short: its end is missing; copy the file again or scan the page again."
DAMAGED = "is damaged; copy the file again or scan the page again."


class Refused(Exception):  # noqa: N818 - a refusal is an answer, not a fault of the program
    """The second half of a sentence that begins with the file's name."""


@dataclass(frozen=True, slots=True, eq=False)
class Decoded:
    """What a decoder hands back: sRGB pixels, uint8, shape (height, width, 3), C-contiguous."""

    pixels: NDArray[np.uint8]
    page_count: int = 1
    notes: tuple[str, ...] = ()


def check_size(width_px: int, height_px: int, max_pixels: int) -> None:
    """Refuse a picture too small to hold a grid, or too large to decode.

    Raises
    ------
    Refused
        If a side is under `MIN_SIDE_PX` or there are more than `max_pixels` pixels.
    """
    if width_px * height_px > max_pixels:
        raise Refused(
            f"has {width_px} × {height_px} pixels, more than the {max_pixels / 1e6:.0f} million "
            "allowed; scan it again at 300 dots per inch."
        )
    if min(width_px, height_px) < MIN_SIDE_PX:
        raise Refused(
            f"has only {width_px} × {height_px} pixels, and each side needs at least "
            f"{MIN_SIDE_PX}; scan or photograph the page again."
        )


def check_page(page: int, page_count: int) -> None:
    """Refuse a page that is not there.

    Raises
    ------
    Refused
        Unless ``0 <= page < page_count``.
    """
    if page_count < 1:
        raise Refused("has no pages; copy the file again or scan the page again.")
    if not 0 <= page < page_count:
        pages = "1 page" if page_count == 1 else f"{page_count} pages"
        choose = "page 1" if page_count == 1 else f"a page from 1 to {page_count}"
        raise Refused(f"has {pages}, so there is no page {page + 1}; choose {choose}.")
