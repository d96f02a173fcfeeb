"""The grid as drawing uses it: plain numbers, quick for single points. No Qt.

Without a grid the frame is upright and of a guessed pitch: good for the length of a drawn
leg, never for a value (`has_grid` says which it is).
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np

from app.reading import PicturePoint, Reading
from imaging.sheet_map import SheetMap

Vector = tuple[float, float]

GUESSED_SHEET_MM = 280.0  # an A4 page held landscape


@dataclass(frozen=True, slots=True)
class SheetFrame:
    """Where sheet_mm lies on the picture, as in `SheetMap`.

    Attributes
    ----------
    origin_px, x_step_px, y_step_px : (float, float)
        Origin, and the picture_px vectors of one small square.
    size_px : (int, int)
        Width and height of the picture.
    has_grid : bool
        False where the pitch is only a guess.
    bent : SheetMap, optional
        The map, where its sheet is bent: origin and steps are then those of the nearest flat
        one, and `at` gives those of a place.
    """

    origin_px: Vector
    x_step_px: Vector
    y_step_px: Vector
    size_px: tuple[int, int]
    has_grid: bool
    bent: SheetMap | None = None

    def at(self, x_px: float, y_px: float) -> SheetFrame:
        """The flat frame that touches a bent sheet at a picture point; a flat sheet's own."""
        if self.bent is None:
            return self
        (x_mm, y_mm) = self.bent.to_mm(np.array([[x_px, y_px]]))[0].tolist()
        if not (math.isfinite(x_mm) and math.isfinite(y_mm)):
            return self
        (xx, xy), (yx, yy) = self.bent.steps_px_at((x_px, y_px))
        origin_px = (x_px - x_mm * xx - y_mm * yx, y_px - x_mm * xy - y_mm * yy)
        return replace(self, origin_px=origin_px, x_step_px=(xx, xy), y_step_px=(yx, yy), bent=None)

    def mm_from_px(self, point: PicturePoint) -> Vector:
        """The place on the grid of a picture point."""
        (xx, xy), (yx, yy) = self.x_step_px, self.y_step_px
        determinant = xx * yy - yx * xy
        dx, dy = point.x_px - self.origin_px[0], point.y_px - self.origin_px[1]
        return (yy * dx - yx * dy) / determinant, (xx * dy - xy * dx) / determinant

    def px_from_mm(self, x_mm: float, y_mm: float) -> Vector:
        """The picture point (x, y) of a place on the grid; not limited to the picture."""
        dx, dy = self.px_step(x_mm, y_mm)
        return self.origin_px[0] + dx, self.origin_px[1] + dy

    def px_step(self, x_mm: float, y_mm: float) -> Vector:
        """The picture_px vector of a step on the grid."""
        (xx, xy), (yx, yy) = self.x_step_px, self.y_step_px
        return x_mm * xx + y_mm * yx, x_mm * xy + y_mm * yy

    @property
    def pitch_px_per_mm(self) -> float:
        """The smaller of the two pitches."""
        return min(math.hypot(*self.x_step_px), math.hypot(*self.y_step_px))

    def key_step_mm(self) -> float:
        """How far one press of an arrow key goes: 0.1 mm of grid, without one 0.25 px."""
        return 0.1 if self.has_grid else 0.25 / self.x_step_px[0]

    def clamped(self, x_px: float, y_px: float) -> PicturePoint:
        """The nearest point of the picture."""
        width_px, height_px = self.size_px
        return PicturePoint(min(max(x_px, 0.0), width_px - 1.0), min(max(y_px, 0.0), height_px - 1))

    def share_inside(self, point: PicturePoint, step_px: Vector) -> float:
        """How much of a step, 0 to 1, a point can go without leaving the picture."""
        share = 1.0
        for place, step, size in zip((point.x_px, point.y_px), step_px, self.size_px, strict=True):
            room = (size - 1.0 - place) if step > 0.0 else -place
            if step != 0.0 and room / step < share:
                share = max(0.0, room / step)
        return share


def frame_of(reading: Reading) -> SheetFrame:
    """The frame of a reading's grid, or a guessed one where it has none."""
    sheet_map, size_px = reading.sheet_map, reading.picture.size_px
    if sheet_map is None:
        pitch_px = max(size_px) / GUESSED_SHEET_MM
        return SheetFrame((0.0, 0.0), (pitch_px, 0.0), (0.0, pitch_px), size_px, False)
    return SheetFrame(
        sheet_map.origin_px,
        sheet_map.x_step_px,
        sheet_map.y_step_px,
        size_px,
        True,
        None if sheet_map.bend is None else sheet_map,
    )
