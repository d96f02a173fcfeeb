"""Photographed sheets: followed to a few hundredths of a millimetre, or refused."""

from __future__ import annotations

import numpy as np
import pytest
from numpy.typing import NDArray

from imaging import GridNotFound, SheetMap, find_grid
from imaging.follow import strain_of
from tests.measure_grid import as_picture
from tests.no_grid import no_grid_pictures
from tests.photos import Photo, photo, quick_set

FloatArray = NDArray[np.float64]

SPAN_BAR_MM = 0.05
LOST_MM = 0.5


def covered_errors_mm(found: SheetMap, taken: Photo) -> tuple[FloatArray, FloatArray, float]:
    """Picture and error of covered visible grid points, (N, 2) each, and the covered share.

    Which way up the sheet is, a grid does not tell: of the eight turns the nearest counts.
    Whole large squares between the origins are taken out, where 1 mm is certain.
    """
    points_mm = taken.sheets[0].grid_points_mm(2.0)
    points_px = taken.to_px(points_mm)
    covered = found.covers(points_px)
    points_mm, points_px = points_mm[covered], points_px[covered]
    seen_mm = found.to_mm(points_px)
    step_mm = 5.0 if found.scale_is_certain else 1.0
    tried = []
    for swapped in (seen_mm, seen_mm[:, ::-1]):
        for signs in ((1, 1), (1, -1), (-1, 1), (-1, -1)):
            errors = swapped * signs - points_mm
            tried.append(errors - step_mm * np.round(np.median(errors, axis=0) / step_mm))
    best = min(tried, key=lambda errors: float(np.median(np.abs(errors))))
    return points_px, best, float(covered.mean())


def span_error_95_mm(points_px: FloatArray, errors_mm: FloatArray, px_per_mm: float) -> float:
    """95th percentile of the error of spans of 5 to 50 mm."""
    rng = np.random.default_rng(0)
    start, end = rng.integers(0, len(errors_mm), (2, 20000))
    apart_mm = np.hypot(*(points_px[start] - points_px[end]).T) / px_per_mm
    fits = (apart_mm >= 5.0) & (apart_mm <= 50.0)
    return float(np.percentile(np.abs(errors_mm[start] - errors_mm[end])[fits], 95.0))


def _hold(taken: Photo) -> None:
    found = find_grid(as_picture(taken.pixels))
    assert isinstance(found, SheetMap)
    points_px, errors_mm, covered = covered_errors_mm(found, taken)
    assert np.abs(errors_mm).max() < LOST_MM
    assert span_error_95_mm(points_px, errors_mm, found.x_pitch_px_per_mm) < SPAN_BAR_MM
    assert covered > 0.85
    stated_mm = found.standard_error_mm(points_px)
    assert (np.hypot(*errors_mm.T) < 2.0 * stated_mm).mean() > 0.8


def test_a_tilted_sheet_is_followed() -> None:
    taken = photo(
        7,
        plain=True,
        megapixels=2.5,
        recordings=False,
        tilt_deg=24.0,
        tilt_towards_deg=70.0,
        noise=2.0,
    )
    _hold(taken)


def test_a_photo_with_everything_is_followed() -> None:
    taken = photo(9022, megapixels=2.9, recordings=False)
    assert len(taken.sheets) == 2  # a strip beside it must not pull the map along
    _hold(taken)


def test_a_turned_photo_keeps_the_pictures_own_right() -> None:
    taken = photo(9007, megapixels=2.3, recordings=False)
    assert taken.recipe.quarter_turns == 1
    found = find_grid(as_picture(taken.pixels))
    assert isinstance(found, SheetMap)
    assert found.bend is not None
    assert found.turn_deg == 0
    assert found.x_step_px[0] > 0.0
    assert found.y_step_px[1] > 0.0


@pytest.mark.parametrize("name", ["text_page", "halftone", "table", "cloth", "square_code"])
def test_a_scene_without_a_grid_is_refused(name: str) -> None:
    pixels = dict(no_grid_pictures())[name]
    assert isinstance(find_grid(as_picture(pixels)), GridNotFound)


def test_squares_of_another_size_than_those_around_are_noticed() -> None:
    """Where a correction runs away at the rim the squares change size all at once."""
    slopes = np.tile(0.15 * np.array([[1.0, 0.1], [-0.1, 1.0]]), (30, 40, 1, 1))
    slopes *= np.linspace(1.0, 1.1, 40)[np.newaxis, :, np.newaxis, np.newaxis]  # perspective
    slopes[-2:, 10:14] *= 1.25
    cells = np.ones((30, 40), dtype=bool)
    cells[:, :3] = False
    strain = strain_of(slopes, cells, 9)
    assert (strain[-2:, 10:14] > 0.1).all()
    elsewhere = strain.copy()
    elsewhere[-8:, 4:20] = 0.0
    assert elsewhere.max() < 0.03
    assert (strain[~cells] == 0.0).all()


@pytest.mark.slow
def test_the_quick_set_is_followed() -> None:
    """Nothing refused, no wrong factor said with certainty, no point lost."""
    spans, shares, lost = [], [], 0
    for taken in quick_set():
        found = find_grid(as_picture(taken.pixels))
        assert isinstance(found, SheetMap)
        points_px, errors_mm, covered = covered_errors_mm(found, taken)
        if not found.scale_is_certain and float(np.median(np.abs(errors_mm))) > 1.0:
            continue  # 5 mm lines taken for 1 mm ones: said to be uncertain
        lost += int((np.abs(errors_mm) >= LOST_MM).sum())
        spans.append(span_error_95_mm(points_px, errors_mm, found.x_pitch_px_per_mm))
        shares.append(covered)
    assert lost == 0
    assert np.median(spans) < 0.02
    assert np.median(shares) > 0.94
