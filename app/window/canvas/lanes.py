"""Choose where each caliper's bar runs: clear of the trace and of the other bars. No Qt."""

from __future__ import annotations

from collections.abc import Iterable

from app.drawing.frame import SheetFrame
from app.drawing.ink_map import Box, InkMap
from app.drawing.shape import Lane, caliper_shape, preferred_side
from app.reading import Caliper, CaliperKind

_DISTANCES_MM = (5.0, 9.0, 13.0, 17.0, 21.0)
_LABEL_MM = 3.6  # room for the label along the outward direction, at a middling zoom
_MARGIN_MM = 0.6
_INK_COST = 80.0
_OVERLAP_COST = 60.0
_LEAVES_PICTURE_COST = 200.0


def choose_lanes(
    calipers: Iterable[Caliper], frame: SheetFrame, ink: InkMap | None
) -> dict[int, Lane]:
    """A lane for each caliper id; earlier calipers choose first, so that theirs stay put."""
    taken: list[Box] = []
    lanes: dict[int, Lane] = {}
    for caliper in calipers:
        options = [
            (_cost(caliper, frame, lane, ink, taken), number, lane)
            for number, lane in enumerate(_candidates(caliper.kind))
        ]
        best = min(options, key=lambda option: option[:2])[2]
        lanes[caliper.caliper_id] = best
        taken.append(_bar_box(caliper, frame, best))
    return lanes


def first_lane(kind: CaliperKind) -> Lane:
    """The lane of a caliper that is still being placed."""
    return Lane(preferred_side(kind), distance_mm=9.0)


def _candidates(kind: CaliperKind) -> list[Lane]:
    preferred = preferred_side(kind)
    return [Lane(side, distance) for distance in _DISTANCES_MM for side in (preferred, -preferred)]


def _cost(
    caliper: Caliper, frame: SheetFrame, lane: Lane, ink: InkMap | None, taken: list[Box]
) -> float:
    box = _bar_box(caliper, frame, lane)
    cost = lane.distance_mm / _DISTANCES_MM[0]
    if lane.side != preferred_side(caliper.kind):
        cost += 0.5
    if ink is not None:
        cost += _INK_COST * ink.share(box)
    cost += sum(_OVERLAP_COST for other in taken if _overlap(box, other))
    width_px, height_px = frame.size_px
    if box[0] < 0 or box[1] < 0 or box[2] > width_px - 1 or box[3] > height_px - 1:
        cost += _LEAVES_PICTURE_COST
    return cost


def _bar_box(caliper: Caliper, frame: SheetFrame, lane: Lane) -> Box:
    """The bar with room for its label, as an upright box in picture_px."""
    shape = caliper_shape(caliper, frame, lane)
    x1, y1, x2, y2 = shape.bar
    out_x, out_y = shape.outward
    xs = (x1, x2, x1 + _LABEL_MM * out_x, x2 + _LABEL_MM * out_x)
    ys = (y1, y2, y1 + _LABEL_MM * out_y, y2 + _LABEL_MM * out_y)
    margin_px = _MARGIN_MM * max(abs(out_x), abs(out_y))
    # Not along the bar: the bars of a chain of RR touch end to end and share one lane.
    margin_x, margin_y = (0.0, margin_px) if abs(out_y) >= abs(out_x) else (margin_px, 0.0)
    return min(xs) - margin_x, min(ys) - margin_y, max(xs) + margin_x, max(ys) + margin_y


def _overlap(one: Box, other: Box) -> bool:
    return (
        min(one[2], other[2]) - max(one[0], other[0]) > 1.0
        and min(one[3], other[3]) - max(one[1], other[1]) > 1.0
    )
