"""Tell 1 mm from 5 mm: which of a page's waves belongs to one small square, and how surely.

ECG paper has a thin line at every small square and a bold one at every fifth. Across the
lines, in units of the wave of one small square, that leaves waves at every fifth: those at
whole numbers are strong (all lines), the four between are equally strong among themselves
(bold lines alone) and in step at one line of five. Other rulings fail on one of these.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from imaging.profiles import Amplitudes, ComplexArray, Profiles
from imaging.spectrum import Waves

FloatArray = NDArray[np.float64]

HIGHEST_CYCLES_PER_PX = 0.47
SQUARE_TOLERANCE = 0.045
COARSEST_PX_PER_MM = 3.0
_MOST_HARMONICS = 3.0
_FAINTEST_THIN = 0.015
_THIN_ALONE = 45.0
_LEAST_SHARE = 0.004
_IN_STEP = 0.85
_IN_STEP_UP_TO = 12
_CLEAR = 5.0
_LONGER_PERIOD = 0.2
_TENTHS = 10.0
_OVERTONES = 10
_OVERTONE_POWER = 0.003
_BESIDE = 0.09
_STRONGER = 3.0
_FIFTEENTHS = np.array([1.0, 2.0, 4.0, 5.0, 7.0, 8.0]) / 15.0
_PRIME_PARTS = tuple(np.arange(1.0, parts) / parts for parts in (7, 11, 13))


@dataclass(frozen=True, slots=True)
class Pair:
    """Waves (cycles per pixel, x and y) that may be one square of the grid, both ways."""

    upright: tuple[float, float]
    level: tuple[float, float]
    power: float

    @property
    def lengths(self) -> tuple[float, float]:
        """Cycles per pixel of both."""
        return float(np.hypot(*self.upright)), float(np.hypot(*self.level))


@dataclass(frozen=True, slots=True)
class Fifths:
    """What one family of lines shows of 'bold every fifth'.

    Attributes
    ----------
    seen : bool
        The wave of one small square is there, and the bands agree on it.
    thin_over_bold : float
        Strength at one small square over what bold lines alone would give; 1 without thin.
    in_step : float
        How well the waves between agree on one line of five, 0 to 1.
    bold_clear : float
        Strength of the bold lines in standard errors.
    longer : float
        Share of waves that only a longer period than five squares explains.
    share : float
        How much of the picture's variance the lines are.
    faintest_thin : float
        Height of the faintest of the four thin lines over that of the bold one.
    """

    seen: bool
    thin_over_bold: float
    in_step: float
    bold_clear: float
    longer: float
    share: float
    faintest_thin: float

    @property
    def has_bold(self) -> bool:
        """Whether every fifth line is bolder."""
        return self.bold_clear > _CLEAR and self.in_step > _IN_STEP

    @property
    def is_ecg(self) -> bool:
        """Thin lines, every fifth bold, and nothing of a longer period."""
        thin = self.faintest_thin > _FAINTEST_THIN and self.thin_over_bold < _THIN_ALONE
        printed = self.seen and self.share > _LEAST_SHARE
        return printed and thin and self.has_bold and not self.is_longer

    @property
    def is_longer(self) -> bool:
        """Whether the page repeats over more than five of these squares."""
        return self.longer >= _LONGER_PERIOD


def pairs_of(upright: Waves, level: Waves, plane_shape: tuple[int, int]) -> list[Pair]:
    """Waves of both families that would make squares, longest first."""
    upright = _sharpened(upright, 1.0 / plane_shape[1])
    level = _sharpened(level, 1.0 / plane_shape[0])
    upright, level = _without_side_waves(upright), _without_side_waves(level)
    ratio = upright.lengths[:, np.newaxis] / level.lengths[np.newaxis]
    rows, columns = np.nonzero(np.abs(np.log(ratio)) < SQUARE_TOLERANCE)
    power = np.sqrt(upright.power[rows] * level.power[columns])
    pairs = [
        Pair(_pair(upright.waves[row]), _pair(level.waves[column]), float(strength))
        for row, column, strength in zip(rows, columns, power, strict=True)
    ]
    return sorted(pairs, key=lambda pair: pair.lengths)


def _sharpened(family: Waves, bin_size: float) -> Waves:
    """Place each wave by its overtones, which are as sharp and so tell more of its length."""
    lengths, waves = family.lengths, family.waves.copy()
    for index, length in enumerate(lengths):
        for overtone in range(2, _OVERTONES + 1):
            apart = np.abs(lengths - overtone * np.hypot(*waves[index]))
            near = int(np.argmin(apart))
            strong = family.power[near] > _OVERTONE_POWER * family.power[index]
            if strong and apart[near] < bin_size and abs(lengths[near] - length) > 3 * bin_size:
                waves[index] = family.waves[near] / overtone
    return Waves(waves, family.power, family.snr)


def _without_side_waves(family: Waves) -> Waves:
    """Leave out waves beside a clearly stronger one: lines beating with the pixels."""
    apart = np.abs(np.log(family.lengths[:, np.newaxis] / family.lengths[np.newaxis]))
    stronger = family.power[np.newaxis] > _STRONGER * family.power[:, np.newaxis]
    beside: NDArray[np.bool_] = np.asarray(((apart < _BESIDE) & stronger).any(axis=1))
    return family.where(~beside)


def _pair(wave: FloatArray) -> tuple[float, float]:
    return float(wave[0]), float(wave[1])


def fifths_of(profiles: Profiles, wave: float) -> Fifths:
    """Hold one family's profile against 'one small square is one cycle of `wave`'."""
    most = int(min(_MOST_HARMONICS, HIGHEST_CYCLES_PER_PX / wave) * _TENTHS)
    tenths = np.arange(1.0, most + 1.0) / _TENTHS
    found = profiles.amplitudes(wave, np.concatenate([tenths, _FIFTEENTHS, *_PRIME_PARTS]))
    one = int(_TENTHS) - 1
    if most <= one:
        return Fifths(False, 1.0, 0.0, 0.0, 1.0, 0.0, 0.0)
    square, error = abs(found.values[one]), float(found.errors[one])
    seen = bool(square > _CLEAR * error and found.coherence[one] > 0.5)
    # Counted from the line nearest the start, so that thin lines stand at whole numbers.
    start = -np.angle(found.values[one]) / (2.0 * np.pi)
    number = np.arange(1, most + 1)
    # Beyond, the waves of a broad bold and of a thin line may cancel and change sign.
    bold = (number % 2 == 0) & (number % 10 != 0) & (number <= _IN_STEP_UP_TO)
    values = found.values[:most] * np.exp(2j * np.pi * tenths * start)
    errors = found.errors[:most]
    total = [
        float((values * np.exp(2j * np.pi * tenths * line))[bold].real.sum()) for line in range(5)
    ]
    line = int(np.argmax(total))
    in_step = total[line] / max(float(np.abs(values[bold]).sum()), 1e-30)
    clear = total[line] / max(float(np.sqrt((errors[bold] ** 2).sum())), 1e-30)
    return Fifths(
        seen,
        _thin_over_bold(np.abs(values), errors, number),
        in_step,
        clear,
        _longer(found, number, most),
        2.0 * float((np.abs(found.values[1:most:2]) ** 2).sum()) / profiles.variance,
        _faintest_thin(values * np.exp(2j * np.pi * tenths * line), number),
    )


