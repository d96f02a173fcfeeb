"""Labels that slide along their calipers, so that they are in view where the caliper is. No Qt.

All boxes are (left, top, right, bottom) in canvas px.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from app.drawing.ink_map import Box
from app.drawing.shape import Segment

_EDGE_PX = 8.0
_GAP_PX = 10.0


@dataclass(frozen=True, slots=True)
class Slide:
    """One label and how far it may go.

    Attributes
    ----------
    label : Box
        Where it was laid out.
    bar : Segment
        It slides along this one, keeping its distance.
    caliper : Box
        All the lines; with none of them in view the label stays where it is.
    is_free : bool
        A selected one: it may leave its bar for its legs, and lie on another label.
    """

    label: Box
    bar: Segment
    caliper: Box
    is_free: bool = False

    def within(self, room: Box) -> Box:
        """The label as far into a room as it may go."""
        x1, y1, x2, y2 = self.bar
        if abs(x2 - x1) >= abs(y2 - y1):
            along = _step_along(self.label[0::2], sorted((x1, x2)), room[0::2])
            slope = (y2 - y1) / (x2 - x1) if x1 != x2 else 0.0
            box = _stepped(self.label, (along, along * slope))
        else:
            along = _step_along(self.label[1::2], sorted((y1, y2)), room[1::2])
            across = 0.0
            if self.label[1] >= max(y1, y2) or self.label[3] <= min(y1, y2):
                # Past the end of the bar there is room to both sides.
                across = _step_along(self.label[0::2], self.caliper[0::2], room[0::2])
            box = _stepped(self.label, (across + along * (x2 - x1) / (y2 - y1), along))
        if self.is_free and not _holds(room, box):
            return self._beside_legs(box, room)
        return box

    def _beside_legs(self, box: Box, room: Box) -> Box:
        """Next to the caliper, where no mark is hidden, and in the room whatever it takes."""
        across = _step_into(box[0::2], room[0::2])
        down = _step_into(box[1::2], room[1::2])
        left, top, right, bottom = self.caliper
        x1, y1, x2, y2 = self.bar
        if abs(x2 - x1) >= abs(y2 - y1):
            beside = (right + _GAP_PX - box[0], left - _GAP_PX - box[2])
            steps = [(step, down) for step in beside]
        else:
            steps = [(across, step) for step in (top - _GAP_PX - box[3], bottom + _GAP_PX - box[1])]
        for step in steps:
            if _holds(room, _stepped(box, step)):
                return _stepped(box, step)
        return _stepped(box, (across, down))


def slid_labels(slides: Mapping[int, Slide], view: Box) -> dict[int, Box]:
    """The labels that are not where they were laid out, and where they are for a view."""
    room = view[0] + _EDGE_PX, view[1] + _EDGE_PX, view[2] - _EDGE_PX, view[3] - _EDGE_PX
    slid: dict[int, Box] = {}
    for key, slide in slides.items():
        if _holds(room, slide.label) or not _touch(room, slide.caliper):
            continue
        box = slide.within(room)
        others = (slid.get(other, slides[other].label) for other in slides if other != key)
        if slide.is_free or not any(_touch(box, other) for other in others):
            slid[key] = box
    return slid


def _step_along(label: Sequence[float], bar: Sequence[float], room: Sequence[float]) -> float:
    """How far a label goes along its bar: within the bar, or if longer, still all over it."""
    length = label[1] - label[0]
    low, high = min(bar[0], bar[1] - length), max(bar[1], bar[0] + length)
    step = _step_into(label, room)
    return min(max(step, min(0.0, low - label[0])), max(0.0, high - label[1]))


def _step_into(interval: Sequence[float], room: Sequence[float]) -> float:
    """The step that brings an interval into a room; its beginning, if it is too long."""
    return max(min(0.0, room[1] - interval[1]), room[0] - interval[0])


def _stepped(box: Box, step: tuple[float, float]) -> Box:
    return box[0] + step[0], box[1] + step[1], box[2] + step[0], box[3] + step[1]


def _holds(room: Box, box: Box) -> bool:
    return room[0] <= box[0] and room[1] <= box[1] and box[2] <= room[2] and box[3] <= room[3]


def _touch(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]
