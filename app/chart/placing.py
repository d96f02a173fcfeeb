"""Find each caliper a place for its bar and its label: labels never lie over each other."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from app.chart.caliper_lines import box_of, lanes_of
from app.drawing.frame import SheetFrame
from app.drawing.ink_map import Box, InkMap
from app.drawing.shape import CaliperShape, Lane, Segment, caliper_shape
from app.reading import Caliper

Size = tuple[float, float]

# What keeps a bar or label away from where it would stand best: larger is worse.
_INK_COST = 60.0
_LEG_INK_COST = 15.0
_LABEL_INK_COST = 400.0
_ANY_INK_COST = 5.0
_BAR_ON_BAR_COST = 60.0
_OFF_PICTURE_COST = 200.0
_LABEL_ON_MARK_COST = 30.0
_LABEL_ON_LINE_COST = 6.0
_LINE_UNDER_LABEL_COST = 10.0
_PER_MM_COST = 0.3
_OTHER_SIDE_COST = 1.5
_SHORTER_TEXT_COST = 1.5
_ONLY_NUMBER_COST = 8.0
_SHIFT_COST = 6.0
_STACK_COST = 3.0
_BAR_ROOM_MM = 1.2
_GAP_PX = 3.0


@dataclass(frozen=True, slots=True)
class Label:
    """A label's words, the box of its plate, and a line to its bar where it stands apart.

    All in picture_px.
    """

    text: str
    box: Box
    leader: Segment | None


@dataclass(frozen=True, slots=True)
class PlacedCaliper:
    """A caliper with its lines, and its label where there was room for one."""

    caliper: Caliper
    lines: CaliperShape
    label: Label | None


def place_calipers(
    calipers: Sequence[Caliper],
    texts: Mapping[int, Sequence[str]],
    frame: SheetFrame,
    ink: InkMap,
    size_px: tuple[int, int],
    plate_size: Callable[[str], Size],
) -> list[PlacedCaliper]:
    """Place calipers one by one, in their order.

    Parameters
    ----------
    calipers : sequence of Caliper
    texts : mapping
        For each caliper id its label's words, the fullest first, the bare number last.
    frame : SheetFrame
    ink : InkMap
        Of the picture.
    size_px : (int, int)
        Of the picture; no label leaves it.
    plate_size : callable
        Width and height of the plate that some words need, px.
    """
    room = _Room(calipers, frame, ink, size_px)
    placed = []
    for caliper in calipers:
        plates = [(text, plate_size(text)) for text in texts[caliper.caliper_id]]
        best = room.best(caliper, plates)
        room.take(best)
        placed.append(best)
    return placed


class _Room:
    """What is taken on the picture so far."""

    def __init__(
        self, calipers: Sequence[Caliper], frame: SheetFrame, ink: InkMap, size_px: tuple[int, int]
    ) -> None:
        self._frame, self._ink, self._size_px = frame, ink, size_px
        self._labels: list[Box] = []
        self._bars: list[Box] = []
        self._lines: list[Box] = []
        reach_px = frame.pitch_px_per_mm * 0.5
        self._marks = [
            box_of((end.x_px, end.y_px, end.x_px, end.y_px), reach_px)
            for item in calipers
            for end in (item.start, item.end)
        ]

    def take(self, placed: PlacedCaliper) -> None:
        """Note what a caliper covers."""
        self._bars.append(self._bar_room(placed.lines))
        self._lines += [box_of(line) for line in (*placed.lines.legs, placed.lines.bar)]
        if placed.label is not None:
            self._labels.append(placed.label.box)

    def best(self, caliper: Caliper, plates: Sequence[tuple[str, Size]]) -> PlacedCaliper:
        """The cheapest lane and label; without any room the cheapest lane and no label."""
        lanes = []
        for number, lane in enumerate(lanes_of(caliper)):
            lines = caliper_shape(caliper, self._frame, lane)
            lanes.append((self._lane_cost(lines, lane, lanes_of(caliper)[0]), number, lines))
        lanes.sort(key=lambda item: item[:2])
        best_cost, best = math.inf, PlacedCaliper(caliper, lanes[0][2], None)
        for cost, _, lines in lanes:
            if cost >= best_cost:
                break
            for own_cost, text, box in self._label_options(lines, plates):
                if cost + own_cost >= best_cost:
                    break
                total = cost + own_cost + self._label_cost(box, lines)
                if total < best_cost:
                    best_cost, best = (
                        total,
                        PlacedCaliper(caliper, lines, self._label(text, box, lines)),
                    )
        return best

    def _lane_cost(self, lines: CaliperShape, lane: Lane, preferred: Lane) -> float:
        bar = box_of(lines.bar)
        cost = _PER_MM_COST * lane.distance_mm + _INK_COST * self._ink.share(bar)
        if lane.side != preferred.side:
            cost += _OTHER_SIDE_COST
        cost += _LEG_INK_COST * max(self._ink.share(box_of(leg)) for leg in lines.legs)
        cost += _BAR_ON_BAR_COST * _count(self._bar_room(lines), self._bars)
        cost += _LINE_UNDER_LABEL_COST * sum(
            _count(box_of(line), self._labels) for line in (*lines.legs, lines.bar)
        )
        width_px, height_px = self._size_px
        if bar[0] < -1 or bar[1] < -1 or bar[2] > width_px or bar[3] > height_px:
            cost += _OFF_PICTURE_COST
        return cost

    def _bar_room(self, lines: CaliperShape) -> Box:
        """A bar with room on both sides, but not at its ends: a chain of bars shares one lane."""
        left, top, right, bottom = box_of(lines.bar, -1.0)
        room_px = _BAR_ROOM_MM * self._frame.pitch_px_per_mm
        if abs(lines.outward[1]) >= abs(lines.outward[0]):
            return left, top - room_px, right, bottom + room_px
        return left - room_px, top, right + room_px, bottom

    def _label_options(
        self, lines: CaliperShape, plates: Sequence[tuple[str, Size]]
    ) -> Iterator[tuple[float, str, Box]]:
        """Where a label may stand inside the picture, the best first, and at what cost."""
        options = sorted(
            (
                _text_cost(level, len(plates)) + abs(shift) * _SHIFT_COST + stack * _STACK_COST,
                level,
                shift,
                stack,
            )
            for level in range(len(plates))
            for shift in (0.0, -0.5, 0.5, -1.0, 1.0)
            for stack in (0, 1, 2)
        )
        width_px, height_px = self._size_px
        for cost, level, shift, stack in options:
            text, size = plates[level]
            box = self._label_box(lines, size, shift, stack)
            if box[0] >= 0 and box[1] >= 0 and box[2] <= width_px - 1 and box[3] <= height_px - 1:
                yield cost, text, box

    def _label_box(self, lines: CaliperShape, size: Size, shift: float, stack: int) -> Box:
        """A label outside the bar, moved along it by shares of itself and stacked outwards."""
        (x1, y1, x2, y2), (out_x, out_y), (width, height) = lines.bar, lines.outward, size
        centre_x, centre_y = (x1 + x2) / 2.0, (y1 + y2) / 2.0
        gap = _GAP_PX + self._frame.pitch_px_per_mm
        if abs(out_y) >= abs(out_x):
            centre_x += shift * max(abs(x2 - x1), width)
            centre_y += math.copysign(gap + height / 2.0 + stack * (height + _GAP_PX), out_y)
        else:
            centre_x += math.copysign(gap + width / 2.0, out_x)
            centre_y += shift * max(abs(y2 - y1), height) + stack * shift * (height + _GAP_PX)
        return (
            centre_x - width / 2,
            centre_y - height / 2,
            centre_x + width / 2,
            centre_y + height / 2,
        )

    def _label(self, text: str, box: Box, lines: CaliperShape) -> Label:
        x1, y1, x2, y2 = lines.bar
        middle_x, middle_y = (x1 + x2) / 2.0, (y1 + y2) / 2.0
        end_x = min(max(middle_x, box[0]), box[2])
        end_y = min(max(middle_y, box[1]), box[3])
        apart_px = math.hypot(end_x - middle_x, end_y - middle_y)
        if apart_px <= 2.0 * (_GAP_PX + self._frame.pitch_px_per_mm):
            return Label(text, box, None)
        return Label(text, box, (middle_x, middle_y, end_x, end_y))

    def _label_cost(self, box: Box, lines: CaliperShape) -> float:
        """What speaks against a label there; infinite where another label is."""
        left, top, right, bottom = box
        if _count((left - _GAP_PX, top - _GAP_PX, right + _GAP_PX, bottom + _GAP_PX), self._labels):
            return math.inf
        inked = self._ink.share(box)
        cost = _LABEL_INK_COST * inked + (_ANY_INK_COST if inked else 0.0)
        cost += _LABEL_ON_MARK_COST * _count(box, self._marks)
        own = [box_of(line) for line in (*lines.legs, lines.bar)]
        return cost + _LABEL_ON_LINE_COST * _count(box, [*self._lines, *own])


def _text_cost(level: int, count: int) -> float:
    if level == count - 1 and count > 1:
        return _ONLY_NUMBER_COST
    return level * _SHORTER_TEXT_COST


def _count(box: Box, others: Sequence[Box]) -> int:
    """How many of the other boxes share ground with a box."""
    if not others:
        return 0
    left, top, right, bottom = np.array(others).T
    apart = (left >= box[2]) | (right <= box[0]) | (top >= box[3]) | (bottom <= box[1])
    return int(np.count_nonzero(~apart))
