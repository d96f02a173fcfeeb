"""The lines a caliper is drawn with, in picture_px. No Qt.

A caliper that measures along the paper stands on two legs that run down it, with a bar across;
one that measures down the paper lies on its side. Both follow the map's turn and skew.
"""

from __future__ import annotations

from dataclasses import dataclass

from app.drawing.frame import SheetFrame, Vector
from app.reading import Caliper, CaliperKind, PicturePoint

Segment = tuple[float, float, float, float]

BEYOND_MARK_MM = 3.0
BEYOND_BAR_MM = 1.0
_LONG_ARM_MM = 9.0
_SHORT_ARM_MM = 1.2


@dataclass(frozen=True, slots=True)
class Lane:
    """Where the bar runs: on which side of the marks, and how far from the nearer one.

    Attributes
    ----------
    side : int
        -1 above (or left of, for a height), +1 below (or right).
    distance_mm : float
        From the outermost mark on that side.
    """

    side: int = -1
    distance_mm: float = 6.0


@dataclass(frozen=True, slots=True)
class CaliperShape:
    """Segments (x1, y1, x2, y2) in picture_px.

    Attributes
    ----------
    legs : tuple of Segment
        One for each tooth, start first, end last.
    marks : tuple of (float, float)
        The start and the end as marked.
    bar : Segment
        From the start's leg to the end's.
    outward : (float, float)
        From the bar away from the marks, picture_px of 1 mm.
    """

    legs: tuple[Segment, ...]
    marks: tuple[Vector, Vector]
    bar: Segment
    outward: Vector


def measuring_axis(kind: CaliperKind) -> int:
    """0 where the legs are apart along the paper, 1 where they are apart down it."""
    return 1 if kind is CaliperKind.HEIGHT else 0


def preferred_side(kind: CaliperKind) -> int:
    """Where a bar stands best: above the wave, right of a height."""
    return 1 if kind is CaliperKind.HEIGHT else -1


def caliper_shape(caliper: Caliper, frame: SheetFrame, lane: Lane) -> CaliperShape:
    """Lay a caliper's lines out around its two marks."""
    axis = measuring_axis(caliper.kind)
    # On a bent sheet the lines run as the grid does half way between the marks.
    frame = frame.at(
        0.5 * (caliper.start.x_px + caliper.end.x_px), 0.5 * (caliper.start.y_px + caliper.end.y_px)
    )
    start_mm, end_mm = frame.mm_from_px(caliper.start), frame.mm_from_px(caliper.end)
    cross_mm = (start_mm[1 - axis], end_mm[1 - axis])
    outermost_mm = min(cross_mm) if lane.side < 0 else max(cross_mm)
    innermost_mm = max(cross_mm) if lane.side < 0 else min(cross_mm)
    bar_mm = outermost_mm + lane.side * lane.distance_mm
    tip_mm = bar_mm + lane.side * BEYOND_BAR_MM
    foot_mm = innermost_mm - lane.side * BEYOND_MARK_MM

    def place(along_mm: float, across_mm: float) -> Vector:
        x_mm, y_mm = (across_mm, along_mm) if axis else (along_mm, across_mm)
        return frame.px_from_mm(x_mm, y_mm)

    teeth = caliper.teeth if caliper.kind is CaliperKind.COMB else 2
    along_mm = [
        start_mm[axis] + (end_mm[axis] - start_mm[axis]) * tooth / (teeth - 1)
        for tooth in range(teeth)
    ]
    outward = (float(lane.side), 0.0) if axis else (0.0, float(lane.side))
    return CaliperShape(
        legs=tuple((*place(along, tip_mm), *place(along, foot_mm)) for along in along_mm),
        marks=(
            (caliper.start.x_px, caliper.start.y_px),
            (caliper.end.x_px, caliper.end.y_px),
        ),
        bar=(*place(along_mm[0], bar_mm), *place(along_mm[-1], bar_mm)),
        outward=frame.px_step(*outward),
    )


def aim_segments(
    frame: SheetFrame, place: PicturePoint, kind: CaliperKind | None
) -> tuple[Segment, Segment]:
    """A cross at a place, with its long arm the way a leg of that kind runs."""
    reach_mm = (_LONG_ARM_MM, _LONG_ARM_MM)
    if kind is not None:
        reach_mm = (_SHORT_ARM_MM, _LONG_ARM_MM)
        if measuring_axis(kind):
            reach_mm = (_LONG_ARM_MM, _SHORT_ARM_MM)
    x, y = place.x_px, place.y_px
    frame = frame.at(x, y)
    across, down = frame.px_step(reach_mm[0], 0.0), frame.px_step(0.0, reach_mm[1])
    return (
        (x - across[0], y - across[1], x + across[0], y + across[1]),
        (x - down[0], y - down[1], x + down[0], y + down[1]),
    )