def _thin_over_bold(strength: FloatArray, errors: FloatArray, number: NDArray[np.int_]) -> float:
    """Strength at one square over its neighbours a fifth away, cautiously."""
    near = [tenth - 1 for tenth in (8, 12) if tenth in number]
    bold = float(np.mean(strength[near]) + 2.0 * np.max(errors[near]))
    return float(strength[9] - 2.0 * errors[9]) / max(bold, 1e-30)


def _faintest_thin(values: ComplexArray, number: NDArray[np.int_]) -> float:
    """Height of the faintest of the four thin lines over the bold one's, from the fold.

    The waves at fifths, put together again, are the mean of all large squares; each thin
    line is held against the paper half a square further from the bold one. A drawn baseline
    may fill one place, not four.
    """
    fifths = number[1::2] // 2
    # Tapered, so that a sharp bold line does not ring over its neighbours.
    taper = 0.5 + 0.5 * np.cos(np.pi * fifths / (len(fifths) + 1.0))

    def height(place: float) -> float:
        turned = values[1::2] * np.exp(2j * np.pi * fifths * place / 5.0)
        return float((taper * turned.real).sum())

    thin = [
        height(1.0) - height(1.5),
        height(2.0) - 0.5 * (height(1.5) + height(2.5)),
        height(3.0) - 0.5 * (height(2.5) + height(3.5)),
        height(4.0) - height(3.5),
    ]
    return min(thin) / max(height(0.0) - height(2.5), 1e-30)


def _longer(found: Amplitudes, number: NDArray[np.int_], most: int) -> float:
    """Power that only a longer period explains, over that of the page's own waves.

    A ruling with a bold line at every tenth square has waves at odd tenths; one square taken
    two or three times too small makes the page's bold lines waves at odd tenths or at
    fifteenths, and seven times or more its thin lines waves at sevenths and so on. Medians,
    for rows of traces raise single waves of those, a ruling all.
    """
    surplus = np.maximum(np.abs(found.values) ** 2 - 4.0 * found.errors**2, 0.0)
    first = number <= 10
    bold = float(np.median(surplus[:most][first & (number % 2 == 0) & (number % 10 != 0)]))
    thin = float(surplus[9])
    odd = float(np.median(surplus[:most][first & (number % 2 == 1)]))
    ends = np.cumsum([most] + [len(parts) for parts in (_FIFTEENTHS, *_PRIME_PARTS)])
    parts = [float(np.median(surplus[start:end])) for start, end in pairwise(ends)]
    by_bold = max(odd, parts[0]) / max(bold, 1e-30)
    return max(by_bold, max(parts[1:]) / max(thin, 1e-30))
