"""Place one family of lines by the phases its waves have in tiles over the picture.

The ink across the lines is a sum of waves at fifths of a square, ``A_m exp(2 pi i m X / 5)``
with X in millimetres. In a tile where the lines lie ``u`` mm off the present map every wave
is turned by ``2 pi m u / 5``: the turns of all waves together give u, and a plane through
the u of all tiles corrects the map.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from imaging.lock_in import ComplexArray, Tiles, lock_in

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

_PASSES = 5
_PRESENT = 0.45
_WHOLE = 0.85
_TUKEY = 4.685
_ON_MAP_MM = 0.15
_INNER = 0.75
_BLOCKS = 5


@dataclass(frozen=True, slots=True, eq=False)
class LineFit:
    """Where one family of lines lies: ``X_mm = wave . (x_px, y_px) + start_mm``.

    Attributes
    ----------
    wave : ndarray of float64, shape (2,)
        Squares per pixel of the plane, along x and y.
    start_mm : float
        X at pixel (0, 0); lines stand at whole numbers of X, bold ones at multiples of 5.
    covariance : ndarray of float64, shape (3, 3)
        Of (wave x, wave y, start_mm).
    offsets_mm : ndarray of float64, shape (tile rows, tile columns)
        How far the lines of each tile lie off this map; NaN where none are seen on it.
    amplitudes : ndarray of complex128, shape (K,)
        Of each harmonic, phase counted from X = 0.
    stray : float
        Share of the tiles with lines that do not lie on the map.
    """

    wave: FloatArray
    start_mm: float
    covariance: FloatArray
    offsets_mm: FloatArray
    amplitudes: ComplexArray
    stray: float


def fit_lines(
    plane: NDArray[np.float32],
    wave: FloatArray,
    fifths: NDArray[np.int_],
    first: int,
    tiles: Tiles,
    sampling_px: float,
) -> LineFit:
    """Correct a first wave by the phases in tiles.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)
    wave : ndarray of float64, shape (2,)
        Squares per pixel, good to a quarter of a square over the plane.
    fifths : ndarray of int, shape (K,)
        Waves to use, in fifths of one square's.
    first : int
        The strongest of them, with which to begin.
    tiles : Tiles
    sampling_px : float
        One sigma of what the pixels' own rounding may move lines by over the whole plane;
        lines in step with the pixels are all moved alike, which no tile can show.
    """
    found = lock_in(plane, np.outer(fifths / 5.0, wave), tiles)
    places = tiles.centres_px().reshape(-1, 2)
    middle = places.mean(axis=0)
    design = np.column_stack([np.ones(len(places)), places - middle])
    correction, state, weights = _settle(found.reshape(len(places), -1), design, fifths, first)
    residual = state.offsets_mm
    corrected = wave + correction[1:]
    start_mm = float(correction[0] - correction[1:] @ middle)
    start_mm, amplitudes = _on_bold_line(state.amplitudes, fifths, start_mm)
    spread = _jackknife(design, residual, weights, tiles.shape)
    rounding_mm = sampling_px * float(np.hypot(*corrected))
    sides = np.array([1.0, plane.shape[1], plane.shape[0]])
    covariance = _to_corner(spread + np.diag((rounding_mm / sides) ** 2), middle)
    lines = state.strength > 0.0
    on_map = np.abs(residual) < _ON_MAP_MM
    stray = float(1.0 - on_map[lines].mean()) if lines.any() else 1.0
    seen = np.where((state.strength > _INNER) & on_map, residual, np.nan)
    return LineFit(corrected, start_mm, covariance, seen.reshape(tiles.shape), amplitudes, stray)


def _settle(
    values: ComplexArray, design: FloatArray, fifths: NDArray[np.int_], first: int
) -> tuple[FloatArray, _State, FloatArray]:
    """Correct the plane until it stays; what is left of the offsets, and the tiles' weights.

    The first passes use the slower waves only, whose turns cannot be a whole one off.
    """
    correction = np.zeros(3)
    for number in range(_PASSES):
        shift_mm = design @ correction
        turned = values * np.exp(-2j * np.pi * np.outer(shift_mm, fifths / 5.0))
        used = fifths <= first if number < 2 else np.ones(len(fifths), dtype=bool)
        state = _offsets(turned, fifths, used, int(np.flatnonzero(fifths == first)[0]))
        step, weights = _robust_plane(design, state.offsets_mm, state.strength)
        correction = correction + step
    left_mm = state.offsets_mm - design @ step
    return correction, replace(state, offsets_mm=left_mm), weights


@dataclass(frozen=True, slots=True, eq=False)
class _State:
    """What one pass made of the tiles."""

    offsets_mm: FloatArray
    strength: FloatArray
    amplitudes: ComplexArray


def _offsets(values: ComplexArray, fifths: NDArray[np.int_], used: BoolArray, first: int) -> _State:
    """Offset of each tile from the turns of its waves, each weighed by how well it tells."""
    strength = np.abs(values[:, first])
    typical = float(np.percentile(strength, 75.0))
    present = strength > _PRESENT * typical
    amplitudes = values[present].mean(axis=0)
    turned = values * np.exp(-1j * np.angle(amplitudes))
    noise = np.median(np.abs(turned[present].imag), axis=0) / 0.6745
    noise = np.maximum(noise, 1e-6 * np.abs(amplitudes).max())
    weight = np.where(used, (fifths * np.abs(amplitudes) / noise) ** 2, 0.0)
    # A wave whose phase is lost in noise in single tiles would only add wrapped turns.
    weight[np.abs(amplitudes) < 2.0 * noise] = 0.0
    weight[first] = max(weight[first], 1e-12)
    turns = np.angle(turned) * 5.0 / (2.0 * np.pi * fifths)
    offsets_mm = turns @ (weight / weight.sum())
    # A tile across the grid's edge sees the edge too, which turns its waves: it counts less.
    share = np.clip((strength / max(typical, 1e-30) - _PRESENT) / (_WHOLE - _PRESENT), 0.0, 1.0)
    return _State(offsets_mm, np.where(present, share, 0.0), amplitudes)


def _robust_plane(
    design: FloatArray, offsets_mm: FloatArray, strength: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """Weighted least squares with Tukey's biweight; strong tiles count more."""
    base = strength**2
    weights = base.copy()
    solution: FloatArray = np.zeros(design.shape[1])
    for _ in range(12):
        scaled = design * weights[:, np.newaxis]
        solved = np.linalg.lstsq(scaled.T @ design, scaled.T @ offsets_mm, rcond=None)
        solution = np.asarray(solved[0], dtype=np.float64)
        residual = offsets_mm - design @ solution
        sigma = float(np.median(np.abs(residual[base > 0.0]))) / 0.6745 if base.any() else 0.0
        ratio = residual / max(_TUKEY * sigma, 1e-9)
        weights = base * np.where(np.abs(ratio) < 1.0, (1.0 - ratio**2) ** 2, 0.0)
    return solution, weights


