"""Regular things that are no ECG paper, seen flat: what clinics, desks and walls have.

Beside the kinds of `tests.no_grid`. Each drawer returns light levels, 0 to 1, of shape
(HEIGHT_PX, WIDTH_PX) or (HEIGHT_PX, WIDTH_PX, 3).
"""

from __future__ import annotations

from collections.abc import Callable

import cv2
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

from sample_scans.pen import line_overlap
from tests.no_grid import HEIGHT_PX, PX_PER_MM, WIDTH_PX

Plane = NDArray[np.float32]
Drawer = Callable[[np.random.Generator], Plane]

_Y, _X = np.mgrid[0:HEIGHT_PX, 0:WIDTH_PX].astype(np.float32)
WHITE = np.full((HEIGHT_PX, WIDTH_PX), 0.96, dtype=np.float32)


def _lines(place_px: Plane, pitch_px: float, width_px: float) -> Plane:
    """Coverage of lines at every multiple of the pitch."""
    off_px = np.abs(place_px - pitch_px * np.round(place_px / pitch_px))
    return line_overlap(off_px.astype(np.float32), width_px)


def _tint(level: Plane, red: float, green: float, blue: float) -> Plane:
    return np.asarray(level[:, :, None] * np.array([red, green, blue], dtype=np.float32))


