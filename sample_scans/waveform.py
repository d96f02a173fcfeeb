"""An invented heart: twelve leads whose wave boundaries, heights and axis are known exactly.

Every wave has compact support: it is exactly zero before its onset and after its end. Limb
leads are the projections of one frontal dipole (Einthoven's triangle, Goldberger's leads),
so II = I + III and aVF = (II + III) / 2 at each instant. All parts of QRS share one frontal
direction, so the axis from net heights, atan2(2 / sqrt(3) * aVF, I), is that direction
(Novosel et al. 1999; computed). Times are in ms from the onset of QRS, heights in mV.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

LIMB_LEADS = ("I", "II", "III", "aVR", "aVL", "aVF")
CHEST_LEADS = ("V1", "V2", "V3", "V4", "V5", "V6")
LEADS = LIMB_LEADS + CHEST_LEADS
QRS_PARTS = ("Q", "R", "S")
SMALLEST_SEEN_MV = 0.001


@dataclass(frozen=True, slots=True)
class Wave:
    """One deflection, drawn through its knots.

    Attributes
    ----------
    name : str
        ``P``, ``Q``, ``R``, ``S`` or ``T``; Q, R and S together are QRS.
    knots : tuple of (float, float)
        (ms from QRS onset, level); the first and last level are 0 and the largest absolute
        level is 1. Half cosines join the knots, so that a knot is a turning point.
    frontal_mv, direction_deg : float
        Height and direction of the frontal dipole, clockwise from lead I.
    chest_mv : mapping of str to float
        Height in each chest lead; absent means 0.
    crisp : (bool, bool)
        Whether onset and end leave the baseline with a slope (QRS) or smoothly (P, T).
    """

    name: str
    knots: tuple[tuple[float, float], ...]
    frontal_mv: float = 0.0
    direction_deg: float = 0.0
    chest_mv: Mapping[str, float] = field(default_factory=dict)
    crisp: tuple[bool, bool] = (False, False)

    @property
    def on_ms(self) -> float:
        """Onset."""
        return self.knots[0][0]

    @property
    def off_ms(self) -> float:
        """End."""
        return self.knots[-1][0]

    @property
    def peak_ms(self) -> float:
        """Time of the largest level."""
        return max(self.knots, key=lambda knot: abs(knot[1]))[0]

    def height_mv(self, lead: str) -> float:
        """Signed height of the peak in one lead."""
        if lead in CHEST_LEADS:
            return self.chest_mv.get(lead, 0.0)
        return self.frontal_mv * limb_weight(lead, self.direction_deg)

    def level(self, time_ms: FloatArray) -> FloatArray:
        """The wave at unit height; exactly 0 outside [on_ms, off_ms]."""
        level = np.zeros_like(time_ms)
        last = len(self.knots) - 2
        for index, ((t0, a), (t1, b)) in enumerate(
            zip(self.knots[:-1], self.knots[1:], strict=True)
        ):
            inside = (time_ms > t0) & (time_ms <= t1)
            share = (time_ms[inside] - t0) / (t1 - t0)
            if index == 0 and self.crisp[0]:
                rise = np.sin(share * np.pi / 2.0)
            elif index == last and self.crisp[1]:
                rise = 1.0 - np.cos(share * np.pi / 2.0)
            else:
                rise = (1.0 - np.cos(share * np.pi)) / 2.0
            level[inside] = a + (b - a) * rise
        level[time_ms >= self.off_ms] = 0.0
        return level


@dataclass(frozen=True, slots=True)
class Ripple:
    """A fine, never-ending undulation of the baseline, such as fibrillating atria give."""

    rates_per_min: tuple[float, ...]
    frontal_mv: float
    direction_deg: float
    chest_mv: Mapping[str, float]

    def height_mv(self, lead: str) -> float:
        """Signed amplitude in one lead."""
        if lead in CHEST_LEADS:
            return self.chest_mv.get(lead, 0.0)
        return self.frontal_mv * limb_weight(lead, self.direction_deg)

    def level(self, time_ms: FloatArray) -> FloatArray:
        """Mean of sines of unrelated rates, between -1 and 1."""
        total = np.zeros_like(time_ms)
        for index, rate in enumerate(self.rates_per_min):
            total += np.sin(2.0 * np.pi * rate * time_ms / 60_000.0 + 1.7 * index)
        return total / len(self.rates_per_min)


@dataclass(frozen=True, slots=True)
class Heart:
    """The waves of one beat, and what lies under all beats."""

    waves: tuple[Wave, ...]
    ripple: Ripple | None = None

    def part(self, *names: str) -> tuple[Wave, ...]:
        """The waves of these names."""
        return tuple(wave for wave in self.waves if wave.name in names)

    @property
    def axis_deg(self) -> float:
        """Frontal direction shared by all parts of QRS."""
        return next(w.direction_deg for w in self.part(*QRS_PARTS) if w.frontal_mv)

    def intervals_ms(self) -> dict[str, float | None]:
        """Global PR, QRS, QT and P duration; None where there is no P wave."""
        atrial, qrs, repolarised = self.part("P"), self.part(*QRS_PARTS), self.part("T")
        on = min(wave.on_ms for wave in qrs)
        p_on = min((wave.on_ms for wave in atrial), default=None)
        return {
            "p": None if p_on is None else max(wave.off_ms for wave in atrial) - p_on,
            "pr": None if p_on is None else on - p_on,
            "qrs": max(wave.off_ms for wave in qrs) - on,
            "qt": max(wave.off_ms for wave in repolarised) - on,
        }


@dataclass(frozen=True, slots=True)
class Recording:
    """A heart's beats: `qrs_on_ms` from the start of the recording."""

    heart: Heart
    qrs_on_ms: tuple[float, ...]

    @property
    def rr_ms(self) -> tuple[float, ...]:
        """From beat to beat."""
        return tuple(float(rr) for rr in np.diff(self.qrs_on_ms))

    def height_mv(self, lead: str, time_ms: FloatArray) -> FloatArray:
        """The potential of a lead at any times, shape (N,) -> (N,)."""
        if lead in LIMB_LEADS:
            return self._limb_mv(lead, time_ms)
        return self._sum_mv(lead, time_ms)

    def _limb_mv(self, lead: str, time_ms: FloatArray) -> FloatArray:
        """Limb leads as arithmetic on I and II, so that the identities hold to rounding."""
        one, two = self._sum_mv("I", time_ms), self._sum_mv("II", time_ms)
        return {
            "I": one,
            "II": two,
            "III": two - one,
            "aVR": -(one + two) / 2.0,
            "aVL": one - two / 2.0,
            "aVF": two - one / 2.0,
        }[lead]

    def _sum_mv(self, lead: str, time_ms: FloatArray) -> FloatArray:
        time_ms = np.asarray(time_ms, dtype=np.float64)
        total = np.zeros_like(time_ms)
        for wave in self.heart.waves:
            height_mv = wave.height_mv(lead)
            if height_mv == 0.0:
                continue
            for on_ms in self.qrs_on_ms:
                total += height_mv * wave.level(time_ms - on_ms)
        if self.heart.ripple is not None:
            total += self.heart.ripple.height_mv(lead) * self.heart.ripple.level(time_ms)
        return total

    def sampled_mv(self, fs_hz: float, duration_s: float) -> FloatArray:
        """All twelve leads in the order of LEADS, shape (N, 12)."""
        time_ms = np.arange(round(fs_hz * duration_s)) * (1000.0 / fs_hz)
        return np.column_stack([self.height_mv(lead, time_ms) for lead in LEADS])


