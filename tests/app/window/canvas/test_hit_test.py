"""What lies under the pointer, by numbers alone."""

from __future__ import annotations

import pytest

from app.window.canvas.hit_test import TOLERANCE_VIEW_PX, Hit, HitTarget, hit_test, segment_distance


def target(
    caliper_id: int,
    left: float,
    right: float,
    *,
    label: tuple[float, float, float, float] | None = None,
    selected: bool = False,
) -> HitTarget:
    """An upright caliper: legs from 0 down to 100, the bar along 10."""
    legs = [(left, 0.0, left, 100.0), (right, 0.0, right, 100.0)]
    return HitTarget(caliper_id, legs, (left, 10.0, right, 10.0), label, selected)


@pytest.mark.parametrize(
    ("x", "y", "distance"),
    [
        (5.0, 3.0, 3.0),
        (5.0, -3.0, 3.0),
        (0.0, 0.0, 0.0),
        (-3.0, 4.0, 5.0),  # beyond an end: to the end itself
        (13.0, -4.0, 5.0),
    ],
)
def test_the_distance_from_a_level_piece(x: float, y: float, distance: float) -> None:
    assert segment_distance((0.0, 0.0, 10.0, 0.0), x, y) == pytest.approx(distance)


def test_the_distance_from_a_slanted_piece_and_from_a_point() -> None:
    assert segment_distance((0.0, 0.0, 8.0, 6.0), 1.0, 7.0) == pytest.approx(5.0)
    assert segment_distance((2.0, 2.0, 2.0, 2.0), 5.0, 6.0) == pytest.approx(5.0)


def test_nothing_is_hit_in_an_empty_place() -> None:
    assert hit_test([], 0.0, 0.0) is None
    assert hit_test([target(1, 0.0, 100.0)], 50.0, 60.0) is None


@pytest.mark.parametrize(("x", "tooth"), [(3.0, 0), (97.0, 1)])
def test_a_leg_is_hit_beside_it_too(x: float, tooth: int) -> None:
    assert hit_test([target(7, 0.0, 100.0)], x, 60.0) == Hit(7, tooth)


def test_the_tolerance_is_where_a_hit_ends() -> None:
    one = [target(1, 0.0, 100.0)]
    assert hit_test(one, -TOLERANCE_VIEW_PX, 60.0) == Hit(1, 0)
    assert hit_test(one, -TOLERANCE_VIEW_PX - 0.5, 60.0) is None
    assert hit_test(one, -TOLERANCE_VIEW_PX - 0.5, 60.0, tolerance=9.0) == Hit(1, 0)


def test_the_nearest_leg_wins() -> None:
    two = [target(1, 0.0, 50.0), target(2, 56.0, 90.0)]
    assert hit_test(two, 52.0, 60.0) == Hit(1, 1)
    assert hit_test(two, 54.5, 60.0) == Hit(2, 0)


def test_every_tooth_of_a_comb_can_be_hit() -> None:
    teeth = [(x, 0.0, x, 100.0) for x in (0.0, 40.0, 80.0, 120.0)]
    comb = HitTarget(3, teeth, (0.0, 10.0, 120.0, 10.0))
    assert [hit_test([comb], x, 60.0) for x in (1.0, 41.0, 79.0, 121.0)] == [
        Hit(3, tooth) for tooth in range(4)
    ]


def test_the_bar_is_the_whole_caliper_but_a_leg_comes_before_it() -> None:
    one = [target(1, 0.0, 100.0)]
    assert hit_test(one, 50.0, 12.0) == Hit(1, None)
    assert hit_test(one, 5.0, 10.0) == Hit(1, 0)


def test_of_two_shared_legs_the_selected_one_is_taken_whichever_is_on_top() -> None:
    """The end of one RR is the start of the next."""
    chain = [target(1, 0.0, 50.0, selected=True), target(2, 50.0, 100.0)]
    assert hit_test(chain, 50.0, 60.0) == Hit(1, 1)
    chain = [target(1, 0.0, 50.0), target(2, 50.0, 100.0, selected=True)]
    assert hit_test(chain, 50.0, 60.0) == Hit(2, 0)


def test_of_two_shared_legs_the_one_drawn_last_is_taken() -> None:
    assert hit_test([target(1, 0.0, 50.0), target(2, 50.0, 100.0)], 50.2, 60.0) == Hit(2, 0)


def test_a_difference_no_hand_can_mean_does_not_beat_the_selection() -> None:
    legs = [target(1, 0.0, 50.0, selected=True), target(2, 50.3, 100.0)]
    assert hit_test(legs, 50.2, 60.0) == Hit(1, 1)


def test_the_label_stands_for_the_whole_and_comes_before_everything() -> None:
    box = (40.0, 50.0, 60.0, 70.0)
    two = [target(1, 0.0, 100.0, label=box), target(2, 50.0, 90.0)]
    assert hit_test(two, 50.0, 60.0) == Hit(1, None)


def test_of_two_labels_the_one_painted_on_top_is_taken() -> None:
    box = (40.0, 50.0, 60.0, 70.0)
    plain = [target(1, 0.0, 100.0, label=box), target(2, 0.0, 90.0, label=box)]
    assert hit_test(plain, 50.0, 60.0) == Hit(2, None)
    chosen = [target(1, 0.0, 100.0, label=box, selected=True), target(2, 0.0, 90.0, label=box)]
    assert hit_test(chosen, 50.0, 60.0) == Hit(1, None)
