"""How far a page is from flat: what of the tiles' offsets a plane does not explain."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_SPAN_MM = (5.0, 50.0)
_SPANS = 1500
_DEGREE = 3
_FEWEST_TILES = 40
_SHARED_NOISE = 3.0
_HIGH_NOISE = 3.0
_ROUNDS = 6
_TUKEY = 4.685


@dataclass(frozen=True, slots=True)
class Bend:
    """What bending of the page does to spans of 5 to 50 mm.

    Attributes
    ----------
    span_mm : float
        95th percentile of the error it gives them.
    noise_mm : float
        What noise alone might make of that figure in one page of twenty.
    scatter_mm : float
        The bend as one sigma of one point; zero unless it is clearly no noise.
    """

    span_mm: float
    noise_mm: float
    scatter_mm: float


def bend_of(offsets_mm: FloatArray, step_mm: float) -> Bend:
    """Measure the bending that a flat map leaves.

    A cubic surface is laid through the tiles; what spans on it would have from noise alone
    is taken off, and only the rest counts.

    Parameters
    ----------
    offsets_mm : ndarray of float64, shape (tile rows, tile columns)
        How far the lines of each tile lie off the map; NaN where none are seen.
    step_mm : float
        Distance of neighbouring tiles.
    """
    rows, columns = np.nonzero(np.isfinite(offsets_mm))
    if len(rows) < _FEWEST_TILES:
        return Bend(0.0, 0.0, 0.0)
    places = np.column_stack([columns, rows]).astype(np.float64)
    centre, half = places.mean(axis=0), np.maximum(np.ptp(places, axis=0) / 2.0, 1.0)
    design = _surface((places - centre) / half)
    values = offsets_mm[rows, columns]
    surface, weights, sigma_mm = _robust_fit(design, values)
    start, end = _spans(places, step_mm)
    change = design[end] - design[start]
    normal = (design * weights[:, np.newaxis]).T @ design
    noise = np.einsum("ni,ij,nj->n", change, np.linalg.pinv(normal), change) * sigma_mm**2
    # Half overlapping Hann windows share what makes 16 / 9 of the variance of single ones
    # in a mean (their correlation is 1/6 each way); traces reach over more than one.
    expected = _SHARED_NOISE * float(np.mean(noise))
    excess = max(float(np.mean((change @ surface) ** 2)) - expected, 0.0)
    scatter_mm = np.sqrt(excess / 2.0) if excess > 4.0 * expected else 0.0
    noise_mm = 1.96 * np.sqrt(_HIGH_NOISE * expected)
    return Bend(1.96 * float(np.sqrt(excess)), float(noise_mm), float(scatter_mm))


def _surface(places: FloatArray) -> FloatArray:
    x, y = places.T
    powers = [(i, j) for i in range(_DEGREE + 1) for j in range(_DEGREE + 1 - i)]
    return np.column_stack([x**i * y**j for i, j in powers])


def _robust_fit(design: FloatArray, values: FloatArray) -> tuple[FloatArray, FloatArray, float]:
    """Least squares with Tukey's biweight: tiles that hold much of a trace fall out.

    Returns the coefficients, the weights and one sigma of the weighted residuals.
    """
    weights = np.ones(len(values))
    surface: FloatArray = np.zeros(design.shape[1])
    residual = values
    for _ in range(_ROUNDS):
        root = np.sqrt(weights)
        solved = np.linalg.lstsq(design * root[:, None], values * root, rcond=1e-8)
        surface = np.asarray(solved[0], dtype=np.float64)
        residual = values - design @ surface
        sigma = max(float(np.median(np.abs(residual))) / 0.6745, 1e-9)
        ratio = residual / (_TUKEY * sigma)
        weights = np.where(np.abs(ratio) < 1.0, (1.0 - ratio**2) ** 2, 0.0)
    freedom = max(float(weights.sum()) - design.shape[1], 1.0)
    return surface, weights, float(np.sqrt((weights * residual**2).sum() / freedom))


def _spans(places: FloatArray, step_mm: float) -> tuple[NDArray[np.int_], NDArray[np.int_]]:
    """Pairs of tiles as far apart as calipers usually are."""
    rng = np.random.default_rng(0)
    start, end = rng.integers(0, len(places), (2, 8 * _SPANS))
    apart_mm = np.hypot(*(places[end] - places[start]).T) * step_mm
    fits = (apart_mm >= _SPAN_MM[0]) & (apart_mm <= _SPAN_MM[1])
    return start[fits][:_SPANS], end[fits][:_SPANS]
