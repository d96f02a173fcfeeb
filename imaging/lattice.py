"""Find the millimetre lattice: flat where the page is flat, else followed over the sheet."""

from __future__ import annotations

import logging
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.choose import TOO_SMALL, Choice, choose_waves
from imaging.errors import GridNotFound
from imaging.flatness import bend_of
from imaging.follow import follow_sheet
from imaging.ink import GridInk, grid_ink, is_two_level
from imaging.lock_in import Tiles
from imaging.periods import HIGHEST_CYCLES_PER_PX
from imaging.phase_fit import LineFit, fit_lines
from imaging.picture import Picture
from imaging.seen import Comb, seen_cells
from imaging.sheet_map import Coverage, SheetMap

FloatArray = NDArray[np.float64]

_log = logging.getLogger(__name__)

SMALLEST_SIDE_PX = 60
_SPECTRUM_PIXELS = 4_200_000
_TILE_MM = 15.0
_SMALL_TILE_MM = 10.0
_COVERAGE_WAVES = 4
# Measured on drawn pages (tests/measure_grid.py): what remains where tiles agree too well.
_SAMPLING_PX = 0.01
_IN_STEP_PX = 0.03
_WANDER_PX = 3.0
_TWO_LEVEL_PX = 0.08
_MOST_STRAY = 0.15
_ASIDE = 0.33
# The bar of a span of 5 to 50 mm is half a millisecond at 25 mm/s. On a coarse scan it is one
# (0.025 mm), and slow beats of the lines' third overtone with the pixels, which look like a
# bend, come on top: four pixels to a square give up to 0.025 mm of them.
_BAR_MM = 0.0125
_COARSE_BAR_MM = 0.035
_COARSE_PX_PER_MM = 5.0

NOT_FLAT = GridNotFound(
    "The grid lines bend or spread across the picture, so one scale cannot hold for all of "
    "it; lay the page flat and scan it.",
    "not_flat",
)


def find_grid(picture: Picture) -> SheetMap | GridNotFound:
    """Find the millimetre grid of a scan or a photograph.

    A flat page gets one origin and two steps; one that no such map fits is followed.

    Parameters
    ----------
    picture : Picture
        Of a page turned by at most 12 degrees from upright or from a quarter turn.

    Returns
    -------
    SheetMap or GridNotFound
        The map's +x is the picture's own right and +y its down: which way up the paper is,
        or whether it is mirrored, cannot be told from its grid, so ``turn_deg`` is 0.

    Notes
    -----
    The lock-in of Takeda et al. 1982 in tiles, with an affine phase through all of them.
    May be called on any thread; nothing is kept between calls.
    """
    if min(picture.size_px) < SMALLEST_SIDE_PX:
        return TOO_SMALL
    ink = grid_ink(picture.pixels)
    times = int(np.ceil(np.sqrt(ink.darkness.size / _SPECTRUM_PIXELS)))
    coarse = ink.binned(times)
    flat = _flat_map(picture, ink, coarse)
    if isinstance(flat, SheetMap):
        return flat
    followed = follow_sheet(picture.size_px, coarse)
    if isinstance(followed, SheetMap):
        return followed
    return NOT_FLAT if flat is not NOT_FLAT and _grid_in_the_middle(coarse) else flat


def _flat_map(picture: Picture, ink: GridInk, coarse: GridInk) -> SheetMap | GridNotFound:
    choice = choose_waves(coarse.darkness, coarse.bin_px)
    if isinstance(choice, GridNotFound):
        return choice
    times = coarse.bin_px // ink.bin_px
    fits = _fit_both(ink, choice, times, two_level=is_two_level(picture.pixels))
    if isinstance(fits, GridNotFound):
        return fits
    return _sheet_map(picture.size_px, ink.bin_px, coarse, fits, choice)


def _grid_in_the_middle(coarse: GridInk) -> bool:
    """Whether a part of the page, flat enough by itself, has thin and bold lines."""
    rows, columns = coarse.darkness.shape
    top, left = int(_ASIDE * rows), int(_ASIDE * columns)
    if min(rows - 2 * top, columns - 2 * left) < SMALLEST_SIDE_PX:
        return False
    part = np.ascontiguousarray(coarse.darkness[top : rows - top, left : columns - left])
    choice = choose_waves(part, coarse.bin_px)
    return isinstance(choice, Choice) and choice.certain


@dataclass(frozen=True, slots=True, eq=False)
class _Fits:
    """Upright and level lines placed on the working plane."""

    both: tuple[LineFit, LineFit]
    scatter_mm: float


def _rounding_px(wave: FloatArray, shape: tuple[int, int], two_level: bool) -> float:
    """One sigma of what the pixels' rounding may move a family of lines over the plane."""
    if two_level:
        return _TWO_LEVEL_PX
    # How many pixels a line wanders sideways along its length: lines that stay in one row of
    # pixels are all rounded alike, others are rounded every way.
    aside, along = sorted(np.abs(wave))
    return _SAMPLING_PX if aside / along * min(shape) > _WANDER_PX else _IN_STEP_PX


