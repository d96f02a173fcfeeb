"""A colleague's figures beside mine."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator import Comparison, Value, compare_all, work_out
from app.reading import HandFigure
from tests.app.calculator.sheets import reading_of, time


def mine(
    number: float | None, plus_minus: float | None, unit: str = "ms", refusal: str = ""
) -> Value:
    return Value(
        *("qrs", "QRS", number, unit, plus_minus, "method", "source", 1), "II", refusal=refusal
    )


def compared(value: Value, figure: float) -> Comparison:
    reading = replace(reading_of(), hand_figures=(HandFigure("qrs", figure, "II"),))
    (comparison,) = compare_all(reading, [value])
    assert (comparison.key, comparison.lead) == ("qrs", "II")
    return comparison


@pytest.mark.parametrize(
    ("figure", "difference", "within", "sentence"),
    [
        (92.0, 8.0, True, "Mine is 8 ms more than the colleague's: within my ± (100 ± 8 ms)."),
        (91.0, 9.0, False, "Mine is 9 ms more than the colleague's: outside my ± (100 ± 8 ms)."),
        (108.0, -8.0, True, "Mine is 8 ms less than the colleague's: within my ± (100 ± 8 ms)."),
        (200.0, -100.0, False, "Mine is 100 ms less than the colleague's: outside my ± "),
        (100.3, -0.3, True, "No difference in the digits that count: mine is 100 ± 8 ms."),
    ],
)
def test_mine_less_the_colleague_s(
    figure: float, difference: float, within: bool, sentence: str
) -> None:
    comparison = compared(mine(100.0, 8.0), figure)
    assert comparison.difference == pytest.approx(difference)
    assert comparison.within is within
    assert comparison.sentence.startswith(sentence)


@pytest.mark.parametrize(
    ("own", "figure", "difference"),
    [
        (175.0, -175.0, -10.0),
        (-175.0, 175.0, 10.0),
        (90.0, -90.0, 180.0),
        (-90.0, 90.0, 180.0),
        (30.0, 40.0, -10.0),
        (10.0, 370.0, 0.0),
        (-170.0, 725.0, -175.0),
    ],
)
def test_angles_differ_the_short_way_round(own: float, figure: float, difference: float) -> None:
    comparison = compared(mine(own, 5.0, "deg"), figure)
    assert comparison.difference == pytest.approx(difference)
    assert comparison.within == (abs(difference) <= 5.0)


def test_an_angle_in_words() -> None:
    assert compared(mine(175.0, 3.0, "deg"), -175.0).sentence == (
        "Mine is 10° less than the colleague's: outside my ± (175 ± 3°)."
    )


@pytest.mark.parametrize(
    ("figure", "name"),
    [
        (HandFigure("qrs", 90.0, "V1"), "QRS in lead V1"),
        (HandFigure("qrs_axis", 40.0), "QRS axis"),
        (HandFigure("a later value", 40.0, "II"), "a later value in lead II"),
    ],
)
def test_a_figure_without_a_value(figure: HandFigure, name: str) -> None:
    reading = replace(reading_of(time("qrs", 2.5)), hand_figures=(figure,))
    (comparison,) = compare_all(reading, work_out(reading))
    assert comparison == Comparison(
        figure.key,
        figure.lead,
        None,
        None,
        f"{name} is not marked yet: nothing to hold the figure against.",
    )


def test_a_figure_beside_a_refusal() -> None:
    comparison = compared(mine(None, None, refusal="It was marked badly."), 90.0)
    assert (comparison.difference, comparison.within) == (None, None)
    assert comparison.sentence == "Nothing to compare with: It was marked badly."


def test_one_for_each_figure_and_none_for_other_values() -> None:
    figures = (HandFigure("pr", 160.0, "II"), HandFigure("qrs", 90.0, "II"))
    reading = replace(reading_of(time("qrs", 2.5), time("pr", 4.0)), hand_figures=figures)
    found = compare_all(reading, work_out(reading))
    assert [comparison.key for comparison in found] == ["pr", "qrs"]
    assert compare_all(reading_of(time("qrs", 2.5)), work_out(reading)) == []
