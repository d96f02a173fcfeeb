"""Lines placed by their phases: place, bold line and stated error."""

from __future__ import annotations

import numpy as np
import pytest

from imaging.lock_in import Tiles
from imaging.phase_fit import LineFit, fit_lines

FIFTHS = np.arange(1, 11)
TRUE_WAVE = np.array([0.1263, 0.0021])  # squares per pixel: 7.9 px and a little skew
TRUE_START = 0.37


def ruled(noise: float, seed: int, bend_mm: float = 0.0) -> np.ndarray:
    """Upright lines, every fifth bolder, at whole numbers of X."""
    y, x = np.mgrid[0:420, 0:640]
    place = TRUE_WAVE[0] * x + TRUE_WAVE[1] * y + TRUE_START
    place = place + bend_mm * ((x - 320.0) / 320.0) ** 2
    nearest = np.round(place)
    height = np.where(nearest % 5 == 0, 1.0, 0.4)
    lines = height * np.exp(-0.5 * ((place - nearest) / 0.13) ** 2)
    return (lines + np.random.default_rng(seed).normal(0.0, noise, x.shape)).astype(np.float32)


def fit(plane: np.ndarray, sampling_px: float = 0.0) -> LineFit:
    first_wave = TRUE_WAVE * 1.0008
    return fit_lines(plane, first_wave, FIFTHS, 5, Tiles.over(plane.shape, 119), sampling_px)


def test_wave_and_bold_line_are_found_from_a_wave_slightly_off() -> None:
    found = fit(ruled(0.05, 0))
    assert found.wave == pytest.approx(TRUE_WAVE, abs=2e-6)
    assert (found.start_mm - TRUE_START + 2.5) % 5.0 - 2.5 == pytest.approx(0.0, abs=1e-3)
    assert found.stray == 0.0


def test_the_stated_error_is_that_of_repeated_noise() -> None:
    far_px = np.array([600.0, 60.0, 0.0])  # a span: the start does not matter
    errors, stated = [], []
    for seed in range(12):
        found = fit(ruled(1.0, seed))
        errors.append(float(far_px[:2] @ (found.wave - TRUE_WAVE)))
        stated.append(float(far_px @ found.covariance @ far_px))
    ratio = np.sqrt(np.mean(np.square(errors)) / np.mean(stated))
    assert 0.4 < ratio < 1.6


def test_rounding_of_the_pixels_is_added_over_the_whole_plane() -> None:
    plane = ruled(0.05, 0)
    plain, rounded = fit(plane), fit(plane, 0.1)
    across_px = np.array([640.0, 0.0, 0.0])
    added = across_px @ (rounded.covariance - plain.covariance) @ across_px
    assert np.sqrt(added) == pytest.approx(0.1 * np.hypot(*TRUE_WAVE), rel=0.01)


def test_a_bend_stays_in_the_offsets() -> None:
    found = fit(ruled(0.02, 0, bend_mm=0.08))
    columns = np.nanmean(found.offsets_mm, axis=0)
    assert columns[0] - columns[len(columns) // 2] > 0.03
