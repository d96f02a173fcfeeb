"""Light on the desk and what a phone's camera makes of it. Nothing here moves a point:
every kernel is symmetric about its centre."""

from __future__ import annotations

import cv2
import numpy as np
from numpy.typing import NDArray

from tests.photo_recipe import Recipe

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]

SHRINK = 16
ROWS_AT_ONCE = 256
BLOWN = 0.85
"""Reflected share above which nothing of the print is left to see."""


def _axes(size_px: tuple[int, int]) -> tuple[Plane, Plane]:
    """x and y of a picture reduced by SHRINK, both in half of its longer side, from its centre."""
    columns, rows = (-(-side // SHRINK) for side in size_px)
    longest = max(columns, rows)
    y, x = np.mgrid[0:rows, 0:columns].astype(np.float32)
    return (x - columns / 2) * (2.0 / longest), (y - rows / 2) * (2.0 / longest)


def light_field(
    size_px: tuple[int, int], recipe: Recipe, page: NDArray[np.bool_], rng: np.random.Generator
) -> Plane:
    """Factor of the light on each block of SHRINK pixels.

    Phones expose for what is in the middle: three quarters of the blocks where `page` is true
    get 1 or less.
    """
    x, y = _axes(size_px)
    towards = rng.uniform(0.0, 2.0 * np.pi)
    lamp_x, lamp_y = 1.4 * np.cos(towards), 1.4 * np.sin(towards)
    light = 1.0 / (1.0 + recipe.uneven * ((x - lamp_x) ** 2 + (y - lamp_y) ** 2) / 2.0)
    light *= 1.0 - 0.3 * recipe.uneven * (x * x + y * y) / 2.0
    for _ in range(recipe.shadows):
        light *= _shadow(x, y, rng)
    light /= np.quantile(light[page] if page.any() else light, 0.75)
    return np.asarray(light, dtype=np.float32)


def _shadow(x: Plane, y: Plane, rng: np.random.Generator) -> Plane:
    """The edge of a shadow: straight, or round as a head or a phone throws it."""
    soft = float(rng.uniform(0.01, 0.12))
    deep = float(rng.uniform(0.12, 0.5))
    if rng.random() < 0.6:
        angle = rng.uniform(0.0, 2.0 * np.pi)
        beyond = x * np.cos(angle) + y * np.sin(angle) - rng.uniform(-0.3, 0.6)
    else:
        centre, size = rng.uniform(-0.8, 0.8, 2), rng.uniform(0.3, 0.7, 2)
        beyond = 1.0 - np.hypot((x - centre[0]) / size[0], (y - centre[1]) / size[1])
        beyond *= float(size.min())
    return np.asarray(1.0 - deep / (1.0 + np.exp(np.clip(-beyond / soft, -40.0, 40.0))))


def reflection(size_px: tuple[int, int], strength: float, rng: np.random.Generator) -> Plane:
    """Share of white that shiny paper adds, 0 to 1: a lamp's spot or a window's oblong."""
    x, y = _axes(size_px)
    centre, angle = rng.uniform(-0.4, 0.4, 2), rng.uniform(0.0, np.pi)
    u = (x - centre[0]) * np.cos(angle) + (y - centre[1]) * np.sin(angle)
    v = (y - centre[1]) * np.cos(angle) - (x - centre[0]) * np.sin(angle)
    if rng.random() < 0.6:
        wide, high = rng.uniform(0.06, 0.25), rng.uniform(0.04, 0.1)
        off_sq = (u / wide) ** 2 + (v / high) ** 2
        spot = 0.9 * np.exp(-off_sq) + 0.25 * np.exp(-off_sq / 9.0)
    else:
        wide, high, soft = rng.uniform(0.1, 0.25), rng.uniform(0.06, 0.15), 0.03
        spot = 1.0 / (1.0 + np.exp(np.clip((np.abs(u) - wide) / soft, -40.0, 40.0)))
        spot /= 1.0 + np.exp(np.clip((np.abs(v) - high) / soft, -40.0, 40.0))
    return np.asarray(np.minimum(strength * spot, 1.0), dtype=np.float32)


def lit(pixels: Pixels, light: Plane, shine: Plane | None, recipe: Recipe) -> Pixels:
    """The scene under its light and through the camera's exposure, white balance and contrast."""
    height_px, width_px = pixels.shape[:2]
    gains = recipe.exposure * np.array(
        [1.0 + 0.12 * recipe.warmth, 1.0, 1.0 - 0.2 * recipe.warmth], dtype=np.float32
    )
    result = np.empty_like(pixels)
    for top in range(0, height_px, ROWS_AT_ONCE):
        rows = slice(top, min(top + ROWS_AT_ONCE, height_px))
        band = pixels[rows] * (_grown(light, rows, width_px)[:, :, None] * gains)
        if shine is not None:
            glint = _grown(shine, rows, width_px)[:, :, None]
            band += glint * (np.float32(252.0) - np.minimum(band, 252.0))
        if recipe.contrast != 1.0:
            band = 128.0 + (band - 128.0) * np.float32(recipe.contrast)
        result[rows] = np.clip(np.rint(band), 0, 255).astype(np.uint8)
    return result


def _grown(small: Plane, rows: slice, width_px: int) -> Plane:
    """A band of rows of a plane reduced by SHRINK, grown again; bands begin on its blocks."""
    first, last = rows.start // SHRINK, -(-rows.stop // SHRINK)
    above, below = max(first - 1, 0), min(last + 1, small.shape[0])
    part = small[above:below]
    size = (part.shape[1] * SHRINK, part.shape[0] * SHRINK)
    grown = cv2.resize(part, size, interpolation=cv2.INTER_LINEAR)
    start = rows.start - above * SHRINK
    return np.asarray(grown[start : start + rows.stop - rows.start, :width_px])


def blurred(pixels: Pixels, recipe: Recipe, px_per_mm: float) -> Pixels:
    """Defocus and motion on the paper, then the phone's own sharpening."""
    sigma_px = recipe.blur_mm * px_per_mm
    if sigma_px > 0.3:
        pixels = cv2.GaussianBlur(pixels, (0, 0), sigma_px)
    if recipe.motion_mm * px_per_mm > 1.0:
        kernel = _streak(recipe.motion_mm * px_per_mm, recipe.motion_deg)
        pixels = cv2.filter2D(pixels, -1, kernel, borderType=cv2.BORDER_REFLECT)
    if recipe.sharpen > 0.0:
        soft = cv2.GaussianBlur(pixels, (0, 0), 1.5)
        pixels = cv2.addWeighted(pixels, 1.0 + recipe.sharpen, soft, -recipe.sharpen, 0.0)
    return np.asarray(pixels, dtype=np.uint8)


def _streak(length_px: float, degrees: float) -> Plane:
    """A straight streak through the centre, antialiased, of sum 1."""
    half = int(np.ceil(length_px / 2.0)) + 1
    y, x = np.mgrid[-half : half + 1, -half : half + 1].astype(np.float64)
    angle = np.deg2rad(degrees)
    along = np.abs(x * np.cos(angle) + y * np.sin(angle))
    across = np.abs(y * np.cos(angle) - x * np.sin(angle))
    kernel = np.clip(length_px / 2.0 - along + 0.5, 0, 1) * np.clip(1.0 - across, 0, 1)
    return np.asarray(kernel / kernel.sum(), dtype=np.float32)


def developed(pixels: Pixels, recipe: Recipe, rng: np.random.Generator) -> Pixels:
    """Sensor noise, most of it in the light and some in the colours, then JPEG."""
    if recipe.noise > 0.0:
        pixels = _noisy(pixels, recipe.noise, rng)
    if recipe.jpeg_quality is None:
        return pixels
    options = [cv2.IMWRITE_JPEG_QUALITY, recipe.jpeg_quality]
    _, data = cv2.imencode(".jpg", cv2.cvtColor(pixels, cv2.COLOR_RGB2BGR), options)
    return np.asarray(cv2.cvtColor(cv2.imdecode(data, cv2.IMREAD_COLOR), cv2.COLOR_BGR2RGB))


def _noisy(pixels: Pixels, noise: float, rng: np.random.Generator) -> Pixels:
    result = np.empty_like(pixels)
    for top in range(0, len(pixels), ROWS_AT_ONCE):
        band = pixels[top : top + ROWS_AT_ONCE]
        rows, columns = band.shape[:2]
        common = rng.standard_normal((rows, columns), dtype=np.float32)
        coarse = rng.standard_normal((-(-rows // 4), -(-columns // 4), 3), dtype=np.float32)
        speckle = cv2.resize(coarse, (columns, rows), interpolation=cv2.INTER_LINEAR)
        speckle = np.float32(0.5 * noise) * speckle + np.float32(noise) * common[:, :, None]
        result[top : top + ROWS_AT_ONCE] = np.clip(np.rint(band + speckle), 0, 255)
    return result
