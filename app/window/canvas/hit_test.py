"""What lies under the pointer, in view px. No Qt."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from app.drawing.ink_map import Box
from app.drawing.shape import Segment

TOLERANCE_VIEW_PX = 8.0


@dataclass(frozen=True, slots=True)
class HitTarget:
    """One caliper as drawn; segments and box in the frame of the pointer.

    Attributes
    ----------
    caliper_id : int
    legs : sequence of Segment
        Start first, end last, a comb's other teeth between.
    bar : Segment
    label : Box or None
    selected : bool
        A selected caliper wins where two lie equally near.
    """

    caliper_id: int
    legs: Sequence[Segment]
    bar: Segment
    label: Box | None = None
    selected: bool = False


@dataclass(frozen=True, slots=True)
class Hit:
    """A caliper and its leg (0 the start, the last the end), or None for bar and label."""

    caliper_id: int
    tooth: int | None


def hit_test(
    targets: Sequence[HitTarget], x: float, y: float, tolerance: float = TOLERANCE_VIEW_PX
) -> Hit | None:
    """The label under the pointer, else the nearest leg, else the nearest bar, else None.

    Where two are equally near, the selected one wins, then the one drawn last (on top).
    """
    # Labels are painted in the order of their calipers, the selected ones after the others.
    for target in sorted(targets, key=lambda target: target.selected)[::-1]:
        if target.label is not None and _contains(target.label, x, y):
            return Hit(target.caliper_id, None)
    legs = [
        (distance, not target.selected, -order, target.caliper_id, tooth)
        for order, target in enumerate(targets)
        for tooth, leg in enumerate(target.legs)
        if (distance := _rounded_distance(leg, x, y)) <= tolerance
    ]
    if legs:
        *_, caliper_id, tooth = min(legs)
        return Hit(caliper_id, tooth)
    bars = [
        (distance, not target.selected, -order, target.caliper_id)
        for order, target in enumerate(targets)
        if (distance := _rounded_distance(target.bar, x, y)) <= tolerance
    ]
    return Hit(min(bars)[-1], None) if bars else None


def _contains(box: Box, x: float, y: float) -> bool:
    return box[0] <= x <= box[2] and box[1] <= y <= box[3]


def _rounded_distance(segment: Segment, x: float, y: float) -> float:
    """To half a pixel: a hand cannot mean less, and shared legs must count as equally near."""
    return round(2.0 * segment_distance(segment, x, y)) / 2.0


def segment_distance(segment: Segment, x: float, y: float) -> float:
    """Distance of a point from a segment, its ends included."""
    x1, y1, x2, y2 = segment
    dx, dy = x2 - x1, y2 - y1
    length_squared = dx * dx + dy * dy
    share = 0.0
    if length_squared > 0.0:
        share = min(max(((x - x1) * dx + (y - y1) * dy) / length_squared, 0.0), 1.0)
    return math.hypot(x - x1 - share * dx, y - y1 - share * dy)
