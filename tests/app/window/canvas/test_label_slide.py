"""Labels slide along their calipers into view, and no further than can be understood."""

from __future__ import annotations

import pytest

from app.drawing.ink_map import Box
from app.window.canvas.label_slide import Slide, slid_labels

VIEW = (0.0, 0.0, 1000.0, 700.0)
EDGE = 8.0


def level(
    left: float,
    right: float,
    *,
    label_width: float = 100.0,
    y: float = 300.0,
    is_free: bool = False,
) -> Slide:
    """A time caliper: bar at y, legs 200 down, the label over its middle."""
    middle = (left + right) / 2.0
    label = (middle - label_width / 2.0, y - 24.0, middle + label_width / 2.0, y - 4.0)
    return Slide(label, (left, y, right, y), (left, y, right, y + 200.0), is_free)


def upright(top: float, bottom: float, x: float = 500.0, *, is_free: bool = False) -> Slide:
    """A height caliper: bar at x, legs 200 to the left, the label right of its middle."""
    middle = (top + bottom) / 2.0
    label = (x + 4.0, middle - 10.0, x + 104.0, middle + 10.0)
    return Slide(label, (x, top, x, bottom), (x - 200.0, top, x, bottom), is_free)


def slid(slide: Slide, view: Box = VIEW) -> Box | None:
    return slid_labels({1: slide}, view).get(1)


def test_a_label_in_view_stays() -> None:
    assert slid(level(300.0, 600.0)) is None


def test_off_the_right_it_comes_back_along_its_bar() -> None:
    assert slid(level(700.0, 1500.0)) == pytest.approx((892.0, 276.0, 992.0, 296.0))


def test_off_the_left_too() -> None:
    assert slid(level(-500.0, 300.0)) == pytest.approx((EDGE, 276.0, 108.0, 296.0))


def test_it_does_not_leave_its_bar() -> None:
    """With 30 px of the bar in view the label of the next one must not be pushed over."""
    assert slid(level(-770.0, 30.0)) == pytest.approx((-70.0, 276.0, 30.0, 296.0))


def test_longer_than_its_bar_it_stays_all_over_it() -> None:
    box = slid(level(10.0, 50.0, label_width=140.0))
    assert box == pytest.approx((EDGE, 276.0, 148.0, 296.0))
    box = slid(level(-20.0, 20.0, label_width=140.0))
    assert box == pytest.approx((-20.0, 276.0, 120.0, 296.0))


def test_along_a_slanting_bar_it_keeps_its_distance() -> None:
    slide = Slide(
        (1050.0, 300.0, 1150.0, 320.0), (800.0, 320.0, 1400.0, 332.0), (800, 320, 1400, 600)
    )
    box = slid(slide)
    assert box == pytest.approx((892.0, 300.0 - 158.0 * 0.02, 992.0, 320.0 - 158.0 * 0.02))


def test_along_an_upright_bar_it_slides_up_and_down() -> None:
    assert slid(upright(-600.0, 400.0)) == pytest.approx((504.0, EDGE, 604.0, 28.0))
    assert slid(upright(500.0, 1100.0)) == pytest.approx((504.0, 672.0, 604.0, 692.0))


def test_past_the_end_of_an_upright_bar_it_slides_sideways_over_the_caliper() -> None:
    below = Slide((-20.0, 410.0, 120.0, 430.0), (60.0, 300.0, 60.0, 400.0), (60, 300, 90, 400))
    assert slid(below) == pytest.approx((EDGE, 410.0, 148.0, 430.0))
    beside = Slide((-90.0, 340.0, 50.0, 360.0), (54.0, 300.0, 54.0, 400.0), (54, 300, 90, 400))
    assert slid(beside) == pytest.approx(beside.label)


def test_of_a_caliper_that_is_out_of_view_the_label_stays_where_it_is() -> None:
    assert slid(level(1100.0, 1500.0)) is None
    assert slid(level(300.0, 600.0, y=-300.0)) is None


def test_across_its_bar_only_the_selected_one_moves() -> None:
    assert slid(level(300.0, 600.0, y=10.0)) == pytest.approx((400.0, -14.0, 500.0, 6.0))
    assert slid(level(300.0, 600.0, y=10.0, is_free=True)) is not None


@pytest.mark.parametrize("y", [-100.0, 10.0])
def test_the_selected_one_stands_beside_its_legs_where_no_mark_is_hidden(y: float) -> None:
    slide = level(300.0, 600.0, y=y, is_free=True)
    box = slid(slide)
    assert box is not None
    assert 0.0 <= box[1] < box[3] <= 700.0
    assert box[0] >= 600.0
    near_the_right = level(700.0, 960.0, y=y, is_free=True)
    box = slid(near_the_right)
    assert box is not None
    assert box[2] <= 700.0


def test_beside_an_upright_bar_it_stands_over_or_under_the_legs() -> None:
    box = slid(upright(200.0, 400.0, x=990.0, is_free=True))
    assert box is not None
    assert box[2] <= 1000.0
    assert box[3] <= 200.0
    box = slid(upright(20.0, 400.0, x=990.0, is_free=True))
    assert box is not None
    assert box[1] >= 400.0


def test_with_no_room_beside_it_is_in_view_all_the_same() -> None:
    box = slid(level(-50.0, 1050.0, y=-60.0, is_free=True))
    assert box is not None
    assert 0.0 <= box[0] < box[2] <= 1000.0
    assert 0.0 <= box[1] < box[3] <= 700.0


def test_none_slides_onto_another() -> None:
    """Two combs in one row: the far one's label stays out rather than cover the near one's."""
    near, far = level(700.0, 990.0, label_width=200.0), level(700.0, 1900.0)
    assert slid_labels({2: far}, VIEW) != {}
    assert slid_labels({1: near, 2: far}, VIEW) == {}


def test_a_selected_one_does_if_it_must() -> None:
    near, far = level(700.0, 990.0, label_width=200.0), level(700.0, 1900.0, is_free=True)
    assert set(slid_labels({1: near, 2: far}, VIEW)) == {2}


def test_of_two_that_would_meet_the_first_one_slides() -> None:
    two = {1: level(600.0, 1800.0), 2: level(650.0, 1900.0)}
    assert set(slid_labels(two, VIEW)) == {1}
