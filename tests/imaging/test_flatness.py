"""How a bend of the page is told from noise."""

from __future__ import annotations

import numpy as np
import pytest

from imaging.flatness import bend_of


def test_noise_alone_is_below_its_own_allowance() -> None:
    rng = np.random.default_rng(4)
    for _ in range(30):
        bend = bend_of(rng.normal(0.0, 0.01, (14, 22)), 7.5)
        assert bend.span_mm < bend.noise_mm
        assert bend.scatter_mm == 0.0


def test_a_bow_is_measured() -> None:
    """0.1 mm x**2 over 160 mm: spans of 5 to 50 mm, worked out by drawing them."""
    y, x = np.mgrid[0:14, 0:22]
    bow = 0.1 * ((x - 10.5) / 10.5) ** 2
    bend = bend_of(bow + np.random.default_rng(1).normal(0.0, 0.001, x.shape), 7.5)
    rng = np.random.default_rng(9)
    start, end = rng.integers(0, bow.size, (2, 40000))
    apart = 7.5 * np.hypot(x.flat[end] - x.flat[start], y.flat[end] - y.flat[start])
    fits = (apart >= 5.0) & (apart <= 50.0)
    change = (bow.flat[end] - bow.flat[start])[fits]
    assert bend.span_mm == pytest.approx(1.96 * float(np.sqrt(np.mean(change**2))), rel=0.1)
    assert bend.scatter_mm > 0.01


def test_tiles_without_lines_do_not_matter_and_too_few_tell_nothing() -> None:
    offsets = np.full((14, 22), np.nan)
    offsets[:3, :4] = 0.2
    assert bend_of(offsets, 7.5).span_mm == 0.0
