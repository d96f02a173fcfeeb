"""Which lines of a sheet drawn flat are 1 mm apart: the flat page's evidence, at known waves."""

from __future__ import annotations

import logging
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.choose import NOT_A_MILLIMETRE_GRID
from imaging.errors import GridNotFound
from imaging.periods import COARSEST_PX_PER_MM, Fifths, fifths_of
from imaging.profiles import Profiles, profiles_of
from imaging.ruling import Ruling, ruling_of

FloatArray = NDArray[np.float64]
FloatPlane = NDArray[np.float32]

_log = logging.getLogger(__name__)

MOST_FIFTHS = 12
_LEAST_SHARE = 0.015
_MOST_OFF_SQUARE = 0.3
# A3 paper has 84 large squares along its longer side, a short strip 100 small ones.
_FEWEST_SQUARES_OF_1_MM = 85.0

TAKEN_AS_5_MM = "Only one line spacing is clear; it is taken as 5 mm, the large squares."
TAKEN_AS_1_MM = "Only one line spacing is clear; it is taken as 1 mm, the small squares."


@dataclass(frozen=True, slots=True)
class SheetScale:
    """What the waves that were followed are.

    Attributes
    ----------
    followed_fifths : (int, int)
        How many of the followed wave's cycles make five small squares, along x and y.
    fifths : tuple of int
        Waves the sheet has, in fifths of a small square's.
    first : int
        The strongest of them.
    certain : bool
        Thin and bold lines were told apart.
    evidence : tuple of str
    """

    followed_fifths: tuple[int, int]
    fifths: tuple[int, ...]
    first: tuple[int, int]
    certain: bool
    evidence: tuple[str, ...]


def scale_of(
    plane: FloatPlane,
    waves: FloatArray,
    off_square: float,
    across_cycles: FloatArray,
    bin_px: int,
) -> SheetScale | GridNotFound:
    """Hold a sheet drawn flat against 1 mm lines with every fifth bold.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)
        Zero where no lines were followed.
    waves : ndarray of float64, shape (2,)
        Cycles per pixel of the followed waves, across upright and across level lines.
    off_square : float
        Length of the level lines' wave over the upright lines' on the picture.
    across_cycles : ndarray of float64, shape (2,)
        Extent of what was followed, in cycles of the waves.
    bin_px : int
        Picture pixels on the side of one pixel of the plane.
    """
    profiles = profiles_of(plane, 0.0)
    bold = _with_bold(profiles, waves, off_square)
    return (
        bold
        if bold is not None
        else _with_one_spacing(profiles, waves, off_square, across_cycles, bin_px)
    )


def _with_bold(
    profiles: tuple[Profiles, Profiles], waves: FloatArray, off_square: float
) -> SheetScale | None:
    both: list[dict[int, Fifths]] = []
    for part, wave in zip(profiles, waves, strict=True):
        tried = {j: fifths_of(part, float(wave) * 5.0 / j) for j in range(1, MOST_FIFTHS + 1)}
        both.append({j: found for j, found in tried.items() if found.is_ecg})
    pairs = [
        (i, j)
        for i in both[0]
        for j in both[1]
        if abs(np.log(off_square * i / j)) < _MOST_OFF_SQUARE
    ]
    if not pairs:
        return None
    _log.debug("thin and bold lines: %s", pairs)
    if len(pairs) > 1:
        # Two ways to read the lines: the clearer one only if it is much clearer.
        pairs.sort(key=lambda pair: -min(both[0][pair[0]].bold_clear, both[1][pair[1]].bold_clear))
    return SheetScale(
        pairs[0],
        tuple(range(1, 16)),
        (5, 5),
        True,
        ("Every fifth line is bolder than the four between: 1 mm and 5 mm are told apart.",),
    )


def _with_one_spacing(
    profiles: tuple[Profiles, Profiles],
    waves: FloatArray,
    off_square: float,
    across_cycles: FloatArray,
    bin_px: int,
) -> SheetScale | GridNotFound:
    """Plain lines of one spacing both ways: the longest that shows no longer period."""
    both: list[dict[int, Ruling]] = []
    for part, wave in zip(profiles, waves, strict=True):
        tried = {j: ruling_of(part, float(wave) / j) for j in range(1, MOST_FIFTHS + 1)}
        both.append(
            {
                j: rule
                for j, rule in tried.items()
                if rule.seen and rule.is_lines and rule.share > _LEAST_SHARE
            }
        )
    pairs = [
        (i, j)
        for i in sorted(both[0], reverse=True)
        for j in sorted(both[1], reverse=True)
        if abs(np.log(off_square * i / j)) < _MOST_OFF_SQUARE
    ]
    if not pairs:
        return NOT_A_MILLIMETRE_GRID
    i, j = pairs[0]
    lines = {both[0][i].lines_per_cycle, both[1][j].lines_per_cycle}
    if lines - {1, 5}:
        return NOT_A_MILLIMETRE_GRID
    across = max(across_cycles[0] / i, across_cycles[1] / j)
    # Large squares so narrow would have small ones that no picture resolves.
    narrow = bin_px * min(i / waves[0], j / waves[1]) < 5.0 * COARSEST_PX_PER_MM
    if 5 in lines or (across < _FEWEST_SQUARES_OF_1_MM and not narrow):
        return SheetScale((i, j), tuple(range(1, 16)), (i, j), False, (TAKEN_AS_5_MM,))
    return SheetScale((5 * i, 5 * j), (5, 10, 15), (5, 5), False, (TAKEN_AS_1_MM,))
