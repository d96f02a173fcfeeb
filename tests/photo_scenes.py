"""Photographs of what is no ECG paper: nothing in them may be taken for its grid."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from sample_scans.pen import line_overlap
from tests.no_grid import (
    HEIGHT_PX,
    PX_PER_MM,
    WIDTH_PX,
    no_grid_pictures,
    unscaled_grid_pictures,
)
from tests.photo_pages import plain_sheet
from tests.photo_recipe import Recipe, random_recipe
from tests.photo_scene_kinds import SCENE_KINDS
from tests.photo_studio import Subject, take

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]

SCENE_MEGAPIXELS = 1.5
SIZE_MM = (WIDTH_PX / PX_PER_MM, HEIGHT_PX / PX_PER_MM)


def no_grid_scenes() -> Iterator[tuple[str, Pixels]]:
    """Name and picture, one at a time and always the same; none holds an ECG grid.

    The kinds of `tests.no_grid` as they are, the same as photos, and further kinds as photos.
    """
    for number, (name, pixels) in enumerate(no_grid_pictures()):
        yield f"{name}, flat", pixels
        yield f"{name}, photo", photographed(pixels, 3000 + number)
    for number, draw in enumerate(SCENE_KINDS):
        level = draw(np.random.default_rng(4000 + number))
        yield f"{draw.__name__}, photo", photographed(as_pixels(level), 4000 + number)


def unscaled_scenes() -> Iterator[tuple[str, Pixels]]:
    """Photos of square rulings other than ECG paper, each from three places.

    A finder may place a lattice on them but must not call its scale certain.
    """
    pictures = [*unscaled_grid_pictures(), *_more_unscaled()]
    for number, (name, pixels) in enumerate(pictures):
        for place in range(3):
            seed = 5000 + 10 * number + place
            yield f"{name}, photo {place + 1}", photographed(pixels, seed)


def photographed(pixels: Pixels, seed: int) -> Pixels:
    """A flat picture of 160 by 119 mm as a phone's photo, which it mostly fills."""
    rng = np.random.default_rng(seed)
    recipe = scene_recipe(random_recipe(rng, SCENE_MEGAPIXELS), float(rng.uniform(0.95, 1.6)))
    return take(
        Subject(SIZE_MM, lambda _: plain_sheet(pixels.copy(), PX_PER_MM)), recipe, seed
    ).pixels


def scene_recipe(recipe: Recipe, fill: float) -> Recipe:
    """The recipe without anything that would bring an ECG grid into the picture."""
    return replace(
        recipe, fill=fill, aim=(0.0, 0.0), other_strips=0, stickers=0, copy_of="none", glare=0.0
    )


def as_pixels(level: Plane) -> Pixels:
    """Light levels, 0 to 1, grey or coloured, as 8-bit sRGB."""
    if level.ndim == 2:
        level = np.repeat(level[:, :, None], 3, axis=2)
    return np.clip(np.rint(255.0 * level), 0, 255).astype(np.uint8)


def _more_unscaled() -> Iterator[tuple[str, Pixels]]:
    """Blue 5 mm exercise paper with a margin, 5 mm dots, and a cutting mat."""
    y, x = np.mgrid[0:HEIGHT_PX, 0:WIDTH_PX].astype(np.float32)
    five_px = 5.0 * PX_PER_MM
    across_px, down_px = (np.abs(at - five_px * np.round(at / five_px)) for at in (x, y))
    lines = np.maximum(line_overlap(across_px, 1.4), line_overlap(down_px, 1.4))
    blue = 0.97 - 0.4 * lines[:, :, None] * np.array([1.0, 0.6, 0.2], dtype=np.float32)
    margin = line_overlap(np.abs(x - 8.0 * five_px), 2.5)[:, :, None]
    yield "blue_exercise_paper", as_pixels(blue - 0.4 * margin * np.array([0.1, 1.0, 1.0]))
    yield (
        "dotted_notebook",
        as_pixels(0.96 - 0.4 * np.clip(2.5 - np.hypot(across_px, down_px), 0, 1)),
    )
    ten_px = 2.0 * five_px
    wide = (line_overlap(np.abs(at - ten_px * np.round(at / ten_px)), 2.4) for at in (x, y))
    mat = 0.35 + 0.15 * lines + 0.3 * np.maximum(*wide)
    yield "cutting_mat", as_pixels(mat[:, :, None] * np.array([0.5, 1.0, 0.7], dtype=np.float32))
