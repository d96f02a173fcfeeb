"""What is selected, and where the Tab key goes next."""

from __future__ import annotations

import pytest

from app.window.canvas.selection import Part, Selection, next_selection
from tests.app.window.canvas.hands import (
    blank_picture,
    comb_caliper,
    height_caliper,
    reading_of,
    time_caliper,
)

READING = reading_of(blank_picture(), time_caliper(), height_caliper(), comb_caliper())


def only(caliper_id: int, part: Part = Part.WHOLE) -> Selection:
    return Selection(frozenset({caliper_id}), part)


def test_a_leg_is_held_of_one_caliper_alone() -> None:
    with pytest.raises(ValueError, match="one caliper"):
        Selection(frozenset({1, 2}), Part.END)
    with pytest.raises(ValueError, match="one caliper"):
        Selection(frozenset(), Part.START)


def test_toggling_takes_in_and_lets_go() -> None:
    two = only(1, Part.END).toggled(2)
    assert two == Selection(frozenset({1, 2}))
    assert two.toggled(1) == only(2)


def test_what_is_gone_is_not_selected() -> None:
    assert Selection(frozenset({1, 9})).kept_in(READING) == only(1)
    held = only(2, Part.END)
    assert held.kept_in(READING) is held
    assert held.kept_in(READING.without_calipers({2})) == Selection()
    assert held.kept_in(None) == Selection()


def test_tab_goes_through_start_end_and_whole_of_each() -> None:
    stop, stops = Selection(), []
    while (following := next_selection(READING, stop, backward=False)) is not None:
        stop = following
        stops.append(stop)
    assert stops == [
        only(caliper_id, part)
        for caliper_id in (1, 2, 3)
        for part in (Part.START, Part.END, Part.WHOLE)
    ]


def test_backward_it_is_the_same_way() -> None:
    assert next_selection(READING, Selection(), backward=True) == only(3)
    assert next_selection(READING, only(2, Part.START), backward=True) == only(1)
    assert next_selection(READING, only(1, Part.START), backward=True) is None


def test_from_several_it_goes_on_after_the_last_of_them() -> None:
    several = Selection(frozenset({1, 2}))
    assert next_selection(READING, several, backward=False) == only(3, Part.START)
    assert next_selection(READING, Selection(frozenset({2, 3})), backward=True) == only(1)


def test_where_there_is_nothing_tab_goes_nowhere() -> None:
    assert next_selection(reading_of(blank_picture()), Selection(), backward=False) is None
