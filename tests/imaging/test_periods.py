"""Thin and bold lines told apart on profiles drawn for the purpose."""

from __future__ import annotations

import numpy as np
import pytest

from imaging.periods import Fifths, fifths_of, pairs_of
from imaging.profiles import BANDS, Profiles
from imaging.ruling import ruling_of
from imaging.spectrum import Waves, waves_of
from tests.pages import flat_page

SQUARE_PX = 7.3


def profiles(heights: list[float], *, square_px: float = SQUARE_PX, length: int = 900) -> Profiles:
    """Lines of these heights in turn, one every square, under a little noise."""
    x = np.arange(length) / square_px
    nearest = np.round(x)
    lines = np.array(heights)[nearest.astype(int) % len(heights)]
    plane = lines * np.exp(-0.5 * ((x - nearest) / 0.14) ** 2)
    noise = np.random.default_rng(3).normal(0.0, 0.01, (BANDS, length))
    window = np.hanning(length)
    bands = plane + noise
    centred = bands - bands @ window[:, None] / window.sum()
    return Profiles((centred * window / window.sum()).astype(np.float32), float(bands.var()))


def fifths(heights: list[float], times: float = 1.0) -> Fifths:
    return fifths_of(profiles(heights), times / SQUARE_PX)


@pytest.mark.parametrize("thin", [0.06, 0.3, 0.85])
def test_ecg_paper_is_known(thin: float) -> None:
    found = fifths([1.0, thin, thin, thin, thin])
    assert found.is_ecg
    assert found.faintest_thin == pytest.approx(thin, abs=0.12)


@pytest.mark.parametrize("times", [0.2, 0.4, 2.0, 3.0, 7.0 / 5.0])
def test_another_size_of_square_is_not(times: float) -> None:
    assert not fifths([1.0, 0.4, 0.4, 0.4, 0.4], times).is_ecg


@pytest.mark.parametrize(
    "heights",
    [
        [1.0],  # one spacing only
        [1.0, 0.0, 0.0, 0.0, 0.0],  # bold lines alone
        [1.0, 0.0, 0.3, 0.0, 0.0],  # and a drawn baseline at one place of four
        [1.0, 0.4, 0.4, 0.4],  # bold every fourth
        [1.0, *[0.4] * 9],  # bold every tenth
    ],
)
def test_other_rulings_are_not(heights: list[float]) -> None:
    assert not fifths(heights).is_ecg


def test_a_plain_ruling_is_lines_of_one_spacing() -> None:
    found = ruling_of(profiles([1.0]), 1.0 / SQUARE_PX)
    assert found.seen
    assert found.is_lines
    assert found.lines_per_cycle == 1


def test_lines_between_are_counted() -> None:
    assert ruling_of(profiles([1.0, 0.4, 0.4, 0.4]), 0.25 / SQUARE_PX).lines_per_cycle == 4


def test_bright_lines_and_waves_are_not_lines() -> None:
    assert not ruling_of(profiles([-1.0]), 1.0 / SQUARE_PX).is_lines
    x = np.arange(900) / SQUARE_PX
    bands = np.tile(np.cos(2.0 * np.pi * x) * np.hanning(900), (BANDS, 1)) / 450.0
    assert not ruling_of(Profiles(bands.astype(np.float32), 0.5), 1.0 / SQUARE_PX).is_lines


@pytest.mark.parametrize("skew_deg", [0.0, -4.6, 3.2])
def test_the_waves_of_a_page_give_its_turn_and_pitch(skew_deg: float) -> None:
    page = flat_page(dpi=150.0, skew_deg=skew_deg, y_over_x=1.015)
    dark = (255.0 - page.pixels[:, :, 1]).astype(np.float32)
    upright, level, turn_rad = waves_of(dark)
    assert np.rad2deg(turn_rad) == pytest.approx(skew_deg, abs=0.02)
    expected = np.linalg.inv(page.px_from_mm[:, :2])
    for family, wave in ((upright, expected[0]), (level, expected[1])):
        nearest = np.abs(family.waves - wave).max(axis=1).min()
        assert nearest < 1e-4


def test_pairs_are_squares_and_forget_side_waves() -> None:
    waves = np.array([[0.1, 0.0], [0.104, 0.0], [0.2, 0.0]])
    family = Waves(waves, np.array([100.0, 10.0, 50.0]), np.array([99.0, 20.0, 60.0]))
    across = Waves(waves[:, ::-1], family.power, family.snr)
    pairs = pairs_of(family, across, (400, 400))
    assert [pair.lengths for pair in pairs] == [(0.1, 0.1), (0.2, 0.2)]
