"""A plain table: columns as wide as their words, one that takes the rest and breaks lines."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.chart.blocks import Area, Block, beside, paragraph, stack
from app.chart.fonts import Colour, Face

_RULE: Colour = (206, 217, 219)


@dataclass(frozen=True, slots=True)
class Column:
    """One column.

    Attributes
    ----------
    title : str
    share : float
        0: as wide as its widest cell; else its share of the room that is left.
    """

    title: str
    share: float = 0.0


@dataclass(frozen=True, slots=True)
class Look:
    """Faces and colours of a table."""

    head: Face
    strong: Face
    plain: Face
    quiet: Colour
    ink: Colour


def table(
    table_columns: Sequence[Column],
    rows: Sequence[Sequence[str]],
    width: float,
    look: Look,
    strong_column: int | None = None,
) -> Block:
    """Lay out a table no wider than `width`; every cell breaks lines rather than lose words."""
    gap = look.plain.size_px * 0.8
    widths = _widths(table_columns, rows, width - gap * (len(table_columns) - 1), look)
    head = [
        paragraph(column.title, look.head, cell, look.quiet)
        for column, cell in zip(table_columns, widths, strict=True)
    ]
    lines = [beside(head, gap), _rule(width, look)]
    for row in rows:
        cells = [
            paragraph(text, look.strong if number == strong_column else look.plain, cell, look.ink)
            for number, (text, cell) in enumerate(zip(row, widths, strict=True))
        ]
        lines += [beside(cells, gap), _rule(width, look)]
    return stack(lines)


def _rule(width: float, look: Look) -> Block:
    room = max(4.0, look.plain.size_px * 0.3)
    thick = max(1.0, look.plain.size_px / 16.0)
    top = (room - thick) / 2.0
    return Block(width, room, (Area(0.0, top, width, top + thick, _RULE),))


def _widths(
    table_columns: Sequence[Column], rows: Sequence[Sequence[str]], room: float, look: Look
) -> list[float]:
    natural = []
    for number, column in enumerate(table_columns):
        cells = [look.strong.width_px(row[number]) for row in rows]
        natural.append(max([look.head.width_px(column.title), *cells]) + 1.0)
    shares = [column.share for column in table_columns]
    fixed = sum(w for w, share in zip(natural, shares, strict=True) if not share)
    wanted = sum(w for w, share in zip(natural, shares, strict=True) if share)
    left = max(room - fixed, 0.25 * room if wanted else 0.0)
    # Where even the columns that should not break are too wide, all give way alike.
    squeeze = min(1.0, (room - min(left, wanted)) / fixed) if fixed else 1.0
    parts = sum(shares)
    if wanted <= left:
        return [w * squeeze if not s else w for w, s in zip(natural, shares, strict=True)]
    return [
        w * squeeze if not share else left * share / parts
        for w, share in zip(natural, shares, strict=True)
    ]
