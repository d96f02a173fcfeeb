"""Two families of lines followed from tile to tile: the wave of each, where it is seen.

A photographed sheet has other waves in every place, but they change little from one tile to
the next. The clearest pair of waves that would make squares is looked for first; from there
each tile is searched near what its neighbours lead one to expect.
"""

from __future__ import annotations

import heapq
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
FloatPlane = NDArray[np.float32]
IntArray = NDArray[np.int64]

TILE_PX = 96
STEP_PX = 32
_LEAN_DEG = 38.0
_LOWEST_CYCLES = 3.5
_HIGHEST_CYCLES_PER_PX = 0.45
_KEPT = 4
_MIRRORED = 28
_CLEAR_SNR = 14.0
_FOLLOWED_SNR = 7.0
_SQUARE = 0.35
_RIGHT_ANGLE_DEG = 25.0
_CHANGE = 0.09
_FEWEST_TILES = 24
_SEEDS = 300
_ALIKE = 0.12
_MOST_SEEDS = 6
_SEED_EVERY = 2


@dataclass(frozen=True, slots=True, eq=False)
class TileWaves:
    """The waves of both families where they were followed.

    Attributes
    ----------
    centres_px : ndarray of float64, shape (rows, columns, 2)
    waves : ndarray of float64, shape (rows, columns, 2, 2)
        Cycles per pixel; third index the family (across upright lines, across level lines),
        last x and y. NaN where not followed.
    snr : ndarray of float64, shape (rows, columns, 2)
    """

    centres_px: FloatArray
    waves: FloatArray
    snr: FloatArray
    step_px: float = float(STEP_PX)


@dataclass(frozen=True, slots=True, eq=False)
class _Spectra:
    """Power over its neighbourhood's median, shape (rows, columns, bins, half bins)."""

    power: FloatPlane
    snr: FloatPlane
    bin_size: float


def follow_waves(plane: FloatPlane) -> TileWaves | None:
    """Follow two families of lines over a plane of darkness; None where there are none."""
    if min(plane.shape) < TILE_PX + 2 * STEP_PX:
        return None
    spectra = _spectra(plane)
    peaks = [_peaks(spectra, family) for family in (0, 1)]
    best: TileWaves | None = None
    best_count = _FEWEST_TILES - 1
    shape = spectra.snr.shape[:2]
    tried = np.zeros(shape, dtype=bool)
    grown = 0
    for row, column, pair in _seeds(peaks):
        if tried[row, column]:
            continue
        waves, snr = _grow(spectra, (row, column), pair)
        followed = np.isfinite(waves[:, :, 0, 0])
        tried |= followed
        if int(followed.sum()) > best_count:
            best_count = int(followed.sum())
            best = TileWaves(_centres(shape), waves, snr)
        grown += 1
        if grown >= _MOST_SEEDS or best_count > 0.5 * followed.size:
            break
    return best


def _centres(shape: tuple[int, int]) -> FloatArray:
    y_px, x_px = (np.arange(count) * STEP_PX + (TILE_PX - 1) / 2.0 for count in shape)
    return np.stack(np.meshgrid(x_px, y_px), axis=-1)


