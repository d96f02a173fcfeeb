"""A place for each label: short in a crowd, off each other and off the drawn line."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import combinations, pairwise

from app.drawing.ink_map import Box
from app.window.canvas.label_layout import (
    LabelPlace,
    LabelRequest,
    centred_place,
    place_labels,
)

SIZES = ((140.0, 20.0), (90.0, 20.0), (60.0, 20.0))
ABOVE, LEFT = (0.0, -1.0), (-1.0, 0.0)


def request(
    caliper_id: int, left: float, right: float, y: float = 300.0, *, must_show: bool = False
) -> LabelRequest:
    return LabelRequest(caliper_id, (left, y, right, y), ABOVE, SIZES, must_show)


def no_ink(_box: Box) -> float:
    return 0.0


def boxes(requests: Sequence[LabelRequest], places: dict[int, LabelPlace]) -> dict[int, Box]:
    found = {}
    for one in requests:
        if one.caliper_id in places:
            place = places[one.caliper_id]
            width, height = one.sizes[place.size_index]
            box = (place.left, place.top, place.left + width, place.top + height)
            found[one.caliper_id] = box
    return found


def overlap(one: Box, other: Box) -> bool:
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]


def laid_out(*requests: LabelRequest) -> dict[int, Box]:
    return boxes(requests, place_labels(requests, no_ink))


def test_alone_it_stands_in_full_over_the_middle_of_its_bar() -> None:
    (box,) = laid_out(request(1, 100.0, 300.0)).values()
    assert box[2] - box[0] == 140.0
    assert (box[0] + box[2]) / 2.0 == 200.0
    assert 270.0 < box[1] < box[3] < 300.0


def test_beside_an_upright_bar_it_stands_level_with_its_middle() -> None:
    upright = LabelRequest(1, (500.0, 200.0, 500.0, 400.0), LEFT, SIZES)
    (box,) = laid_out(upright).values()
    assert box[2] < 500.0
    assert (box[1] + box[3]) / 2.0 == 300.0


def test_a_chain_of_narrow_spans_shortens_its_labels_and_none_lies_on_another() -> None:
    chain = [request(number, 100.0 * number, 100.0 * (number + 1)) for number in range(1, 9)]
    found = laid_out(*chain)
    assert len(found) == 8
    assert not any(overlap(*pair) for pair in combinations(found.values(), 2))
    assert all(box[2] - box[0] < 140.0 for box in found.values())
    # Each over its own bar, in the order of the bars.
    for one in chain:
        box = found[one.caliper_id]
        assert one.bar[0] < (box[0] + box[2]) / 2.0 < one.bar[2]


def test_stacked_bars_of_one_beat_have_their_labels_apart() -> None:
    """PR, QRS and QT at a middling zoom, each bar a lane of its own."""
    found = laid_out(
        request(1, 100.0, 220.0, 300.0),
        request(2, 200.0, 300.0, 335.0),
        request(3, 200.0, 480.0, 370.0),
    )
    assert len(found) == 3
    assert not any(overlap(*pair) for pair in combinations(found.values(), 2))


def test_where_many_lie_in_one_place_some_are_left_out_rather_than_unreadable() -> None:
    crowd = [request(number, 300.0, 310.0) for number in range(1, 40)]
    found = laid_out(*crowd)
    assert 0 < len(found) < 39
    for one, other in combinations(found.values(), 2):
        width = min(one[2], other[2]) - max(one[0], other[0])
        height = min(one[3], other[3]) - max(one[1], other[1])
        assert min(width, height) <= 0.0 or width * height < 0.6 * 60.0 * 20.0


def test_the_selected_one_is_shown_in_full_and_first_whatever_the_crowd() -> None:
    crowd = [request(number, 300.0, 340.0) for number in range(1, 40)]
    crowd[-1] = request(39, 300.0, 340.0, must_show=True)
    box = laid_out(*crowd)[39]
    assert box[2] - box[0] == 140.0
    assert (box[0] + box[2]) / 2.0 == 320.0


def test_it_keeps_off_the_drawn_line() -> None:
    def line_above(box: Box) -> float:
        """A thick line where the label would stand."""
        return max(0.0, min(box[3], 300.0) - max(box[1], 270.0)) / (box[3] - box[1])

    one = request(1, 100.0, 300.0)
    (box,) = boxes([one], place_labels([one], line_above)).values()
    assert box[3] <= 280.0


def test_the_label_of_what_is_being_placed_is_always_in_one_place() -> None:
    one = request(1, 100.0, 300.0)
    assert centred_place(one) == LabelPlace(130.0, 276.0, 0)


def test_more_calipers_do_not_move_the_first_label_of_a_wide_bar() -> None:
    alone = laid_out(request(1, 100.0, 400.0))[1]
    crowd = laid_out(request(1, 100.0, 400.0), request(2, 420.0, 700.0), request(3, 720.0, 999.0))
    assert crowd[1] == alone
    assert all(left[2] < right[0] for left, right in pairwise(crowd.values()))
