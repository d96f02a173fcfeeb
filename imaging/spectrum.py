"""Waves that run along and across a picture, from its power spectrum."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
FloatPlane = NDArray[np.float32]

MAX_SKEW_DEG = 12.0
_HIGHEST_CYCLES_PER_PX = 0.475
_FEWEST_CYCLES = 3.5
_FLOOR_BLOCK = (9, 32)
_KEPT = 200
_ROWS_TOGETHER = 4
_FEWEST_ROWS = 64
_ON_RAY_BINS = 1.6
_VOTERS = 40
_FAINTEST_SNR = 10.0


@dataclass(frozen=True, slots=True, eq=False)
class Waves:
    """Peaks of the spectrum that belong to one family of lines.

    Attributes
    ----------
    waves : ndarray of float64, shape (N, 2)
        Cycles per pixel along x and y; the larger component is positive.
    power, snr : ndarray of float64, shape (N,)
        Height of the peak, and the same over the median of its neighbourhood.
    """

    waves: FloatArray
    power: FloatArray
    snr: FloatArray

    def where(self, chosen: NDArray[np.bool_]) -> Waves:
        """A part of them."""
        return Waves(self.waves[chosen], self.power[chosen], self.snr[chosen])

    @property
    def lengths(self) -> FloatArray:
        """Cycles per pixel along the wave."""
        return np.asarray(np.hypot(self.waves[:, 0], self.waves[:, 1]))


def waves_of(plane: FloatPlane) -> tuple[Waves, Waves, float]:
    """Waves of the upright lines, of the level lines, and the turn of both.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)

    Returns
    -------
    upright, level : Waves
        Only peaks on one ray through the origin, and on the ray perpendicular to it.
    skew_rad : float
        Clockwise turn of the lines (y down).
    """
    upright = _peaks(plane)
    level = _peaks(np.ascontiguousarray(plane.T))
    level = Waves(level.waves[:, ::-1], level.power, level.snr)
    tolerance = _ON_RAY_BINS / min(plane.shape)
    skew_rad = _vote(upright, level, tolerance)
    upright = upright.where(_off_ray(upright.waves, skew_rad) < tolerance)
    level = level.where(_off_ray(level.waves @ _QUARTER_BACK, skew_rad) < tolerance)
    return upright, level, _refined(upright, level, skew_rad)


# Turns a wave of the level lines onto the ray of the upright ones: (x, y) -> (y, -x).
_QUARTER_BACK = np.array([[0.0, -1.0], [1.0, 0.0]])


def _slab(plane: FloatPlane) -> tuple[FloatPlane, float, float]:
    """Power near the x axis of frequency, under a Hann window, and the size of its bins.

    Rows run over y from -reach to reach, columns over x from 0 up. Nothing steeper is
    wanted, so rows are first taken together.
    """
    import cv2

    together = _ROWS_TOGETHER if plane.shape[0] >= _ROWS_TOGETHER * _FEWEST_ROWS else 1
    rows, columns = plane.shape[0] // together, plane.shape[1]
    whole = plane[: rows * together]
    flat = np.asarray(cv2.resize(whole, (columns, rows), interpolation=cv2.INTER_AREA))
    window = np.outer(_hann(rows), _hann(columns)).astype(np.float32)
    tall, wide = (2 * cv2.getOptimalDFTSize((side + 1) // 2) for side in flat.shape)
    padded = np.zeros((tall, wide), dtype=np.float32)
    mean = float((flat * window).sum() / window.sum())
    padded[:rows, :columns] = (flat - np.float32(mean)) * window
    half = np.fft.rfft(padded, axis=1)[:, : int(_HIGHEST_CYCLES_PER_PX * wide) + 3]
    spectrum = np.fft.fft(half, axis=0)
    steepest = _HIGHEST_CYCLES_PER_PX * np.tan(np.deg2rad(MAX_SKEW_DEG)) * together
    reach = min(int(np.ceil(steepest * tall)) + 3, (tall - 1) // 2)
    near = np.concatenate([spectrum[-reach:], spectrum[: reach + 1]])
    power = np.asarray(near.real**2 + near.imag**2, dtype=np.float32)
    return power, 1.0 / wide, 1.0 / (tall * together)


def _hann(count: int) -> FloatArray:
    return np.asarray(1.0 - np.cos(2.0 * np.pi * (np.arange(count) + 0.5) / count))


def _peaks(plane: FloatPlane) -> Waves:
    """Local maxima within the allowed turn from the x axis, the clearest of them."""
    import cv2

    slab, major_bin, minor_bin = _slab(plane)
    reach = slab.shape[0] // 2
    snr = slab / _floor(slab)
    highest = slab >= cv2.dilate(slab, np.ones((3, 5), dtype=np.uint8))
    major = np.arange(slab.shape[1]) * major_bin
    minor = np.abs(np.arange(-reach, reach + 1)) * minor_bin
    allowed = minor[:, np.newaxis] <= major * np.tan(np.deg2rad(MAX_SKEW_DEG)) + minor_bin
    longest = _FEWEST_CYCLES / plane.shape[1]
    allowed &= ((major > longest) & (major < _HIGHEST_CYCLES_PER_PX))[np.newaxis]
    highest &= allowed & (snr > _FAINTEST_SNR)
    highest[[0, -1]] = False
    highest[:, [0, -1]] = False
    row, column = np.nonzero(highest)
    kept = np.argsort(-snr[row, column])[:_KEPT]
    row, column = row[kept], column[kept]
    fine_row = (
        row - reach + _between(slab[row - 1, column], slab[row, column], slab[row + 1, column])
    )
    fine_column = column + _between(slab[row, column - 1], slab[row, column], slab[row, column + 1])
    waves = np.column_stack([fine_column * major_bin, fine_row * minor_bin])
    return Waves(waves, slab[row, column].astype(np.float64), snr[row, column].astype(np.float64))


def _between(before: FloatPlane, top: FloatPlane, after: FloatPlane) -> FloatArray:
    """Place of a maximum between samples: a parabola through three logarithms."""
    logs = [np.log(np.maximum(part, 1e-20).astype(np.float64)) for part in (before, top, after)]
    curve = logs[0] - 2.0 * logs[1] + logs[2]
    offset = 0.5 * (logs[0] - logs[2]) / np.where(curve < -1e-9, curve, -1e-9)
    return np.asarray(np.clip(offset, -0.5, 0.5))


def _floor(slab: FloatPlane) -> FloatPlane:
    """Smooth median of the neighbourhood, never zero."""
    import cv2

    tall, wide = (min(block, side) for block, side in zip(_FLOOR_BLOCK, slab.shape, strict=True))
    rows, columns = slab.shape[0] // tall, slab.shape[1] // wide
    blocks = slab[: rows * tall, : columns * wide].reshape(rows, tall, columns, wide)
    flat = blocks.transpose(0, 2, 1, 3).reshape(rows, columns, tall * wide)
    middle = np.partition(flat, tall * wide // 2, axis=2)[:, :, tall * wide // 2]
    floor = cv2.resize(middle, slab.shape[::-1], interpolation=cv2.INTER_LINEAR)
    lowest = np.float32(1e-9) * (np.float32(1.0) + slab.max())
    return np.asarray(np.maximum(floor, lowest), dtype=np.float32)


def _off_ray(waves: FloatArray, angle_rad: float) -> FloatArray:
    return np.asarray(np.abs(waves[:, 1] * np.cos(angle_rad) - waves[:, 0] * np.sin(angle_rad)))


def _vote(upright: Waves, level: Waves, tolerance: float) -> float:
    """The turn that most of the clear peaks of both families agree on."""
    both = np.concatenate([upright.waves, level.waves @ _QUARTER_BACK])
    if not len(both):
        return 0.0
    # Cubed, so that the few waves of a page without bold lines outweigh many of words.
    weight = np.log(np.concatenate([upright.snr, level.snr])) ** 3
    voters = both[np.argsort(-weight)[:_VOTERS]]
    angles = np.arctan2(voters[:, 1], voters[:, 0])
    scores = [
        float((weight * np.exp(-0.5 * (_off_ray(both, angle) / (0.6 * tolerance)) ** 2)).sum())
        for angle in angles
    ]
    return float(angles[int(np.argmax(scores))])


def _refined(upright: Waves, level: Waves, skew_rad: float) -> float:
    """Least squares through the peaks on the rays; long waves vectors turn it most."""
    both = np.concatenate([upright.waves, level.waves @ _QUARTER_BACK])
    if not len(both):
        return skew_rad
    weight = np.log(np.concatenate([upright.snr, level.snr])) ** 2
    along = both @ np.array([np.cos(skew_rad), np.sin(skew_rad)])
    off = both @ np.array([-np.sin(skew_rad), np.cos(skew_rad)])
    return skew_rad + float((weight * along * off).sum() / (weight * along**2).sum())
