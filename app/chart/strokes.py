"""Lines drawn to a fraction of a pixel, so that a leg lies where it was placed."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from app.chart.fonts import Colour
from app.drawing.shape import Segment


def draw_stroke(
    image: Image.Image,
    segment: Segment,
    width_px: float,
    colour: Colour,
    *,
    opacity: float = 1.0,
    within_px: tuple[int, int] | None = None,
) -> None:
    """Draw a straight line with smooth edges and flat ends over an RGB image.

    Parameters
    ----------
    image : Image
        Mode RGB; drawn on. (0, 0) is the centre of the first pixel.
    segment : (float, float, float, float)
        x1, y1, x2, y2 in the image's pixels.
    width_px, colour, opacity
        Of the line; opacity 0 to 1.
    within_px : (int, int) or None
        Width and height of the part, from the corner, that may be drawn on; None: all of it.
    """
    x1, y1, x2, y2 = segment
    limit_x, limit_y = within_px or image.size
    reach = width_px / 2.0 + 1.0
    left, top = (max(0, math.floor(low - reach)) for low in (min(x1, x2), min(y1, y2)))
    right = min(limit_x, math.ceil(max(x1, x2) + reach) + 1)
    bottom = min(limit_y, math.ceil(max(y1, y2) + reach) + 1)
    if right <= left or bottom <= top:
        return
    length = math.hypot(x2 - x1, y2 - y1)
    along_x, along_y = ((x2 - x1) / length, (y2 - y1) / length) if length else (1.0, 0.0)
    dx = np.arange(left, right, dtype=np.float32)[np.newaxis, :] - np.float32((x1 + x2) / 2.0)
    dy = np.arange(top, bottom, dtype=np.float32)[:, np.newaxis] - np.float32((y1 + y2) / 2.0)
    across = np.abs(dx * along_y - dy * along_x)
    along = np.abs(dx * along_x + dy * along_y)
    cover = _overlap(across, width_px / 2.0) * _overlap(along, length / 2.0)
    mask = Image.fromarray(np.round(cover * (255.0 * opacity)).astype(np.uint8))
    image.paste(colour, (left, top, right, bottom), mask)


def _overlap(distance: NDArray[np.float32], half: float) -> NDArray[np.float32]:
    """The share of a pixel at a distance from a line's middle that lies within its half width."""
    shared = np.minimum(distance + 0.5, half) - np.maximum(distance - 0.5, -half)
    return np.asarray(np.maximum(shared, 0.0))