def _on_bold_line(
    amplitudes: ComplexArray, fifths: NDArray[np.int_], start_mm: float
) -> tuple[float, ComplexArray]:
    """Shift the origin onto a bold line: where all waves are dark together."""
    trial_mm = np.arange(0.0, 5.0, 0.01)
    waves = np.exp(2j * np.pi * np.outer(trial_mm, fifths / 5.0))
    darkness = (waves * amplitudes).real.sum(axis=1)
    best = int(np.argmax(darkness))
    before, after = darkness[best - 1], darkness[(best + 1) % len(darkness)]
    curve = before - 2.0 * darkness[best] + after
    offset = 0.5 * (before - after) / curve if curve < 0.0 else 0.0
    line_mm = trial_mm[best] + 0.01 * offset
    return start_mm - line_mm, amplitudes * np.exp(2j * np.pi * line_mm * fifths / 5.0)


def _jackknife(
    design: FloatArray, residual: FloatArray, weights: FloatArray, shape: tuple[int, int]
) -> FloatArray:
    """Covariance of the plane by leaving out one block of neighbouring tiles at a time.

    Neighbouring tiles share windows, traces and the beat of lines against pixels; whole
    blocks are nearly independent (Efron 1982; the grouped jackknife).
    """
    down, across = (np.minimum(np.arange(n) * _BLOCKS // n, _BLOCKS - 1) for n in shape)
    block = (down[:, np.newaxis] * _BLOCKS + across[np.newaxis]).ravel()
    scaled = design * weights[:, np.newaxis]
    whole, right = scaled.T @ design, scaled.T @ residual
    estimates = []
    for number in np.unique(block[weights > 0.0]):
        out = block == number
        normal = whole - scaled[out].T @ design[out]
        if np.linalg.cond(normal) < 1e12:
            estimates.append(np.linalg.solve(normal, right - scaled[out].T @ residual[out]))
    changes = np.array(estimates) - np.mean(estimates, axis=0)
    return np.asarray((len(estimates) - 1) / len(estimates) * changes.T @ changes)


def _to_corner(covariance: FloatArray, middle: FloatArray) -> FloatArray:
    """From (start at the middle, wave x, wave y) to (wave x, wave y, start at the corner)."""
    change = np.array([[0.0, 1.0, 0.0], [0.0, 0.0, 1.0], [1.0, -middle[0], -middle[1]]])
    return np.asarray(change @ covariance @ change.T)
