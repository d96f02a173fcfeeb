"""Printed words on a page, set in the font that Pillow carries."""

from __future__ import annotations

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray
from PIL import Image, ImageDraw, ImageFont

OVERSAMPLING = 2.0


@dataclass(frozen=True, slots=True)
class Label:
    """A line of print; (x_mm, y_mm) is the left end of its base line, in sheet_mm."""

    text: str
    x_mm: float
    y_mm: float
    height_mm: float = 2.6
    strength: float = 0.9


def draw_labels(
    layer: NDArray[np.float32], labels: tuple[Label, ...], px_from_mm: NDArray[np.float64]
) -> None:
    """Draw labels into a coverage layer, in place, turned and scaled with the sheet."""
    pitch_px = float(np.sqrt(abs(np.linalg.det(px_from_mm[:, :2]))))
    for label in labels:
        mask_per_mm = pitch_px * OVERSAMPLING
        mask = _mask(label.text, label.height_mm * mask_per_mm)
        base_px = px_from_mm @ np.array([label.x_mm, label.y_mm, 1.0])
        linear = px_from_mm[:, :2] / mask_per_mm
        # The mask keeps its base line at three quarters of its height.
        shift = base_px - linear @ np.array([0.0, 0.75 * mask.shape[0]])
        _paste(layer, mask * np.float32(label.strength), np.column_stack([linear, shift]))


def _mask(text: str, size_px: float) -> NDArray[np.float32]:
    font = ImageFont.load_default(size=max(size_px, 4.0))
    width_px = int(np.ceil(font.getlength(text))) + 4
    height_px = int(np.ceil(size_px * 1.6)) + 4
    picture = Image.new("L", (width_px, height_px), 0)
    ImageDraw.Draw(picture).text((2, 0.75 * height_px), text, font=font, fill=255, anchor="ls")
    return np.asarray(picture, dtype=np.float32) / np.float32(255.0)


def _paste(
    layer: NDArray[np.float32], mask: NDArray[np.float32], layer_from_mask: NDArray[np.float64]
) -> None:
    """Warp a mask into the part of the layer it touches."""
    height, width = mask.shape
    corners = np.array([[0, 0, 1], [width, 0, 1], [0, height, 1], [width, height, 1]])
    corners_px = corners @ layer_from_mask.T
    low = np.maximum(np.floor(corners_px.min(axis=0)).astype(int) - 1, 0)
    high = np.minimum(np.ceil(corners_px.max(axis=0)).astype(int) + 2, layer.shape[::-1])
    if (high <= low).any():
        return
    moved = layer_from_mask.copy()
    moved[:, 2] -= low
    size = (int(high[0] - low[0]), int(high[1] - low[1]))
    warped = cv2.warpAffine(mask, moved, size, flags=cv2.INTER_LINEAR)
    part = layer[low[1] : high[1], low[0] : high[0]]
    np.maximum(part, warped, out=part)
