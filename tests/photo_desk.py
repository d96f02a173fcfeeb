"""What lies around the page: desk tops, other papers, fingers."""

from __future__ import annotations

import cv2
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

from sample_scans.pen import line_overlap

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]
FloatArray = NDArray[np.float64]

DESK_PX = 1400
DESK_PX_PER_MM = 3.0
SKINS = ((226, 178, 150), (205, 150, 118), (160, 108, 78), (105, 68, 48), (238, 196, 172))


def desk_top(kind: str, rng: np.random.Generator) -> Pixels:
    """A square of a desk at DESK_PX_PER_MM, to be repeated by reflection."""
    plane = _DESKS[kind](rng)
    plane = plane + 0.006 * rng.standard_normal(plane.shape[:2], dtype=np.float32)[:, :, None]
    return np.asarray(np.clip(np.rint(255.0 * plane), 0, 255), dtype=np.uint8)


def _smooth(rng: np.random.Generator, across: float, down: float) -> Plane:
    """Random field of mean 0 and standard deviation 1, smooth over so many pixels."""
    thinner, lower = max(1, int(across // 3)), max(1, int(down // 3))
    shape = (DESK_PX // lower + 1, DESK_PX // thinner + 1)
    field = rng.standard_normal(shape, dtype=np.float32)
    field = cv2.GaussianBlur(field, (0, 0), across / thinner, None, down / lower)
    field = cv2.resize(field, (DESK_PX, DESK_PX), interpolation=cv2.INTER_CUBIC)
    return np.asarray((field - field.mean()) / field.std())


def _coloured(level: Plane, colour: tuple[float, float, float]) -> Plane:
    return np.asarray(level[:, :, None] * np.array(colour, dtype=np.float32))


def _grain(rng: np.random.Generator, contrast: float) -> Plane:
    """Wood: rings that run along x and fine fibres."""
    y = np.mgrid[0:DESK_PX, 0:DESK_PX][0].astype(np.float32)
    place = y + 40.0 * _smooth(rng, 300.0, 60.0)
    rings = np.sin(place / 13.0) + 0.6 * np.sin(place / 5.3 + 2.0 * np.sin(place / 71.0))
    return 1.0 + contrast * (0.06 * rings + 0.05 * _smooth(rng, 60.0, 1.5))


def _wood(rng: np.random.Generator) -> Plane:
    return _coloured(0.72 * _grain(rng, 1.0), (1.0, 0.8, 0.58))


def _dark_wood(rng: np.random.Generator) -> Plane:
    return _coloured(0.4 * _grain(rng, 1.3), (1.0, 0.72, 0.52))


def _laminate(rng: np.random.Generator) -> Plane:
    level = 0.78 + 0.01 * _smooth(rng, 200.0, 200.0) + 0.015 * _smooth(rng, 2.0, 2.0)
    return _coloured(level, (1.0, 0.99, 0.96))


def _sheet(rng: np.random.Generator) -> Plane:
    """A bed sheet: creases and a weave too fine to see."""
    level = 0.72 + 0.04 * _smooth(rng, 90.0, 25.0) + 0.03 * _smooth(rng, 18.0, 60.0)
    tone = [(1.0, 1.0, 1.0), (0.75, 0.88, 1.0), (0.72, 0.92, 0.84)][int(rng.integers(3))]
    return _coloured(level + 0.012 * _smooth(rng, 1.2, 1.2), tone)


def _steel(rng: np.random.Generator) -> Plane:
    level = 0.6 + 0.03 * _smooth(rng, 200.0, 1.2) + 0.04 * _smooth(rng, 300.0, 200.0)
    return _coloured(level, (0.98, 0.99, 1.0))


def _dark(rng: np.random.Generator) -> Plane:
    return _coloured(0.16 + 0.012 * _smooth(rng, 3.0, 3.0), (0.9, 0.95, 1.0))


def _card(rng: np.random.Generator) -> Plane:
    """A folder or a tray of one colour."""
    tones = [(0.35, 0.5, 0.72), (0.75, 0.65, 0.45), (0.45, 0.6, 0.42), (0.7, 0.35, 0.33)]
    level = 1.0 + 0.015 * _smooth(rng, 3.0, 3.0) + 0.02 * _smooth(rng, 150.0, 150.0)
    return _coloured(level, tones[int(rng.integers(4))])


_DESKS = {
    "wood": _wood,
    "dark_wood": _dark_wood,
    "laminate": _laminate,
    "sheet": _sheet,
    "steel": _steel,
    "dark": _dark,
    "card": _card,
}


def other_paper(rng: np.random.Generator, px_per_mm: float) -> Pixels:
    """A letter, a form, a ruled leaf or a blank one, A5 to A4."""
    size_mm = [(148.0, 210.0), (210.0, 297.0), (100.0, 150.0)][int(rng.integers(3))]
    wide, high = (int(side * px_per_mm) for side in size_mm)
    tone = int(rng.integers(232, 252))
    picture = Image.new("RGB", (wide, high), (tone, tone, tone - int(rng.integers(0, 14))))
    pen = ImageDraw.Draw(picture)
    kind = int(rng.integers(4))
    if kind in (0, 1):
        _write_letter(pen, wide, high, px_per_mm, rng)
    if kind == 1:
        for row in range(12):
            top = (30 + 9 * row) * px_per_mm
            box = (15 * px_per_mm, top, wide - 15 * px_per_mm, top + 9 * px_per_mm)
            pen.rectangle(box, outline=(60, 60, 60), width=max(1, int(0.3 * px_per_mm)))
    pixels = np.array(picture)
    if kind == 2:
        y_mm = np.arange(high, dtype=np.float32)[:, None, None] / np.float32(px_per_mm)
        near_px = np.abs(y_mm - 8.0 * np.round(y_mm / 8.0)) * np.float32(px_per_mm)
        line = 0.4 * line_overlap(near_px, 0.25 * px_per_mm) * (y_mm > 20.0)
        pixels = np.rint(pixels * (1.0 - line * np.array([0.6, 0.4, 0.15]))).astype(np.uint8)
    return pixels


def _write_letter(
    pen: ImageDraw.ImageDraw, wide: int, high: int, px_per_mm: float, rng: np.random.Generator
) -> None:
    font = ImageFont.load_default(size=max(3.4 * px_per_mm, 5.0))
    letters = np.array(list("aaabcdeeeefghiiklmnnooprrsstttuvwy"))
    top_px = 18.0 * px_per_mm
    while top_px < high - 20.0 * px_per_mm:
        words = ["".join(rng.choice(letters, int(rng.integers(2, 10)))) for _ in range(24)]
        line = " ".join(words)
        fits = int(len(line) * (wide - 36.0 * px_per_mm) / max(font.getlength(line), 1.0))
        if rng.random() < 0.12:
            fits //= 3
        pen.text((18.0 * px_per_mm, top_px), line[: max(fits, 0)], font=font, fill=(35, 35, 40))
        top_px += 5.2 * px_per_mm


def add_finger(
    pixels: Pixels,
    owner: Pixels,
    mark: int,
    tip_px: FloatArray,
    outward: FloatArray,
    width_px: float,
    skin: tuple[int, int, int],
) -> None:
    """A finger that comes in along `outward` and ends at `tip_px`, in place.

    Where it covers a pixel, `owner` becomes `mark`. `outward` is a unit vector.
    """
    radius_px = width_px / 2.0
    height, width = owner.shape
    base_px = tip_px + outward * float(height + width)
    low = np.maximum(np.floor(np.minimum(tip_px, base_px) - 3.0 * width_px), 0).astype(int)
    high = np.minimum(np.ceil(np.maximum(tip_px, base_px) + 3.0 * width_px), (width, height))
    x1, y1 = (int(side) for side in high)
    if x1 <= low[0] or y1 <= low[1]:
        return
    y, x = np.mgrid[low[1] : y1, low[0] : x1].astype(np.float32)
    x -= np.float32(tip_px[0] + outward[0] * radius_px)
    y -= np.float32(tip_px[1] + outward[1] * radius_px)
    along = x * np.float32(outward[0]) + y * np.float32(outward[1])
    across = y * np.float32(outward[0]) - x * np.float32(outward[1])
    # A finger is a little slimmer at its tip; five widths behind it the hand begins.
    hand = np.clip((along / np.float32(radius_px) - 7.0) / 9.0, 0.0, 1.0)
    girth = np.clip(0.92 + 0.02 * along / radius_px, 0.9, 1.1) + 2.4 * hand**2 * (3.0 - 2.0 * hand)
    girth *= np.float32(radius_px)
    off = np.hypot(np.minimum(along, 0.0), across) / girth
    cover = np.clip((1.0 - off) * girth + 0.5, 0.0, 1.0)[:, :, None]
    round_shade = 0.62 + 0.38 * np.sqrt(np.clip(1.0 - off**2, 0.0, 1.0))
    colour = round_shade[:, :, None] * np.array(skin, dtype=np.float32)
    nail = np.hypot((along + 0.15 * radius_px) / 0.7, across / 0.58) / np.float32(radius_px)
    nail_cover = np.clip((1.0 - nail) * 6.0, 0.0, 0.55)[:, :, None]
    colour += nail_cover * (np.array([242, 205, 196], dtype=np.float32) - colour)
    shadow = 1.0 - 0.45 * np.exp(-np.maximum(off - 1.0, 0.0) * 5.0)[:, :, None]
    part = pixels[low[1] : y1, low[0] : x1]
    part[:] = np.rint(part * shadow * (1.0 - cover) + colour * cover).astype(np.uint8)
    owner[low[1] : y1, low[0] : x1][cover[:, :, 0] > 0.02] = mark
