"""Find each label a place of its own at the present zoom. No Qt.

All boxes are (left, top, right, bottom) in canvas px: view px plus the scroll position.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from app.window.canvas.ink_map import Box
from app.window.canvas.shape import Segment

Size = tuple[float, float]

_GAP_PX = 4.0
_INK_COST = 30.0
_OVERLAP_COST = 100.0
_SHORT_COST = 4.0
_SHIFT_COST = 1.0
_STACK_COST = 3.0
_DROPPED_FROM = 60.0


@dataclass(frozen=True, slots=True)
class LabelRequest:
    """One label that wants a place.

    Attributes
    ----------
    caliper_id : int
    bar : Segment
        In canvas px.
    outward : (float, float)
        Unit vector from the bar away from the marks, upright or level.
    sizes : sequence of (float, float)
        Width and height of the full label, then of shorter ones.
    must_show : bool
        The selected caliper's label is never dropped nor shortened.
    """

    caliper_id: int
    bar: Segment
    outward: tuple[float, float]
    sizes: Sequence[Size]
    must_show: bool = False


@dataclass(frozen=True, slots=True)
class LabelPlace:
    """Where a label goes and which of its sizes."""

    left: float
    top: float
    size_index: int


def place_labels(
    requests: Sequence[LabelRequest], ink_share: Callable[[Box], float]
) -> dict[int, LabelPlace]:
    """A place for each caliper's label; a label with no room is left out.

    Parameters
    ----------
    requests : sequence of LabelRequest
        Those that must show are placed first, the others in their order.
    ink_share : callable
        Share of a box that lies on the drawn line, 0 to 1.
    """
    taken: list[Box] = []
    places: dict[int, LabelPlace] = {}
    for request in sorted(requests, key=lambda item: not item.must_show):
        best_cost, best_box, best_index = _best(request, taken, ink_share)
        if best_cost >= _DROPPED_FROM and not request.must_show:
            continue
        taken.append(best_box)
        places[request.caliper_id] = LabelPlace(best_box[0], best_box[1], best_index)
    return places


def centred_place(request: LabelRequest) -> LabelPlace:
    """The place of a label that follows the pointer: always the same, so that it never jumps."""
    box = _box(request, request.sizes[0], 0.0, 0.0)
    return LabelPlace(box[0], box[1], 0)


def _best(
    request: LabelRequest, taken: Sequence[Box], ink_share: Callable[[Box], float]
) -> tuple[float, Box, int]:
    options: list[tuple[float, Box, int]] = []
    sizes = request.sizes[:1] if request.must_show else request.sizes
    for index, size in enumerate(sizes):
        for stack in (0.0, 1.0, 2.0):
            for shift in (0.0, -1.0, 1.0):
                box = _box(request, size, shift, stack)
                cost = index * _SHORT_COST + abs(shift) * _SHIFT_COST + stack * _STACK_COST
                cost += _INK_COST * ink_share(box)
                cost += _OVERLAP_COST * sum(_shared(box, other) for other in taken)
                options.append((cost, box, index))
    return min(options)


def _box(request: LabelRequest, size: Size, shift: float, stack: float) -> Box:
    """A label outside the bar: `shift` -1, 0, 1 along it, `stack` heights further out."""
    x1, y1, x2, y2 = request.bar
    width, height = size
    out_x, out_y = request.outward
    centre_x, centre_y = (x1 + x2) / 2.0, (y1 + y2) / 2.0
    if abs(out_y) >= abs(out_x):
        centre_x += shift * max(abs(x2 - x1) / 2.0, width / 2.0)
        centre_y += out_y * (height / 2.0 + _GAP_PX + stack * (height + 2.0))
    else:
        centre_x += out_x * (width / 2.0 + _GAP_PX)
        centre_y += (shift + 2.0 * shift * stack) * (height / 2.0 + 1.0)
    left, top = centre_x - width / 2.0, centre_y - height / 2.0
    return left, top, left + width, top + height


def _shared(one: Box, other: Box) -> float:
    """The share of the smaller box that both cover."""
    width = min(one[2], other[2]) - max(one[0], other[0])
    height = min(one[3], other[3]) - max(one[1], other[1])
    if width <= 0.0 or height <= 0.0:
        return 0.0
    areas = [(box[2] - box[0]) * (box[3] - box[1]) for box in (one, other)]
    return width * height / min(areas)
