"""What hands leave on a printed page: handwriting, stamps, stains, stickers."""

from __future__ import annotations

import cv2
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]
FloatArray = NDArray[np.float64]
Colour = tuple[int, int, int]

PEN_COLOURS: tuple[Colour, ...] = ((30, 45, 130), (20, 20, 25), (170, 25, 40), (40, 90, 60))
STAMP_COLOURS: tuple[Colour, ...] = ((60, 60, 170), (180, 40, 60), (90, 40, 140), (40, 40, 50))
STAMP_WORDS = ("SEEN", "COPY", "WARD 7", "FILED", "RECEIVED", "URGENT", "14 MAR", "SCANNED")


def add_handwriting(pixels: Pixels, px_per_mm: float, rng: np.random.Generator) -> None:
    """One line of scrawl, now and then a ring around something, in place."""
    ink = PEN_COLOURS[int(rng.integers(len(PEN_COLOURS)))]
    size_px = float(rng.uniform(4.0, 9.0)) * px_per_mm
    count = int(rng.integers(8, 30))
    t = np.linspace(0.0, count, count * 14)
    loops = np.stack([np.cos(6.0 * t + np.sin(1.7 * t)), np.sin(6.0 * t + 1.3 * np.sin(2.3 * t))])
    tall = 0.4 + 0.6 * np.abs(np.sin(0.9 * t + rng.uniform(0, 6)) * np.sin(0.37 * t)) ** 2
    x = 0.42 * t + 0.28 * loops[0]
    y = -0.5 * tall * (1.0 + loops[1]) + 0.1 * np.sin(0.2 * t)
    points_px = np.column_stack([x, y]) * size_px
    if rng.random() < 0.3:
        turn = np.linspace(0.0, 2.2 * np.pi, 80)
        radius_px = rng.uniform(6.0, 14.0, 2) * px_per_mm
        points_px = (
            np.column_stack([np.cos(turn), np.sin(turn)]) * radius_px * (1 + 0.02 * turn)[:, None]
        )
    angle = rng.normal(0.0, 0.12)
    turn_by = np.array([[np.cos(angle), -np.sin(angle)], [np.sin(angle), np.cos(angle)]])
    points_px = points_px @ turn_by.T + _somewhere(pixels, rng)
    width_px = max(1, round(float(rng.uniform(0.35, 0.7)) * px_per_mm))
    fixed = np.rint(points_px * 16.0).astype(np.int32)
    cv2.polylines(pixels, [fixed[:, None]], False, ink, width_px, cv2.LINE_AA, 4)


def _somewhere(pixels: Pixels, rng: np.random.Generator) -> FloatArray:
    height_px, width_px = pixels.shape[:2]
    return np.array([width_px, height_px]) * rng.uniform((0.05, 0.1), (0.75, 0.92))


def _multiply(pixels: Pixels, cover: Plane, colour: Colour, centre_px: FloatArray) -> None:
    """Tint a patch by a colour where it is covered (0 to 1), in place, as thin ink does."""
    high, wide = cover.shape
    left, top = (round(float(place)) for place in centre_px - np.array([wide, high]) / 2.0)
    x0, y0 = max(left, 0), max(top, 0)
    x1, y1 = min(left + wide, pixels.shape[1]), min(top + high, pixels.shape[0])
    if x1 <= x0 or y1 <= y0:
        return
    part = cover[y0 - top : y1 - top, x0 - left : x1 - left, None]
    tint = 1.0 - part * (1.0 - np.array(colour, dtype=np.float32) / np.float32(255.0))
    pixels[y0:y1, x0:x1] = np.rint(pixels[y0:y1, x0:x1] * tint).astype(np.uint8)


