"""Waves measured in tiles, against the sum written out."""

from __future__ import annotations

import numpy as np
import pytest

from imaging.lock_in import Tiles, lock_in


@pytest.mark.parametrize("smooth", [True, False])
def test_it_is_the_windowed_sum(smooth: bool) -> None:
    rng = np.random.default_rng(2)
    plane = rng.normal(size=(53, 71)).astype(np.float32)
    tiles = Tiles.over(plane.shape, 20, smooth=smooth)
    waves = np.array([[0.11, 0.02], [-0.03, 0.31]])
    found = lock_in(plane, waves, tiles)
    window = tiles.halves().ravel()
    y, x = np.mgrid[0:53, 0:71]
    for row, column in np.ndindex(tiles.shape):
        part = np.s_[row * 10 : row * 10 + 20, column * 10 : column * 10 + 20]
        for number, (along_x, along_y) in enumerate(waves):
            turned = plane * np.exp(-2j * np.pi * (along_x * x + along_y * y))
            expected = window @ turned[part] @ window
            assert found[row, column, number] == pytest.approx(expected, abs=1e-6)


def test_centres_lie_between_the_two_halves() -> None:
    tiles = Tiles.over((40, 60), 20)
    assert tiles.shape == (3, 5)
    assert tuple(tiles.centres_px()[1, 2]) == (29.5, 19.5)


def test_a_plane_smaller_than_the_window_has_one_tile() -> None:
    assert Tiles.over((9, 31), 50).step_px == 4
