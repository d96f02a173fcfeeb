"""Regular or not, and the rates that cannot be."""

from __future__ import annotations

import math

import pytest

from app.calculator.lines import Line
from app.calculator.rhythm import rate_of, rhythm_cautions, spread_percent
from app.calculator.uncertainty import mean_of
from tests.app.calculator.sheets import estimate


def rr_line(*beats_ms: float, plus_minus_ms: float = 2.0) -> Line:
    """Intervals of one lead, all with the same leg."""
    beats = tuple(estimate(beat, plus_minus_ms) for beat in beats_ms)
    return Line("rr", "II", beats, mean_of(beats), tuple(range(len(beats))), True)


def said(line: Line) -> dict[str, str]:
    assert line.mean is not None
    return {item.code: item.text for item in rhythm_cautions(line, rate_of(line.mean))}


def test_a_steady_rhythm_has_none() -> None:
    assert said(rr_line(800.0, 810.0, 790.0)) == {}
    assert said(rr_line(800.0)) == {}


@pytest.mark.parametrize(
    ("shortest", "rules"),
    [
        # 10 % of 1000 ms comes first, then 120 and 160 ms.
        (905.0, None),
        (895.0, "more than 10 %"),
        (875.0, "more than 10 %, more than 120 ms"),
        (835.0, "more than 10 %, more than 120 ms, 160 ms or more"),
    ],
)
def test_each_rule_in_use(shortest: float, rules: str | None) -> None:
    """The beats share their leg here, so that the gap between them is exact."""
    line = said(rr_line(1000.0, shortest, 1000.0))
    if rules is None:
        assert "irregular_rhythm" not in line
    else:
        assert line["irregular_rhythm"] == (
            f"Irregular RR: {shortest:.0f} to 1000 ms over 3 intervals ({rules})."
        )


def test_a_gap_too_close_to_call() -> None:
    """10 % of the longest is 100 ms; the ± of the percentage is that of one leg."""
    line = rr_line(1000.0, 899.5, plus_minus_ms=20.0)
    assert abs(spread_percent(line).value - 10.0) < spread_percent(line).plus_minus
    assert said(line) == {
        "irregular_rhythm": "RR may be irregular: 900 to 1000 ms over 2 intervals (more than 10 %)."
    }


@pytest.mark.parametrize(("n", "is_few"), [(2, True), (9, True), (10, False), (11, False)])
def test_an_irregular_rhythm_needs_ten_intervals(n: int, is_few: bool) -> None:
    found = said(rr_line(*([800.0] * (n - 1)), 600.0))
    assert "irregular_rhythm" in found
    assert ("few_beats_irregular" in found) == is_few


def test_few_intervals_of_a_steady_rhythm_are_no_matter() -> None:
    assert said(rr_line(800.0, 801.0)) == {}
    assert "few_beats_irregular" not in said(rr_line(1000.0, 899.5, plus_minus_ms=20.0))


@pytest.mark.parametrize(
    ("rr_ms", "is_implausible"),
    [(200.0, False), (199.9, True), (3000.0, False), (3001.0, True)],
)
def test_a_rate_that_can_hardly_be(rr_ms: float, is_implausible: bool) -> None:
    """Below 20 or above 300 /min."""
    assert ("implausible_rate" in said(rr_line(rr_ms))) == is_implausible


def test_the_implausible_rate_is_named() -> None:
    text = said(rr_line(150.0))["implausible_rate"]
    assert text.startswith("A rate of 400/min is hardly possible")


def test_the_rate_s_error_is_the_interval_s_in_proportion() -> None:
    rate = rate_of(estimate(800.0, 8.0))
    assert rate.value == pytest.approx(75.0)
    assert rate.plus_minus == pytest.approx(0.75)


def test_the_spread_s_error() -> None:
    """(L - S) / L with one shared leg: both slopes act on the same error."""
    spread = spread_percent(rr_line(1000.0, 800.0, plus_minus_ms=10.0))
    assert spread.value == pytest.approx(20.0)
    assert spread.plus_minus == pytest.approx(100.0 * math.fabs(0.8 / 1000 - 1 / 1000) * 10.0)
