"""Photographs of ECG pages for tests, each with its exact geometry.

`photo(seed)` draws a bedside photo with everything varied by the seed; options (fields of
`Recipe`) fix single things, and `plain=True` leaves out all that is not asked for. The truth
is a closed formula (`tests.photo_geometry`); drawing only follows it.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from sample_scans.page import apply_affine, invert_affine
from tests.photo_geometry import View
from tests.photo_light import BLOWN, SHRINK
from tests.photo_pages import PrintedPage, random_printed_page, strongly_ruled
from tests.photo_recipe import Recipe, random_recipe
from tests.photo_studio import Placed, Shot, subject_of, take

FloatArray = NDArray[np.float64]
Pixels = NDArray[np.uint8]

QUICK_SEEDS = (
    *(9001, 9006, 9007, 9008, 9009, 9010, 9011, 9012, 9013, 9014),
    *(9016, 9017, 9018, 9019, 9020, 9021, 9022, 9023, 9025, 9026),
)
"""Seeds whose page has 3 px or more for a mm everywhere at 2 to 3 megapixels."""


@dataclass(frozen=True, slots=True, eq=False)
class PhotoSheet:
    """One ECG sheet in a photo.

    Attributes
    ----------
    view : View
        The sheet before the camera, in sensor_px.
    picture_from_sensor : ndarray of float64, shape (2, 3)
        The mirroring and the quarter turns of the finished picture.
    grid_mm : tuple of float
        Left, top, right, bottom of the printed grid; may reach past the paper.
    stickers_mm : tuple of ndarray, each (4, 2)
        Labels glued over the print, corners in paper_mm.
    """

    view: View
    picture_from_sensor: FloatArray
    grid_mm: tuple[float, float, float, float]
    stickers_mm: tuple[FloatArray, ...]
    mark: int
    owner: Pixels
    shine: NDArray[np.float32] | None

    def to_px(self, points_mm: FloatArray) -> FloatArray:
        """sheet_mm to picture_px, (N, 2) -> (N, 2)."""
        return apply_affine(self.picture_from_sensor, self.view.to_px(np.asarray(points_mm)))

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """picture_px to sheet_mm, (N, 2) -> (N, 2); NaN off the paper."""
        sensor_px = apply_affine(invert_affine(self.picture_from_sensor), points_px)
        return self.view.to_mm(sensor_px)

    def visible(self, points_mm: FloatArray) -> NDArray[np.bool_]:
        """Which sheet points, (N, 2), are in the picture and under nothing else."""
        points_mm = np.asarray(points_mm, dtype=np.float64)
        paper_mm = apply_affine(self.view.paper_from_sheet, points_mm)
        seen = (np.abs(paper_mm) <= np.array(self.view.half_size_mm)).all(axis=1)
        place = np.rint(self.view.paper_to_px(paper_mm)).astype(np.int64)
        height_px, width_px = self.owner.shape
        seen &= (place >= 0).all(axis=1) & (place < [width_px, height_px]).all(axis=1)
        column, row = np.where(seen[:, None], place, 0).T
        seen &= self.owner[row, column] == self.mark
        for corners_mm in self.stickers_mm:
            seen &= ~_inside(paper_mm, corners_mm)
        return seen

    def legible(self, points_mm: FloatArray) -> NDArray[np.bool_]:
        """Which are visible and not drowned in a reflection either."""
        seen = self.visible(points_mm)
        if self.shine is None:
            return seen
        place = np.rint(self.view.to_px(np.asarray(points_mm))).astype(np.int64) // SHRINK
        rows, columns = self.shine.shape
        place = np.clip(place, 0, [columns - 1, rows - 1])
        return np.asarray(seen & (self.shine[place[:, 1], place[:, 0]] < BLOWN))

    def grid_points_mm(self, step_mm: float = 5.0) -> FloatArray:
        """Points of the printed grid that can be seen, (N, 2), at whole multiples of the step."""
        to_sheet = invert_affine(self.view.paper_from_sheet)
        paper = apply_affine(to_sheet, self.view.samples_mm(2))
        low = np.maximum(paper.min(axis=0), self.grid_mm[:2])
        high = np.minimum(paper.max(axis=0), self.grid_mm[2:])
        x, y = (
            step_mm * np.arange(np.ceil(a / step_mm), np.floor(b / step_mm) + 1)
            for a, b in zip(low, high, strict=True)
        )
        points_mm = np.stack(np.meshgrid(x, y), axis=-1).reshape(-1, 2)
        return points_mm[self.legible(points_mm)]


def _inside(points: FloatArray, corners: FloatArray) -> NDArray[np.bool_]:
    """Which points lie in a convex polygon whose corners go clockwise with y down."""
    inside = np.ones(len(points), dtype=bool)
    for start, end in zip(corners, np.roll(corners, -1, axis=0), strict=True):
        side = end - start
        inside &= side[0] * (points[:, 1] - start[1]) - side[1] * (points[:, 0] - start[0]) >= 0.0
    return inside


@dataclass(frozen=True, slots=True, eq=False)
class Photo:
    """A photo: `pixels` (H, W, 3) uint8 sRGB; `sheets`, the largest first; how it was made."""

    pixels: Pixels
    sheets: tuple[PhotoSheet, ...]
    seed: int
    recipe: Recipe
    printed: PrintedPage | None

    @property
    def applied(self) -> dict[str, Any]:
        """The recipe's fields that differ from a plain photo, and the page."""
        plain = Recipe()
        changed = {
            field.name: getattr(self.recipe, field.name)
            for field in fields(Recipe)
            if getattr(self.recipe, field.name) != getattr(plain, field.name)
        }
        if self.printed is not None:
            changed["page"] = self.printed.description
        return changed

    def to_px(self, points_mm: FloatArray) -> FloatArray:
        """sheet_mm of the largest sheet to picture_px, (N, 2) -> (N, 2)."""
        return self.sheets[0].to_px(points_mm)

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """picture_px to sheet_mm of the largest sheet; NaN off its paper."""
        return self.sheets[0].to_mm(points_px)

    def visible(self, points_mm: FloatArray) -> NDArray[np.bool_]:
        """Which points of the largest sheet are in the picture and under nothing else."""
        return self.sheets[0].visible(points_mm)


