"""Where the grid of a sheet that does not lie flat runs: sheet_mm on a lattice of nodes.

Between the nodes the place is interpolated by cubic convolution (Keys 1981), which has a
continuous slope and keeps a parabola as it is.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Vector = tuple[float, float]
FloatArray = NDArray[np.float64]

UNIT_MM = 1e-4
"""Nodes are kept in whole tenths of a micrometre, so that a file holds them exactly."""

_NEWTON_STEPS = 40
_SETTLED_PX = 1e-7
_LONGEST_STEP_NODES = 4.0


@dataclass(frozen=True, slots=True, eq=False)
class Bend:
    """Places on the grid at the nodes of a square lattice on the picture.

    Attributes
    ----------
    first_px : (float, float)
        The first node, in picture_px.
    pitch_px : float
        Distance of neighbouring nodes along x and y.
    x_mm, y_mm : ndarray of float64, shape (rows, columns)
        sheet_mm at each node; at least two rows and two columns, all finite.
    standard_error_mm : ndarray of float64, shape (rows, columns)
        One sigma of a point's place along one axis; NaN where the place is only a guess,
        beyond where the grid was followed.
    """

    first_px: Vector
    pitch_px: float
    x_mm: FloatArray
    y_mm: FloatArray
    standard_error_mm: FloatArray

    def __post_init__(self) -> None:
        shape = np.shape(self.x_mm)
        if len(shape) != 2 or min(shape) < 2:
            raise ValueError("a Bend has at least two rows and two columns of nodes")
        if np.shape(self.y_mm) != shape or np.shape(self.standard_error_mm) != shape:
            raise ValueError("the arrays of a Bend have one shape")
        if not (np.isfinite(self.x_mm).all() and np.isfinite(self.y_mm).all()):
            raise ValueError("the places of a Bend are finite numbers")
        if not (np.isfinite([*self.first_px, self.pitch_px]).all() and self.pitch_px > 0.0):
            raise ValueError("the nodes of a Bend lie at finite places, a step apart")
        for name in ("x_mm", "y_mm", "standard_error_mm"):
            kept = np.rint(np.asarray(getattr(self, name), dtype=np.float64) / UNIT_MM) * UNIT_MM
            kept.setflags(write=False)
            object.__setattr__(self, name, kept)

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Bend):
            return NotImplemented
        return (
            self.first_px == other.first_px
            and self.pitch_px == other.pitch_px
            and np.array_equal(self.x_mm, other.x_mm)
            and np.array_equal(self.y_mm, other.y_mm)
            and np.array_equal(self.standard_error_mm, other.standard_error_mm, equal_nan=True)
        )

    def __hash__(self) -> int:
        return hash((self.first_px, self.pitch_px, self.x_mm.tobytes(), self.y_mm.tobytes()))

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """Picture points to sheet points, (N, 2) -> (N, 2); straight on beyond the nodes."""
        place, slope_px = self._place(points_px)
        return np.column_stack(
            [_cubic(nodes, place) + _beyond(nodes, place, slope_px) for nodes in self._both]
        )

    def to_px(self, points_mm: FloatArray, guess_px: FloatArray) -> FloatArray:
        """The inverse by Newton's method from a guess, (N, 2) -> (N, 2); NaN if none is found."""
        found_px = np.array(guess_px, dtype=np.float64)
        open_ones = np.flatnonzero(np.isfinite(found_px).all(axis=1))
        settled = np.zeros(len(found_px), dtype=bool)
        limit_px = _LONGEST_STEP_NODES * self.pitch_px
        for _ in range(_NEWTON_STEPS):
            here_px = found_px[open_ones]
            miss_mm = self.to_mm(here_px) - points_mm[open_ones]
            slopes = self.mm_per_px(here_px)
            usable = np.abs(np.linalg.det(slopes)) > 1e-9
            open_ones, here_px, miss_mm = open_ones[usable], here_px[usable], miss_mm[usable]
            change_px = np.linalg.solve(slopes[usable], miss_mm[:, :, np.newaxis])[:, :, 0]
            length_px = np.hypot(change_px[:, 0], change_px[:, 1])
            change_px *= np.minimum(1.0, limit_px / np.maximum(length_px, 1e-12))[:, np.newaxis]
            found_px[open_ones] = here_px - change_px
            done = length_px < _SETTLED_PX
            settled[open_ones[done]] = True
            open_ones = open_ones[~done]
            if not open_ones.size:
                break
        found_px[~settled] = np.nan
        return found_px

    def mm_per_px(self, points_px: FloatArray) -> FloatArray:
        """d(sheet_mm) / d(picture_px), (N, 2) -> (N, 2, 2); row: x_mm, y_mm; column: x, y."""
        place, _ = self._place(points_px)
        columns = [
            np.column_stack([_cubic(nodes, place, along) for nodes in self._both])
            for along in (0, 1)
        ]
        return np.stack(columns, axis=2) / self.pitch_px

    def errors_mm(self, points_px: FloatArray) -> FloatArray:
        """One sigma along one axis at each point, (N, 2) -> (N,); NaN where it is not known."""
        place, _ = self._place(points_px)
        rows, columns = self.x_mm.shape
        base = np.minimum(np.floor(place).astype(np.int64), (columns - 2, rows - 2))
        share = place - base
        errors = np.zeros(len(place))
        for down in (0, 1):
            for across in (0, 1):
                weight = np.abs(1 - across - share[:, 0]) * np.abs(1 - down - share[:, 1])
                node = self.standard_error_mm[base[:, 1] + down, base[:, 0] + across]
                errors += np.where(weight > 0.0, weight * node, 0.0)
        beyond = (np.abs(self._unlimited(points_px) - place) > 1.0).any(axis=1)
        errors[beyond] = np.nan
        return errors

    def turned(self) -> Bend:
        """The same nodes after one clockwise quarter turn of the sheet: (x, y) -> (-y, x)."""
        return Bend(self.first_px, self.pitch_px, -self.y_mm, self.x_mm, self.standard_error_mm)

    @property
    def _both(self) -> tuple[FloatArray, FloatArray]:
        return self.x_mm, self.y_mm

    def _unlimited(self, points_px: FloatArray) -> FloatArray:
        return np.asarray((points_px - self.first_px) / self.pitch_px)

    def _place(self, points_px: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Columns and rows of nodes, limited to the lattice, and how far beyond it they were."""
        wanted = self._unlimited(points_px)
        rows, columns = self.x_mm.shape
        place = np.clip(np.nan_to_num(wanted), 0.0, (columns - 1.0, rows - 1.0))
        return place, wanted - place


def _cubic(nodes: FloatArray, place: FloatArray, along: int | None = None) -> FloatArray:
    """Interpolate at (column, row) places; with `along`, the slope along x (0) or y (1)."""
    rows, columns = nodes.shape
    base = np.minimum(np.floor(place).astype(np.int64), (columns - 2, rows - 2))
    share = place - base
    across = _slopes(share[:, 0]) if along == 0 else _weights(share[:, 0])
    down = _slopes(share[:, 1]) if along == 1 else _weights(share[:, 1])
    wide = _bordered(nodes)
    total = np.zeros(len(place))
    for row in range(4):
        for column in range(4):
            # The border added one row and one column before the first.
            values = wide[base[:, 1] + row, base[:, 0] + column]
            total += down[row] * across[column] * values
    return total


def _weights(share: FloatArray) -> FloatArray:
    """Of the four nodes around a place, shape (4, N); Keys (1981), a = -1/2."""
    t, t2, t3 = share, share**2, share**3
    return 0.5 * np.stack([-t3 + 2 * t2 - t, 3 * t3 - 5 * t2 + 2, -3 * t3 + 4 * t2 + t, t3 - t2])


def _slopes(share: FloatArray) -> FloatArray:
    """The derivative of the weights by the place."""
    t, t2 = share, share**2
    parts = [-3 * t2 + 4 * t - 1, 9 * t2 - 10 * t, -9 * t2 + 8 * t + 1, 3 * t2 - 2 * t]
    return 0.5 * np.stack(parts)


def _bordered(nodes: FloatArray) -> FloatArray:
    """One more row and column on each side, straight on."""
    tall = np.vstack([2 * nodes[:1] - nodes[1:2], nodes, 2 * nodes[-1:] - nodes[-2:-1]])
    return np.hstack([2 * tall[:, :1] - tall[:, 1:2], tall, 2 * tall[:, -1:] - tall[:, -2:-1]])


def _beyond(nodes: FloatArray, place: FloatArray, beyond: FloatArray) -> FloatArray:
    """What a place beyond the lattice adds: straight on from its edge."""
    total = np.zeros(len(place))
    outside = np.flatnonzero((beyond != 0.0).any(axis=1) | np.isnan(beyond).any(axis=1))
    if outside.size:
        for along in (0, 1):
            slope = _cubic(nodes, place[outside], along)
            total[outside] += slope * beyond[outside, along]
    return total
