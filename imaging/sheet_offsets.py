"""How far the lines of a sheet drawn flat still lie off their map, tile by tile."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.flat_view import FlatView
from imaging.lock_in import ComplexArray, Tiles, lock_in
from imaging.unwrap import unwrapped

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]
IntArray = NDArray[np.int_]

_PRESENT = 0.3
_TYPICAL_PERCENTILE = 80.0
_LARGEST_STEP = 0.22


@dataclass(frozen=True, slots=True, eq=False)
class Offsets:
    """One family of lines in the tiles of a view.

    Attributes
    ----------
    offsets : ndarray of float64, shape (rows, columns)
        True place less the map's, in cycles of the wave; NaN outside the region.
    values : ndarray of complex128, shape (rows, columns, K)
        The waves of each tile, phases counted from the map's zero.
    """

    offsets: FloatArray
    values: ComplexArray


@dataclass(frozen=True, slots=True, eq=False)
class Lattice:
    """Centres of tiles on a view: the first, their distance, and how many."""

    first_px: float
    step_px: float
    shape: tuple[int, int]

    @classmethod
    def over(cls, plane_shape: tuple[int, ...], side_px: int, *, fine: bool = False) -> Lattice:
        """Windows of about this side, half a window apart, or with `fine` a quarter."""
        tiles = Tiles.over((plane_shape[0], plane_shape[1]), _even(side_px))
        rows, columns = tiles.shape
        if not fine:
            return cls(tiles.step_px - 0.5, float(tiles.step_px), (rows, columns))
        shape = (2 * rows - 1, 2 * columns - 1)
        return cls(tiles.step_px - 0.5, tiles.step_px / 2.0, shape)

    def centres_px(self) -> FloatArray:
        """x and y of the centres, shape (rows, columns, 2)."""
        y_px, x_px = (self.first_px + np.arange(count) * self.step_px for count in self.shape)
        return np.stack(np.meshgrid(x_px, y_px), axis=-1)

    def place_of(self, points_px: FloatArray) -> FloatArray:
        """Column and row of points of the view, (N, 2) -> (N, 2)."""
        return np.asarray((points_px - self.first_px) / self.step_px)


def _even(side_px: int) -> int:
    return max(4, 4 * round(side_px / 4))


def _lock_in(view: FlatView, waves: FloatArray, side_px: int, lattice: Lattice) -> ComplexArray:
    """The windows of a lattice; a fine one in four goes, each half a step on."""
    plane = view.plane
    tiles = Tiles.over((plane.shape[0], plane.shape[1]), _even(side_px))
    if lattice.step_px == tiles.step_px:
        return lock_in(plane, waves, tiles)
    half = tiles.step_px // 2
    result = np.empty((*lattice.shape, len(waves)), dtype=np.complex128)
    for down in (0, 1):
        for across in (0, 1):
            target = result[down::2, across::2]
            part = Tiles(tiles.step_px, (target.shape[0], target.shape[1]))
            found = lock_in(plane[down * half :, across * half :], waves, part)
            turn = np.exp(-2j * np.pi * (waves @ (across * half, down * half)))
            result[down::2, across::2] = found * turn
    return result


def offsets_of(
    view: FlatView, side_px: int, lattice: Lattice, axis: int, multiples: FloatArray, first: int
) -> Offsets:
    """Measure one family (axis 0: upright lines) at multiples of one cycle to a unit.

    `first` is the index of the multiple that is unwrapped.
    """
    waves = np.zeros((len(multiples), 2))
    waves[:, axis] = multiples / view.px_per_unit[axis]
    values = _lock_in(view, waves, side_px, lattice)
    values = values * np.exp(-2j * np.pi * multiples * view.first[axis])
    strength = np.abs(values[:, :, first])
    typical = float(np.percentile(strength[strength > 0.0], _TYPICAL_PERCENTILE, method="lower"))
    quality = np.where(strength > _PRESENT * typical, strength, 0.0)
    turns = np.angle(values[:, :, first]) / (2.0 * np.pi)
    cycles, _ = unwrapped(turns, quality, _LARGEST_STEP)
    return Offsets(cycles / multiples[first], values)