def _cells(rng: np.random.Generator, wide_px: float, high_px: float) -> Plane:
    """A random level for each cell of a lattice."""
    levels = rng.random((int(HEIGHT_PX / high_px) + 3, int(WIDTH_PX / wide_px) + 3))
    found = levels[(_Y // high_px).astype(int), (_X // wide_px).astype(int)]
    return np.asarray(found, dtype=np.float32)


def _smooth(rng: np.random.Generator, sigma_px: float) -> Plane:
    field = rng.standard_normal((HEIGHT_PX, WIDTH_PX), dtype=np.float32)
    field = cv2.GaussianBlur(field, (0, 0), sigma_px)
    return np.asarray(field / field.std())


def _drawing(level: int) -> tuple[Image.Image, ImageDraw.ImageDraw]:
    picture = Image.new("L", (WIDTH_PX, HEIGHT_PX), level)
    return picture, ImageDraw.Draw(picture)


def _levels(picture: Image.Image) -> Plane:
    return np.asarray(picture, dtype=np.float32) / np.float32(255.0)


def _font(size_px: float) -> ImageFont.ImageFont | ImageFont.FreeTypeFont:
    return ImageFont.load_default(size=size_px)


def window_blinds(rng: np.random.Generator) -> Plane:
    slats = np.mod(_Y + 3.0 * np.sin(_X / 300.0), 38.0) / 38.0
    cords = np.maximum(*(line_overlap(np.abs(_X - at), 4.0) for at in (300.0, 950.0)))
    return np.asarray(0.95 - 0.55 * slats**3 - 0.3 * cords)


def tiled_floor(rng: np.random.Generator) -> Plane:
    tone = 0.55 + 0.12 * _cells(rng, 180.0, 180.0) + 0.02 * _smooth(rng, 2.0)
    joint = np.maximum(_lines(_X, 180.0, 5.0), _lines(_Y, 180.0, 5.0))
    return _tint(tone * (1.0 - 0.45 * joint), 1.0, 0.95, 0.88)


def mosaic(rng: np.random.Generator) -> Plane:
    tone = 0.3 + 0.5 * _cells(rng, 31.0, 31.0)
    joint = np.maximum(_lines(_X, 31.0, 4.0), _lines(_Y, 31.0, 4.0))
    return _tint(tone * (1.0 - joint) + 0.85 * joint, 0.7, 0.9, 1.0)


def plaid(rng: np.random.Generator) -> Plane:
    stripes = [(140.0, 60.0, 0.0), (140.0, 8.0, 45.0), (140.0, 4.0, 90.0)]
    across = sum(0.22 * _lines(_X - shift, pitch, width) for pitch, width, shift in stripes)
    down = sum(0.22 * _lines(_Y - shift, pitch, width) for pitch, width, shift in stripes)
    weave = 0.03 * np.sin((_X + _Y) * 1.3)
    return _tint(np.asarray(0.85 - across - down + weave), 1.0, 0.45, 0.4)


def gingham(rng: np.random.Generator) -> Plane:
    across, down = (np.mod(np.floor(place / 26.0), 2) for place in (_X, _Y))
    return _tint(np.asarray(0.95 - 0.25 * across - 0.25 * down), 0.75, 0.85, 1.0)


def radiator(rng: np.random.Generator) -> Plane:
    return np.asarray(0.75 + 0.2 * np.cos(2.0 * np.pi * _X / 74.0) - 0.1 * (_Y / HEIGHT_PX))


def corrugated_card(rng: np.random.Generator) -> Plane:
    level = 0.65 + 0.06 * np.sin(2.0 * np.pi * _X / 19.0) + 0.02 * _smooth(rng, 1.5)
    return _tint(np.asarray(level), 1.0, 0.82, 0.6)


def spreadsheet_on_screen(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(252)
    for row in range(0, HEIGHT_PX, 26):
        for column in range(0, WIDTH_PX, 96):
            pen.rectangle((column, row, column + 96, row + 26), outline=205)
            if rng.random() < 0.6:
                pen.text((column + 40, row + 5), f"{rng.uniform(0, 999):.1f}", 40, _font(14))
    light = np.ones((HEIGHT_PX, WIDTH_PX, 3), dtype=np.float32) * 0.6
    for channel in range(3):
        light[:, channel::3, channel] = 1.0
    return np.asarray(_levels(picture)[:, :, None] * light)


def crossword(rng: np.random.Generator) -> Plane:
    size = 62.0
    black = _cells(rng, size, size) < 0.2
    joint = np.maximum(_lines(_X, size, 2.0), _lines(_Y, size, 2.0))
    return np.asarray(np.where(black, 0.08, WHITE - 0.85 * joint), dtype=np.float32)


def sudoku(rng: np.random.Generator) -> Plane:
    """Nine by nine cells, bold every third line, figures in a third of them."""
    picture, pen = _drawing(246)
    for line in range(10):
        width, at = (6 if line % 3 == 0 else 2), 40 + 95 * line
        pen.line((200, at, 200 + 855, at), 20, width)
        pen.line((160 + at, 40, 160 + at, 895), 20, width)
    for cell in rng.permutation(81)[:28]:
        place = (200 + 95 * (cell % 9) + 30, 40 + 95 * (cell // 9) + 20)
        pen.text(place, str(rng.integers(1, 10)), 20, _font(52))
    return _levels(picture)


def tape_measure(rng: np.random.Generator) -> Plane:
    """Millimetre ticks, longer at 5 and 10: one family of lines only."""
    mm = _X / PX_PER_MM
    nearest = np.round(mm)
    long_mm = np.where(nearest % 10 == 0, 12.0, np.where(nearest % 5 == 0, 9.0, 6.0))
    tick = line_overlap((np.abs(mm - nearest) * PX_PER_MM).astype(np.float32), 1.6)
    band = np.abs(_Y - 470.0) < 150.0
    tick = tick * band * (long_mm > (_Y - 320.0) / PX_PER_MM)
    return _tint(np.asarray(np.where(band, 0.9 - 0.8 * tick, 0.4)), 1.0, 0.92, 0.5)


def herringbone(rng: np.random.Generator) -> Plane:
    column = np.floor(_X / 60.0)
    slant = np.where(column % 2 == 0, _Y + _X, _Y - _X).astype(np.float32)
    tone = 0.55 + 0.1 * np.sin(np.floor(slant / 34.0) * 12.9)
    seam = np.maximum(_lines(slant, 34.0, 2.5), _lines(_X, 60.0, 2.5))
    return _tint(np.asarray(tone - 0.3 * seam), 1.0, 0.8, 0.58)


def floor_boards(rng: np.random.Generator) -> Plane:
    tone = 0.45 + 0.15 * _cells(rng, 2000.0, 64.0) + 0.03 * _smooth(rng, 6.0)
    return _tint(tone - 0.3 * _lines(_Y, 64.0, 3.0), 1.0, 0.75, 0.55)


def chain_link_fence(rng: np.random.Generator) -> Plane:
    wire = np.maximum(_lines(_X + _Y, 58.0, 7.0), _lines(_X - _Y, 58.0, 7.0))
    behind = 0.45 + 0.12 * _smooth(rng, 40.0)
    return _tint(np.asarray(behind * (1.0 - wire) + 0.75 * wire), 0.9, 1.0, 0.85)


def perforated_metal(rng: np.random.Generator) -> Plane:
    """Round holes in a hexagonal pattern."""
    row = np.round(_Y / 22.0)
    x = _X + 12.7 * np.mod(row, 2)
    hole = np.hypot(x - 25.4 * np.round(x / 25.4), _Y - 22.0 * row)
    return np.asarray(0.7 - 0.55 * np.clip(8.5 - hole, 0, 1), dtype=np.float32)


def peg_board(rng: np.random.Generator) -> Plane:
    """Round holes at the crossings of a wide square lattice."""
    hole = np.hypot(_X - 96.0 * np.round(_X / 96.0), _Y - 96.0 * np.round(_Y / 96.0))
    return _tint(np.asarray(0.7 - 0.6 * np.clip(11.0 - hole, 0, 1)), 1.0, 0.85, 0.65)


def blister_pack(rng: np.random.Generator) -> Plane:
    off = np.hypot((np.mod(_X, 150.0) - 75.0) / 55.0, (np.mod(_Y, 110.0) - 55.0) / 38.0)
    foil = 0.7 + 0.03 * _smooth(rng, 1.5)
    return np.asarray(np.where(off < 1.0, 0.95 - 0.25 * off**4, foil), dtype=np.float32)


def house_front(rng: np.random.Generator) -> Plane:
    inside = (np.abs(np.mod(_X, 120.0) - 60.0) < 32.0) & (np.abs(np.mod(_Y, 160.0) - 80.0) < 50.0)
    glass = 0.2 + 0.4 * _cells(rng, 120.0, 160.0)
    return _tint(np.asarray(np.where(inside, glass, 0.78)), 1.0, 0.93, 0.85)


def book_shelf(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(50)
    for shelf in range(3):
        x = 0
        while x < WIDTH_PX:
            wide, high = int(rng.integers(18, 60)), int(rng.integers(200, 280))
            bottom = 305 * (shelf + 1)
            pen.rectangle((x, bottom - high, x + wide - 2, bottom), int(rng.integers(40, 230)))
            x += wide
    return _levels(picture)


def circuit_board(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(70)
    for _ in range(160):
        x, y = (int(place) * 12 for place in rng.integers(0, (105, 78)))
        turn = x + int(rng.integers(-12, 13)) * 12
        end = y + int(rng.integers(-12, 13)) * 12
        pen.line([(x, y), (turn, y), (turn, end)], 150, 3)
        pen.ellipse((turn - 5, end - 5, turn + 5, end + 5), 210)
    for _ in range(14):
        x, y = (int(place) for place in rng.integers(20, (1100, 800)))
        pen.rectangle((x, y, x + 120, y + 60), 25)
    return _tint(_levels(picture), 0.4, 1.0, 0.5)


def keypad(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(40)
    for number in range(20):
        x, y = 60 + 230 * (number % 5), 40 + 225 * (number // 5)
        pen.rounded_rectangle((x, y, x + 200, y + 190), 24, 215)
        pen.text((x + 80, y + 60), str(number % 10), 30, _font(70))
    return _levels(picture)


def monitor_without_grid(rng: np.random.Generator) -> Plane:
    """Bright waves on a black screen, as a bedside monitor shows them."""
    level = np.full((HEIGHT_PX, WIDTH_PX, 3), 0.03, dtype=np.float32)
    colours = [(0.2, 1.0, 0.3), (1.0, 0.9, 0.2), (0.2, 0.9, 1.0)]
    for row, colour in enumerate(colours):
        phase = np.mod(_X[0], 210.0) - 100.0
        wave = 180.0 + 290.0 * row - 120.0 * np.exp(-((phase / (6.0 + 18.0 * row)) ** 2))
        drawn = np.clip(3.0 - np.abs(_Y - wave[None]), 0.0, 1.0)
        level += drawn[:, :, None] * np.array(colour, dtype=np.float32)
    return np.asarray(np.clip(level, 0, 1))


def form_with_boxes(rng: np.random.Generator) -> Plane:
    """Rows of separate letter boxes as forms have them."""
    picture, pen = _drawing(247)
    for row in range(11):
        top = 40 + 80 * row
        pen.text((40, top), "".join(rng.choice(list("aeinorst"), 9)), 40, _font(20))
        for box in range(int(rng.integers(8, 26))):
            pen.rectangle((240 + 36 * box, top, 268 + 36 * box, top + 34), outline=90, width=2)
    return _levels(picture)


def receipt(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(244)
    for row in range(30):
        words = "".join(rng.choice(list("ABEHKLNORST "), 14))
        pen.text((420, 15 + 30 * row), words, 60, _font(22))
        pen.text((750, 15 + 30 * row), f"{rng.uniform(0, 99):.2f}", 60, _font(22))
    return _levels(picture)


def newspaper(rng: np.random.Generator) -> Plane:
    """Narrow columns of print and one coarse picture."""
    picture, pen = _drawing(220)
    for column in range(5):
        for top in range(20, HEIGHT_PX - 20, 17):
            words = "".join(rng.choice(list("aaeeiinnoorrsstt  lmdc"), 30))
            pen.text((20 + 250 * column, top), words, 60, _font(13))
    dots = 0.5 + 0.25 * (np.cos(_X * 0.9) + np.cos(_Y * 0.9))
    tone = 0.5 + 0.2 * _smooth(rng, 60.0)
    inside = (np.abs(_X - 640.0) < 235.0) & (np.abs(_Y - 400.0) < 180.0)
    return np.asarray(
        np.where(inside, np.clip(0.4 + 2.0 * (tone - dots), 0, 0.9), _levels(picture))
    )


def knitting(rng: np.random.Generator) -> Plane:
    wave = np.abs(np.sin(np.pi * _X / 26.0)) * 12.0
    level = 0.5 + 0.18 * np.cos(2.0 * np.pi * (_Y + wave) / 20.0) + 0.02 * _smooth(rng, 1.0)
    return _tint(np.asarray(level), 0.8, 0.85, 1.0)


def basket(rng: np.random.Generator) -> Plane:
    flip = np.mod(np.floor(_X / 40.0) + np.floor(_Y / 40.0), 2)
    level = np.where(flip == 0, np.sin(np.pi * _X / 40.0), np.sin(np.pi * _Y / 40.0))
    return _tint(np.asarray(0.4 + 0.3 * np.abs(level)), 1.0, 0.8, 0.5)


def honeycomb(rng: np.random.Generator) -> Plane:
    angles = np.deg2rad([0.0, 60.0, 120.0])
    level = sum(np.cos(2 * np.pi * (_X * np.cos(a) + _Y * np.sin(a)) / 44.0) for a in angles)
    return _tint(np.asarray(np.where(level < -0.9, 0.4, 0.85), dtype=np.float32), 1.0, 0.8, 0.4)


def grille(rng: np.random.Generator) -> Plane:
    """Slots of a vent: long and low openings in rows."""
    inside = (np.abs(np.mod(_X, 210.0) - 105.0) < 90.0) & (np.mod(_Y, 30.0) < 13.0)
    return np.asarray(np.where(inside, 0.1, 0.7), dtype=np.float32)


def wire_shelf(rng: np.random.Generator) -> Plane:
    """Close wires one way, a few thick ones the other."""
    wire = np.maximum(_lines(_X, 24.0, 5.0), _lines(_Y, 310.0, 12.0))
    return np.asarray(0.3 + 0.5 * wire + 0.05 * _smooth(rng, 40.0))


def bar_chart(rng: np.random.Generator) -> Plane:
    picture, pen = _drawing(250)
    for line in range(7):
        pen.line((100, 100 + 120 * line, 1200, 100 + 120 * line), 190, 2)
    for bar in range(18):
        high = int(rng.uniform(50, 700))
        pen.rectangle((120 + 60 * bar, 820 - high, 160 + 60 * bar, 820), 110)
    return _levels(picture)


def road_map(rng: np.random.Generator) -> Plane:
    """Crooked roads and a wide graticule."""
    picture, pen = _drawing(232)
    for _ in range(26):
        walk = np.cumsum(rng.normal(0.0, 40.0, (30, 2)) + rng.normal(0.0, 30.0, 2), axis=0)
        road = walk + rng.uniform((0, 0), (WIDTH_PX, HEIGHT_PX))
        pen.line([(float(x), float(y)) for x, y in road], 150, int(rng.integers(2, 9)))
    frame = np.maximum(_lines(_X, 320.0, 1.5), _lines(_Y, 320.0, 1.5))
    return _tint(np.asarray(_levels(picture) - 0.3 * frame), 0.95, 1.0, 0.85)


def leaves(rng: np.random.Generator) -> Plane:
    level = 0.4 + 0.12 * _smooth(rng, 12.0) + 0.08 * _smooth(rng, 3.0)
    return _tint(np.asarray(np.clip(level, 0, 1)), 0.6, 1.0, 0.4)


SCENE_KINDS: tuple[Drawer, ...] = (
    *(window_blinds, tiled_floor, mosaic, plaid, gingham, radiator, corrugated_card),
    *(spreadsheet_on_screen, crossword, sudoku, tape_measure, herringbone, floor_boards),
    *(chain_link_fence, perforated_metal, peg_board, blister_pack, house_front, book_shelf),
    *(circuit_board, keypad, monitor_without_grid, form_with_boxes, receipt, newspaper),
    *(knitting, basket, honeycomb, grille, wire_shelf, bar_chart, road_map, leaves),
)
