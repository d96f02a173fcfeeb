"""Rate, mean RR and spread, from marks."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from app.calculator import work_out
from app.calculator.spans import NO_SCALE
from app.calculator.uncertainty import Axis, leg_error
from tests.app.calculator.sheets import (
    PX_PER_MM,
    calibration,
    codes,
    exact_map,
    find,
    number,
    reading_of,
    rr_chain,
    text_of,
    time,
    worked,
)


def test_the_mean_rate_is_not_the_mean_of_single_rates() -> None:
    """60 n / sum of RR: 0.5 s and 1.0 s give 80 /min, not (120 + 60) / 2."""
    reading = reading_of(*rr_chain([12.5, 25.0]))
    rate = worked(reading, "rate")
    assert number(rate) == pytest.approx(80.0, rel=1e-12)
    assert (rate.unit, rate.n, rate.lead, rate.caliper_ids) == ("/min", 2, "II", (1, 2))
    mean = worked(reading, "rr_mean")
    assert number(mean) == pytest.approx(750.0)
    assert mean.spread == pytest.approx(500.0 / math.sqrt(2.0))
    spread = worked(reading, "rr_spread")
    assert number(spread) == pytest.approx(50.0)
    assert spread.unit == "%"
    assert "500 to 1000 ms over 2 intervals" in spread.method


def test_a_chain_s_rate_has_the_error_of_its_two_outer_legs() -> None:
    reading = reading_of(*rr_chain([20.0] * 5))
    leg_ms = 40.0 * leg_error(exact_map(), Axis.ALONG).sigma_mm
    mean = worked(reading, "rr_mean")
    assert mean.plus_minus == pytest.approx(2.0 * math.sqrt(2.0) * leg_ms / 5.0)


@pytest.mark.parametrize("gap_mm", [0.0, 0.0625])
def test_an_irregular_rhythm_s_mean_is_as_sure_as_its_marks(gap_mm: float) -> None:
    """Whether or not each interval begins on the very place where the last one ended."""
    widths_mm, calipers, start_mm = [14.0, 30.0, 19.0, 25.0], [], 4.0
    for beat, width_mm in enumerate(widths_mm, start=1):
        calipers.append(time("rr", width_mm, beat=beat, at_mm=(start_mm, 30.0)))
        start_mm += width_mm + gap_mm
    legs = 2 if gap_mm == 0.0 else 8
    leg_ms = 40.0 * leg_error(exact_map(), Axis.ALONG).sigma_mm
    mean = worked(reading_of(*calipers), "rr_mean")
    assert mean.plus_minus == pytest.approx(2.0 * math.sqrt(legs) * leg_ms / 4.0)
    assert mean.spread is not None
    assert mean.spread > 10.0 * mean.plus_minus


def test_every_lead_has_its_own_rate() -> None:
    reading = reading_of(*rr_chain([20.0]), *rr_chain([25.0], lead="V1", y_mm=60.0))
    values = work_out(reading)
    assert number(find(values, "rate", "II")) == pytest.approx(75.0)
    assert number(find(values, "rate", "V1")) == pytest.approx(60.0)


def test_one_interval_has_a_rate_and_no_spread() -> None:
    reading = reading_of(time("rr", 20.0))
    for key in ("rate", "rr_mean"):
        assert text_of(worked(reading, key), "single_beat") == "From one RR interval only."
    spread = worked(reading, "rr_spread")
    assert (spread.value, spread.plus_minus, spread.n) == (None, None, 0)
    assert spread.refusal == "Mark a second RR interval: one alone has no spread."
    two = reading_of(*rr_chain([20.0, 20.0]))
    assert all("single_beat" not in codes(value) for value in work_out(two))


def test_marks_that_make_no_sense_refuse_all_three() -> None:
    values = work_out(reading_of(time("rr", 0.0)))
    assert [value.key for value in values] == ["rate", "rr_mean", "rr_spread"]
    for value in values:
        assert (value.value, value.caliper_ids, value.cautions) == (None, (1,), ())
        assert value.refusal.startswith("RR in lead II, beat 1, has both legs")


def test_without_a_map_all_three_ask_for_the_scale() -> None:
    values = work_out(replace(reading_of(time("rr", 20.0)), sheet_map=None))
    assert {value.refusal for value in values} == {NO_SCALE}


def test_irregular_is_said_beside_all_three() -> None:
    reading = reading_of(*rr_chain([20.0, 25.0]), settings=calibration(confirmed=False))
    for key in ("rate", "rr_mean", "rr_spread"):
        assert codes(worked(reading, key)) == {
            "speed_unconfirmed",
            "irregular_rhythm",
            "few_beats_irregular",
        }


@pytest.mark.parametrize(
    ("rr_mm", "shown_on_the_other_side"),
    [
        (14.99, True),
        (15.0, False),
        (14.9, False),
        (25.01, True),
        (25.0, False),
        (24.99, True),
        (25.3, False),
        (20.0, False),
    ],
)
def test_a_rate_rounded_onto_60_or_100(rr_mm: float, shown_on_the_other_side: bool) -> None:
    """Just outside 60 to 100 the rounded rate may read 60 or 100, and just inside too.

    With a scale unsure by 3 % the rate is shown in whole numbers.
    """
    unsure = exact_map(step_variance_px2=(0.03 * PX_PER_MM) ** 2)
    value = worked(reading_of(time("rr", rr_mm), sheet_map=unsure), "rate")
    assert ("rounding" in codes(value)) == shown_on_the_other_side
