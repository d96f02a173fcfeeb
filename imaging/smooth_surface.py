"""A smooth surface through values on a lattice of nodes, some unknown, some wrong."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_TUKEY = 4.685
_STIFF_EVERYWHERE = 1e-7


def smoothest(
    values: FloatArray, weights: FloatArray, stiffness: float, rounds: int = 1
) -> tuple[FloatArray, FloatArray]:
    """The surface s with least ``sum w (s - v)^2 + stiffness * sum (second differences)^2``.

    Where nothing is known it goes straight on (a thin plate: Wahba 1990).

    Parameters
    ----------
    values, weights : ndarray of float64, shape (rows, columns)
        The weight is zero where nothing is known.
    stiffness : float
    rounds : int
        Above one, nodes far off the surface are given less weight and at last none (Tukey's
        biweight), each time anew.

    Returns
    -------
    surface, kept : ndarray of float64, shape (rows, columns)
        The surface, and the share of its weight that each node kept.
    """
    known = weights > 0.0
    plate = stiffness * bending(values.shape)
    filled = np.where(known, values, 0.0)
    kept = np.where(known, 1.0, 0.0)
    surface = filled
    for number in range(rounds):
        surface = solved(plate, weights * kept, filled)
        if number < rounds - 1:
            residual = np.abs(filled - surface)
            sigma = max(float(np.median(residual[known])) / 0.6745, 1e-6)
            ratio = residual / (_TUKEY * sigma)
            kept = np.where(known & (ratio < 1.0), (1.0 - ratio**2) ** 2, 0.0)
    return surface, kept


def bending(shape: tuple[int, ...]) -> Any:
    """Sparse matrix B of the sum of squared second differences, ``s B s``."""
    from scipy import sparse

    rows, columns = shape
    second = [_differences(count, 2) for count in shape]
    first = [_differences(count, 1) for count in shape]
    down = sparse.kron(second[0], sparse.identity(columns))
    across = sparse.kron(sparse.identity(rows), second[1])
    twist = np.sqrt(2.0) * sparse.kron(first[0], first[1])
    return down.T @ down + across.T @ across + twist.T @ twist


def solved(plate: Any, weights: FloatArray, values: FloatArray) -> FloatArray:
    """Solve ``(diag(weights) + plate) s = weights * values``."""
    from scipy import sparse
    from scipy.sparse.linalg import splu

    weight = weights.ravel() + _STIFF_EVERYWHERE * float(weights.max())
    matrix = (sparse.diags(weight) + plate).tocsc()
    factors = splu(matrix, permc_spec="MMD_AT_PLUS_A", options={"SymmetricMode": True})
    found = factors.solve((weights * values).ravel())
    return np.asarray(found.reshape(weights.shape), dtype=np.float64)


def _differences(count: int, order: int) -> Any:
    from scipy import sparse

    steps = {1: (-1.0, 1.0), 2: (1.0, -2.0, 1.0)}[order]
    return sparse.diags(steps, list(range(order + 1)), shape=(count - order, count))
