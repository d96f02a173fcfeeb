"""Follow the millimetre grid over a sheet that is tilted, curled or seen from near by.

The waves of tiles give a first map, the sheet is drawn flat by it, and the phases that the
lines still have there correct the map (the lock-in of Takeda et al. 1982, done in the
sheet's own frame). What 1 mm is, is decided on the flat drawing, as on a flat page.
"""

from __future__ import annotations

import logging
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend
from imaging.choose import TOO_COARSE
from imaging.errors import GridNotFound
from imaging.flat_view import FlatView, flat_view
from imaging.ink import GridInk
from imaging.lock_in import Tiles, lock_in
from imaging.periods import COARSEST_PX_PER_MM, HIGHEST_CYCLES_PER_PX
from imaging.sheet_dense import Dense, measure_dense
from imaging.sheet_map import Coverage, SheetMap
from imaging.sheet_offsets import Lattice, offsets_of
from imaging.sheet_scale import SheetScale, scale_of
from imaging.smooth_surface import smoothest
from imaging.tile_waves import TileWaves, follow_waves
from imaging.wave_field import field_of

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

_log = logging.getLogger(__name__)

_ROUGH_TILE_PX = 64
_ROUGH_STIFFNESS = 0.3
_MARGIN_CYCLES = 25.0
_ROUNDS = 8
_PASSES = (False, False, True)
_FASTEST_TURN_DEG_PER_MM = 0.3
_BESIDE_TURN_MM = 4.0
_MOST_STRAIN = 0.05
_AROUND_MM = 20.0
_DOTS = 0.5
_LEAST_BEND_MM = 0.4
_NODE_MM = 4.0
_FEWEST_REGION_TILES = 30
_BEYOND_MM = 8.0
_SURE_MM = 2.0
_GUESS_SHARE = 0.1
_LEAST_ERROR_MM = 1e-3
_FEWEST_CELLS = 50

FOLLOWED = "The sheet is tilted or bent on the picture; its grid was followed over it."

NOT_FOLLOWED = GridNotFound(
    "The grid lines could not be followed over the sheet; take the picture again from above "
    "and nearer, with even light, or scan the page.",
    "not_followed",
)


def follow_sheet(size_px: tuple[int, int], coarse: GridInk) -> SheetMap | GridNotFound:
    """Find a grid that no single scale and angle fits.

    Parameters
    ----------
    size_px : (int, int)
        Width and height of the picture.
    coarse : GridInk
        The plane of darkness, binned to about four million pixels.
    """
    waves = follow_waves(coarse.darkness)
    if waves is None:
        return NOT_FOLLOWED
    rough = _rough_map(coarse, waves)
    if rough is None:
        return NOT_FOLLOWED
    if _is_dots(rough.view):
        return NOT_FOLLOWED
    waves_per_px = 1.0 / rough.view.px_per_unit
    across_cycles = rough.high - rough.low - 2.0 * _MARGIN_CYCLES
    scale = scale_of(rough.masked, waves_per_px, rough.off_square, across_cycles, coarse.bin_px)
    if isinstance(scale, GridNotFound):
        return scale
    per_cycle = 5.0 / np.array(scale.followed_fifths)
    px_per_mm = rough.view.px_per_unit / per_cycle
    if float(px_per_mm.min()) * coarse.bin_px < COARSEST_PX_PER_MM:
        return TOO_COARSE
    plane = coarse.darkness
    field = _in_mm(rough.field, per_cycle, plane.shape, float(px_per_mm.mean()))
    low, high = rough.low * per_cycle, rough.high * per_cycle
    highest = 5.0 * HIGHEST_CYCLES_PER_PX * float(px_per_mm.min())
    fifths = np.array([number for number in scale.fifths if number <= highest])
    if not all(first in fifths for first in scale.first):
        return TOO_COARSE
    found = _corrected(plane, field, _Window(low, high, px_per_mm), fifths, scale)
    if found is None:
        return NOT_FOLLOWED
    return _sheet_map(size_px, coarse.bin_px, *found, scale)


@dataclass(frozen=True, slots=True, eq=False)
class _Window:
    """The part of the sheet that is drawn, in mm, and how finely."""

    low: FloatArray
    high: FloatArray
    px_per_mm: FloatArray


