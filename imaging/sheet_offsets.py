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


def offsets_of(
    view: FlatView, tiles: Tiles, axis: int, multiples: FloatArray, first: int
) -> Offsets:
    """Measure one family (axis 0: upright lines) at multiples of one cycle to a unit.

    `first` is the index of the multiple that is unwrapped.
    """
    waves = np.zeros((len(multiples), 2))
    waves[:, axis] = multiples / view.px_per_unit[axis]
    values = lock_in(view.plane, waves, tiles)
    values = values * np.exp(-2j * np.pi * multiples * view.first[axis])
    strength = np.abs(values[:, :, first])
    typical = float(np.percentile(strength[strength > 0.0], _TYPICAL_PERCENTILE, method="lower"))
    quality = np.where(strength > _PRESENT * typical, strength, 0.0)
    turns = np.angle(values[:, :, first]) / (2.0 * np.pi)
    cycles, _ = unwrapped(turns, quality, _LARGEST_STEP)
    return Offsets(cycles / multiples[first], values)