def _fit_both(ink: GridInk, choice: Choice, times: int, *, two_level: bool) -> _Fits | GridNotFound:
    waves = [np.array(wave) / times for wave in (choice.upright, choice.level)]
    px_per_mm = 1.0 / max(np.hypot(*wave) for wave in waves)
    smallest_mm = min(ink.darkness.shape) / px_per_mm
    if smallest_mm < 1.5 * _SMALL_TILE_MM:
        return TOO_SMALL
    tile_mm = _TILE_MM if smallest_mm >= 3.0 * _TILE_MM else _SMALL_TILE_MM
    tiles = Tiles.over(ink.darkness.shape, round(tile_mm * px_per_mm))
    highest = 5.0 * HIGHEST_CYCLES_PER_PX * px_per_mm
    fifths = np.array([number for number in choice.fifths if number <= highest])
    shape = (ink.darkness.shape[0], ink.darkness.shape[1])
    fits = [
        fit_lines(
            ink.darkness,
            wave,
            fifths,
            choice.first,
            tiles,
            _rounding_px(wave, shape, two_level) / ink.bin_px,
        )
        for wave in waves
    ]
    bar_mm = _BAR_MM if px_per_mm * ink.bin_px >= _COARSE_PX_PER_MM else _COARSE_BAR_MM
    bends = [bend_of(fit.offsets_mm, tile_mm / 2.0) for fit in fits]
    _log.debug("stray %.3f %.3f, bends %s", fits[0].stray, fits[1].stray, bends)
    if max(fit.stray for fit in fits) > _MOST_STRAY:
        return NOT_FLAT
    if any(bend.span_mm > np.hypot(bar_mm, bend.noise_mm) for bend in bends):
        return NOT_FLAT
    return _Fits((fits[0], fits[1]), max(bend.scatter_mm for bend in bends))


def _sheet_map(
    size_px: tuple[int, int], bin_px: int, coarse: GridInk, fits: _Fits, choice: Choice
) -> SheetMap:
    """Turn two phase planes into origin and steps, and look where the grid is."""
    rows = np.zeros((2, 3))
    covariance = np.zeros((6, 6))
    for axis, fit in enumerate(fits.both):
        # Working pixel p lies at bin * p + (bin - 1) / 2 in the picture.
        change = np.diag([1.0 / bin_px, 1.0 / bin_px, 1.0])
        change[2, :2] = -0.5 * (bin_px - 1) / bin_px
        rows[axis] = change @ [*fit.wave, fit.start_mm]
        covariance[3 * axis : 3 * axis + 3, 3 * axis : 3 * axis + 3] = (
            change @ fit.covariance @ change.T
        )
    rows = _origin_on_picture(rows, size_px)
    steps: FloatArray = np.asarray(np.linalg.inv(rows[:, :2]), dtype=np.float64)
    origin = -steps @ rows[:, 2]
    jacobian = _jacobian(steps, origin)
    in_px = jacobian @ covariance @ jacobian.T
    return SheetMap(
        picture_size_px=size_px,
        origin_px=(float(origin[0]), float(origin[1])),
        x_step_px=(float(steps[0, 0]), float(steps[1, 0])),
        y_step_px=(float(steps[0, 1]), float(steps[1, 1])),
        covariance=tuple(tuple(float(number) for number in row) for row in in_px),
        scatter_mm=fits.scatter_mm,
        coverage=_coverage(coarse, bin_px, fits, choice),
        scale_is_certain=choice.certain,
        evidence=choice.evidence,
    )


def _origin_on_picture(rows: FloatArray, size_px: tuple[int, int]) -> FloatArray:
    """Shift by whole large squares so that the origin lies near the picture's first corner."""
    near_px = np.array([*(0.1 * np.array(size_px)), 1.0])
    shifted = rows.copy()
    shifted[:, 2] -= 5.0 * np.round(rows @ near_px / 5.0)
    return shifted


def _jacobian(steps: FloatArray, origin: FloatArray) -> FloatArray:
    """Of (origin, x_step, y_step) in the two rows (wave x, wave y, start), shape (6, 6)."""
    jacobian = np.zeros((6, 6))
    for axis in range(2):
        for part in range(3):
            change = np.zeros((2, 3))
            change[axis, part] = 1.0
            # d(M^-1) = -M^-1 dM M^-1, and M origin + start = 0.
            moved = -steps @ change[:, :2] @ steps
            shift = -steps @ (change[:, :2] @ origin + change[:, 2])
            jacobian[:, 3 * axis + part] = [*shift, *moved[:, 0], *moved[:, 1]]
    return jacobian


def _coverage(coarse: GridInk, bin_px: int, fits: _Fits, choice: Choice) -> Coverage:
    """Cells in which the grid is printed, from the few strongest waves."""
    times = coarse.bin_px // bin_px
    combs = []
    for fit in fits.both:
        wave = fit.wave * times
        # Pixel p of the coarse plane lies at times * p + (times - 1) / 2 of the working one.
        start_mm = fit.start_mm + float(fit.wave.sum()) * (times - 1) / 2.0
        fifths = np.array(choice.fifths[: len(fit.amplitudes)]) / 5.0
        strength = np.abs(fit.amplitudes) * (fifths * np.hypot(*wave) <= HIGHEST_CYCLES_PER_PX)
        kept = np.argsort(-strength)[:_COVERAGE_WAVES]
        turned = fit.amplitudes[kept] * np.exp(2j * np.pi * fifths[kept] * start_mm)
        combs.append(Comb(np.outer(fifths[kept], wave), turned))
    px_per_mm = 1.0 / float(np.hypot(*fits.both[0].wave)) / times
    cells, cell_px = seen_cells(coarse.darkness, (combs[0], combs[1]), 5.0 * px_per_mm)
    return Coverage.from_cells(cells, float(cell_px * coarse.bin_px))