def _corrected(
    plane: NDArray[np.float32],
    field: Bend,
    window: _Window,
    fifths: NDArray[np.int_],
    scale: SheetScale,
) -> tuple[Bend, FlatView, Dense] | None:
    """Correct the map by all waves of the lines, at last in tiles that lie closer."""
    found = None
    for fine in _PASSES:
        view = flat_view(plane, field, window.low, window.high, window.px_per_mm)
        dense = None if view is None else measure_dense(view, fifths, scale, fine=fine)
        if view is None or dense is None:
            return None
        field = _moved(field, view, dense.tiles, dense.surfaces)
        found = (field, view, dense)
    return found


@dataclass(frozen=True, slots=True, eq=False)
class _Rough:
    """The first map, in cycles of the followed waves, and the sheet drawn by it."""

    field: Bend
    view: FlatView
    masked: NDArray[np.float32]
    low: FloatArray
    high: FloatArray
    off_square: float


def _rough_map(coarse: GridInk, waves: TileWaves) -> _Rough | None:
    """Correct the first map round by round, each time over a little more than was seen."""
    followed = np.isfinite(waves.waves[:, :, 0, 0])
    lengths = np.nanmedian(np.hypot(waves.waves[..., 0], waves.waves[..., 1]), axis=(0, 1))
    field = field_of(waves)
    places = field.to_mm(waves.centres_px[followed])
    seen_before = 0
    for _ in range(_ROUNDS):
        low = np.percentile(places, 0.5, axis=0) - _MARGIN_CYCLES
        high = np.percentile(places, 99.5, axis=0) + _MARGIN_CYCLES
        view = flat_view(coarse.darkness, field, low, high, 1.0 / lengths)
        if view is None:
            return None
        tiles = Lattice.over(view.plane.shape, _ROUGH_TILE_PX)
        surfaces, regions = [], []
        for axis in (0, 1):
            cycles = offsets_of(view, _ROUGH_TILE_PX, tiles, axis, np.array([1.0]), 0).offsets
            known = np.isfinite(cycles)
            surfaces.append(
                smoothest(np.nan_to_num(cycles), known.astype(float), _ROUGH_STIFFNESS, 4)[0]
            )
            regions.append(known & (np.abs(np.nan_to_num(cycles) - surfaces[axis]) < 0.15))
        region = regions[0] & regions[1]
        seen = int(region.sum())
        _log.debug("rough: %d tiles of %d", seen, region.size)
        if seen < _FEWEST_REGION_TILES:
            return None
        places = view.first + tiles.centres_px()[region] / view.px_per_unit
        field = _moved(field, view, tiles, (surfaces[0], surfaces[1]))
        if seen < 1.02 * seen_before:
            break
        seen_before = seen
    view = flat_view(coarse.darkness, field, low, high, 1.0 / lengths)
    if view is None:
        return None
    masked = view.plane * _spread(region, tiles, view.plane.shape)
    return _Rough(field, view, masked, low, high, float(lengths[1] / lengths[0]))


def _spread(region: BoolArray, tiles: Lattice, shape: tuple[int, ...]) -> NDArray[np.float32]:
    """One over the middle of each tile of a region, else zero."""
    mask = np.zeros(shape, dtype=np.float32)
    side = int(tiles.step_px)
    for row, column in zip(*np.nonzero(region), strict=True):
        top, left = row * side + side // 2, column * side + side // 2
        mask[top : top + side + 1, left : left + side + 1] = 1.0
    return mask


def _in_mm(field: Bend, per_cycle: FloatArray, shape: tuple[int, ...], px_per_mm: float) -> Bend:
    """The map in millimetres on finer nodes over the whole plane."""
    pitch_px = float(max(2.0, round(_NODE_MM * px_per_mm)))
    columns, rows = (int(np.ceil((side - 1) / pitch_px)) + 1 for side in shape[::-1])
    x, y = np.meshgrid(np.arange(columns) * pitch_px, np.arange(rows) * pitch_px)
    places = field.to_mm(np.column_stack([x.ravel(), y.ravel()])) * per_cycle
    x_mm, y_mm = places.T.reshape(2, rows, columns)
    return Bend((0.0, 0.0), pitch_px, x_mm, y_mm, np.full(x_mm.shape, np.nan))


def _moved(
    field: Bend, view: FlatView, tiles: Lattice, surfaces: tuple[FloatArray, FloatArray]
) -> Bend:
    """The map corrected by offsets that were measured in tiles of its view."""
    places = np.column_stack([field.x_mm.ravel(), field.y_mm.ravel()])
    shift = [
        on_tiles(surface, places, view, tiles).reshape(field.x_mm.shape) for surface in surfaces
    ]
    return Bend(
        field.first_px,
        field.pitch_px,
        field.x_mm + shift[0],
        field.y_mm + shift[1],
        field.standard_error_mm,
    )