def photo(
    seed: int,
    *,
    megapixels: float | None = None,
    plain: bool = False,
    printed: PrintedPage | None = None,
    recordings: bool = True,
    **options: Any,
) -> Photo:
    """A photograph of a page, always the same for the same arguments.

    Parameters
    ----------
    seed : int
        Chooses the page and everything that is done to it.
    megapixels : float, optional
        Of the picture; by chance 8 to 12.
    plain : bool
        Only what `options` ask for, seen from above.
    printed : PrintedPage, optional
        The page; by chance if not given.
    recordings : bool
        Whether a page by chance may show a real recording, where there are some.
    **options
        Fields of `Recipe`.
    """
    rng = np.random.default_rng(seed)
    if megapixels is None:
        megapixels = float(rng.uniform(8.0, 12.0))
    recipe = Recipe(megapixels=megapixels) if plain else random_recipe(rng, megapixels)
    recipe = replace(recipe, **options)
    if printed is None:
        page_rng = np.random.default_rng([seed, 0])
        printed = random_printed_page(page_rng, recordings=recordings)
        if recipe.copy_of in ("photocopy", "fax"):
            printed = strongly_ruled(printed, page_rng)
    shot = take(subject_of(printed), recipe, seed)
    turn = turn_of_picture(shot.owner.shape, recipe.quarter_turns, mirrored=recipe.mirrored)
    sheets = [_photo_sheet(one, shot, turn) for one in shot.placed]
    sheets.sort(key=lambda sheet: -int((sheet.owner == sheet.mark).sum()))
    pixels = turned_pixels(shot.pixels, recipe.quarter_turns, mirrored=recipe.mirrored)
    return Photo(pixels, tuple(sheets), seed, recipe, printed)


def _photo_sheet(placed: Placed, shot: Shot, turn: FloatArray) -> PhotoSheet:
    return PhotoSheet(
        view=placed.view,
        picture_from_sensor=turn,
        grid_mm=placed.sheet.grid_mm,
        stickers_mm=placed.stickers_mm,
        mark=placed.mark,
        owner=shot.owner,
        shine=shot.shine,
    )


def turned_pixels(pixels: Pixels, quarter_turns: int, *, mirrored: bool) -> Pixels:
    """The picture mirrored left to right if asked, then turned clockwise by quarter turns."""
    if mirrored:
        pixels = pixels[:, ::-1]
    return np.ascontiguousarray(np.rot90(pixels, -quarter_turns))


def turn_of_picture(shape: tuple[int, ...], quarter_turns: int, *, mirrored: bool) -> FloatArray:
    """The map that goes with `turned_pixels`, (2, 3), for a picture of this (height, width)."""
    height_px, width_px = shape[:2]
    turn = np.eye(2, 3)
    if mirrored:
        turn = np.array([[-1.0, 0.0, width_px - 1.0], [0.0, 1.0, 0.0]])
    for _ in range(quarter_turns % 4):
        # (x, y) goes to (height - 1 - y, x); the new width is the old height.
        turn = np.array([[0.0, -1.0], [1.0, 0.0]]) @ turn
        turn[0, 2] += height_px - 1.0
        width_px, height_px = height_px, width_px
    return turn


def quick_set() -> Iterator[Photo]:
    """Twenty photos of 2 to 3 megapixels, one at a time; the same on every machine."""
    for number, seed in enumerate(QUICK_SEEDS):
        yield photo(seed, megapixels=2.0 + number / 19.0, recordings=False)


def slow_set() -> Iterator[Photo]:
    """Eighty photos of 8 to 12 megapixels, one at a time."""
    for number in range(80):
        yield photo(100 + number)
