"""Calipers, kept where the reader put them on the picture."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import StrEnum
from typing import Any

import numpy as np

from imaging.sheet_map import SheetMap


class CaliperKind(StrEnum):
    """What a caliper measures."""

    TIME = "time"
    HEIGHT = "height"
    COMB = "comb"


@dataclass(frozen=True, slots=True)
class PicturePoint:
    """A place on the picture, in picture_px.

    Attributes
    ----------
    x_px, y_px : float
    step_px : float
        Distance to the neighbouring places the hand could have chosen instead when it put
        the mark there; 0: not known, or finer than a pixel of the picture.
    """

    x_px: float
    y_px: float
    step_px: float = 0.0

    def __post_init__(self) -> None:
        if not (math.isfinite(self.x_px) and math.isfinite(self.y_px)):
            raise ValueError("a mark must lie at a finite place on the picture")
        if not (math.isfinite(self.step_px) and self.step_px >= 0.0):
            raise ValueError("the step a mark was placed in must be finite and not negative")


@dataclass(frozen=True, slots=True)
class Caliper:
    """Two marked places and what lies between them.

    Attributes
    ----------
    caliper_id : int
        Unique within a reading, never reused.
    kind : CaliperKind
        Time along the paper, height down it, or a comb of evenly spaced teeth in time.
    start, end : PicturePoint
        Where the reader put the two legs. For a height the start is the baseline and the
        end the peak; for a comb they are the first and the last tooth.
    quantity : str or None
        Key of the quantity it measures (see `app.reading.quantities`); None: a free caliper.
    lead : str or None
        Lead it was placed in.
    beat : int or None
        Beat number, from 1, within that quantity and lead.
    teeth : int
        Teeth of a comb, at least 2; 2 for the others.
    """

    caliper_id: int
    kind: CaliperKind
    start: PicturePoint
    end: PicturePoint
    quantity: str | None = None
    lead: str | None = None
    beat: int | None = None
    teeth: int = 2
    extra: Mapping[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if self.teeth < 2:
            raise ValueError("a comb has at least two teeth")

    def ends_px(self) -> np.ndarray[tuple[int, int], np.dtype[np.float64]]:
        """Start and end, shape (2, 2), in picture_px."""
        return np.array(
            [[self.start.x_px, self.start.y_px], [self.end.x_px, self.end.y_px]], dtype=np.float64
        )

    def span_mm(self, sheet_map: SheetMap) -> tuple[float, float]:
        """``end - start`` in sheet_mm (x along the paper, y down); NaN off the picture."""
        start, end = sheet_map.to_mm(self.ends_px())
        return float(end[0] - start[0]), float(end[1] - start[1])

    def width_mm(self, sheet_map: SheetMap) -> float:
        """Distance of the legs along the paper, at least 0."""
        return abs(self.span_mm(sheet_map)[0])

    def height_mm(self, sheet_map: SheetMap) -> float:
        """Height of the end above the start; positive is up on the paper."""
        return -self.span_mm(sheet_map)[1]