def on_tiles(values: FloatArray, places: FloatArray, view: FlatView, tiles: Lattice) -> FloatArray:
    """A surface given on the tiles of a view, at places of its map; held at its border."""
    place = tiles.place_of((places - view.first) * view.px_per_unit)
    rows, columns = values.shape
    place = np.clip(place, 0.0, (columns - 1.0, rows - 1.0))
    # A Bend of these nodes interpolates them.
    nodes = Bend((0.0, 0.0), 1.0, values, values, np.full(values.shape, np.nan))
    return nodes.to_mm(place)[:, 0]


def _is_dots(view: FlatView) -> bool:
    """Whether what was followed are dots: their wave comes and goes along the lines too."""
    along = np.diag(1.0 / view.px_per_unit)
    waves = np.stack([along[0], along[1], along[0] + along[1], along[0] - along[1]])
    tiles = Tiles.over((view.plane.shape[0], view.plane.shape[1]), _ROUGH_TILE_PX)
    power = np.abs(lock_in(view.plane, waves, tiles)) ** 2
    flat = np.sqrt(power.reshape(-1, 4))
    lines = (flat[:, :2] > 0.5 * np.percentile(flat[:, :2], 80.0, axis=0)).all(axis=1)
    if not lines.any():
        return True
    first, second, *both = np.median(flat[lines], axis=0)
    return bool(min(both) > _DOTS * min(first, second))


def _sheet_map(
    size_px: tuple[int, int],
    bin_px: int,
    field: Bend,
    view: FlatView,
    dense: Dense,
    scale: SheetScale,
) -> SheetMap | GridNotFound:
    bend = _with_errors(field, view, dense, bin_px)
    coverage = _coverage(size_px, bend, view, dense)
    cells = coverage.cells()
    if int(cells.sum()) < _FEWEST_CELLS:
        return NOT_FOLLOWED
    covered_px = _cell_centres_px(cells.shape, coverage.cell_px)[cells.ravel()]
    covered_mm = bend.to_mm(covered_px)
    shift_mm = 5.0 * np.round(covered_mm.min(axis=0) / 5.0)
    bend = replace(bend, x_mm=bend.x_mm - shift_mm[0], y_mm=bend.y_mm - shift_mm[1])
    covered_mm = covered_mm - shift_mm
    design = np.column_stack([np.ones(len(covered_mm)), covered_mm])
    affine = np.linalg.lstsq(design, covered_px, rcond=None)[0]
    off_px = np.hypot(*(design @ affine - covered_px).T)
    bent_mm = float(np.percentile(off_px, 95.0) / np.hypot(*affine[1]))
    if not scale.certain and bent_mm < _LEAST_BEND_MM:
        # Flat enough for the search on flat pages, which did not find a grid in these lines.
        return NOT_FOLLOWED
    origin, x_step, y_step = ((float(row[0]), float(row[1])) for row in affine)
    return SheetMap(
        picture_size_px=size_px,
        origin_px=origin,
        x_step_px=x_step,
        y_step_px=y_step,
        covariance=((0.0,) * 6,) * 6,
        scatter_mm=float(np.median(bend.errors_mm(covered_px))),
        coverage=coverage,
        scale_is_certain=scale.certain,
        evidence=(*scale.evidence, FOLLOWED),
        bend=bend,
    )


def _with_errors(field: Bend, view: FlatView, dense: Dense, bin_px: int) -> Bend:
    """The map in picture_px, with its errors: growing beyond what was seen, at last unknown."""
    places = np.column_stack([field.x_mm.ravel(), field.y_mm.ravel()])
    shape = field.x_mm.shape
    seen_mm = on_tiles(dense.errors_mm, places, view, dense.tiles).reshape(shape)
    away_mm = on_tiles(dense.outside_mm, places, view, dense.tiles).reshape(shape)
    guessed_mm = _GUESS_SHARE * np.maximum(away_mm - _SURE_MM, 0.0)
    errors = np.hypot(np.maximum(seen_mm, _LEAST_ERROR_MM), guessed_mm)
    last = view.first + (np.array(view.plane.shape[::-1]) - 1.0) / view.px_per_unit
    within = ((places >= view.first) & (places <= last)).all(axis=1).reshape(shape)
    errors[~within | (away_mm > _BEYOND_MM)] = np.nan
    # Working pixel p lies at bin * p + (bin - 1) / 2 in the picture.
    x_px, y_px = (bin_px * first + (bin_px - 1) / 2.0 for first in field.first_px)
    return Bend((x_px, y_px), bin_px * field.pitch_px, field.x_mm, field.y_mm, errors)


