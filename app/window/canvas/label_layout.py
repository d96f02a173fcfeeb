"""Find each label a place of its own at the present zoom. No Qt.

All boxes are (left, top, right, bottom) in canvas px: view px plus the scroll position.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from app.drawing.ink_map import Box
from app.drawing.shape import Segment

Size = tuple[float, float]

_GAP_PX = 4.0
_INK_COST_PER_PX2 = 0.1
_OVERHANG_COST_PER_PX = 0.03
_OVERLAP_COST = 100.0
_OTHER_BAR_COST = 6.0
_OTHER_SLOT_COST = 5.0
_OTHER_WIDER_SLOT_COST = 2.0
_SHORT_COST = 1.5
_SHIFT_COST = 7.0
_STACK_COST = 7.5
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
        Width and height of the full label, then of up to two shorter ones.
    must_show : bool
        The label of a caliper selected alone is never dropped nor shortened.
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

    Each keeps off the others' bars and off the slots outside each bar where the shorter
    labels of that one would stand: in a crowd all become short and none wanders off.

    Parameters
    ----------
    requests : sequence of LabelRequest
        Those that must show are placed first, the others in their order.
    ink_share : callable
        Share of a box that lies on the drawn line, 0 to 1.
    """
    taken: list[Box] = []
    places: dict[int, LabelPlace] = {}
    kept_clear = {request.caliper_id: _kept_clear(request) for request in requests}
    for request in sorted(requests, key=lambda item: not item.must_show):
        others = [kept for key, kept in kept_clear.items() if key != request.caliper_id]
        best_cost, best_box, best_index = _best(request, taken, others, ink_share)
        if best_cost >= _DROPPED_FROM and not request.must_show:
            continue
        taken.append(best_box)
        places[request.caliper_id] = LabelPlace(best_box[0], best_box[1], best_index)
    return places


def centred_place(request: LabelRequest) -> LabelPlace:
    """The place of a label that follows the pointer: always the same, so that it never jumps."""
    box = _box(request, request.sizes[0], 0.0, 0.0)
    return LabelPlace(box[0], box[1], 0)


# Where a label may stand: (cost of its own, which size, shift along the bar, stack outwards).
_OPTIONS = sorted(
    (size * _SHORT_COST + abs(shift) * _SHIFT_COST + stack * _STACK_COST, size, shift, stack)
    for size in range(3)
    for shift in (0.0, -1.0, 1.0)
    for stack in (0.0, 1.0, 2.0)
)


def _best(
    request: LabelRequest,
    taken: Sequence[Box],
    others: Sequence[tuple[tuple[float, Box], ...]],
    ink_share: Callable[[Box], float],
) -> tuple[float, Box, int]:
    count = 1 if request.must_show else len(request.sizes)
    best = math.inf, (0.0, 0.0, 0.0, 0.0), 0
    for own_cost, index, shift, stack in _OPTIONS:
        if own_cost >= best[0]:
            break  # the options that follow cost at least as much by themselves
        if index >= count:
            continue
        box = _box(request, request.sizes[index], shift, stack)
        cost = own_cost + _OVERHANG_COST_PER_PX * _overhang(request, index)
        cost += _INK_COST_PER_PX2 * ink_share(box) * (box[2] - box[0]) * (box[3] - box[1])
        cost += _OVERLAP_COST * sum(_shared(box, other) for other in taken)
        cost += sum(price for other in others for price, kept in other if _shared(box, kept) > 0.0)
        best = min(best, (cost, box, index))
    return best


def _box(request: LabelRequest, size: Size, shift: float, stack: float) -> Box:
    """A label outside the bar.

    `shift` -1, 0 or 1 moves it along the bar, `stack` one or two heights further out; beside
    an upright bar the shifts go past its ends.
    """
    x1, y1, x2, y2 = request.bar
    width, height = size
    out_x, out_y = request.outward
    centre_x, centre_y = (x1 + x2) / 2.0, (y1 + y2) / 2.0
    if abs(out_y) >= abs(out_x):
        centre_x += shift * max(abs(x2 - x1) / 2.0, width / 2.0)
        centre_y += out_y * (height / 2.0 + _GAP_PX + stack * (height + 2.0))
    elif shift == 0.0:
        centre_x += out_x * (width / 2.0 + _GAP_PX + stack * width / 4.0)
    else:
        centre_x += out_x * width / 4.0
        reach = abs(y2 - y1) / 2.0 + height / 2.0 + 2.0 * _GAP_PX
        centre_y += shift * (reach + stack * (height + 2.0))
    left, top = centre_x - width / 2.0, centre_y - height / 2.0
    return left, top, left + width, top + height


def _kept_clear(request: LabelRequest) -> tuple[tuple[float, Box], ...]:
    """What a label costs that lies on this one's bar, or where its shorter labels would be."""
    slots = [_box(request, size, 0.0, 0.0) for size in request.sizes[1:]]
    prices = (_OTHER_WIDER_SLOT_COST, _OTHER_SLOT_COST)
    return ((_OTHER_BAR_COST, _bar_box(request.bar)), *zip(prices, slots, strict=False))


def _overhang(request: LabelRequest, size_index: int) -> float:
    """How much longer a label is than its bar: it then looks as if it were its neighbour's."""
    x1, y1, x2, y2 = request.bar
    width, height = request.sizes[size_index]
    is_level = abs(request.outward[1]) >= abs(request.outward[0])
    return max(0.0, width - abs(x2 - x1) if is_level else height - abs(y2 - y1))


def _bar_box(bar: Segment) -> Box:
    x1, y1, x2, y2 = bar
    return min(x1, x2) - 1.0, min(y1, y2) - 1.0, max(x1, x2) + 1.0, max(y1, y2) + 1.0


def _shared(one: Box, other: Box) -> float:
    """The share of the smaller box that both cover."""
    if one[0] >= other[2] or other[0] >= one[2] or one[1] >= other[3] or other[1] >= one[3]:
        return 0.0
    width = min(one[2], other[2]) - max(one[0], other[0])
    height = min(one[3], other[3]) - max(one[1], other[1])
    areas = [(box[2] - box[0]) * (box[3] - box[1]) for box in (one, other)]
    return width * height / min(areas)
