"""The lines a caliper is drawn with, in picture_px.

A caliper that measures along the paper stands on legs that run down it, with a bar across;
one that measures down the paper lies on its side. Both follow the map's turn and skew.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from app.chart.ink import Box
from app.chart.strokes import Segment
from app.reading import Caliper, CaliperKind, Reading
from imaging.sheet_map import SheetMap, Vector

# Without a grid lengths are drawn as on an A4 page held landscape; nothing is measured by it.
_GUESSED_SHEET_MM = 280.0
_BEYOND_MARK_MM = 2.0
_BEYOND_BAR_MM = 0.7
_TICK_MM = 0.7
DISTANCES_MM = (4.0, 6.5, 9.0, 11.5, 14.0, 17.0, 20.0, 24.0)


@dataclass(frozen=True, slots=True)
class Frame:
    """What turns sheet_mm into picture_px, guessed where a reading has no map.

    Attributes
    ----------
    origin_px, x_step_px, y_step_px : (float, float)
        As in `SheetMap`.
    """

    origin_px: Vector
    x_step_px: Vector
    y_step_px: Vector

    @classmethod
    def of(cls, reading: Reading) -> Frame:
        """The frame of a reading."""
        sheet_map: SheetMap | None = reading.sheet_map
        if sheet_map is not None:
            return cls(sheet_map.origin_px, sheet_map.x_step_px, sheet_map.y_step_px)
        pitch_px = max(reading.picture.size_px) / _GUESSED_SHEET_MM
        return cls((0.0, 0.0), (pitch_px, 0.0), (0.0, pitch_px))

    @property
    def pitch_px_per_mm(self) -> float:
        """The smaller of the two pitches."""
        return float(min(np.hypot(*self.x_step_px), np.hypot(*self.y_step_px)))

    def to_mm(self, x_px: float, y_px: float) -> Vector:
        """A picture point on the grid."""
        steps = np.array([self.x_step_px, self.y_step_px]).T
        x_mm, y_mm = np.linalg.solve(steps, [x_px - self.origin_px[0], y_px - self.origin_px[1]])
        return float(x_mm), float(y_mm)

    def to_px(self, x_mm: float, y_mm: float) -> Vector:
        """A place on the grid in the picture."""
        step = self.step_px(x_mm, y_mm)
        return self.origin_px[0] + step[0], self.origin_px[1] + step[1]

    def step_px(self, x_mm: float, y_mm: float) -> Vector:
        """A step on the grid as a vector in the picture."""
        (xx, xy), (yx, yy) = self.x_step_px, self.y_step_px
        return x_mm * xx + y_mm * yx, x_mm * xy + y_mm * yy


@dataclass(frozen=True, slots=True)
class Lane:
    """Where the bar runs.

    Attributes
    ----------
    side : int
        -1 above (or left of, for a height), +1 below (or right).
    distance_mm : float
        From the outermost mark on that side.
    """

    side: int
    distance_mm: float


@dataclass(frozen=True, slots=True)
class CaliperLines:
    """Segments in picture_px.

    Attributes
    ----------
    legs : tuple of Segment
        One for each tooth.
    ticks : tuple of Segment
        A short stroke across the leg at each of the two marks: there they were placed.
    bar : Segment
    outward : (float, float)
        From the bar away from the marks, unit vector in the picture.
    """

    legs: tuple[Segment, ...]
    ticks: tuple[Segment, Segment]
    bar: Segment
    outward: Vector


def lanes_of(caliper: Caliper) -> tuple[Lane, ...]:
    """Where a caliper's bar may run, best first: above the wave, right of a height."""
    preferred = 1 if caliper.kind is CaliperKind.HEIGHT else -1
    return tuple(
        Lane(side, distance) for distance in DISTANCES_MM for side in (preferred, -preferred)
    )


def caliper_lines(caliper: Caliper, frame: Frame, lane: Lane) -> CaliperLines:
    """Lay a caliper's lines out around its two marks."""
    axis = 1 if caliper.kind is CaliperKind.HEIGHT else 0
    ends_mm = [frame.to_mm(end.x_px, end.y_px) for end in (caliper.start, caliper.end)]
    across_mm = [lane.side * end[1 - axis] for end in ends_mm]
    bar_mm = lane.side * (max(across_mm) + lane.distance_mm)
    tip_mm = bar_mm + lane.side * _BEYOND_BAR_MM
    foot_mm = lane.side * (min(across_mm) - _BEYOND_MARK_MM)

    def place(along: float, across: float) -> Vector:
        return frame.to_px(across, along) if axis else frame.to_px(along, across)

    first, last = ends_mm[0][axis], ends_mm[1][axis]
    teeth = caliper.teeth if caliper.kind is CaliperKind.COMB else 2
    along_mm = [first + (last - first) * tooth / (teeth - 1) for tooth in range(teeth)]
    ticks = [
        (*place(end[axis] - _TICK_MM, end[1 - axis]), *place(end[axis] + _TICK_MM, end[1 - axis]))
        for end in ends_mm
    ]
    outward = frame.step_px(lane.side, 0.0) if axis else frame.step_px(0.0, lane.side)
    length = float(np.hypot(*outward))
    return CaliperLines(
        legs=tuple((*place(along, tip_mm), *place(along, foot_mm)) for along in along_mm),
        ticks=(ticks[0], ticks[1]),
        bar=(*place(first, bar_mm), *place(last, bar_mm)),
        outward=(outward[0] / length, outward[1] / length),
    )


def box_of(segment: Segment, margin_px: float = 1.0) -> Box:
    """The upright box around a segment."""
    x1, y1, x2, y2 = segment
    return (
        min(x1, x2) - margin_px,
        min(y1, y2) - margin_px,
        max(x1, x2) + margin_px,
        max(y1, y2) + margin_px,
    )