def limb_weight(lead: str, direction_deg: float) -> float:
    """How much of a unit frontal dipole a limb lead sees."""
    one = float(np.cos(np.deg2rad(direction_deg)))
    two = float(np.cos(np.deg2rad(direction_deg - 60.0)))
    return {
        "I": one,
        "II": two,
        "III": two - one,
        "aVR": -(one + two) / 2.0,
        "aVL": one - two / 2.0,
        "aVF": two - one / 2.0,
    }[lead]


def onsets_from_rr(first_on_ms: float, rr_ms: Sequence[float]) -> tuple[float, ...]:
    """QRS onsets from the first and the RR intervals."""
    return tuple(float(t) for t in first_on_ms + np.concatenate([[0.0], np.cumsum(rr_ms)]))


def lead_marks_ms(heart: Heart, lead: str) -> dict[str, float | None]:
    """Boundaries of one beat in one lead, ms from the (global) QRS onset.

    Keys ``p_on p_peak p_off qrs_on r_peak main_peak j t_on t_peak t_end``; `r_peak` is the
    largest upward part of QRS, `main_peak` the largest of either sign. None where the lead
    shows no such wave (below 1 uV).
    """
    seen = [wave for wave in heart.waves if abs(wave.height_mv(lead)) >= SMALLEST_SEEN_MV]
    marks: dict[str, float | None] = {}
    for name, begin, end in (("P", "p_on", "p_off"), ("T", "t_on", "t_end")):
        waves = [wave for wave in seen if wave.name == name]
        marks[begin] = min((wave.on_ms for wave in waves), default=None)
        largest = max(waves, key=lambda wave: abs(wave.height_mv(lead)), default=None)
        marks[f"{name.lower()}_peak"] = None if largest is None else largest.peak_ms
        marks[end] = max((wave.off_ms for wave in waves), default=None)
    qrs = [wave for wave in seen if wave.name in QRS_PARTS]
    upward = [wave for wave in qrs if wave.height_mv(lead) > 0.0]
    marks["qrs_on"] = min((wave.on_ms for wave in qrs), default=None)
    top = max(upward, key=lambda wave: wave.height_mv(lead), default=None)
    main = max(qrs, key=lambda wave: abs(wave.height_mv(lead)), default=None)
    marks["r_peak"] = None if top is None else top.peak_ms
    marks["main_peak"] = None if main is None else main.peak_ms
    marks["j"] = max((wave.off_ms for wave in qrs), default=None)
    return marks


def lead_heights_mv(heart: Heart, lead: str) -> dict[str, float]:
    """Largest P, R (upward), Q or S (downward) and T of a lead, and net QRS = sum of parts."""
    qrs_mv = [wave.height_mv(lead) for wave in heart.part(*QRS_PARTS)]

    def largest(name: str) -> float:
        return max((wave.height_mv(lead) for wave in heart.part(name)), key=abs, default=0.0)

    return {
        "p": largest("P"),
        "r": max(0.0, *qrs_mv),
        "deepest_qrs": min(0.0, *qrs_mv),
        "net_qrs": sum(qrs_mv),
        "t": largest("T"),
    }
