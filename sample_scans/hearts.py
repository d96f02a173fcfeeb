"""The invented hearts of the specimen pages. No person, no recording stands behind them."""

from __future__ import annotations

from collections.abc import Mapping

from sample_scans.waveform import CHEST_LEADS, Heart, Ripple, Wave

Knots = tuple[tuple[float, float], ...]
P_DURATION_MS = 104.0


def _bump(on_ms: float, peak_ms: float, off_ms: float) -> Knots:
    return ((on_ms, 0.0), (peak_ms, 1.0), (off_ms, 0.0))


def _chest(*heights_mv: float) -> Mapping[str, float]:
    """Heights in V1 to V6."""
    return dict(zip(CHEST_LEADS, heights_mv, strict=True))


def _atrial(pr_ms: float, direction_deg: float) -> tuple[Wave, ...]:
    """The P wave; in V1 up, then down, as right and left atrium follow each other."""
    on = -pr_ms
    whole = _bump(on, on + 50.0, on + P_DURATION_MS)
    first, second = _bump(on, on + 28.0, on + 54.0), _bump(on + 54.0, on + 78.0, on + P_DURATION_MS)
    chest = _chest(0.0, 0.08, 0.08, 0.08, 0.07, 0.06)
    return (
        Wave("P", whole, 0.15, direction_deg, chest),
        Wave("P", first, chest_mv={"V1": 0.07}),
        Wave("P", second, chest_mv={"V1": -0.05}),
    )


def _narrow_qrs(axis_deg: float, frontal_mv: float, chest_gain: float) -> tuple[Wave, ...]:
    """QRS of 92 ms: q, R, s in the limb leads and V4 to V6; r, S in V1 to V3."""

    def chest(*heights_mv: float) -> Mapping[str, float]:
        return _chest(*(chest_gain * height for height in heights_mv))

    begins, ends = (True, False), (False, True)
    q, r, s = _bump(0.0, 12.0, 22.0), _bump(22.0, 42.0, 62.0), _bump(62.0, 74.0, 92.0)
    return (
        Wave(
            "Q", q, -0.09 * frontal_mv, axis_deg, chest(0.0, 0.0, 0.0, -0.04, -0.09, -0.1), begins
        ),
        Wave("R", r, frontal_mv, axis_deg, chest(0.0, 0.0, 0.0, 1.35, 1.4, 1.05)),
        Wave("S", s, -0.16 * frontal_mv, axis_deg, chest(0.0, 0.0, 0.0, -0.5, -0.22, -0.08), ends),
        Wave(
            "R",
            _bump(0.0, 20.0, 36.0),
            chest_mv=chest(0.22, 0.42, 0.75, 0.0, 0.0, 0.0),
            crisp=begins,
        ),
        Wave(
            "S",
            _bump(36.0, 56.0, 92.0),
            chest_mv=chest(-0.85, -1.3, -0.85, 0.0, 0.0, 0.0),
            crisp=ends,
        ),
    )


def _recovery(
    on_ms: float,
    peak_ms: float,
    end_ms: float,
    frontal_mv: float,
    direction_deg: float,
    *chest_mv: float,
) -> Wave:
    """The T wave: a slow rise and a quicker fall."""
    return Wave("T", _bump(on_ms, peak_ms, end_ms), frontal_mv, direction_deg, _chest(*chest_mv))


def normal_heart() -> Heart:
    """PR 160, QRS 92, QT 380 ms, axis +50 degrees."""
    t = _recovery(150.0, 298.0, 380.0, 0.34, 42.0, 0.06, 0.42, 0.48, 0.42, 0.34, 0.24)
    return Heart((*_atrial(160.0, 55.0), *_narrow_qrs(50.0, 1.15, 1.0), t))


def fibrillating_heart() -> Heart:
    """No P wave, an undulating baseline; QRS 92, QT 356 ms, axis +65 degrees."""
    t = _recovery(146.0, 280.0, 356.0, 0.24, 50.0, 0.05, 0.3, 0.34, 0.3, 0.24, 0.18)
    ripple = Ripple(
        rates_per_min=(341.0, 397.0, 458.0),
        frontal_mv=0.07,
        direction_deg=75.0,
        chest_mv=_chest(0.1, 0.05, 0.03, 0.02, 0.02, 0.02),
    )
    return Heart((*_narrow_qrs(65.0, 1.05, 0.9), t), ripple)


def wide_qrs_heart() -> Heart:
    """PR 172, QRS 148, QT 442 ms, axis -8 degrees: notched R in the left leads."""
    notched = ((0.0, 0.0), (54.0, 1.0), (76.0, 0.74), (98.0, 0.93), (148.0, 0.0))
    deep = ((0.0, 0.0), (26.0, 0.3), (72.0, 1.0), (148.0, 0.0))
    both = (True, True)
    return Heart(
        (
            *_atrial(172.0, 50.0),
            Wave("R", notched, 1.05, -8.0, _chest(0.0, 0.0, 0.0, 0.0, 0.9, 1.15), both),
            Wave("S", deep, chest_mv=_chest(-1.0, -1.45, -1.3, 0.0, 0.0, 0.0), crisp=both),
            Wave("R", _bump(0.0, 24.0, 48.0), chest_mv={"V4": 0.4}, crisp=(True, False)),
            Wave("S", _bump(48.0, 84.0, 148.0), chest_mv={"V4": -0.8}, crisp=(False, True)),
            _recovery(148.0, 338.0, 442.0, 0.3, 155.0, 0.34, 0.5, 0.46, 0.26, -0.2, -0.28),
        )
    )


def large_voltage_heart() -> Heart:
    """PR 156, QRS 92, QT 418 ms, axis +12 degrees: chest leads too tall for full gain."""
    t = _recovery(140.0, 326.0, 418.0, 0.2, 60.0, 0.2, 0.7, 0.75, 0.4, -0.25, -0.3)
    return Heart((*_atrial(156.0, 48.0), *_narrow_qrs(12.0, 1.3, 2.2), t))
