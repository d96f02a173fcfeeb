"""Follow the millimetre grid over a sheet that is tilted, curled or seen from near by.

The waves of tiles give a first map, the sheet is drawn flat by it, and the phases that the
lines still have there correct the map (the lock-in of Takeda et al. 1982, done in the
sheet's own frame). What 1 mm is, is decided on the flat drawing, as on a flat page.
"""

from __future__ import annotations

import logging
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend
from imaging.errors import GridNotFound
from imaging.flat_view import FlatView, flat_view
from imaging.ink import GridInk
from imaging.lock_in import Tiles
from imaging.periods import COARSEST_PX_PER_MM, HIGHEST_CYCLES_PER_PX
from imaging.sheet_dense import Dense, measure_dense
from imaging.sheet_map import Coverage, SheetMap
from imaging.sheet_offsets import offsets_of
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
_NODE_MM = 4.0
_FEWEST_REGION_TILES = 30
_BEYOND_MM = 8.0

NOT_FOLLOWED = GridNotFound(
    "The grid lines could not be followed over the sheet; take the picture again from above "
    "and nearer, with even light, or scan the page.",
    "not_followed",
)
TOO_COARSE = GridNotFound(
    "The small squares are fewer than three pixels wide; take the picture from nearer.",
    "too_coarse",
)


def follow_sheet(
    size_px: tuple[int, int], ink: GridInk, coarse: GridInk
) -> SheetMap | GridNotFound:
    """Find a grid that no single scale and angle fits.

    Parameters
    ----------
    size_px : (int, int)
        Width and height of the picture.
    ink, coarse : GridInk
        The working plane, and the same binned for the search.
    """
    waves = follow_waves(coarse.darkness)
    if waves is None:
        return NOT_FOLLOWED
    rough = _rough_map(coarse, waves)
    if rough is None:
        return NOT_FOLLOWED
    scale = scale_of(rough.masked, 1.0 / rough.view.px_per_unit, rough.off_square)
    if isinstance(scale, GridNotFound):
        return scale
    times = coarse.bin_px // ink.bin_px
    per_cycle = 5.0 / np.array(scale.followed_fifths)
    px_per_mm = rough.view.px_per_unit / per_cycle
    if float(px_per_mm.min()) * coarse.bin_px < COARSEST_PX_PER_MM:
        return TOO_COARSE
    plane = coarse.darkness
    del times
    field = _in_mm(rough.field, per_cycle, plane.shape, float(px_per_mm.mean()))
    low, high = rough.low * per_cycle, rough.high * per_cycle
    highest = 5.0 * HIGHEST_CYCLES_PER_PX * float(px_per_mm.min())
    fifths = np.array([number for number in scale.fifths if number <= highest])
    dense: Dense | None = None
    for _ in range(2):
        view = flat_view(plane, field, low, high, px_per_mm)
        if view is None:
            return NOT_FOLLOWED
        dense = measure_dense(view, fifths, scale)
        if dense is None:
            return NOT_FOLLOWED
        field = _moved(field, view, dense.tiles, dense.surfaces)
    assert dense is not None
    return _sheet_map(size_px, coarse.bin_px, field, view, dense, scale)


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
        tiles = Tiles.over(view.plane.shape, _ROUGH_TILE_PX)
        surfaces, regions = [], []
        for axis in (0, 1):
            cycles = offsets_of(view, tiles, axis, np.array([1.0]), 0).offsets
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


def _spread(region: BoolArray, tiles: Tiles, shape: tuple[int, ...]) -> NDArray[np.float32]:
    """One over the middle of each tile of a region, else zero."""
    mask = np.zeros(shape, dtype=np.float32)
    half = tiles.step_px // 2
    for row, column in zip(*np.nonzero(region), strict=True):
        top, left = row * tiles.step_px + half, column * tiles.step_px + half
        mask[top : top + tiles.step_px + 1, left : left + tiles.step_px + 1] = 1.0
    return mask


def _in_mm(
    field: Bend, per_cycle: FloatArray, shape: tuple[int, ...], px_per_mm: float
) -> Bend:
    """The map in millimetres on finer nodes over the whole plane."""
    pitch_px = float(max(2.0, round(_NODE_MM * px_per_mm)))
    columns, rows = (int(np.ceil((side - 1) / pitch_px)) + 1 for side in shape[::-1])
    x, y = np.meshgrid(np.arange(columns) * pitch_px, np.arange(rows) * pitch_px)
    places = field.to_mm(np.column_stack([x.ravel(), y.ravel()])) * per_cycle
    x_mm, y_mm = places.T.reshape(2, rows, columns)
    return Bend((0.0, 0.0), pitch_px, x_mm, y_mm, np.full(x_mm.shape, np.nan))


