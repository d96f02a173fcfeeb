"""Rulings with one line spacing only: are they lines at all, and is theirs the only spacing?"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from imaging.periods import HIGHEST_CYCLES_PER_PX
from imaging.profiles import Profiles

FloatArray = NDArray[np.float64]

_CLEAR = 5.0
_IN_STEP = 0.8
_NARROW = 0.03
_LONGER_PERIOD = 0.3
_MORE_LINES = 1.5
_MOST_HARMONICS = 13
_LINE_HARMONICS = 4
_LONGER = (2, 3, 5, 7)


@dataclass(frozen=True, slots=True)
class Ruling:
    """What one family shows of 'one line every cycle of this wave'.

    Attributes
    ----------
    seen : bool
        The wave is there and the bands agree on it.
    is_lines : bool
        Narrow, darker than the paper, and nothing of a longer period.
    lines_per_cycle : int
        1, or how many lines stand in one cycle where the finer ones show by themselves.
    share : float
        How much of the picture's variance these lines are.
    """

    seen: bool
    is_lines: bool
    lines_per_cycle: int
    share: float


def ruling_of(profiles: Profiles, wave: float) -> Ruling:
    """Hold one family's profile against 'one line every cycle of `wave`'."""
    most = min(int(HIGHEST_CYCLES_PER_PX / wave), _MOST_HARMONICS)
    if most < 1:
        return Ruling(False, False, 1, 0.0)
    parts = [np.array([j / k for j in range(1, 2 * k) if j % k]) for k in _LONGER]
    found = profiles.amplitudes(wave, np.concatenate([np.arange(1.0, most + 1.0), *parts]))
    strength = np.abs(found.values)
    seen = bool(strength[0] > _CLEAR * found.errors[0] and found.coherence[0] > 0.5)
    surplus = np.maximum(strength**2 - 4.0 * found.errors**2, 0.0)
    few = found.values[: min(most, _LINE_HARMONICS)]
    trial = np.arange(0.0, 1.0, 0.005)
    darkness = (np.exp(2j * np.pi * np.outer(trial, np.arange(1, len(few) + 1))) * few).real
    in_step = float(darkness.sum(axis=1).max() / max(float(np.abs(few).sum()), 1e-30))
    second = darkness[int(np.argmax(darkness.sum(axis=1)))][1:2]
    narrow = bool((second > max(_NARROW * strength[0], 3.0 * found.errors[:2].max())).all())
    ends = np.cumsum([most] + [len(part) for part in parts])
    longer = max(float(np.median(surplus[start:end])) for start, end in pairwise(ends))
    is_lines = in_step > _IN_STEP and narrow and longer < _LONGER_PERIOD * float(surplus[0])
    share = 2.0 * float(surplus[:most].sum()) / profiles.variance
    return Ruling(seen, is_lines, _lines_per_cycle(strength[:most], found.errors[:most]), share)


def _lines_per_cycle(strength: FloatArray, errors: FloatArray) -> int:
    """A harmonic well above both its neighbours has lines of its own, and so its double."""

    def stands_out(lines: int, times: float) -> bool:
        if lines >= len(strength):
            return True
        near = max(strength[lines - 2], strength[lines]) + 2.0 * errors[lines - 1]
        return bool(strength[lines - 1] - 2.0 * errors[lines - 1] > times * near)

    for lines in range(2, len(strength)):
        if stands_out(lines, _MORE_LINES) and stands_out(2 * lines, 1.0):
            return lines
    return 1
