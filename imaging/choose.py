"""Choose the waves of one small square, or say why there are none."""

from __future__ import annotations

import logging
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from imaging.errors import GridNotFound
from imaging.lock_in import Tiles, lock_in
from imaging.periods import COARSEST_PX_PER_MM, Fifths, Pair, fifths_of, pairs_of
from imaging.profiles import Profiles, profiles_of
from imaging.ruling import Ruling, ruling_of
from imaging.spectrum import Waves, waves_of

FloatPlane = NDArray[np.float32]

_log = logging.getLogger(__name__)

_WEAKEST_SHARE = 0.02
_LEAST_SHARE = 0.015
_FEWEST_LINES = 6.0
_DOTS_SHARE = 0.45
_THIN_IN_OTHER = 1.05
_ALIKE = 2.5
_FEWEST_SMALL_SQUARES = 80.0
_MOST_PAIRS = 60
_STRONGEST_WAVES = 12

NO_LINES = GridNotFound(
    "No grid of evenly spaced lines was found; lay the ECG paper flat and upright, and scan it "
    "in colour or grey at 150 dots per inch or more.",
    "no_lines",
)
ONE_DIRECTION = GridNotFound(
    "Evenly spaced lines were found in one direction only; scan the page so that both the "
    "upright and the level lines of the grid are visible.",
    "one_direction",
)
NOT_A_MILLIMETRE_GRID = GridNotFound(
    "The lines found are not ruled like ECG paper (squares with every fifth line bold); give "
    "the scale by hand if this is an ECG.",
    "not_a_millimetre_grid",
)
TOO_COARSE = GridNotFound(
    "The small squares are fewer than three pixels wide; scan the page again at 150 dots per "
    "inch or more, or take the picture from nearer.",
    "too_coarse",
)

TOO_SMALL = GridNotFound(
    "The picture shows too few squares to place a grid; use a picture of at least 30 by 30 mm "
    "of the paper.",
    "too_small",
)


@dataclass(frozen=True, slots=True)
class Choice:
    """Which waves are the grid's.

    Attributes
    ----------
    upright, level : (float, float)
        Cycles per pixel of the plane, one cycle to a small square.
    fifths : tuple of int
        Waves the page has, in fifths of a square's.
    first : int
        The strongest of them.
    certain : bool
        Thin and bold lines were told apart.
    evidence : tuple of str
        What that rests on.
    """

    upright: tuple[float, float]
    level: tuple[float, float]
    fifths: tuple[int, ...]
    first: int
    certain: bool
    evidence: tuple[str, ...]


def choose_waves(plane: FloatPlane, bin_px: int) -> Choice | GridNotFound:
    """Look for the grid's waves on a plane of darkness.

    Parameters
    ----------
    plane : ndarray of float32, shape (rows, columns)
    bin_px : int
        Picture pixels on the side of one pixel of the plane.
    """
    upright, level, skew_rad = waves_of(plane)
    if not len(upright.waves) and not len(level.waves):
        return NO_LINES
    pairs = pairs_of(upright, level, plane.shape)
    strongest = sorted(pairs, key=lambda pair: -pair.power)[:_MOST_PAIRS]
    pairs = [pair for pair in pairs if pair in strongest]
    profiles = profiles_of(plane, skew_rad)
    choice = _with_bold(plane, bin_px, pairs, profiles)
    if choice is None:
        choice = _with_one_spacing(plane, bin_px, pairs, profiles)
    return choice if choice is not None else _why_not((upright, level), profiles)


def _why_not(families: tuple[Waves, Waves], profiles: tuple[Profiles, Profiles]) -> GridNotFound:
    """Whether lines were there at all, and which way."""
    ruled = []
    for family, part in zip(families, profiles, strict=True):
        strongest = family.lengths[np.argsort(-family.power)[:_STRONGEST_WAVES]]
        rules = [ruling_of(part, float(wave)) for wave in strongest]
        ruled.append(any(r.seen and r.is_lines and r.share > _LEAST_SHARE for r in rules))
    if all(ruled):
        return NOT_A_MILLIMETRE_GRID
    return ONE_DIRECTION if any(ruled) else NO_LINES


