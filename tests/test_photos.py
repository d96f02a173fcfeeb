"""The photo maker: its truth against what it draws, its inverse, what it hides, its sets."""

from __future__ import annotations

import time
from collections.abc import Iterator
from itertools import islice
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from sample_scans.page import Finish, Page, Ruling, Stroke
from tests.photo_geometry import Fold, Surface, Wave
from tests.photo_pages import PrintedPage
from tests.photo_recipe import Recipe, random_recipe, random_surface
from tests.photos import Photo, photo, quick_set, slow_set

FloatArray = NDArray[np.float64]

CENTROID_PX = 0.05
INVERSE_PX = 1e-3
DOT_MM = 0.9
CURLED = Surface(curl_per_m=2.5, curl_along_deg=20.0)
CREASED = Surface(fold=Fold(angle_deg=25.0, across_deg=88.0, offset_mm=3.0, crease_mm=1.5))
CRUMPLED = Surface(waves=(Wave(1.0, 60.0, 30.0, 0.5), Wave(0.7, 45.0, 110.0, 2.0)))

GEOMETRIES: dict[str, dict[str, Any]] = {
    "from above": {},
    "tilted along": {"tilt_deg": 35.0, "tilt_towards_deg": 90.0},
    "tilted across": {"tilt_deg": 30.0, "tilt_towards_deg": 10.0},
    "rolled": {"roll_deg": 11.0},
    "barrel": {"barrel": (-0.05, 0.01)},
    "pincushion": {"barrel": (0.05, -0.01)},
    "curled": {"surface": CURLED, "tilt_deg": 12.0},
    "creased": {"surface": CREASED, "tilt_deg": 12.0},
    "crumpled": {"surface": CRUMPLED, "tilt_deg": 12.0},
    "turned once": {"quarter_turns": 1, "tilt_deg": 12.0},
    "turned twice": {"quarter_turns": 2, "tilt_deg": 12.0},
    "turned three times": {"quarter_turns": 3, "tilt_deg": 12.0},
    "mirrored": {"mirrored": True, "quarter_turns": 1, "tilt_deg": 12.0},
    "portrait": {"portrait": True, "tilt_deg": 12.0},
    "lit unevenly": {"uneven": 0.4, "relief": 0.7, "surface": CURLED},
}


def dots_mm() -> FloatArray:
    """Where the dots of `dotted_page` are, (N, 2): off the pixels' own rhythm."""
    x, y = np.meshgrid(np.arange(6.0, 106.0, 9.37), np.arange(5.0, 70.0, 8.11))
    return np.column_stack([x.ravel(), y.ravel()])


def dotted_page() -> PrintedPage:
    """White paper of 130 by 95 mm with single dots, stretched and skewed by the printer."""
    strokes = tuple(Stroke(np.array([dot, dot + 1e-6]), width_mm=DOT_MM) for dot in dots_mm())
    page = Page((130.0, 95.0), (10.0, 12.0), (0.0, 0.0, 110.0, 75.0), strokes=strokes)
    ruling = Ruling(thin="absent", bold=False)
    finish = Finish(paper=(250, 250, 250), ink=(10, 10, 10))
    return PrintedPage(page, ruling, finish, printed_scale=0.97, y_over_x=1.01, skew_deg=0.7)


def measured_px(taken: Photo, expected_px: FloatArray, reach_px: int) -> FloatArray:
    """Centroid of darkness about each expected place, (N, 2)."""
    darkness = 255.0 - taken.pixels.astype(np.float64).mean(axis=2)
    found = []
    for x_px, y_px in expected_px:
        left, top = round(x_px) - reach_px, round(y_px) - reach_px
        side = 2 * reach_px + 1
        patch = darkness[top : top + side, left : left + side]
        rim = np.concatenate([patch[0], patch[-1], patch[:, 0], patch[:, -1]])
        patch = np.maximum(patch - rim.max() - 1.0, 0.0)
        rows, columns = np.mgrid[0:side, 0:side]
        total = patch.sum()
        found.append((left + (patch * columns).sum() / total, top + (patch * rows).sum() / total))
    return np.array(found)


def reach_px(taken: Photo) -> int:
    """Half the side of a window that holds one dot and no other."""
    _, finest = taken.sheets[0].view.px_per_mm()
    return int(np.ceil(0.5 * DOT_MM * finest)) + 3


def well_inside(taken: Photo, points_px: FloatArray) -> NDArray[np.bool_]:
    height_px, width_px = taken.pixels.shape[:2]
    margin = reach_px(taken) + 2
    return np.asarray(
        (points_px > margin).all(axis=1)
        & (points_px < np.array([width_px, height_px]) - margin).all(axis=1)
    )