def _cell_centres_px(shape: tuple[int, ...], cell_px: float) -> FloatArray:
    y, x = ((np.arange(count) + 0.5) * cell_px - 0.5 for count in shape)
    across, down = np.meshgrid(x, y)
    return np.column_stack([across.ravel(), down.ravel()])


def _coverage(size_px: tuple[int, int], bend: Bend, view: FlatView, dense: Dense) -> Coverage:
    """Cells of the picture on covered tiles; one sheet only, where its lines do not jump."""
    import cv2

    cell_px = float(max(4, round(bend.pitch_px / 2.0)))
    shape = (int(np.ceil(size_px[1] / cell_px)), int(np.ceil(size_px[0] / cell_px)))
    centres_px = _cell_centres_px(shape, cell_px)
    place = dense.tiles.place_of((bend.to_mm(centres_px) - view.first) * view.px_per_unit)
    at = np.rint(np.clip(place, -9.0, 1e6)).astype(np.int64)
    inside = (at >= 0).all(axis=1) & (at < dense.covered.shape[::-1]).all(axis=1)
    cells = np.zeros(len(at), dtype=bool)
    cells[inside] = dense.covered[at[inside, 1], at[inside, 0]]
    cells &= np.isfinite(bend.errors_mm(centres_px))
    slopes = bend.mm_per_px(centres_px)
    # Where one sheet ends on another, the joined map turns at once; a fold or curl does not.
    # At the rim of what was followed a correction may run away: there the squares are all at
    # once of another size than those around.
    turn = np.unwrap(
        np.arctan2(slopes[:, 1, 0] - slopes[:, 0, 1], slopes[:, 0, 0] + slopes[:, 1, 1])
    ).reshape(shape)
    mm_per_px = np.sqrt(np.abs(np.linalg.det(slopes))).reshape(shape)
    speed = np.hypot(*np.gradient(turn, cell_px)) / np.maximum(mm_per_px, 1e-9)
    window = 1 + 2 * max(1, round(0.5 * _AROUND_MM * float(np.median(1.0 / mm_per_px)) / cell_px))
    strain = strain_of(slopes.reshape(*shape, 2, 2), cells.reshape(shape), window)
    jumps = (np.rad2deg(speed) > _FASTEST_TURN_DEG_PER_MM) | (strain > _MOST_STRAIN)
    jumps &= cells.reshape(shape)
    reach = 1 + 2 * max(1, round(_BESIDE_TURN_MM * float(np.median(1.0 / mm_per_px)) / cell_px))
    near = cv2.dilate(jumps.astype(np.uint8), np.ones((reach, reach), dtype=np.uint8))
    kept = (cells.reshape(shape) & (near == 0)).astype(np.uint8)
    count, labels, stats, _ = cv2.connectedComponentsWithStats(kept, connectivity=4)
    if count < 2:
        return Coverage.from_cells(np.zeros(shape, dtype=bool), cell_px)
    largest = 1 + int(np.argmax(stats[1:, cv2.CC_STAT_AREA]))
    return Coverage.from_cells(labels == largest, cell_px)


def strain_of(slopes: FloatArray, cells: BoolArray, window: int) -> FloatArray:
    """How far each cell's squares differ in size or shape from those covered around it.

    `slopes` are sheet_mm per picture_px, shape (rows, columns, 2, 2); the result has shape
    (rows, columns) and no unit.
    """
    import cv2

    mask = cells.astype(np.float64)
    seen = np.maximum(cv2.blur(mask, (window, window)), 1e-9)
    parts = (slopes * mask[:, :, np.newaxis, np.newaxis]).reshape(*cells.shape, 4)
    around = (cv2.blur(parts, (window, window)) / seen[:, :, np.newaxis]).reshape(slopes.shape)
    around[~cells | (np.abs(np.linalg.det(around)) < 1e-12)] = np.eye(2)
    change = slopes @ np.linalg.inv(around) - np.eye(2)
    return np.where(cells, np.abs(change).max(axis=(2, 3)), 0.0)
