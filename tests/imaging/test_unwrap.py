"""Wrapped phases made whole; regions that do not hold together stay apart."""

from __future__ import annotations

import numpy as np

from imaging.unwrap import unwrapped


def _wrapped(cycles: np.ndarray) -> np.ndarray:
    return cycles - np.round(cycles)


def test_a_slope_of_many_cycles_is_made_whole() -> None:
    y, x = np.mgrid[0:20, 0:30].astype(float)
    cycles = 0.18 * x - 0.1 * y
    found, region = unwrapped(_wrapped(cycles), np.ones(x.shape), 0.25)
    assert region.all()
    assert np.ptp(found - cycles) < 1e-9
    assert abs(np.median(found)) <= 0.5


def test_of_two_regions_the_larger_is_taken() -> None:
    cycles = np.zeros((10, 20))
    quality = np.ones((10, 20))
    quality[:, 6] = 0.0
    cycles[:, 7:] = 0.3
    found, region = unwrapped(cycles, quality, 0.2)
    assert not region[:, :7].any()
    assert region[:, 7:].all()
    assert np.isnan(found[:, :7]).all()


def test_a_jump_is_not_crossed() -> None:
    cycles = np.zeros((10, 20))
    cycles[:, 14:] = 0.4
    _, region = unwrapped(cycles, np.ones((10, 20)), 0.2)
    assert region[:, :14].all()
    assert not region[:, 14:].any()


def test_nothing_gives_nothing() -> None:
    found, region = unwrapped(np.zeros((4, 4)), np.zeros((4, 4)), 0.2)
    assert np.isnan(found).all()
    assert not region.any()