@pytest.mark.parametrize("name", GEOMETRIES)
def test_a_dot_is_drawn_where_the_map_says(name: str) -> None:
    taken = photo(3, megapixels=1.3, plain=True, printed=dotted_page(), **GEOMETRIES[name])
    expected_px = taken.to_px(dots_mm())
    expected_px = expected_px[well_inside(taken, expected_px)]
    assert len(expected_px) > 80
    error_px = measured_px(taken, expected_px, reach_px(taken)) - expected_px
    assert np.abs(error_px).max() < CENTROID_PX
    assert np.abs(error_px.mean(axis=0)).max() < CENTROID_PX / 3.0


@pytest.mark.parametrize("seed", range(6))
def test_a_dot_is_drawn_where_the_map_says_with_everything_bent_at_once(seed: int) -> None:
    recipe = random_recipe(np.random.default_rng(seed), 2.0)
    bent = {
        name: getattr(recipe, name)
        for name in ("focal", "tilt_deg", "tilt_towards_deg", "roll_deg", "barrel")
    }
    turned = {name: getattr(recipe, name) for name in ("quarter_turns", "mirrored", "portrait")}
    surface = random_surface(np.random.default_rng(40 + seed))
    taken = photo(
        seed, megapixels=2.0, plain=True, printed=dotted_page(), surface=surface, **bent, **turned
    )
    expected_px = taken.to_px(dots_mm())
    expected_px = expected_px[well_inside(taken, expected_px)]
    assert len(expected_px) > 60
    error_px = measured_px(taken, expected_px, reach_px(taken)) - expected_px
    assert np.abs(error_px).max() < CENTROID_PX


@pytest.fixture(scope="module")
def some_photos() -> list[Photo]:
    return [photo(seed, megapixels=1.0) for seed in range(8)]


def test_the_inverse_returns_to_the_pixel(some_photos: list[Photo]) -> None:
    for taken in some_photos:
        for sheet in taken.sheets:
            points_mm = sheet.grid_points_mm(3.0)
            points_px = sheet.to_px(points_mm)
            again_px = sheet.to_px(sheet.to_mm(points_px))
            assert np.abs(again_px - points_px).max() < INVERSE_PX


def test_off_the_paper_the_inverse_is_nan() -> None:
    taken = photo(1, megapixels=0.8, plain=True, printed=dotted_page(), fill=0.6, tilt_deg=20.0)
    height_px, width_px = taken.pixels.shape[:2]
    corners_px = np.array([(0, 0), (width_px, 0), (0, height_px), (width_px, height_px)])
    assert np.isnan(taken.to_mm(corners_px.astype(float))).all()
    assert np.isfinite(taken.to_mm(np.array([[width_px / 2.0, height_px / 2.0]]))).all()


def test_the_same_seed_gives_the_same_photo() -> None:
    first, again = (photo(5, megapixels=0.6) for _ in range(2))
    assert np.array_equal(first.pixels, again.pixels)
    assert not np.array_equal(first.pixels, photo(6, megapixels=0.6).pixels)
    assert first.applied == again.applied


def test_what_was_applied_is_told() -> None:
    taken = photo(2, megapixels=0.5, plain=True, fingers=2, glare=0.6)
    assert taken.applied.pop("page")
    assert taken.applied.keys() >= {"megapixels", "fingers", "glare"}
    assert "stains" not in taken.applied


def test_an_unknown_option_is_refused() -> None:
    with pytest.raises(TypeError, match="no_such_thing"):
        photo(2, megapixels=0.5, no_such_thing=1)


@pytest.mark.parametrize("option", ["fingers", "papers_over", "stickers"])
def test_what_lies_over_the_grid_hides_it(option: str) -> None:
    points_mm = np.stack(np.meshgrid(np.arange(1.0, 109.0), np.arange(1.0, 74.0)), -1)
    points_mm = points_mm.reshape(-1, 2)
    bare = photo(6, megapixels=1.0, plain=True, printed=dotted_page())
    covered = photo(6, megapixels=1.0, plain=True, printed=dotted_page(), **{option: 1})
    assert bare.visible(points_mm).all()
    hidden = ~covered.visible(points_mm)
    assert 0.005 < hidden.mean() < 0.5
    changed = bare.pixels.astype(int) - covered.pixels
    column, row = np.rint(bare.to_px(points_mm)).astype(int).T
    unlike = np.abs(changed[row, column]).max(axis=1) > 1
    # A finger's and a paper's shadow reach past what they hide; nothing hidden looks the same.
    assert unlike[hidden].mean() > 0.95
    far = points_mm[~hidden][~unlike[~hidden]]
    assert len(far) > 0.4 * len(points_mm)