def _moved(
    field: Bend, view: FlatView, tiles: Tiles, surfaces: tuple[FloatArray, FloatArray]
) -> Bend:
    """The map corrected by offsets that were measured in tiles of its view."""
    places = np.column_stack([field.x_mm.ravel(), field.y_mm.ravel()])
    shift = [on_tiles(surface, places, view, tiles).reshape(field.x_mm.shape) for surface in surfaces]
    return Bend(
        field.first_px,
        field.pitch_px,
        field.x_mm + shift[0],
        field.y_mm + shift[1],
        field.standard_error_mm,
    )


def on_tiles(values: FloatArray, places: FloatArray, view: FlatView, tiles: Tiles) -> FloatArray:
    """A surface given on the tiles of a view, at places of its map; held at its border."""
    middle_px = tiles.step_px - 0.5
    place = ((places - view.first) * view.px_per_unit - middle_px) / tiles.step_px
    rows, columns = values.shape
    place = np.clip(place, 0.0, (columns - 1.0, rows - 1.0))
    # A Bend of these nodes interpolates them.
    nodes = Bend((0.0, 0.0), 1.0, values, values, np.full(values.shape, np.nan))
    return nodes.to_mm(place)[:, 0]


def _sheet_map(
    size_px: tuple[int, int],
    bin_px: int,
    field: Bend,
    view: FlatView,
    dense: Dense,
    scale: SheetScale,
) -> SheetMap:
    # Working pixel p lies at bin * p + (bin - 1) / 2 in the picture.
    places = np.column_stack([field.x_mm.ravel(), field.y_mm.ravel()])
    shape = field.x_mm.shape
    errors = on_tiles(dense.errors_mm, places, view, dense.tiles).reshape(shape)
    depth_mm = on_tiles(dense.outside_mm, places, view, dense.tiles).reshape(shape)
    errors = np.hypot(np.maximum(errors, 1e-3), 0.1 * np.maximum(depth_mm - 3.0, 0.0))
    limits = view.first + (np.array(view.plane.shape[::-1]) - 1.0) / view.px_per_unit
    within = ((places >= view.first) & (places <= limits)).all(axis=1).reshape(shape)
    errors[~within | (depth_mm > _BEYOND_MM)] = np.nan
    first = (bin_px - 1) / 2.0 + bin_px * np.array(field.first_px)
    bend = Bend((float(first[0]), float(first[1])), bin_px * field.pitch_px, field.x_mm, field.y_mm, errors)
    # Cells
    cell_px = max(4, round(bend.pitch_px / 2.0))
    rows, columns = (-(-side // cell_px) for side in size_px[::-1])
    cx, cy = np.meshgrid((np.arange(columns) + 0.5) * cell_px - 0.5, (np.arange(rows) + 0.5) * cell_px - 0.5)
    cells_px = np.column_stack([cx.ravel(), cy.ravel()])
    cell_mm = bend.to_mm(cells_px)
    middle_px = dense.tiles.step_px - 0.5
    at = np.rint(((cell_mm - view.first) * view.px_per_unit - middle_px) / dense.tiles.step_px).astype(int)
    tall, wide = dense.covered.shape
    inside = (at >= 0).all(axis=1) & (at < (wide, tall)).all(axis=1)
    cells = np.zeros(len(at), dtype=bool)
    cells[inside] = dense.covered[at[inside, 1], at[inside, 0]]
    cells &= np.isfinite(bend.errors_mm(cells_px))
    covered_px, covered_mm = cells_px[cells], cell_mm[cells]
    if len(covered_px) < 50:
        return NOT_FOLLOWED
    middle_mm = covered_mm.mean(axis=0)
    shift_mm = 5.0 * np.round(covered_mm.min(axis=0) / 5.0)
    bend = Bend(bend.first_px, bend.pitch_px, bend.x_mm - shift_mm[0], bend.y_mm - shift_mm[1], bend.standard_error_mm)
    design = np.column_stack([np.ones(len(covered_mm)), covered_mm - shift_mm])
    affine = np.linalg.lstsq(design, covered_px, rcond=None)[0]
    del middle_mm
    scatter = float(np.median(bend.errors_mm(covered_px)))
    return SheetMap(
        picture_size_px=size_px,
        origin_px=(float(affine[0, 0]), float(affine[0, 1])),
        x_step_px=(float(affine[1, 0]), float(affine[1, 1])),
        y_step_px=(float(affine[2, 0]), float(affine[2, 1])),
        covariance=tuple((0.0,) * 6 for _ in range(6)),
        scatter_mm=scatter,
        coverage=Coverage.from_cells(cells.reshape(rows, columns), float(cell_px)),
        scale_is_certain=scale.certain,
        evidence=(*scale.evidence, "The sheet is tilted or bent; its grid was followed over it."),
        bend=bend,
    )