def _spectra(plane: FloatPlane) -> _Spectra:
    import cv2
    import scipy.fft
    from numpy.lib.stride_tricks import sliding_window_view

    window = cv2.createHanningWindow((TILE_PX, TILE_PX), cv2.CV_32F)
    size = TILE_PX
    tiles = sliding_window_view(plane, (TILE_PX, TILE_PX))[::STEP_PX, ::STEP_PX]
    rows, columns = tiles.shape[:2]
    power = np.empty((rows, columns, size, size // 2 + 1 + _MIRRORED), dtype=np.float32)
    back = (-np.arange(size)) % size
    snr = np.empty_like(power)
    for row in range(rows):
        some = tiles[row].astype(np.float32)
        some = (some - some.mean(axis=(1, 2), keepdims=True)) * window
        found = scipy.fft.rfft2(some, axes=(1, 2))
        half = (found.real**2 + found.imag**2).astype(np.float32)
        # P(-x, y) = P(x, -y) for a real picture: waves near the y axis are seen whole.
        power[row, :, :, _MIRRORED:] = half
        power[row, :, :, :_MIRRORED] = half[:, back, _MIRRORED:0:-1]
        for column in range(columns):
            snr[row, column] = power[row, column] / _floor(power[row, column])
    return _Spectra(power, snr, 1.0 / size)


def _floor(power: FloatPlane) -> FloatPlane:
    """Median of blocks, smoothed: what the tile holds besides waves."""
    import cv2

    tall, wide = 8, 8
    rows, columns = power.shape[0] // tall, power.shape[1] // wide
    blocks = power[: rows * tall, : columns * wide].reshape(rows, tall, columns, wide)
    flat = blocks.transpose(0, 2, 1, 3).reshape(rows, columns, -1)
    middle = np.partition(flat, flat.shape[2] // 2, axis=2)[:, :, flat.shape[2] // 2]
    grown = cv2.resize(middle, power.shape[::-1], interpolation=cv2.INTER_LINEAR)
    least = np.float32(1e-9) + np.float32(1e-7) * power.max()
    return np.asarray(np.maximum(np.asarray(grown), least), dtype=np.float32)


def _frequencies(spectra: _Spectra) -> tuple[FloatArray, FloatArray]:
    size = spectra.snr.shape[2]
    y = np.fft.fftfreq(size)[:, np.newaxis]
    x = ((np.arange(spectra.snr.shape[3]) - _MIRRORED) / size)[np.newaxis]
    return np.asarray(x, dtype=np.float64), np.asarray(y, dtype=np.float64)


def _peaks(spectra: _Spectra, family: int) -> tuple[FloatArray, FloatArray]:
    """The clearest waves of a family in each tile: waves (rows, columns, K, 2) and snr."""
    x, y = _frequencies(spectra)
    along, across = (x, np.abs(y)) if family == 0 else (y, np.abs(x))
    length = np.hypot(x, y)
    allowed = across <= np.tan(np.deg2rad(_LEAN_DEG)) * along
    allowed &= (length > _LOWEST_CYCLES / TILE_PX) & (length < _HIGHEST_CYCLES_PER_PX)
    rows, columns = spectra.snr.shape[:2]
    waves = np.full((rows, columns, _KEPT, 2), np.nan)
    snr = np.zeros((rows, columns, _KEPT))
    for row in range(0, rows, _SEED_EVERY):
        for column in range(0, columns, _SEED_EVERY):
            masked = np.where(allowed, spectra.snr[row, column], 0.0)
            for kept in range(_KEPT):
                at = np.unravel_index(int(np.argmax(masked)), masked.shape)
                clear = float(spectra.snr[row, column][at])
                if masked[at] <= 0.0 or clear < _CLEAR_SNR:
                    break
                waves[row, column, kept] = _fine(spectra, row, column, (int(at[0]), int(at[1])))
                snr[row, column, kept] = clear
                near = _near(masked.shape, (int(at[0]), int(at[1])), 3)
                masked[near] = 0.0
    return waves, snr


def _near(shape: tuple[int, ...], at: tuple[int, int], reach: int) -> tuple[IntArray, IntArray]:
    rows = (np.arange(at[0] - reach, at[0] + reach + 1)) % shape[0]
    columns = np.arange(max(at[1] - reach, 0), min(at[1] + reach + 1, shape[1]))
    down, across = np.meshgrid(rows, columns, indexing="ij")
    return down, across


def _fine(spectra: _Spectra, row: int, column: int, at: tuple[int, int]) -> FloatArray:
    """A peak placed between the bins; the larger component is positive."""
    power = spectra.power[row, column]
    size = power.shape[0]
    down, across = at
    column_logs = np.log(
        np.maximum(power[[(down - 1) % size, down, (down + 1) % size], across], 1e-20)
    )
    last = power.shape[1] - 1
    beside = [max(across - 1, 0), across, min(across + 1, last)]
    row_logs = np.log(np.maximum(power[down, beside], 1e-20))
    y = down + _between(column_logs)
    x = across - _MIRRORED + _between(row_logs)
    if y > size / 2:
        y -= size
    wave = np.array([x, y]) / size
    return np.asarray(wave if wave[np.argmax(np.abs(wave))] > 0 else -wave)


def _between(logs: FloatPlane) -> float:
    curve = float(logs[0] - 2.0 * logs[1] + logs[2])
    return float(np.clip(0.5 * (logs[0] - logs[2]) / curve, -0.5, 0.5)) if curve < -1e-9 else 0.0


def _seeds(
    peaks: list[tuple[FloatArray, FloatArray]],
) -> list[tuple[int, int, FloatArray]]:
    """Pairs of waves that would make squares, those that most tiles have first."""
    (upright, clear_u), (level, clear_l) = peaks
    a, b = upright[:, :, :, np.newaxis], level[:, :, np.newaxis]
    lengths = np.linalg.norm(a, axis=-1), np.linalg.norm(b, axis=-1)
    with np.errstate(invalid="ignore", divide="ignore"):
        cosine = np.abs((a * b).sum(axis=-1)) / (lengths[0] * lengths[1])
        fits = np.abs(np.log(lengths[0] / lengths[1])) < _SQUARE
        fits &= cosine < np.sin(np.deg2rad(_RIGHT_ANGLE_DEG))
    row, column, i, j = np.nonzero(fits)
    pairs = np.stack([upright[row, column, i], level[row, column, j]], axis=1)
    clear = np.minimum(clear_u[row, column, i], clear_l[row, column, j])
    order = np.argsort(-clear)[:_SEEDS]
    tile = row * fits.shape[1] + column
    votes = []
    for index in order:
        size = np.linalg.norm(pairs[index], axis=-1)
        apart = np.linalg.norm(pairs - pairs[index], axis=-1)
        near = (apart < _ALIKE * size).all(axis=1)
        votes.append(len(np.unique(tile[near])))
    ranked = order[np.argsort(-np.array(votes), kind="stable")] if len(order) else order
    return [(int(row[k]), int(column[k]), pairs[k]) for k in ranked]


def _grow(
    spectra: _Spectra, seed: tuple[int, int], pair: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Follow a pair of waves outwards, from the clearest tile first."""
    rows, columns = spectra.snr.shape[:2]
    waves = np.full((rows, columns, 2, 2), np.nan)
    snr = np.zeros((rows, columns, 2))
    queue: list[tuple[float, int, int]] = [(0.0, *seed)]
    while queue:
        _, row, column = heapq.heappop(queue)
        if np.isfinite(waves[row, column, 0, 0]):
            continue
        expected = pair if (row, column) == seed else _expected(waves, row, column)
        found = [_search(spectra, row, column, expected[family]) for family in (0, 1)]
        clear = min(clear for _, clear in found)
        if clear < _FOLLOWED_SNR:
            continue
        waves[row, column] = [wave for wave, _ in found]
        snr[row, column] = [clear for _, clear in found]
        for down, across in ((0, 1), (0, -1), (1, 0), (-1, 0)):
            beside = (row + down, column + across)
            inside = 0 <= beside[0] < rows and 0 <= beside[1] < columns
            if inside and not np.isfinite(waves[(*beside, 0, 0)]):
                heapq.heappush(queue, (-clear, *beside))
    return waves, snr


def _expected(waves: FloatArray, row: int, column: int) -> FloatArray:
    """Mean of what the followed neighbours have."""
    part = waves[max(row - 1, 0) : row + 2, max(column - 1, 0) : column + 2].reshape(-1, 2, 2)
    return np.asarray(part[np.isfinite(part[:, 0, 0])].mean(axis=0))


def _search(
    spectra: _Spectra, row: int, column: int, expected: FloatArray
) -> tuple[FloatArray, float]:
    """The highest wave near an expected one, and how clear it is."""
    snr = spectra.power[row, column]
    size = snr.shape[0]
    wave = expected
    reach = max(3, 1 + int(np.ceil(_CHANGE * np.hypot(*wave) * size)))
    at = (round(float(wave[1] * size)) % size, _MIRRORED + round(float(wave[0] * size)))
    down, across = _near(snr.shape, at, reach)
    if not down.size:
        return expected, 0.0
    part = snr[down, across]
    top = np.unravel_index(int(np.argmax(part)), part.shape)
    place = (int(down[top]), int(across[top]))
    on_edge = top[0] in (0, part.shape[0] - 1) or top[1] in (0, part.shape[1] - 1)
    if on_edge:
        return expected, 0.0
    found = _fine(spectra, row, column, place)
    if found @ expected < 0:
        found = -found
    return found, float(spectra.snr[row, column][place])
