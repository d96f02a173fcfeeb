"""A first smooth map from the waves of tiles: how many lines lie between any two places."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend
from imaging.smooth_surface import bending
from imaging.tile_waves import TileWaves

FloatArray = NDArray[np.float64]

_BORDER_NODES = 2
_STIFFNESS = 0.02
_ROUNDS = 5
_TUKEY = 4.685
_LEAST_SIGMA_CYCLES = 0.01


def field_of(waves: TileWaves) -> Bend:
    """Add the waves up: the places of a Bend count cycles, in both families from zero.

    Waves and their place count are held together in the sense of least squares; a tile
    that followed another wave than its neighbours is given up.
    """
    first_px = waves.centres_px[0, 0] - _BORDER_NODES * waves.step_px
    both = [_added_up(waves, family) for family in (0, 1)]
    errors = np.full(both[0].shape, np.nan)
    return Bend((float(first_px[0]), float(first_px[1])), waves.step_px, both[0], both[1], errors)


def _added_up(waves: TileWaves, family: int) -> FloatArray:
    from scipy import sparse
    from scipy.sparse.linalg import splu

    border = ((_BORDER_NODES, _BORDER_NODES), (_BORDER_NODES, _BORDER_NODES), (0, 0))
    step = np.pad(waves.waves[:, :, family] * waves.step_px, border, constant_values=np.nan)
    shape = step.shape[:2]
    number = np.arange(shape[0] * shape[1]).reshape(shape)
    start, end, cycles = [], [], []
    for axis, (before, after) in enumerate((_beside(1), _beside(0))):
        mean = 0.5 * (step[before][..., axis] + step[after][..., axis])
        known = np.isfinite(mean)
        start.append(number[before][known])
        end.append(number[after][known])
        cycles.append(mean[known])
    starts, ends, wanted = (np.concatenate(part) for part in (start, end, cycles))
    count = len(wanted)
    edges = sparse.csr_matrix(
        (
            np.repeat([1.0, -1.0], count),
            (np.tile(np.arange(count), 2), np.concatenate([ends, starts])),
        ),
        shape=(count, number.size),
    )
    plate = _STIFFNESS * bending(shape) + 1e-9 * sparse.identity(number.size)
    weights = np.ones(count)
    found = np.zeros(number.size)
    for _ in range(_ROUNDS):
        matrix = (edges.T @ sparse.diags(weights) @ edges + plate).tocsc()
        factors = splu(matrix, permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True})
        found = factors.solve(edges.T @ (weights * wanted))
        residual = np.abs(edges @ found - wanted)
        sigma = max(float(np.median(residual)) / 0.6745, _LEAST_SIGMA_CYCLES)
        ratio = residual / (_TUKEY * sigma)
        weights = np.where(ratio < 1.0, (1.0 - ratio**2) ** 2, 0.0) + 1e-6
    return np.asarray(found.reshape(shape), dtype=np.float64)


def _beside(axis: int) -> tuple[tuple[slice, slice], tuple[slice, slice]]:
    """Slices of all nodes that have a next one along an axis, and of those next ones."""
    everything, before, after = slice(None), slice(None, -1), slice(1, None)
    if axis == 1:
        return (everything, before), (everything, after)
    return (before, everything), (after, everything)
