"""The fitted lattice as straight pieces: where it lies, and where it stops."""

from __future__ import annotations

import time
from dataclasses import replace

import numpy as np
import pytest

from app.window.canvas.lattice_lines import lattice_lines
from imaging.sheet_map import Coverage, FloatArray, SheetMap
from tests.app.reading_examples import example_map
from tests.bends import bent

SIZE_PX = (1200, 900)


def ends_mm(sheet_map: SheetMap, pieces_px: FloatArray) -> FloatArray:
    """Both ends of each piece on the grid, shape (N, 2, 2)."""
    return sheet_map.to_mm(pieces_px.reshape(-1, 2)).reshape(-1, 2, 2)


def skewed_map() -> SheetMap:
    return replace(example_map(SIZE_PX), x_step_px=(7.9, 0.6), y_step_px=(-0.5, 8.1))


@pytest.mark.parametrize("sheet_map", [example_map(SIZE_PX), skewed_map()], ids=["flat", "skew"])
@pytest.mark.parametrize("quarter_turns", [0, 1, 2, 3])
@pytest.mark.parametrize("bold", [True, False])
def test_every_piece_runs_along_one_whole_millimetre_of_its_weight(
    sheet_map: SheetMap, quarter_turns: int, bold: bool
) -> None:
    turned = sheet_map.turned(quarter_turns)
    places_mm = ends_mm(turned, lattice_lines(turned, bold=bold))
    along = np.ptp(places_mm, axis=1)
    fixed_axis = np.argmin(along, axis=1)
    kept = along[np.arange(len(along)), fixed_axis]
    assert kept.max() < 1e-6
    line_mm = places_mm[np.arange(len(places_mm)), 0, fixed_axis]
    assert np.abs(line_mm - np.round(line_mm)).max() < 1e-6
    assert ((np.round(line_mm) % 5 == 0) == bold).all()


def test_where_all_was_seen_there_is_one_piece_for_each_line() -> None:
    sheet_map = example_map(SIZE_PX)
    x_mm, y_mm = sheet_map.to_mm(np.array([[0.0, 0.0], [1199.0, 899.0]])).T
    lines = sum(
        len(range(int(np.ceil(low)), int(np.floor(high)) + 1)) for low, high in (x_mm, y_mm)
    )
    pieces = [lattice_lines(sheet_map, bold=bold) for bold in (True, False)]
    # A line within half a pixel of the picture's edge may be there as well.
    assert lines <= sum(map(len, pieces)) <= lines + 4
    for x1, y1, x2, y2 in np.concatenate(pieces):
        assert max(abs(x2 - x1), abs(y2 - y1)) > 890.0


def test_pieces_stay_on_the_picture() -> None:
    pieces = lattice_lines(skewed_map(), bold=False)
    assert pieces.min() >= -0.5
    assert pieces[:, ::2].max() <= 1199.5
    assert pieces[:, 1::2].max() <= 899.5


def test_lines_stop_where_the_grid_was_not_seen() -> None:
    cells = np.ones((23, 30), dtype=bool)
    cells[:, 10:20] = False  # a gap from 400 px to 800 px
    sheet_map = replace(example_map(SIZE_PX), coverage=Coverage.from_cells(cells, 40.0))
    pieces = lattice_lines(sheet_map, bold=True)
    low, high = np.minimum(pieces[:, 0], pieces[:, 2]), np.maximum(pieces[:, 0], pieces[:, 2])
    left, right = high < 400.0, low > 799.0
    assert (left | right).all()
    level = high - low > 100.0
    # From the edge to within half a cell of the gap, on both sides.
    assert high[level & left].min() > 379.0
    assert low[level & right].max() < 820.0
    assert (level & left).sum() == (level & right).sum() > 20


def test_where_nothing_was_seen_there_is_no_line() -> None:
    nothing = Coverage.from_cells(np.zeros((23, 30), dtype=bool), 40.0)
    assert lattice_lines(replace(example_map(SIZE_PX), coverage=nothing), bold=True).shape == (0, 4)


def test_a_page_of_twelve_megapixels_is_laid_out_at_once() -> None:
    size_px = (4000, 3000)
    cells = np.ones((-(-3000 // 16), 250), dtype=bool)
    sheet_map = replace(example_map(size_px), coverage=Coverage.from_cells(cells, 16.0))
    begun = time.perf_counter()
    count = len(lattice_lines(sheet_map, bold=True)) + len(lattice_lines(sheet_map, bold=False))
    # About 0.1 s on a quiet machine; line by line it was 7 s.
    assert time.perf_counter() - begun < 1.5
    assert count > 800


@pytest.mark.parametrize("bold", [True, False])
def test_on_a_bent_sheet_every_piece_follows_its_line(bold: bool) -> None:
    sheet_map = bent(example_map(SIZE_PX))
    places_mm = ends_mm(sheet_map, lattice_lines(sheet_map, bold=bold))
    assert len(places_mm) > 500
    apart = np.abs(places_mm[:, 1] - places_mm[:, 0])
    across = np.argmin(apart, axis=1)
    on_line = places_mm[np.arange(len(places_mm)), :, across]
    assert np.abs(on_line - np.round(on_line)).max() < 1e-6
    assert ((np.round(on_line) % 5 == 0) == bold).all()
    assert apart.max() < 3.0


def test_where_nothing_of_a_bent_sheet_was_seen_there_are_no_lines() -> None:
    nowhere = Coverage.from_cells(np.zeros((9, 12), dtype=bool), 100.0)
    sheet_map = replace(bent(example_map(SIZE_PX)), coverage=nowhere)
    assert lattice_lines(sheet_map, bold=True).shape == (0, 4)
