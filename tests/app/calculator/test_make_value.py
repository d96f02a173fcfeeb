"""What a mean rests on, in words; each caliper counted once."""

from __future__ import annotations

import pytest

from app.calculator.lines import Line, measure_lines
from app.calculator.make_value import beats_in_words, caliper_ids, given, refused
from app.reading import Caliper
from tests.app.calculator.sheets import estimate, reading_of, time


def line(*calipers: Caliper) -> Line:
    (found,) = measure_lines(reading_of(*calipers)).lines.values()
    return found


@pytest.mark.parametrize(
    ("calipers", "words"),
    [
        ([time("qrs", 2.0)], "one beat in lead II"),
        ([time("qrs", 2.0), time("qrs", 2.5)], "one beat in lead II, 2 placings"),
        ([time("qrs", 2.0), time("qrs", 2.5, beat=2)], "mean of 2 beats in lead II"),
        ([time("qrs", 2.0, lead=None)], "one beat in a lead not named"),
    ],
)
def test_what_a_mean_rests_on(calipers: list[Caliper], words: str) -> None:
    assert beats_in_words(line(*calipers)) == words
    assert beats_in_words(line(*calipers), "interval") == words.replace("beat", "interval")


def test_each_caliper_once() -> None:
    one = line(time("qrs", 2.0), time("qrs", 2.0, beat=2))
    assert caliper_ids([one, one]) == (1, 2)


def test_given_and_refused_have_the_catalogue_s_words() -> None:
    value = given("qt", estimate(400.0, 8.0), "method", [3, 4], [], n=2, lead="II", spread=5.0)
    assert (value.label, value.unit, value.plus_minus) == ("QT", "ms", 8.0)
    assert (value.caliper_ids, value.cautions, value.refusal) == ((3, 4), (), "")
    none = refused("qt", "One sentence.", "method", [3], lead="II")
    assert (none.label, none.value, none.plus_minus, none.n) == ("QT", None, None, 0)
    assert none.refusal == "One sentence."
