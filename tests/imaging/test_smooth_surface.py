"""The smooth surface: planes stay, noise goes, wrong nodes are left out."""

from __future__ import annotations

import numpy as np

from imaging.smooth_surface import smoothest

Y, X = np.mgrid[0:24, 0:30].astype(float)
PLANE = 0.02 * X - 0.05 * Y + 1.0


def test_a_plane_stays_and_goes_on_where_nothing_is_known() -> None:
    weights = np.ones(PLANE.shape)
    weights[:, 20:] = 0.0
    surface, kept = smoothest(np.where(weights > 0, PLANE, 99.0), weights, 0.5)
    assert np.abs(surface - PLANE).max() < 1e-3
    assert (kept == (weights > 0)).all()


def test_noise_is_smoothed() -> None:
    noise = np.random.default_rng(0).normal(0.0, 0.1, PLANE.shape)
    surface, _ = smoothest(PLANE + noise, np.ones(PLANE.shape), 2.0)
    assert np.std(surface - PLANE) < 0.04


def test_wrong_nodes_are_left_out() -> None:
    rng = np.random.default_rng(1)
    values = PLANE + rng.normal(0.0, 0.005, PLANE.shape)
    values[10:12, 10:13] += 0.8
    surface, kept = smoothest(values, np.ones(PLANE.shape), 0.5, 5)
    assert np.abs(surface - PLANE).max() < 0.02
    assert (kept[10:12, 10:13] == 0.0).all()
