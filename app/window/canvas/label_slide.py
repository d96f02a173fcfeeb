"""Labels that slide along their calipers, so that they are in view where the caliper is. No Qt.

All boxes are (left, top, right, bottom) in canvas px.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from app.window.canvas.ink_map import Box
from app.window.canvas.shape import Segment

_EDGE_PX = 8.0


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
        left, top, right, bottom = self.label
        x1, y1, x2, y2 = self.bar
        if abs(x2 - x1) >= abs(y2 - y1):
            along = _moved(left, right, room[0::2], (min(x1, x2), max(x1, x2)))
            step = along, along * (y2 - y1) / (x2 - x1) if x1 != x2 else 0.0
        else:
            along = _moved(top, bottom, room[1::2], (min(y1, y2), max(y1, y2)))
            step = along * (x2 - x1) / (y2 - y1), along
        left, top, right, bottom = _stepped(self.label, step)
        if not self.is_free:
            return left, top, right, bottom
        step = (
            _moved(left, right, room[0::2], self.caliper[0::2]),
            _moved(top, bottom, room[1::2], self.caliper[1::2]),
        )
        return _stepped((left, top, right, bottom), step)


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


def _moved(low: float, high: float, room: Sequence[float], reach: Sequence[float]) -> float:
    """The step that brings an interval into a room, but not further beyond its reach."""
    wanted = max(min(0.0, room[1] - high), room[0] - low)
    return min(max(wanted, min(0.0, reach[0] - low)), max(0.0, reach[1] - high))


def _stepped(box: Box, step: tuple[float, float]) -> Box:
    return box[0] + step[0], box[1] + step[1], box[2] + step[0], box[3] + step[1]


def _holds(room: Box, box: Box) -> bool:
    return room[0] <= box[0] and room[1] <= box[1] and box[2] <= room[2] and box[3] <= room[3]


def _touch(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]
