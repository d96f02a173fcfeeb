"""The last correction of a bent map: all waves of the lines, in tiles of one centimetre."""

from __future__ import annotations

import logging
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.flat_view import FlatView
from imaging.lock_in import ComplexArray
from imaging.sheet_offsets import Lattice, offsets_of
from imaging.sheet_scale import SheetScale
from imaging.smooth_surface import smoothest

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int_]

_log = logging.getLogger(__name__)

_TILE_MM = 10.0
_STIFFNESS = 0.1
_ROUNDS = 4
_SEEN = 0.22
_NEVER_TURNED = 5
_IN_STEP = 0.6
_OFF_SURFACE_MM = 0.12
_FEWEST_TILES = 20
_MOST_MISCOUNTED = 0.4
_BOLD_WINDOW = 3
_ERROR_WINDOW = 5
_ERROR_SHARE = 0.75
_LEAST_ERROR_MM = 0.005


@dataclass(frozen=True, slots=True, eq=False)
class Dense:
    """What the tiles of a view say.

    Attributes
    ----------
    tiles : Lattice
    surfaces : two ndarrays of float64, shape (rows, columns)
        True place less the map's along x and y, in mm; smooth, and going on beyond the region.
    errors_mm : ndarray of float64, shape (rows, columns)
        One sigma of the surfaces, along one axis.
    covered : ndarray of bool, shape (rows, columns)
        Both families of lines are there, and they agree with the surfaces.
    outside_mm : ndarray of float64, shape (rows, columns)
        Distance to the nearest covered tile.
    """

    tiles: Lattice
    surfaces: tuple[FloatArray, FloatArray]
    errors_mm: FloatArray
    covered: BoolArray
    outside_mm: FloatArray


def measure_dense(
    view: FlatView, fifths: IntArray, scale: SheetScale, *, fine: bool
) -> Dense | None:
    """Measure both families; None where they cannot be counted. `fine` takes four times as long."""
    import cv2

    px_per_mm = float(view.px_per_unit.mean())
    side_px = round(_TILE_MM * px_per_mm)
    tiles = Lattice.over(view.plane.shape, side_px, fine=fine)
    both = []
    for axis in (0, 1):
        family = _family(view, side_px, tiles, axis, fifths, scale)
        if family is None:
            return None
        both.append(family)
    seen = both[0].seen & both[1].seen
    surfaces, errors, good = [], [], seen
    stiffness = _STIFFNESS * (16.0 if fine else 1.0)
    for family in both:
        known = seen & np.isfinite(family.offsets_mm)
        offsets = np.where(known, family.offsets_mm, 0.0)
        surface, kept = smoothest(offsets, known * family.weight, stiffness, _ROUNDS)
        residual = np.abs(offsets - surface)
        good = good & (~known | (residual < _OFF_SURFACE_MM))
        errors.append(_errors(residual, kept, known))
        surfaces.append(surface)
    # Without bold lines a count lost at the edge would go unseen: a little less is covered.
    covered = _largest(good) if scale.certain else _eroded(_largest(good))
    if int(covered.sum()) < _FEWEST_TILES:
        return None
    away = cv2.distanceTransform((~covered).astype(np.uint8), cv2.DIST_L2, 5)
    return Dense(
        tiles,
        (surfaces[0], surfaces[1]),
        np.maximum(errors[0], errors[1]),
        covered,
        np.asarray(away, dtype=np.float64) * tiles.step_px / px_per_mm,
    )


@dataclass(frozen=True, slots=True, eq=False)
class _Family:
    offsets_mm: FloatArray
    weight: FloatArray
    seen: BoolArray


def _family(
    view: FlatView,
    side_px: int,
    tiles: Lattice,
    axis: int,
    fifths: IntArray,
    scale: SheetScale,
) -> _Family | None:
    first = int(np.flatnonzero(fifths == scale.first[axis])[0])
    found = offsets_of(view, side_px, tiles, axis, fifths / 5.0, first)
    region = np.isfinite(found.offsets)
    if int(region.sum()) < _FEWEST_TILES:
        return None
    base_mm = np.where(region, found.offsets, 0.0)
    values = found.values * np.exp(-2j * np.pi * base_mm[..., np.newaxis] * fifths / 5.0)
    mean = values[region].mean(axis=0)
    line_mm = _bold_line_mm(mean, fifths)
    to_line = np.exp(2j * np.pi * line_mm * fifths / 5.0)
    values, amplitudes = values * to_line, mean * to_line
    turned = values * np.exp(-1j * np.angle(amplitudes))
    weight = _weights(turned[region], amplitudes, fifths, first)
    extra_mm = (np.angle(turned) * 5.0 / (2.0 * np.pi * fifths)) @ weight
    power = float((np.abs(amplitudes) ** 2).sum())
    real = (turned * np.abs(amplitudes)).real.sum(axis=2)
    share = real / power
    in_step = real / np.maximum((np.abs(values) * np.abs(amplitudes)).sum(axis=2), 1e-30)
    seen = region & (share > _SEEN) & (in_step > _IN_STEP)
    if scale.certain:
        miscounted = _miscounted(turned, amplitudes, fifths, seen)
        share_wrong = float(miscounted[seen].mean()) if seen.any() else 1.0
        _log.debug("axis %d: miscounted %.3f", axis, share_wrong)
        if share_wrong > _MOST_MISCOUNTED:
            return None
        seen = seen & ~miscounted
    offsets_mm = np.where(region, base_mm + extra_mm - line_mm, np.nan)
    return _Family(offsets_mm, np.clip(share, 0.05, 1.0) ** 2, seen)


