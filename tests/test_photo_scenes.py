"""Scenes without an ECG grid: enough of them, each different, each a picture of something."""

from __future__ import annotations

import numpy as np
import pytest

from tests.photo_recipe import random_recipe
from tests.photo_scene_kinds import SCENE_KINDS
from tests.photo_scenes import (
    as_pixels,
    no_grid_scenes,
    photographed,
    scene_recipe,
    unscaled_scenes,
)


@pytest.mark.slow
def test_no_grid_scenes_are_many_and_all_different() -> None:
    names: list[str] = []
    small = []
    for name, pixels in no_grid_scenes():
        assert pixels.dtype == np.uint8
        assert pixels.ndim == 3
        assert min(pixels.shape[:2]) >= 900
        names.append(name)
        small.append(pixels[:900:30, :900:30].astype(float).ravel())
    kinds = {name.split(",")[0] for name in names}
    assert len(kinds) >= 60
    assert len(names) == len(set(names)) >= 80
    apart = np.abs(np.array(small)[:, None] - np.array(small)[None]).mean(axis=2)
    assert apart[~np.eye(len(names), dtype=bool)].min() > 0.5


@pytest.mark.parametrize("draw", SCENE_KINDS)
def test_a_kind_shows_something(draw) -> None:  # type: ignore[no-untyped-def]
    level = draw(np.random.default_rng(1))
    assert np.isfinite(level).all()
    assert level.min() > -0.6
    assert level.max() < 1.6
    assert np.std(level) > 0.02


@pytest.mark.parametrize("number", [0, 8, 22])
def test_a_photographed_kind_is_a_picture_of_its_own(number: int) -> None:
    flat = as_pixels(SCENE_KINDS[number](np.random.default_rng(1)))
    taken, other = (photographed(flat, seed) for seed in (4000 + number, 1))
    assert taken.dtype == np.uint8
    assert 1.4e6 < taken.shape[0] * taken.shape[1] < 1.6e6
    assert taken.std() > 5.0
    assert not np.array_equal(taken, photographed(flat[::-1], 4000 + number))
    assert not np.array_equal(taken[:900, :900], other[:900, :900])


def test_no_scene_brings_an_ecg_strip_with_it() -> None:
    recipes = [random_recipe(np.random.default_rng(seed), 1.5) for seed in range(60)]
    assert any(recipe.other_strips for recipe in recipes)
    assert not any(scene_recipe(recipe, 1.0).other_strips for recipe in recipes)


@pytest.mark.slow
def test_unscaled_scenes_hold_exercise_paper() -> None:
    names = [name for name, _ in unscaled_scenes()]
    assert len(set(names)) == len(names) >= 15
    assert sum("exercise_paper" in name for name in names) >= 9
