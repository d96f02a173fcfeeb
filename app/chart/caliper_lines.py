"""What the annotated picture needs beside a caliper's shape: lanes, ticks at the marks, boxes."""

from __future__ import annotations

from app.drawing.frame import SheetFrame
from app.drawing.ink_map import Box
from app.drawing.shape import Lane, Segment, measuring_axis, preferred_side
from app.reading import Caliper

_TICK_MM = 0.7
DISTANCES_MM = (4.0, 6.5, 9.0, 11.5, 14.0, 17.0, 20.0, 24.0)


def lanes_of(caliper: Caliper) -> tuple[Lane, ...]:
    """Where a caliper's bar may run, best first."""
    preferred = preferred_side(caliper.kind)
    return tuple(
        Lane(side, distance) for distance in DISTANCES_MM for side in (preferred, -preferred)
    )


def mark_ticks(caliper: Caliper, frame: SheetFrame) -> tuple[Segment, Segment]:
    """A short stroke across the leg at each of the two marks, in picture_px: there they lie."""
    reach = (0.0, _TICK_MM) if measuring_axis(caliper.kind) else (_TICK_MM, 0.0)
    middle_px = [
        0.5 * (first + second) for first, second in zip(*caliper.ends_px().tolist(), strict=True)
    ]
    dx, dy = frame.at(*middle_px).px_step(*reach)
    first, second = (
        (end.x_px - dx, end.y_px - dy, end.x_px + dx, end.y_px + dy)
        for end in (caliper.start, caliper.end)
    )
    return first, second


def box_of(segment: Segment, margin_px: float = 1.0) -> Box:
    """The upright box around a segment."""
    x1, y1, x2, y2 = segment
    return (
        min(x1, x2) - margin_px,
        min(y1, y2) - margin_px,
        max(x1, x2) + margin_px,
        max(y1, y2) + margin_px,
    )
