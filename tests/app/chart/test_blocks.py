"""Words and boxes laid out: nothing is lost, nothing is cut off."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image, ImageDraw

from app.chart.blocks import Area, Block, beside, columns, paragraph, stack, wrapped
from app.chart.fonts import face

LETTERS = face(14)
INK = (20, 30, 40)


def block(width: float, height: float, name: str = "x") -> Block:
    words = paragraph(name, LETTERS, 400.0, INK).words
    return Block(width, height, (Area(0, 0, width, height, INK),), words)


@settings(max_examples=80, deadline=None)
@given(st.text(max_size=120), st.integers(20, 400))
def test_wrapping_loses_no_letter_and_no_line_is_too_wide(text: str, width: int) -> None:
    lines = wrapped(text, LETTERS, width)
    letters = LETTERS.readable(" ".join(text.split())).replace(" ", "")
    assert "".join(lines).replace(" ", "") == letters
    assert all(LETTERS.width_px(line) <= width or len(line) == 1 for line in lines)


def test_a_word_longer_than_a_line_is_broken() -> None:
    lines = wrapped("SHA-256 " + "ab" * 32, LETTERS, 150.0)
    assert len(lines) > 2
    assert "".join(lines) == "SHA-256" + "ab" * 32


def test_a_paragraph_is_as_high_as_its_lines() -> None:
    one, many = (paragraph(text, LETTERS, 100.0, INK) for text in ("QRS", "QRS " * 20))
    assert one.height == LETTERS.line_px
    assert many.height == LETTERS.line_px * len(many.words)
    assert many.words[-1].baseline < many.height


def test_stacked_blocks_stand_below_each_other() -> None:
    stacked = stack([block(50, 20), block(80, 30)], gap=5)
    assert (stacked.width, stacked.height) == (80, 55)
    assert [(a.top, a.bottom) for a in stacked.areas] == [(0, 20), (25, 55)]
    assert stack([]).height == 0.0


def test_blocks_beside_each_other_share_their_top() -> None:
    row = beside([block(50, 20), block(80, 30)], gap=7)
    assert (row.width, row.height) == (137, 30)
    assert [(a.left, a.right, a.top) for a in row.areas] == [(0, 50, 0), (57, 137, 0)]
    assert beside([], 7).width == 0.0


def test_columns_keep_the_order_and_share_the_height() -> None:
    laid = columns([block(50, 20, f"n{n}") for n in range(6)], 2, gap=10)
    assert [w.text for w in laid.words] == [f"n{n}" for n in range(6)]
    assert laid.height == 60
    assert {a.left for a in laid.areas} == {0, 60}
    one_tall = columns([block(50, 500), block(50, 20)], 2, gap=10)
    assert {a.left for a in one_tall.areas} == {0, 60}


def test_an_area_fills_its_pixels_and_no_more() -> None:
    image = Image.new("RGB", (20, 20), (255, 255, 255))
    Block(20, 20, (Area(5, 5, 10, 12, INK),)).draw(ImageDraw.Draw(image))
    dark = [(x, y) for x in range(20) for y in range(20) if image.getpixel((x, y)) == INK]
    assert (min(dark), max(dark)) == ((5, 5), (9, 11))
