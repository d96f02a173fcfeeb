"""Copies of a drawn sheet: photocopied, faxed, shown on a screen. The geometry stays."""

from __future__ import annotations

from dataclasses import replace

import cv2
import numpy as np
from numpy.typing import NDArray

from sample_scans.page import MM_PER_INCH
from tests.photo_pages import Sheet

Pixels = NDArray[np.uint8]

FAX_DPI = (204.0, 98.0)
"""Group 3 fax at standard resolution: 8.04 by 3.85 lines a millimetre (from memory)."""


def photocopied(sheet: Sheet, rng: np.random.Generator) -> Sheet:
    """Grey and hard, with toner specks and a dark edge where the lid stood open."""
    grey = cv2.cvtColor(sheet.pixels, cv2.COLOR_RGB2GRAY)
    level = np.arange(256, dtype=np.float64)
    white, steep = float(rng.uniform(205.0, 245.0)), float(rng.uniform(1.3, 2.6))
    table = 250.0 - (white - np.minimum(level, white)) * steep
    grey = cv2.LUT(grey, np.clip(np.rint(table), 12, 252).astype(np.uint8))
    height_px, width_px = grey.shape
    for _ in range(int(rng.integers(20, 200))):
        at = (int(rng.integers(width_px)), int(rng.integers(height_px)))
        cv2.circle(grey, at, max(1, int(rng.uniform(0.05, 0.3) * sheet.px_per_mm)), 40, -1)
    if rng.random() < 0.4:
        edge_px = int(rng.uniform(1.0, 5.0) * sheet.px_per_mm)
        grey[:, :edge_px] = 25
    return replace(sheet, pixels=np.repeat(grey[:, :, None], 3, axis=2))


def faxed(sheet: Sheet, rng: np.random.Generator) -> Sheet:
    """One bit, 204 by 98 dpi, printed again so that a fax dot is a dark oblong.

    The dots quantise every edge to half a dot (0.06 mm across, 0.13 mm down) either way; on
    average over a line the geometry stays.
    """
    bits = fax_bits(sheet, rng)
    height_px, width_px = sheet.pixels.shape[:2]
    grown = cv2.resize(bits, (width_px, height_px), interpolation=cv2.INTER_AREA)
    return replace(sheet, pixels=np.repeat(grown[:, :, None], 3, axis=2))


def fax_bits(sheet: Sheet, rng: np.random.Generator) -> Pixels:
    """The sheet as a fax sends it: 0 and 255, shape (rows, columns) of FAX_DPI."""
    grey = cv2.cvtColor(sheet.pixels, cv2.COLOR_RGB2GRAY)
    columns, rows = (
        round(2.0 * half_mm * dpi / MM_PER_INCH)
        for half_mm, dpi in zip(sheet.half_size_mm, FAX_DPI, strict=True)
    )
    small = cv2.resize(grey, (columns, rows), interpolation=cv2.INTER_AREA).astype(np.float32)
    paper = float(np.median(small))
    small += rng.normal(0.0, 2.0, small.shape).astype(np.float32)
    threshold = paper - float(rng.uniform(14.0, 26.0))
    return np.where(small < threshold, 0, 255).astype(np.uint8)


def on_screen(sheet: Sheet, rng: np.random.Generator) -> Sheet:
    """Shown on a display: square screen pixels of three coloured stripes and a dark gap.

    The stripes of one screen pixel are three columns of the new drawing. Its camera sees them
    finely enough to beat with its own pixels.
    """
    pitch_mm = float(rng.uniform(0.2, 0.28))
    columns, rows = (round(2.0 * half_mm / pitch_mm) for half_mm in sheet.half_size_mm)
    shown = cv2.resize(sheet.pixels, (columns, rows), interpolation=cv2.INTER_AREA)
    fine = cv2.resize(shown, (3 * columns, 3 * rows), interpolation=cv2.INTER_NEAREST)
    light = np.full((3, 3, 3), float(rng.uniform(0.35, 0.7)), dtype=np.float32)
    light[:, np.arange(3), np.arange(3)] = 1.0
    light[2] *= 0.75
    mask = cv2.repeat(light.reshape(3, 9), rows, columns).reshape(3 * rows, 3 * columns, 3)
    lit = np.empty_like(fine)
    for top in range(0, 3 * rows, 600):
        band = slice(top, top + 600)
        lit[band] = np.rint(fine[band] * mask[band]).astype(np.uint8)
    # The screen has a whole number of pixels, so its pixels are not quite square.
    matrix = sheet.paper_from_sheet.copy()
    px_per_mm = 3.0 * columns / (2.0 * sheet.half_size_mm[0])
    stretch = 3.0 * rows / (2.0 * sheet.half_size_mm[1]) / px_per_mm
    matrix[1] *= stretch
    return replace(sheet, pixels=lit, px_per_mm=px_per_mm, paper_from_sheet=matrix)
