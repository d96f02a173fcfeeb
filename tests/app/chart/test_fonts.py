"""Letters: every text can be drawn, and what no font has is seen to be missing."""

from __future__ import annotations

import sys

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image, ImageDraw, ImageFont

from app.chart import fonts
from app.chart.fonts import Face, face

SYMBOLS = "± − ° √ · × ≥ ≤ – ² ?"


def carried_alone(size_px: int = 20) -> Face:
    """Only the font that Pillow brings, as on a machine without fonts."""
    font = ImageFont.load_default(size=size_px)
    assert isinstance(font, ImageFont.FreeTypeFont)
    return Face((font,), size_px)


def ink_of(letters: Face, text: str) -> int:
    """How much is drawn for a text."""
    image = Image.new("RGB", (1200, 60), (255, 255, 255))
    letters.draw(ImageDraw.Draw(image), 10, 40, text, (0, 0, 0))
    return sum(255 - value for value in image.convert("L").tobytes())


@pytest.mark.parametrize("letters", [face(20), face(20, bold=True), carried_alone()])
def test_every_symbol_we_use_is_drawn(letters: Face) -> None:
    for symbol in SYMBOLS.split():
        assert ink_of(letters, symbol) > 0
        assert "U+" not in letters.readable(symbol)


def test_the_minus_sign_keeps_its_meaning_without_a_font_for_it() -> None:
    assert carried_alone().readable("−8 ms, √RR, ≥ 120") == "-8 ms, sqrt RR, >= 120"


def test_names_in_other_letters_are_seen_to_be_replaced() -> None:
    letters = carried_alone()
    assert letters.readable("José") == "Jose"
    assert letters.readable("Ж") == "[U+0416]"


@pytest.mark.parametrize("text", ["a\nb", "a\x00b", "a\x1bb", "\ud800", "a\u202eb", "\u200d", ""])
def test_what_is_no_letter_is_shown_by_its_number(text: str) -> None:
    letters = face(16)
    shown = letters.readable(text)
    assert all(letter.isprintable() for letter in shown)
    assert letters.width_px(text) >= 0.0
    ink_of(letters, text)


@settings(max_examples=60, deadline=None)
@given(st.text(max_size=30))
def test_any_text_can_be_measured_and_drawn(text: str) -> None:
    letters = carried_alone(12)
    assert letters.width_px(text) == letters.width_px(letters.readable(text))
    ink_of(letters, text)


def test_a_machine_without_fonts_still_has_letters(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(fonts, "_FOLDERS", {})
    letters = face(37)
    assert len(letters.fonts) == 1
    assert ink_of(letters, "QRS 92 ± 8 ms") > 0


def test_a_font_file_that_is_damaged_is_passed_over(
    monkeypatch: pytest.MonkeyPatch, tmp_path_factory: pytest.TempPathFactory
) -> None:
    folder = tmp_path_factory.mktemp("fonts")
    (folder / "Damaged example.ttf").write_bytes(b"no font")
    monkeypatch.setattr(fonts, "_FOLDERS", {sys.platform: (str(folder),)})
    monkeypatch.setattr(fonts, "_REGULAR", ("Damaged example.ttf",))
    assert len(face(39).fonts) == 1


def test_parts_drawn_with_two_fonts_stand_one_after_the_other() -> None:
    letters = face(20)
    assert letters.width_px("ab") + letters.width_px("±") == pytest.approx(
        letters.width_px("ab±"), abs=1.0
    )
    assert letters.width_px("QRS 92 ± 8 ms") > letters.width_px("QRS 92")