def _weights(
    turned: ComplexArray, amplitudes: ComplexArray, fifths: IntArray, first: int
) -> FloatArray:
    """How much each wave tells of a place, summing to one; waves lost in noise tell nothing."""
    noise = np.median(np.abs(turned.imag), axis=0) / 0.6745
    noise = np.maximum(noise, 1e-6 * np.abs(amplitudes).max())
    weight = (fifths * np.abs(amplitudes) / noise) ** 2
    weight[np.abs(amplitudes) < 2.0 * noise] = 0.0
    weight[first] = max(weight[first], 1e-12)
    return np.asarray(weight / weight.sum())


def _bold_line_mm(amplitudes: ComplexArray, fifths: IntArray) -> float:
    """Where a bold line's middle lies: there every wave is at its top, or blurred over, bottom.

    Defocus turns the finer waves round (its transfer is negative beyond its first zero), so
    the coarse ones choose the line and the fine ones, either way round, only place it.
    """
    coarse = fifths <= max(_NEVER_TURNED, int(fifths[0]))
    trial_mm = np.arange(0.0, 5.0, 0.01)
    waves = np.exp(2j * np.pi * np.outer(trial_mm, fifths[coarse] / 5.0))
    line_mm = float(trial_mm[int(np.argmax((waves * amplitudes[coarse]).real.sum(axis=1)))])
    turned = amplitudes * np.exp(2j * np.pi * line_mm * fifths / 5.0)
    upright = np.where(turned.real < 0.0, -turned, turned)
    off_mm = np.angle(upright) * 5.0 / (2.0 * np.pi * fifths)
    weight = (fifths * np.abs(amplitudes)) ** 2
    return line_mm - float((weight * off_mm).sum() / weight.sum())


def _miscounted(
    turned: ComplexArray, amplitudes: ComplexArray, fifths: IntArray, seen: BoolArray
) -> BoolArray:
    """Tiles around which the bold lines stand at another thin line than on the whole sheet."""
    import cv2

    bold = fifths % 5 != 0
    part = np.where(seen[..., np.newaxis], turned[..., bold] * np.abs(amplitudes[bold]), 0.0)
    scores = []
    for line in range(5):
        rotate = np.exp(-2j * np.pi * line * fifths[bold] / 5.0)
        score = (part * rotate).real.sum(axis=2)
        scores.append(cv2.blur(score, (_BOLD_WINDOW, _BOLD_WINDOW), borderType=cv2.BORDER_CONSTANT))
    return np.asarray(np.argmax(np.stack(scores), axis=0) != 0)


def _errors(residual: FloatArray, kept: FloatArray, known: BoolArray) -> FloatArray:
    """One sigma of the surface from how the tiles around scatter about it."""
    import cv2

    def around(values: FloatArray) -> FloatArray:
        return np.asarray(
            cv2.blur(values, (_ERROR_WINDOW, _ERROR_WINDOW), borderType=cv2.BORDER_CONSTANT)
        )

    weight = np.where(known, kept + 0.02, 0.0)
    total = around(weight)
    squares = around(weight * np.minimum(residual, 0.5) ** 2)
    typical = float((weight * np.minimum(residual, 0.5) ** 2).sum() / max(weight.sum(), 1e-12))
    # A few tiles alone tell little: mixed with what the whole sheet has.
    variance = (squares + 0.05 * typical) / (total + 0.05)
    return np.hypot(_ERROR_SHARE * np.sqrt(variance), _LEAST_ERROR_MM)


def _eroded(cells: BoolArray) -> BoolArray:
    import cv2

    return np.asarray(cv2.erode(cells.astype(np.uint8), np.ones((3, 3), dtype=np.uint8)) > 0)


def _largest(good: BoolArray) -> BoolArray:
    """The largest region in one piece, small holes closed."""
    import cv2

    kernel = cv2.getStructuringElement(cv2.MORPH_CROSS, (3, 3))
    wide = cv2.copyMakeBorder(good.astype(np.uint8), 3, 3, 3, 3, cv2.BORDER_CONSTANT)
    opened = cv2.morphologyEx(wide, cv2.MORPH_OPEN, kernel)
    count, labels, stats, _ = cv2.connectedComponentsWithStats(opened, connectivity=4)
    if count < 2:
        return np.zeros(good.shape, dtype=bool)
    largest = 1 + int(np.argmax(stats[1:, cv2.CC_STAT_AREA]))
    piece = (labels == largest).astype(np.uint8)
    closed = cv2.morphologyEx(piece, cv2.MORPH_CLOSE, np.ones((3, 3), dtype=np.uint8))
    return np.asarray(closed[3:-3, 3:-3] > 0)
