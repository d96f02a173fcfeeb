"""Letters: which font has them, how wide they are, and what stands for those no font has."""

from __future__ import annotations

import functools
import os
import sys
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path

from PIL import ImageDraw, ImageFont

Colour = tuple[int, int, int]
_Font = ImageFont.FreeTypeFont

# Tried in this order; the last resort is the font that Pillow carries (letters of English only).
_FOLDERS = {
    "linux": (
        "/usr/share/fonts/truetype/dejavu",
        "/usr/share/fonts/dejavu-sans-fonts",
        "/usr/share/fonts/TTF",
        "/usr/share/fonts/dejavu",
    ),
    "darwin": ("/Library/Fonts", "/System/Library/Fonts/Supplemental"),
    "win32": (f"{os.environ.get('WINDIR', 'C:/Windows')}/Fonts",),
}
_REGULAR = ("DejaVuSans.ttf", "segoeui.ttf", "Arial Unicode.ttf", "arial.ttf", "Arial.ttf")
_BOLD = ("DejaVuSans-Bold.ttf", "segoeuib.ttf", "Arial Bold.ttf", "arialbd.ttf")
# A code point that is never a letter: what a font draws for it, it draws for what it lacks.
_NO_LETTER = "\U0010fffe"
_STAND_INS = {
    "−": "-",
    "–": "-",
    "—": "-",
    "√": "sqrt ",
    "×": "x",
    "≥": ">=",
    "≤": "<=",
    "·": ".",
    "²": "2",
    "°": " deg",
    "±": "+/-",
    "′": "'",
}


@dataclass(frozen=True, slots=True)
class Face:
    """Fonts of one size; the first that has a letter draws it.

    Attributes
    ----------
    fonts : tuple of FreeTypeFont
        Never empty.
    size_px : int
    """

    fonts: tuple[_Font, ...]
    size_px: int

    @property
    def line_px(self) -> int:
        """From baseline to baseline."""
        return round(1.32 * self.size_px)

    @property
    def rise_px(self) -> int:
        """From the top of a line to its baseline."""
        return round(1.02 * self.size_px)

    def width_px(self, text: str) -> float:
        """How far a text runs."""
        return sum(float(font.getlength(part)) for font, part in self._runs(text))

    def draw(
        self, draw: ImageDraw.ImageDraw, x: float, baseline: float, text: str, colour: Colour
    ) -> None:
        """Draw a text from `x` on a baseline."""
        for font, part in self._runs(text):
            draw.text((x, baseline), part, font=font, fill=colour, anchor="ls")
            x += float(font.getlength(part))

    def _runs(self, text: str) -> Iterator[tuple[_Font, str]]:
        """Parts of a text with the font of each, letters no font has already replaced."""
        numbered = ((self._font_of(letter) or 0, letter) for letter in self.readable(text))
        for number, letters in groupby(numbered, key=lambda item: item[0]):
            yield self.fonts[number], "".join(letter for _, letter in letters)

    def readable(self, text: str) -> str:
        """The text with a visible stand-in for every letter that no font has."""
        return "".join(
            letter if self._font_of(letter) is not None else self._stand_in(letter)
            for letter in text
        )

    def _font_of(self, letter: str) -> int | None:
        return next((n for n, font in enumerate(self.fonts) if _has(font, letter)), None)

    def _stand_in(self, letter: str) -> str:
        if letter in _STAND_INS:
            return _STAND_INS[letter]
        plain = unicodedata.normalize("NFKD", letter)[:1]
        if plain.isascii() and plain.isalnum():
            return plain
        return f"[U+{ord(letter):04X}]"


def face(size_px: int, *, bold: bool = False) -> Face:
    """The letters of one size."""
    return _face(size_px, bold)


@functools.lru_cache(maxsize=16)
def _face(size_px: int, bold: bool) -> Face:
    names = (*_BOLD, *_REGULAR) if bold else _REGULAR
    folders = _FOLDERS.get(sys.platform, ())
    paths = [Path(folder) / name for name in names for folder in folders]
    found = [font for path in paths if (font := _load(path, size_px)) is not None]
    carried = ImageFont.load_default(size=size_px)
    assert isinstance(carried, _Font)  # every wheel of Pillow brings FreeType
    return Face((*found, carried), size_px)


def _load(path: Path, size_px: int) -> _Font | None:
    # Asked for a file that is not there, Pillow would search every folder of fonts.
    if not path.is_file():
        return None
    try:
        return ImageFont.truetype(str(path), size_px)
    except OSError:
        return None


@functools.lru_cache(maxsize=4096)
def _has(font: _Font, letter: str) -> bool:
    """Whether a font has a letter that can be shown: no control or direction mark is one."""
    if letter == " ":
        return True
    if not letter.isprintable():
        return False
    drawn, missing = font.getmask(letter), font.getmask(_NO_LETTER)
    return drawn.size != missing.size or bytes(drawn) != bytes(missing)
