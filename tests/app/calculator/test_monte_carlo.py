"""The ± against noise: legs and grid steps drawn at random, values worked out without the
calculator, and two standard deviations of them held against the ± that is shown.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
import pytest
from numpy.typing import NDArray

from app.reading import Caliper, Reading
from tests.app.calculator.sheets import (
    PX_PER_MM,
    exact_map,
    height,
    in_steps,
    number,
    reading_of,
    rr_chain,
    time,
    worked,
)

Samples = NDArray[np.float64]

DRAWS = 200_000
TOLERANCE = 0.03
SCATTER_MM = 0.02
STEP_SIGMA_PX = 0.08
# The model in numbers: half a pen width of 0.4 mm and one pixel, both uniform, and the grid.
LEG_SIGMA_MM = math.sqrt((0.2**2 + (1.0 / PX_PER_MM) ** 2) / 12.0 + SCATTER_MM**2)
RR_MM = [20.0, 23.0, 21.0]


@dataclass
class Noise:
    """Random sheets: one scale for each axis and draw, one error for each place and draw."""

    rng: np.random.Generator

    def __post_init__(self) -> None:
        self.along = PX_PER_MM / self.rng.normal(PX_PER_MM, STEP_SIGMA_PX, DRAWS)
        self.down = PX_PER_MM / self.rng.normal(PX_PER_MM, STEP_SIGMA_PX, DRAWS)

    def leg(self, place_mm: float) -> Samples:
        """A leg put down at a place."""
        return place_mm + self.rng.normal(0.0, LEG_SIGMA_MM, DRAWS)

    def time_ms(self, width_mm: float) -> Samples:
        """A time caliper with two legs of its own, at 25 mm/s."""
        return 40.0 * self.along * (self.leg(width_mm) - self.leg(0.0))

    def height_mv(self, height_mm: float, foot: Samples | None = None) -> Samples:
        """A height, from a baseline of its own or a shared one, at 10 mm/mV."""
        base = self.leg(0.0) if foot is None else foot
        return 0.1 * self.down * (self.leg(height_mm) - base)

    def chain_ms(self, widths_mm: list[float]) -> list[Samples]:
        """RR intervals whose neighbours share a leg."""
        legs = [self.leg(place) for place in np.concatenate([[0.0], np.cumsum(widths_mm)])]
        return [40.0 * self.along * (b - a) for a, b in pairwise(legs)]


@pytest.fixture
def noise() -> Noise:
    """A local generator with a seed."""
    return Noise(np.random.default_rng(20260102))


def on_sheet(*calipers: Caliper) -> Reading:
    """The calipers on the map whose noise is drawn."""
    sheet_map = exact_map(scatter_mm=SCATTER_MM, step_variance_px2=STEP_SIGMA_PX**2)
    return reading_of(*calipers, sheet_map=sheet_map)


def agrees(reading: Reading, key: str, samples: Samples, lead: str | None = "II") -> None:
    value = worked(reading, key, lead)
    assert value.plus_minus is not None
    assert 2.0 * samples.std() == pytest.approx(value.plus_minus, rel=TOLERANCE)
    # The value itself lies in the middle of them.
    assert samples.mean() == pytest.approx(number(value), abs=0.1 * value.plus_minus)


@pytest.mark.parametrize(
    ("key", "width_mm"), [("p_duration", 2.5), ("pr", 4.0), ("qrs", 2.5), ("qt", 10.0)]
)
def test_one_interval(noise: Noise, key: str, width_mm: float) -> None:
    agrees(on_sheet(time(key, width_mm)), key, noise.time_ms(width_mm))


def test_the_mean_of_beats(noise: Noise) -> None:
    beats = [time("qt", width, beat=n, at_mm=(20.0 * n, 50.0)) for n, width in ((1, 10), (2, 9.9))]
    agrees(on_sheet(*beats), "qt", (noise.time_ms(10.0) + noise.time_ms(9.9)) / 2.0)


def test_two_placings_of_one_beat(noise: Noise) -> None:
    placings = [time("qrs", 2.5, at_mm=(8.0, y_mm)) for y_mm in (50.0, 51.0)]
    agrees(on_sheet(*placings), "qrs", (noise.time_ms(2.5) + noise.time_ms(2.5)) / 2.0)


def test_rhythm(noise: Noise) -> None:
    reading = on_sheet(*rr_chain(RR_MM))
    intervals = noise.chain_ms(RR_MM)
    mean_ms = sum(intervals) / len(intervals)
    agrees(reading, "rr_mean", mean_ms)
    agrees(reading, "rate", 60_000.0 / mean_ms)
    agrees(reading, "rr_spread", 100.0 * (intervals[1] - intervals[0]) / intervals[1])


def test_intervals_that_share_no_leg(noise: Noise) -> None:
    apart = [time("rr", 20.0, beat=n, at_mm=(30.0 * n, 30.0)) for n in (1, 2)]
    agrees(on_sheet(*apart), "rr_mean", (noise.time_ms(20.0) + noise.time_ms(20.0)) / 2.0)


@pytest.mark.parametrize("key", ["qtc_bazett", "qtc_fridericia", "qtc_framingham", "qtc_hodges"])
@pytest.mark.parametrize("qt_mm", [9.0, 11.0])
def test_qtc(noise: Noise, key: str, qt_mm: float) -> None:
    """QT and RR share the scale of the paper: that part of their errors goes together."""
    reading = on_sheet(*rr_chain(RR_MM), time("qt", qt_mm, at_mm=(8.0, 60.0)))
    rr_s = sum(noise.chain_ms(RR_MM)) / len(RR_MM) / 1000.0
    qt_ms = noise.time_ms(qt_mm)
    forms = {
        "qtc_bazett": qt_ms * rr_s**-0.5,
        "qtc_fridericia": qt_ms * rr_s ** (-1.0 / 3.0),
        "qtc_framingham": qt_ms + 154.0 * (1.0 - rr_s),
        "qtc_hodges": qt_ms + 1.75 * (60.0 / rr_s - 60.0),
    }
    agrees(reading, key, forms[key])


def test_a_qt_that_shares_a_leg_with_the_rr(noise: Noise) -> None:
    """Not as in a heart, but marks may lie on each other: one error acts twice."""
    rr = time("rr", 20.0)
    qt = time("qt", 10.0)
    start, qt_end, rr_end = noise.leg(0.0), noise.leg(10.0), noise.leg(20.0)
    rr_s = 0.04 * noise.along * (rr_end - start)
    qtc = 40.0 * noise.along * (qt_end - start) / np.sqrt(rr_s)
    agrees(on_sheet(rr, qt), "qtc_bazett", qtc)


def test_heights_and_net_height_from_one_baseline(noise: Noise) -> None:
    reading = on_sheet(height("r_height", 12.0), height("s_height", -4.0))
    foot = noise.leg(0.0)
    r_mv, s_mv = noise.height_mv(12.0, foot), noise.height_mv(-4.0, foot)
    agrees(reading, "r_height", r_mv, "I")
    agrees(reading, "s_height", s_mv, "I")
    agrees(reading, "net_qrs", r_mv + s_mv, "I")


@pytest.mark.parametrize(
    ("lead_i_mm", "lead_avf_mm"), [(10.0, 5.0), (5.0, -6.5), (-4.0, 8.0), (-8.0, -3.0), (2.0, 9.0)]
)
def test_the_axis(noise: Noise, lead_i_mm: float, lead_avf_mm: float) -> None:
    net_mv = {}
    marks = []
    for lead, net_mm, y_mm in (("I", lead_i_mm, 60.0), ("aVF", lead_avf_mm, 140.0)):
        r_mm, s_mm = max(net_mm, 0.0) + 2.0, min(net_mm, 0.0) - 2.0
        at_mm = (8.0, y_mm)
        marks.append(height("r_height", r_mm, lead=lead, at_mm=at_mm))
        marks.append(height("s_height", s_mm, lead=lead, at_mm=at_mm))
        foot = noise.leg(0.0)
        net_mv[lead] = noise.height_mv(r_mm, foot) + noise.height_mv(s_mm, foot)
    middle_deg = math.degrees(math.atan2(2.0 / math.sqrt(3.0) * lead_avf_mm, lead_i_mm))
    axis_deg = np.degrees(np.arctan2(2.0 / math.sqrt(3.0) * net_mv["aVF"], net_mv["I"]))
    unwrapped_deg = middle_deg + (axis_deg - middle_deg + 180.0) % 360.0 - 180.0
    agrees(on_sheet(*marks), "qrs_axis", unwrapped_deg, None)


@pytest.mark.parametrize("beats", [3, 5, 8])
def test_the_mean_of_three_beats_or_more_is_not_understated(noise: Noise, beats: int) -> None:
    """From three on the ± is the larger of the marks' and of the beats' own spread.

    So with nothing but the marks' noise it is too large on average, by less than 40 % for
    three beats and less for more, and never below what the marks alone give.
    """
    draws = 400
    leg_mm = noise.rng.normal(0.0, LEG_SIGMA_MM, (draws, beats, 2))
    means_ms, shown_ms = [], []
    for draw in leg_mm:
        marks = [
            time("qt", 10.0 + end - start, beat=n, at_mm=(20.0 * n + start, 50.0))
            for n, (start, end) in enumerate(draw, start=1)
        ]
        sheet_map = exact_map(scatter_mm=SCATTER_MM)
        value = worked(reading_of(*marks, sheet_map=sheet_map), "qt")
        assert value.plus_minus is not None
        means_ms.append(number(value))
        shown_ms.append(value.plus_minus)
    by_marks_ms = 2.0 * 40.0 * LEG_SIGMA_MM * math.sqrt(2.0 / beats)
    assert min(shown_ms) >= by_marks_ms * (1.0 - 1e-9)
    assert by_marks_ms < np.mean(shown_ms) < 1.4 * by_marks_ms
    inside = np.abs(np.array(means_ms) - 400.0) <= np.array(shown_ms)
    assert inside.mean() >= 0.95


def rounded(places_mm: Samples, step_mm: float, rng: np.random.Generator) -> Samples:
    """Places put down on the nearest of a grid of places that lies anywhere."""
    offset_mm = rng.uniform(0.0, step_mm, DRAWS)
    return np.round((places_mm - offset_mm) / step_mm) * step_mm + offset_mm


@pytest.mark.parametrize(("start_step_mm", "end_step_mm"), [(0.4, 0.4), (0.1, 0.4), (0.02, 0.02)])
def test_marks_rounded_to_the_screen_scatter_within_the_plus_minus(
    start_step_mm: float, end_step_mm: float
) -> None:
    """A hand that sees exactly where the wave is and can only hit whole screen pixels."""
    rng = np.random.default_rng(20260103)
    mark = in_steps(time("qrs", 2.5), start_step_mm, end_step_mm)
    value = worked(reading_of(mark), "qrs")
    assert value.plus_minus is not None
    true_ms = rng.uniform(60.0, 200.0, DRAWS)
    start = rng.uniform(5.0, 6.0, DRAWS)
    end = start + true_ms / 40.0
    read_ms = 40.0 * (rounded(end, end_step_mm, rng) - rounded(start, start_step_mm, rng))
    errors_ms = read_ms - true_ms
    assert 2.0 * errors_ms.std() <= value.plus_minus
    assert np.mean(np.abs(errors_ms) <= value.plus_minus) >= 0.95
    # The hand's own part is what is left of the ± without pen and, where finer, pixel.
    pen_ms2 = 2.0 * (40.0 * 0.2) ** 2 / 12.0
    steps_mm = [max(step, 1.0 / PX_PER_MM) for step in (start_step_mm, end_step_mm)]
    hand_ms2 = sum((40.0 * step) ** 2 for step in steps_mm) / 12.0
    assert (value.plus_minus / 2.0) ** 2 == pytest.approx(pen_ms2 + hand_ms2)
    if min(start_step_mm, end_step_mm) > 1.0 / PX_PER_MM:
        assert errors_ms.var() == pytest.approx(hand_ms2, rel=TOLERANCE)


def test_without_the_step_the_plus_minus_would_be_too_small() -> None:
    """Why the step is kept: at 0.6 mm to a screen pixel the hand alone goes beyond the pen."""
    rng = np.random.default_rng(20260104)
    place = rng.uniform(5.0, 6.0, DRAWS)
    errors_ms = 40.0 * (rounded(place + 2.5, 0.6, rng) - rounded(place, 0.6, rng) - 2.5)
    unaware = worked(reading_of(time("qrs", 2.5)), "qrs").plus_minus
    aware = worked(reading_of(in_steps(time("qrs", 2.5), 0.6)), "qrs").plus_minus
    assert unaware is not None
    assert aware is not None
    assert unaware < 2.0 * errors_ms.std() <= aware
