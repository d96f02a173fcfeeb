"""Propagation, repeats, means and limits."""

from __future__ import annotations

import math

import numpy as np
import pytest

from app.calculator.uncertainty import (
    Axis,
    Estimate,
    LegError,
    Verdict,
    against_limit,
    combine,
    leg_error,
    mean_of,
    plain_mean,
    repeated,
    sample_sd,
)
from tests.app.calculator.sheets import exact_map


def with_leg(value: float, leg: int, sigma: float = 2.0, legs: int = 8) -> Estimate:
    """A number with one leg of its own and a scale error of 1."""
    shared = np.zeros(2 + legs)
    shared[0], shared[2 + leg] = 1.0, sigma
    return Estimate(value, shared)


def shares(of_legs: float, legs: int = 8) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """What the resolution is of each source: all of the scales, so much of every leg."""
    return np.array([1.0, 1.0] + [of_legs] * legs)


def test_a_leg_s_error_has_pen_pixel_and_grid() -> None:
    sheet_map = exact_map(10.0, 5.0, scatter_mm=0.02)
    for axis, pitch in ((Axis.ALONG, 10.0), (Axis.DOWN, 5.0)):
        error = leg_error(sheet_map, axis)
        pixel_mm = 1.0 / pitch / math.sqrt(12.0)
        assert error.pen_mm == pytest.approx(0.2 / math.sqrt(12.0))
        assert error.resolution_mm == pytest.approx(math.hypot(pixel_mm, 0.02))
        assert error.sigma_mm == pytest.approx(math.hypot(error.pen_mm, error.resolution_mm))


@pytest.mark.parametrize(("step_px", "counts_px"), [(0.0, 1.0), (0.9, 1.0), (1.1, 1.1), (4.0, 4.0)])
def test_a_step_coarser_than_a_pixel_takes_its_place(step_px: float, counts_px: float) -> None:
    error = leg_error(exact_map(10.0, 5.0, scatter_mm=0.02), Axis.DOWN, step_px)
    assert error.resolution_mm == pytest.approx(math.hypot(counts_px / 5.0 / math.sqrt(12.0), 0.02))
    assert error.pen_mm == pytest.approx(0.2 / math.sqrt(12.0))


def test_what_two_numbers_share_cancels_in_their_difference() -> None:
    one, other = with_leg(10.0, 0), with_leg(4.0, 1)
    difference = combine(6.0, (1.0, one), (-1.0, other))
    assert difference.sigma == pytest.approx(math.sqrt(8.0))
    total = combine(14.0, (1.0, one), (1.0, other))
    assert total.sigma == pytest.approx(math.sqrt(4.0 + 8.0))
    assert total.plus_minus == 2.0 * total.sigma


def test_own_variance_is_carried_by_the_square_of_the_slope() -> None:
    own = Estimate(5.0, np.zeros(3), own_variance=4.0)
    assert combine(15.0, (3.0, own)).sigma == pytest.approx(6.0)


def test_a_spread_needs_two() -> None:
    assert sample_sd([3.0]) is None
    assert sample_sd([1.0, 3.0]) == pytest.approx(math.sqrt(2.0))


def test_two_placings_are_averaged() -> None:
    mean = repeated([with_leg(10.0, 0), with_leg(14.0, 1)], shares(0.8))
    assert mean.value == 12.0
    assert mean.placement_variance == pytest.approx(2.0)


def test_from_three_placings_the_reader_s_own_repeatability_counts() -> None:
    kept = LegError(pen_mm=3.0, resolution_mm=4.0).resolution_share
    spans = [with_leg(value, leg_no) for leg_no, value in enumerate((9, 12, 15))]
    mean = repeated(spans, shares(kept))
    assert mean.shared[0] == pytest.approx(1.0)
    resolution = 3 * (2.0 / 3.0 * 0.8) ** 2
    assert mean.placement_variance == pytest.approx(resolution + 9.0 / 3.0)
    copies = repeated([with_leg(12.0, leg_no) for leg_no in range(3)], shares(kept))
    assert copies.placement_variance == pytest.approx(resolution)


def test_the_scale_s_error_is_not_averaged_away() -> None:
    mean = mean_of([with_leg(10.0, leg) for leg in range(8)])
    assert mean.shared[0] == pytest.approx(1.0)
    assert mean.placement_variance == pytest.approx(4.0 / 8.0)


def test_a_mean_of_three_is_no_surer_than_its_beats_say() -> None:
    two = mean_of([with_leg(0.0, 0), with_leg(60.0, 1)])
    assert two.placement_variance == pytest.approx(2.0)
    three = mean_of([with_leg(value, leg) for leg, value in enumerate((0.0, 30.0, 60.0))])
    assert three.placement_variance == pytest.approx(900.0 / 3.0)
    close = mean_of([with_leg(value, leg) for leg, value in enumerate((29.9, 30.0, 30.1))])
    assert close.placement_variance == pytest.approx(4.0 / 3.0)


def test_a_chain_is_its_two_outer_legs() -> None:
    """Beats of a chain differ, but their mean is the whole stretch divided."""
    beats = []
    for beat, value in enumerate((500.0, 900.0, 700.0)):
        shared = np.zeros(6)
        shared[2 + beat], shared[3 + beat] = -2.0, 2.0
        beats.append(Estimate(value, shared))
    mean = plain_mean(beats)
    assert mean.value == pytest.approx(700.0)
    assert mean.sigma == pytest.approx(math.sqrt(8.0) / 3.0)


@pytest.mark.parametrize(
    ("value", "plus_minus", "verdict"),
    [
        (129.0, 8.0, Verdict.ABOVE),
        (128.0, 8.0, Verdict.TOO_CLOSE),
        (120.0, 8.0, Verdict.TOO_CLOSE),
        (112.0, 8.0, Verdict.TOO_CLOSE),
        (111.0, 8.0, Verdict.BELOW),
        (120.0, 0.0, Verdict.ABOVE),
        (119.999, 0.0, Verdict.BELOW),
    ],
)
def test_a_limit_has_three_answers(value: float, plus_minus: float, verdict: Verdict) -> None:
    assert against_limit(value, plus_minus, 120.0) is verdict
