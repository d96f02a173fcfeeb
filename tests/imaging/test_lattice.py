"""The grid finder against pages whose grid is known exactly."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import cv2
import numpy as np
import pytest
from numpy.typing import NDArray

from imaging import GridNotFound, SheetMap, find_grid, open_picture
from sample_scans.layout import Layout
from sample_scans.page import GRID_COLOURS, RenderedPage
from tests.measure_grid import (
    as_picture,
    pages_at,
    random_pages,
    score_page,
    spans_on,
    summary_of,
)
from tests.no_grid import no_grid_pictures, unscaled_grid_pictures
from tests.pages import flat_page, random_flat_page, turned

FloatArray = NDArray[np.float64]

BAR_MM = 0.0125  # half a millisecond at 25 mm/s, 150 dots per inch and above
COARSE_BAR_MM = 0.025  # one millisecond, at 100 dots per inch
FOLLOWED_BAR_MM = 0.05  # two milliseconds, where the sheet had to be followed
SAMPLES = Path(__file__).resolve().parent.parent.parent / "sample_scans"
CONDITIONS: list[dict[str, Any]] = [
    *({"dpi": 150.0, "skew_deg": 1.7, "colour": colour} for colour in GRID_COLOURS),
    {"dpi": 100.0, "skew_deg": -5.0, "jpeg_quality": 70},
    {"dpi": 100.0, "y_over_x": 1.02, "noise": 4.0},
    {"dpi": 150.0, "mode": "grey", "thin": "dotted", "shading": 25.0},
    {"dpi": 200.0, "mode": "one_bit", "skew_deg": 0.4},
    {"dpi": 200.0, "printed_scale": 0.94, "y_over_x": 0.98, "skew_deg": 5.0},
    {"dpi": 300.0, "mode": "one_bit", "thin": "dotted", "skew_deg": -0.7},
    {"dpi": 300.0, "paper": (253, 236, 200), "jpeg_quality": 60, "blur_sigma_px": 1.0},
]


def found_map(pixels: NDArray[np.uint8]) -> SheetMap:
    found = find_grid(as_picture(pixels))
    assert isinstance(found, SheetMap), found
    return found


@pytest.mark.parametrize("options", CONDITIONS, ids=lambda options: "-".join(map(str, options)))
def test_spans_on_a_flat_scan_are_within_the_bar(options: dict[str, Any]) -> None:
    score = score_page(flat_page(seed=3, **options))
    assert not score.refused
    assert score.certain
    assert not score.wrong_factor
    bar_mm = BAR_MM if options["dpi"] >= 150.0 else COARSE_BAR_MM
    assert np.percentile(score.span_errors_mm, 95.0) < 0.4 * bar_mm
    assert score.origin_off_mm < 0.02
    assert score.covered > 0.97
    assert score.covered_outside < 0.03


def test_random_pages_are_found_with_the_right_factor_and_an_honest_error() -> None:
    row = summary_of([score_page(random_flat_page(seed)) for seed in range(40, 65)])
    assert row.refused <= 1
    assert row.wrong_certain == row.wrong_uncertain == 0
    assert row.p95_mm < 0.004
    assert row.worst_page_mm < BAR_MM
    assert 0.15 < row.normalised < 1.3


def test_bold_lines_alone_are_no_certain_scale() -> None:
    found = found_map(flat_page(dpi=200.0, thin="absent", skew_deg=0.6).pixels)
    assert not found.scale_is_certain
    assert "taken as 5 mm" in found.evidence[0]
    assert found.x_pitch_px_per_mm == pytest.approx(200.0 / 25.4, rel=1e-3)


def test_thin_lines_alone_are_no_certain_scale() -> None:
    found = found_map(flat_page(dpi=200.0, bold=False, skew_deg=0.6).pixels)
    assert not found.scale_is_certain
    assert "taken as 1 mm" in found.evidence[0]
    assert found.x_pitch_px_per_mm == pytest.approx(200.0 / 25.4, rel=1e-3)


@pytest.mark.parametrize("row_gap_mm", [25.0, 50.0])
def test_rows_of_traces_are_not_taken_for_bold_lines(row_gap_mm: float) -> None:
    """Bold lines alone, and traces at every fifth or tenth of them: that is still 5 mm paper."""
    layout = Layout(row_gap_mm=row_gap_mm, grid_mm=(0.0, 0.0, 180.0, 175.0), row_s=6.5)
    page = flat_page(layout=layout, dpi=150.0, thin="absent", mode="one_bit", skew_deg=0.5)
    score = score_page(page)
    assert not score.certain
    assert not score.wrong_factor


def test_a_bold_only_page_with_rows_25_mm_apart_keeps_its_factor() -> None:
    """Found wrong and certain once: its rows passed for bold lines of five times the size."""
    score = score_page(random_flat_page(147))
    assert not score.certain
    assert not score.wrong_factor


def test_dots_are_not_taken_for_small_squares() -> None:
    """Dots five to a millimetre, no bold lines: dots and lines would pass for thin and bold."""
    page = flat_page(dpi=600.0, bold=False, thin="dotted", thin_strength=0.9, traces=False)
    found = find_grid(as_picture(page.pixels))
    assert isinstance(found, GridNotFound) or not found.scale_is_certain


@pytest.mark.parametrize("name_and_pixels", list(no_grid_pictures()), ids=lambda pair: pair[0])
def test_pictures_without_a_grid_are_refused(name_and_pixels: tuple[str, Any]) -> None:
    found = find_grid(as_picture(name_and_pixels[1]))
    assert isinstance(found, GridNotFound)
    assert found.code in ("no_lines", "one_direction", "not_a_millimetre_grid")
    assert found.reason.endswith(".")
    assert found.reason.count(". ") == 0


@pytest.mark.parametrize(
    "name_and_pixels", list(unscaled_grid_pictures()), ids=lambda pair: pair[0]
)
def test_other_rulings_are_never_certain(name_and_pixels: tuple[str, Any]) -> None:
    found = find_grid(as_picture(name_and_pixels[1]))
    assert isinstance(found, GridNotFound) or not found.scale_is_certain


def curled(page: RenderedPage, deepest_mm: float) -> NDArray[np.uint8]:
    """The page with lines shifted along x by up to `deepest_mm`, quadratically from the middle."""
    height, width = page.pixels.shape[:2]
    y, x = np.mgrid[0:height, 0:width].astype(np.float32)
    across = (x - width / 2) / (width / 2)
    shift = deepest_mm * float(np.hypot(*page.px_from_mm[:, 0])) * across**2
    moved = cv2.remap(
        page.pixels, x + shift.astype(np.float32), y, cv2.INTER_LINEAR, None, cv2.BORDER_REPLICATE
    )
    return np.asarray(moved, dtype=np.uint8)


def slant(page: RenderedPage, share: float) -> FloatArray:
    """The homography of `in_perspective`."""
    height, width = page.pixels.shape[:2]
    corners = np.array([[0, 0], [width, 0], [width, height], [0, height]], dtype=np.float32)
    seen = corners.copy()
    seen[0, 0] += share * width / 2
    seen[1, 0] -= share * width / 2
    matrix = cv2.getPerspectiveTransform(corners, seen)
    return np.asarray(matrix, dtype=np.float64)


def seen_at(page: RenderedPage, points_px: FloatArray, share: float) -> FloatArray:
    """Where points of the page, (N, 2), lie on its slanted picture."""
    seen = cv2.perspectiveTransform(points_px[np.newaxis], slant(page, share))[0]
    return np.asarray(seen, dtype=np.float64)


def in_perspective(page: RenderedPage, share: float) -> NDArray[np.uint8]:
    """The page seen at a slant: its upper edge narrower by `share` of the width."""
    height, width = page.pixels.shape[:2]
    matrix = slant(page, share)
    warped = cv2.warpPerspective(page.pixels, matrix, (width, height), borderValue=(250, 250, 250))
    return np.asarray(warped, dtype=np.uint8)


@pytest.mark.parametrize("deepest_mm", [0.1, 0.5, 2.0])
def test_a_curled_page_is_followed(deepest_mm: float) -> None:
    found = find_grid(as_picture(curled(flat_page(dpi=150.0), deepest_mm)))
    assert isinstance(found, SheetMap)
    assert found.bend is not None


@pytest.mark.parametrize("share", [0.01, 0.04, 0.08])
def test_a_page_in_perspective_is_followed(share: float) -> None:
    page = flat_page(dpi=200.0)
    found = find_grid(as_picture(in_perspective(page, share)))
    assert isinstance(found, SheetMap)
    assert found.bend is not None
    start_mm, end_mm = spans_on(page, seed=2)
    start_px, end_px = (seen_at(page, page.to_px(ends), share) for ends in (start_mm, end_mm))
    both = found.covers(start_px) & found.covers(end_px)
    assert both.mean() > 0.9
    measured_mm = (found.to_mm(end_px) - found.to_mm(start_px))[both]
    assert np.percentile(np.abs(measured_mm - (end_mm - start_mm)[both]), 95.0) < FOLLOWED_BAR_MM


def test_a_bend_far_below_the_bar_is_taken_as_flat() -> None:
    page = flat_page(dpi=200.0)
    found = find_grid(as_picture(curled(page, 0.01)))
    assert isinstance(found, SheetMap)
    start_mm, end_mm = spans_on(page, seed=2)
    measured_mm = found.to_mm(page.to_px(end_mm)) - found.to_mm(page.to_px(start_mm))
    assert np.percentile(np.abs(measured_mm - (end_mm - start_mm)), 95.0) < BAR_MM


def test_a_turned_or_mirrored_page_is_taken_as_the_picture_has_it() -> None:
    page = flat_page(dpi=150.0, y_over_x=1.015, skew_deg=0.8)
    for quarter_turns in range(4):
        drawn = turned(page, quarter_turns, mirrored=quarter_turns == 2)
        found = found_map(drawn.pixels)
        assert found.turn_deg == 0
        assert not found.mirrored
        assert found.x_step_px[0] > 0.99 * found.x_pitch_px_per_mm
        pitches = np.hypot(*drawn.px_from_mm[:, :2])
        if quarter_turns % 2:
            pitches = pitches[::-1]
        assert (found.x_pitch_px_per_mm, found.y_pitch_px_per_mm) == pytest.approx(
            tuple(pitches), rel=1e-4
        )


def test_the_grid_covers_what_lies_beneath_the_trace_and_not_the_margin() -> None:
    page = flat_page(dpi=150.0)
    found = found_map(page.pixels)
    for strip in page.page.strips:
        points_mm = strip.points_mm()
        on_grid = (points_mm[:, 1] > 2.0) & (points_mm[:, 1] < 73.0) & (points_mm[:, 0] < 108.0)
        assert found.covers(page.to_px(points_mm[on_grid])).all()
    left, top, right, bottom = page.grid_mm
    beside_mm = [(left - 4.0, 30.0), (right + 4.0, 30.0), (50.0, top - 4.0), (50.0, bottom + 4.0)]
    assert not found.covers(page.to_px(np.array(beside_mm))).any()


def test_a_large_picture_is_binned_and_loses_nothing() -> None:
    """600 dots per inch on a sheet larger than the working plane."""
    page = flat_page(layout=Layout(paper_mm=(240.0, 130.0)), dpi=600.0, skew_deg=0.3)
    score = score_page(page)
    assert score.certain
    assert np.percentile(score.span_errors_mm, 95.0) < 0.001
    assert score.origin_off_mm < 0.01


@pytest.mark.parametrize("size", [(1, 1), (32, 32), (61, 64), (32, 4000), (5000, 64), (97, 211)])
def test_any_picture_gives_a_map_or_a_reason(size: tuple[int, int]) -> None:
    rng = np.random.default_rng(size[0])
    y, x = np.mgrid[0 : size[0], 0 : size[1]]
    kinds = [
        np.zeros(size),
        np.full(size, 255),
        rng.integers(0, 256, size),
        255 * ((x + y) % 2),
        255 * (y % 5 > 0),
        np.where((x % 7 == 0) | (y % 7 == 0), 80, 250),
        np.where(x > size[1] // 2, 0, 255),
        127 + 100 * np.sin(x / 3.7) * np.sin(y / 3.7),
    ]
    for plane in kinds:
        pixels = np.repeat(plane.astype(np.uint8)[:, :, np.newaxis], 3, axis=2)
        found = find_grid(as_picture(pixels))
        if isinstance(found, SheetMap):
            assert np.isfinite(found.covariance).all()
            assert not found.scale_is_certain
        else:
            assert found.reason


def test_a_small_crop_without_a_second_bold_line_has_no_certain_wrong_scale() -> None:
    """Five squares of 23 px across: a seventh of a square must not pass for a small square."""
    y, x = np.mgrid[0:738, 0:132]
    plane = 255 - 100 * ((x % 23 == 0) | (y % 23 == 0)) - 100 * ((x % 115 == 0) | (y % 115 == 0))
    pixels = np.repeat(plane.astype(np.uint8)[:, :, np.newaxis], 3, axis=2)
    found = find_grid(as_picture(pixels))
    assert isinstance(found, GridNotFound) or not found.scale_is_certain


def test_the_picture_is_not_changed_and_the_answer_is_the_same_again() -> None:
    picture = as_picture(flat_page(dpi=150.0, noise=3.0).pixels)
    before = picture.pixels.copy()
    assert find_grid(picture) == find_grid(picture)
    assert np.array_equal(picture.pixels, before)


@pytest.mark.parametrize(
    "truth_path", sorted(SAMPLES.glob("*.truth.json")), ids=lambda path: path.name
)
def test_the_specimens_agree_with_their_truth(truth_path: Path) -> None:
    truth = json.loads(truth_path.read_text(encoding="utf-8"))
    name = truth_path.name.removesuffix(".truth.json")
    (path,) = (p for p in SAMPLES.glob(f"{name}.*") if p.suffix in (".jpg", ".png"))
    found = find_grid(open_picture(path))
    assert isinstance(found, SheetMap)
    assert found.scale_is_certain
    px_from_mm = np.array(truth["px_from_mm"])
    steps = np.column_stack([found.x_step_px, found.y_step_px])
    off_in_50_mm = 50.0 * (np.linalg.inv(steps) @ px_from_mm[:, :2] - np.eye(2))
    assert np.abs(off_in_50_mm).max() < 0.001
    origin_mm = np.linalg.solve(px_from_mm[:, :2], np.array(found.origin_px) - px_from_mm[:, 2])
    assert np.abs(origin_mm - 5.0 * np.round(origin_mm / 5.0)).max() < 0.005


@pytest.mark.slow
@pytest.mark.parametrize("dpi", [100.0, 150.0, 200.0, 300.0, 600.0])
def test_every_colour_mode_and_thin_line(dpi: float) -> None:
    row = summary_of([score_page(page) for page in pages_at(dpi, 63)])
    assert row.wrong_certain == row.wrong_uncertain == 0
    assert row.p95_mm < (BAR_MM if dpi >= 150.0 else COARSE_BAR_MM)
    assert row.refused <= 6
    assert 0.2 < row.normalised < 1.3


@pytest.mark.slow
def test_many_random_pages() -> None:
    row = summary_of([score_page(page) for page in random_pages(200)])
    assert row.wrong_certain == row.wrong_uncertain == 0
    assert row.refused <= 4
    assert row.p95_mm < 0.004
    assert 0.2 < row.normalised < 1.3