def _with_bold(
    plane: FloatPlane, bin_px: int, pairs: list[Pair], profiles: tuple[Profiles, Profiles]
) -> Choice | GridNotFound | None:
    """The strongest pair that shows thin lines with every fifth bold; None without any."""
    for pair in sorted(pairs, key=lambda pair: -pair.power):
        both = [fifths_of(part, wave) for part, wave in zip(profiles, pair.lengths, strict=True)]
        if not _is_ecg(both) or _is_dots(plane, pair):
            continue
        _log.debug("thin and bold lines: %s %s", pair, both)
        if bin_px / max(pair.lengths) < COARSEST_PX_PER_MM:
            return TOO_COARSE
        told = "Every fifth line is bolder than the four between: 1 mm and 5 mm are told apart."
        return Choice(pair.upright, pair.level, tuple(range(1, 16)), 5, True, (told,))
    return None


def _is_ecg(both: list[Fifths]) -> bool:
    """Both families show thin and bold lines, or one clearly and the other as far as seen.

    Rows of traces five lines apart make bold lines of one family; never of the other.
    """
    if all(family.is_ecg for family in both):
        return True
    if not any(family.is_ecg for family in both):
        return False
    other = both[1] if both[0].is_ecg else both[0]
    ratios = [family.thin_over_bold for family in both]
    alike = max(ratios) < _ALIKE * min(ratios)
    bold = other.seen and other.has_bold and not other.is_longer
    return bold and alike and other.thin_over_bold > _THIN_IN_OTHER


def _is_dots(plane: FloatPlane, pair: Pair) -> bool:
    """Whether the 'thin lines' are dots along lines five times as far apart.

    Lines keep their strength all along; dots only stand on the lines of the other family,
    so their wave comes and goes with it, which is a wave at the sum of both.
    """
    for along, across in ((pair.upright, pair.level), (pair.level, pair.upright)):
        lines = np.array(along)
        waves = np.stack([lines, lines + np.array(across) / 5.0, lines - np.array(across) / 5.0])
        tiles = Tiles.over(plane.shape, min(plane.shape))
        strength = np.sqrt((np.abs(lock_in(plane, waves, tiles)) ** 2).mean(axis=(0, 1)))
        if min(strength[1], strength[2]) > _DOTS_SHARE * strength[0]:
            return True
    return False


def _with_one_spacing(
    plane: FloatPlane, bin_px: int, pairs: list[Pair], profiles: tuple[Profiles, Profiles]
) -> Choice | GridNotFound | None:
    """The longest pair that shows plain lines of one spacing both ways."""
    weakest = _WEAKEST_SHARE * max((pair.power for pair in pairs), default=0.0)
    for pair in pairs:
        both = [ruling_of(part, wave) for part, wave in zip(profiles, pair.lengths, strict=True)]
        plain = all(rule.seen and rule.is_lines and rule.share > _LEAST_SHARE for rule in both)
        if pair.power < weakest or not plain:
            continue
        if min(plane.shape) * min(pair.lengths) < _FEWEST_LINES:
            return TOO_SMALL
        _log.debug("one spacing: %s %s", pair, both)
        return _assumed(plane, bin_px, pair, both)
    return None


def _assumed(
    plane: FloatPlane, bin_px: int, pair: Pair, both: list[Ruling]
) -> Choice | GridNotFound:
    """Take one spacing as 1 mm or 5 mm by what picture that would make.

    Large squares are at least 15 px, or the small ones could not be told; a sheet has at
    most 60 of them along its side, but more than 80 small ones.
    """
    lines = {rule.lines_per_cycle for rule in both}
    if lines - {1, 5}:
        return NOT_A_MILLIMETRE_GRID
    across = max(plane.shape) * max(pair.lengths)
    pitch_px = bin_px / max(pair.lengths)
    if 5 in lines:
        scale, fifths, first = 5.0, tuple(range(1, 16)), 5
        taken = "The bold lines are not clear; the closest lines are taken as 1 mm apart."
    elif across < _FEWEST_SMALL_SQUARES and pitch_px >= 5.0 * COARSEST_PX_PER_MM:
        scale, fifths, first = 5.0, tuple(range(1, 16)), 1
        taken = "Only one line spacing is clear; it is taken as 5 mm, the large squares."
    else:
        scale, fifths, first = 1.0, (5, 10, 15), 5
        taken = "Only one line spacing is clear; it is taken as 1 mm, the small squares."
    waves = [(wave[0] * scale, wave[1] * scale) for wave in (pair.upright, pair.level)]
    if bin_px / max(np.hypot(*waves[0]), np.hypot(*waves[1])) < COARSEST_PX_PER_MM:
        return TOO_COARSE
    return Choice(waves[0], waves[1], fifths, first, False, (taken,))
