"""Words and boxes laid out before anything is drawn, so that nothing is cut off."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from PIL import ImageDraw

from app.chart.fonts import Colour, Face


@dataclass(frozen=True, slots=True)
class Words:
    """One run of text, `baseline` px down from the block's top."""

    x: float
    baseline: float
    text: str
    face: Face
    colour: Colour


@dataclass(frozen=True, slots=True)
class Area:
    """A filled rectangle from (left, top) to (right, bottom)."""

    left: float
    top: float
    right: float
    bottom: float
    colour: Colour


@dataclass(frozen=True, slots=True)
class Block:
    """What is to be drawn, in px from the block's own corner, and how much room it takes.

    Attributes
    ----------
    width, height : float
    areas : tuple of Area
        Drawn first.
    words : tuple of Words
    """

    width: float
    height: float
    areas: tuple[Area, ...] = ()
    words: tuple[Words, ...] = ()

    def moved(self, x: float, y: float) -> Block:
        """The same block's content, further right and down."""
        return replace(
            self,
            areas=tuple(
                replace(a, left=a.left + x, right=a.right + x, top=a.top + y, bottom=a.bottom + y)
                for a in self.areas
            ),
            words=tuple(replace(w, x=w.x + x, baseline=w.baseline + y) for w in self.words),
        )

    def draw(self, draw: ImageDraw.ImageDraw) -> None:
        """Draw the block with its corner at (0, 0)."""
        for area in self.areas:
            # Pillow's rectangles contain their last pixel.
            corners = (area.left, area.top, area.right - 1, area.bottom - 1)
            draw.rectangle(tuple(round(c) for c in corners), fill=area.colour)
        for words in self.words:
            words.face.draw(draw, words.x, words.baseline, words.text, words.colour)


def paragraph(text: str, face: Face, width: float, colour: Colour) -> Block:
    """A text broken into lines no wider than `width`."""
    lines = wrapped(text, face, width)
    words = tuple(
        Words(0.0, face.rise_px + number * face.line_px, line, face, colour)
        for number, line in enumerate(lines)
    )
    return Block(width, face.line_px * len(lines), words=words)


def stack(blocks: Sequence[Block], gap: float = 0.0) -> Block:
    """Blocks below each other."""
    y, placed = 0.0, []
    for block in blocks:
        placed.append(block.moved(0.0, y))
        y += block.height + gap
    width = max((block.width for block in blocks), default=0.0)
    return _one_block(placed, width, max(0.0, y - gap))


def beside(blocks: Sequence[Block], gap: float) -> Block:
    """Blocks next to each other, their tops level."""
    x, placed = 0.0, []
    for block in blocks:
        placed.append(block.moved(x, 0.0))
        x += block.width + gap
    height = max((block.height for block in blocks), default=0.0)
    return _one_block(placed, max(0.0, x - gap), height)


def _one_block(placed: Sequence[Block], width: float, height: float) -> Block:
    areas = tuple(area for block in placed for area in block.areas)
    words = tuple(run for block in placed for run in block.words)
    return Block(width, height, areas, words)


def columns(blocks: Sequence[Block], count: int, gap: float, row_gap: float = 0.0) -> Block:
    """Blocks in reading order down `count` columns of about the same height."""
    room = sum(block.height + row_gap for block in blocks) / max(1, count)
    filled: list[list[Block]] = [[]]
    height = 0.0
    for block in blocks:
        if filled[-1] and height + block.height / 2.0 > room and len(filled) < count:
            filled.append([])
            height = 0.0
        filled[-1].append(block)
        height += block.height + row_gap
    return beside([stack(column, row_gap) for column in filled], gap)


def wrapped(text: str, face: Face, width: float) -> list[str]:
    """The lines of a text; a word wider than a line is broken where it must be."""
    lines: list[str] = []
    line = ""
    for word in face.readable(" ".join(text.split())).split(" "):
        longer = f"{line} {word}" if line else word
        if face.width_px(longer) <= width:
            line = longer
            continue
        if line:
            lines.append(line)
        *broken, line = _broken(word, face, width)
        lines += broken
    return [*lines, line]


def _broken(word: str, face: Face, width: float) -> list[str]:
    """A word in pieces that each fit; never less than one letter to a piece."""
    pieces: list[str] = []
    piece = ""
    for letter in word:
        if piece and face.width_px(piece + letter) > width:
            pieces.append(piece)
            piece = ""
        piece += letter
    return [*pieces, piece]
