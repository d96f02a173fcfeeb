"""How sure a span is, carried through every formula by first-order propagation.

The model (law of propagation with correlations, JCGM 100:2008, 5.2.2, from memory):

* the map's scale along each axis is one shared error: averaging beats does not reduce it;
* each leg has its own error, the quadrature sum of the pen's share (uniform over half an
  assumed pen width of 0.4 mm: common practice, no source), one picture pixel or, where that
  is coarser, the step in which the leg could be placed (step/√12), and the printed grid's
  scatter. Two spans that use the very same leg share its error, so in the mean of a chain
  of RR intervals only the two outer legs remain;
* a span placed three times or more has the reader's own repeatability in the place of the
  pen's share;
* the mean of three beats or more is no surer than their spread says, except for RR: there
  the beats differ by the rhythm itself, which has its own value and cautions.

It does not contain two readers' different idea of where a wave ends, nor a recorder whose
speed or gain is off.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import NDArray

from imaging.sheet_map import SheetMap

FloatArray = NDArray[np.float64]

PEN_WIDTH_MM = 0.4  # common practice, no source
REPEATS_NEEDED = 3
_SCALES = 2  # the first sources: scale along x, scale along y


class Axis(Enum):
    """Direction on the sheet; the value is its column in a point array."""

    ALONG = 0
    DOWN = 1


@dataclass(frozen=True, slots=True)
class LegError:
    """One sigma of one leg's place along one axis, in mm, in its two parts.

    Attributes
    ----------
    pen_mm : float
        The pen's share, which a reader's own repeatability can replace.
    resolution_mm : float
        One pixel of the picture, or the step the leg was placed in where that is coarser, and
        the printed grid's scatter; always there.
    """

    pen_mm: float
    resolution_mm: float

    @property
    def sigma_mm(self) -> float:
        """Both parts together."""
        return math.hypot(self.pen_mm, self.resolution_mm)

    @property
    def resolution_share(self) -> float:
        """What is left of the sigma without the pen's share, 0 to 1."""
        return self.resolution_mm / self.sigma_mm


def pitch_px_per_mm(sheet_map: SheetMap, axis: Axis) -> float:
    """Length of one small square along an axis, in picture_px."""
    return (sheet_map.x_pitch_px_per_mm, sheet_map.y_pitch_px_per_mm)[axis.value]


def leg_error(sheet_map: SheetMap, axis: Axis, step_px: float = 0.0) -> LegError:
    """The error of one leg placed on a picture, along one axis, in steps of `step_px`."""
    step_mm = max(1.0, step_px) / pitch_px_per_mm(sheet_map, axis)
    return LegError(
        pen_mm=0.5 * PEN_WIDTH_MM / math.sqrt(12.0),
        resolution_mm=math.hypot(step_mm / math.sqrt(12.0), sheet_map.scatter_mm),
    )


@dataclass(frozen=True, slots=True, eq=False)
class Estimate:
    """A number with what each error source does to it.

    Attributes
    ----------
    value : float
    shared : ndarray of float64, shape (S,)
        Change of the value for one sigma of each source that other numbers may share:
        the scale along x, the scale along y, then one for each leg.
    own_variance : float
        Variance that no other number shares.
    """

    value: float
    shared: FloatArray
    own_variance: float = 0.0

    @property
    def sigma(self) -> float:
        """One sigma of the value."""
        return math.sqrt(float(self.shared @ self.shared) + self.own_variance)

    @property
    def plus_minus(self) -> float:
        """Two sigma of the value."""
        return 2.0 * self.sigma

    @property
    def placement_variance(self) -> float:
        """The part of the variance that comes from placing legs, not from the map's scale."""
        legs = self.shared[_SCALES:]
        return float(legs @ legs) + self.own_variance


def combine(value: float, *parts: tuple[float, Estimate]) -> Estimate:
    """A number worked out from others: (slope, part) for each, to first order."""
    shared = sum(slope * part.shared for slope, part in parts)
    own = sum(slope**2 * part.own_variance for slope, part in parts)
    return Estimate(value, np.asarray(shared, dtype=np.float64), own)


def sample_sd(numbers: Sequence[float]) -> float | None:
    """Sample standard deviation (n - 1); None below two."""
    return float(np.std(numbers, ddof=1)) if len(numbers) > 1 else None


def repeated(spans: Sequence[Estimate], resolution_share: FloatArray) -> Estimate:
    """One beat from all placings of the same span (at least one).

    From three placings on, their standard deviation takes the place of the assumed pen's
    share; the resolution stays, so that copies of one caliper cannot claim none.

    Parameters
    ----------
    spans : sequence of Estimate
    resolution_share : ndarray of float64, shape (S,)
        What is left of each shared source's sigma without the pen's share, 0 to 1; 1 for the
        scales. Not modified.
    """
    count = len(spans)
    mean = plain_mean(spans)
    if count < REPEATS_NEEDED:
        return mean
    own = float(np.var([span.value for span in spans], ddof=1)) / count
    return Estimate(mean.value, mean.shared * resolution_share, own)


def mean_of(beats: Sequence[Estimate]) -> Estimate:
    """Mean over beats that are taken as repeats of one thing (at least one).

    From three beats on, the placing part is not taken below the beats' standard deviation
    over √n.
    """
    mean = plain_mean(beats)
    count = len(beats)
    if count < REPEATS_NEEDED:
        return mean
    by_spread = float(np.var([beat.value for beat in beats], ddof=1)) / count
    missing = max(0.0, by_spread - mean.placement_variance)
    return Estimate(mean.value, mean.shared, mean.own_variance + missing)


def plain_mean(parts: Sequence[Estimate]) -> Estimate:
    """Mean of numbers that may well differ (at least one): only the marks' and map's errors."""
    share = 1.0 / len(parts)
    value = math.fsum(part.value for part in parts) * share
    return combine(value, *((share, part) for part in parts))


class Verdict(Enum):
    """A comparison with a limit has three answers."""

    BELOW = "below"
    ABOVE = "at or above"
    TOO_CLOSE = "too close to call against"


def against_limit(value: float, plus_minus: float, limit: float) -> Verdict:
    """Below, at or above, or too close to call by the value's own ± (two sigma)."""
    if abs(value - limit) <= plus_minus and plus_minus > 0.0:
        return Verdict.TOO_CLOSE
    return Verdict.ABOVE if value >= limit else Verdict.BELOW