def add_stamp(pixels: Pixels, px_per_mm: float, rng: np.random.Generator) -> None:
    """A worn rubber stamp, in place."""
    word = str(rng.choice(STAMP_WORDS))
    size_px = float(rng.uniform(5.0, 9.0)) * px_per_mm
    font = ImageFont.load_default(size=max(size_px, 5.0))
    wide, high = int(font.getlength(word) + 1.2 * size_px), int(2.0 * size_px)
    picture = Image.new("L", (wide, high), 0)
    pen = ImageDraw.Draw(picture)
    pen.rectangle((2, 2, wide - 3, high - 3), outline=255, width=max(1, int(0.6 * px_per_mm)))
    pen.text((wide / 2, high / 2), word, font=font, fill=255, anchor="mm")
    cover = np.asarray(picture, dtype=np.float32) / np.float32(255.0)
    coarse = rng.standard_normal((6, 1 + int(6 * wide / high)), dtype=np.float32)
    worn = cv2.resize(coarse, (wide, high), interpolation=cv2.INTER_CUBIC)
    cover = cover * np.clip(0.7 + 0.2 * worn, 0.1, 0.9)
    side = int(np.hypot(wide, high)) + 2
    turn = cv2.getRotationMatrix2D((wide / 2, high / 2), float(rng.normal(0.0, 12.0)), 1.0)
    turn[:, 2] += (side - np.array([wide, high])) / 2.0
    cover = cv2.warpAffine(cover.astype(np.float32), turn, (side, side))
    colour = STAMP_COLOURS[int(rng.integers(len(STAMP_COLOURS)))]
    _multiply(pixels, cover, colour, _somewhere(pixels, rng))


def add_stain(pixels: Pixels, px_per_mm: float, rng: np.random.Generator) -> None:
    """The ring of a cup, or a drop that dried, in place."""
    ring = bool(rng.random() < 0.6)
    radius_px = float(rng.uniform(30.0, 42.0) if ring else rng.uniform(4.0, 16.0)) * px_per_mm
    half = int(radius_px * 1.25)
    y, x = np.mgrid[-half : half + 1, -half : half + 1].astype(np.float32)
    angle = np.arctan2(y, x)
    phases = rng.uniform(0.0, 6.3, 3)
    wobble = sum((0.02 if ring else 0.08) * np.sin((n + 2) * angle + phases[n]) for n in range(3))
    out_mm = (np.hypot(x, y) - radius_px * (1.0 + wobble)) / px_per_mm
    edge = np.exp(-((out_mm / 1.2) ** 2))
    inside = 1.0 / (1.0 + np.exp(np.clip(4.0 * out_mm, -30.0, 30.0)))
    broken = 0.6 + 0.4 * np.sin(angle + phases[0])
    cover = 0.7 * edge * broken + (0.08 if ring else 0.4) * inside
    colour = (150, 105, 60) if rng.random() < 0.7 else (165, 60, 50)
    strength = float(rng.uniform(0.4, 0.9))
    _multiply(pixels, (strength * cover).astype(np.float32), colour, _somewhere(pixels, rng))


def add_sticker(pixels: Pixels, px_per_mm: float, rng: np.random.Generator) -> FloatArray:
    """A white label with bars and invented words, in place; its corners in pixels, (4, 2)."""
    wide, high = (int(side * px_per_mm) for side in rng.uniform((38.0, 18.0), (65.0, 28.0)))
    label = Image.new("RGB", (wide, high), (252, 252, 250))
    pen, font = ImageDraw.Draw(label), ImageFont.load_default(size=max(2.6 * px_per_mm, 5.0))
    for line in range(int(high / px_per_mm / 4.0) - 2):
        text = "".join(rng.choice(list("ABEHKLNORST 0123456789"), 14))
        pen.text(
            (2 * px_per_mm, (1.5 + 4.0 * line) * px_per_mm), text, font=font, fill=(20, 20, 20)
        )
    x = 3.0 * px_per_mm
    while x < wide - 5.0 * px_per_mm:
        bar_px = float(rng.choice([0.3, 0.6])) * px_per_mm
        pen.rectangle((x, high - 7 * px_per_mm, x + bar_px, high - 1.5 * px_per_mm), (10, 10, 10))
        x += bar_px + float(rng.choice([0.4, 0.8])) * px_per_mm
    angle = float(rng.normal(0.0, 4.0))
    at_px = _somewhere(pixels, rng)
    turn = cv2.getRotationMatrix2D((0.0, 0.0), angle, 1.0)
    turn[:, 2] = at_px
    size = (pixels.shape[1], pixels.shape[0])
    corners = np.array([(0, 0), (wide - 1, 0), (wide - 1, high - 1), (0, high - 1)], dtype=float)
    corners_px = corners @ turn[:, :2].T + turn[:, 2]
    cv2.warpAffine(np.asarray(label), turn, size, pixels, cv2.INTER_LINEAR, cv2.BORDER_TRANSPARENT)
    return np.asarray(corners_px)