def test_points_outside_the_picture_are_not_visible() -> None:
    taken = photo(4, megapixels=1.0, plain=True, printed=dotted_page(), aim=(0.4, 0.0))
    points_px = taken.to_px(dots_mm())
    outside = ~((points_px > 0) & (points_px < taken.pixels.shape[1::-1])).all(axis=1)
    assert outside.any()
    assert not taken.visible(dots_mm())[outside].any()
    assert taken.visible(dots_mm())[well_inside(taken, points_px)].all()


def test_a_reflection_leaves_points_visible_but_not_legible() -> None:
    taken = photo(4, megapixels=1.0, plain=True, printed=dotted_page(), glare=1.0)
    sheet, points_mm = taken.sheets[0], np.array(dots_mm())
    assert sheet.visible(points_mm).all()
    lost = ~sheet.legible(points_mm)
    column, row = np.rint(taken.to_px(points_mm)).astype(int).T
    assert 0 < lost.sum() < len(points_mm) / 2
    assert taken.pixels[row, column].max(axis=1)[lost].min() > 200
    assert taken.pixels[row, column].max(axis=1)[~lost].min() < 60


def test_the_largest_of_several_strips_comes_first() -> None:
    taken = photo(3, megapixels=1.0, other_strips=2)
    assert len(taken.sheets) == 3
    areas = [(sheet.owner == sheet.mark).sum() for sheet in taken.sheets]
    assert areas == sorted(areas, reverse=True)
    for sheet in taken.sheets:
        assert len(sheet.grid_points_mm()) > 30


@pytest.mark.parametrize("copy_of", ["photocopy", "fax", "screen"])
def test_copies_keep_their_grid_in_place(copy_of: str) -> None:
    """Grid lines of a copy are darker than the paper between them, where the map says."""
    options = {"megapixels": 4.0, "plain": True, "fill": 1.0}
    taken = photo(12, copy_of=copy_of, **options)
    points_mm = taken.sheets[0].grid_points_mm(1.0)
    bold_mm = points_mm[(points_mm[:, 0] % 5.0 == 0.0) & (points_mm[:, 1] % 5.0 != 0.0)]
    grey = taken.pixels.astype(float).mean(axis=2)
    on_line, beside = (
        _sampled(grey, taken.to_px(bold_mm + np.array([shift_mm, 0.5]))) for shift_mm in (0.0, 0.5)
    )
    assert np.mean(on_line) < np.mean(beside) - 8.0
    if copy_of != "screen":
        assert np.ptp(taken.pixels[::7, ::7].astype(int), axis=2).mean() < 12.0


def _sampled(grey: FloatArray, points_px: FloatArray) -> FloatArray:
    column, row = np.rint(points_px).astype(int).T
    return np.asarray(grey[row, column])


@pytest.mark.parametrize(
    "count", [4, pytest.param(20, marks=pytest.mark.slow)], ids=["first four", "all"]
)
def test_the_quick_set_is_twenty_readable_photos(count: int) -> None:
    photos = 0
    for taken in islice(quick_set(), count if count < 20 else None):
        photos += 1
        assert 1.9e6 < taken.pixels.shape[0] * taken.pixels.shape[1] < 3.1e6
        assert len(taken.sheets[0].grid_points_mm()) > 100
        assert taken.sheets[0].view.px_per_mm()[0] > 3.0
    assert photos == count


@pytest.mark.slow
def test_the_slow_set_is_eighty_photos_drawn_in_time() -> None:
    taken_s: list[float] = []
    for taken in _timed(slow_set(), taken_s):
        assert 7.9e6 < taken.pixels.shape[0] * taken.pixels.shape[1] < 12.1e6
        sheet = taken.sheets[0]
        points_px = sheet.to_px(sheet.grid_points_mm())
        assert len(points_px) > 100
        assert np.abs(sheet.to_px(sheet.to_mm(points_px)) - points_px).max() < INVERSE_PX
    assert len(taken_s) == 80
    assert np.median(taken_s) < 6.0


def _timed(photos: Iterator[Photo], taken_s: list[float]) -> Iterator[Photo]:
    while True:
        start = time.perf_counter()
        taken = next(photos, None)
        if taken is None:
            return
        taken_s.append(time.perf_counter() - start)
        yield taken


def test_a_plain_recipe_changes_nothing() -> None:
    assert photo(2, megapixels=0.5, plain=True).recipe == Recipe(megapixels=0.5)
