"""How regular the RR intervals are, and whether their rate can be."""

from __future__ import annotations

from app.calculator.cautions import caution
from app.calculator.lines import Line
from app.calculator.uncertainty import Estimate, Verdict, against_limit, combine
from app.calculator.values import Caution

# A grid taken five times too large or too small gives such a rate: common practice, no source.
SLOWEST_PER_MIN = 20.0
FASTEST_PER_MIN = 300.0
# Averaging over ten beats or more: AHA/ACCF/HRS 2009 part IV, from memory.
ENOUGH_INTERVALS = 10


def rate_per_min(rr_mean_ms: float) -> float:
    """Rate from the mean RR, which is 60 n / sum of RR (never the mean of single rates).

    Source: 60 / RR in teaching texts (found, secondary source); the mean is computed.
    """
    return 60_000.0 / rr_mean_ms


def rate_of(rr_mean: Estimate) -> Estimate:
    """The rate in /min with the mean RR's error carried over."""
    rate = rate_per_min(rr_mean.value)
    return combine(rate, (-rate / rr_mean.value, rr_mean))


def shortest_and_longest(rr: Line) -> tuple[Estimate, Estimate]:
    """The two extreme intervals of a line with at least one."""
    ordered = sorted(rr.beats, key=lambda beat: beat.value)
    return ordered[0], ordered[-1]


def spread_percent(rr: Line) -> Estimate:
    """(longest - shortest) / longest of a line with at least one interval, in %."""
    shortest, longest = shortest_and_longest(rr)
    ratio = shortest.value / longest.value
    return combine(
        100.0 * (1.0 - ratio),
        (100.0 * ratio / longest.value, longest),
        (-100.0 / longest.value, shortest),
    )


def rhythm_cautions(rr: Line, rate: Estimate) -> list[Caution]:
    """Beside everything that uses the mean RR: irregular, too few, hardly possible."""
    found = _irregular(rr)
    if not SLOWEST_PER_MIN <= rate.value <= FASTEST_PER_MIN:
        found.append(caution("implausible_rate", rate=rate.value))
    return found


def _irregular(rr: Line) -> list[Caution]:
    """By the rules in use: more than 10 %, more than 120 ms, 160 ms or more (no standard)."""
    if rr.n < 2:
        return []
    shortest, longest = shortest_and_longest(rr)
    gap = combine(longest.value - shortest.value, (1.0, longest), (-1.0, shortest))
    rules = [
        ("more than 10 %", spread_percent(rr), 10.0),
        ("more than 120 ms", gap, 120.0),
        ("160 ms or more", gap, 160.0),
    ]
    verdicts = {
        words: against_limit(part.value, part.plus_minus, limit) for words, part, limit in rules
    }
    too_close = Verdict.ABOVE not in verdicts.values()
    wanted = Verdict.TOO_CLOSE if too_close else Verdict.ABOVE
    met = [words for words, verdict in verdicts.items() if verdict is wanted]
    if not met:
        return []
    irregular = caution(
        "irregular_rhythm",
        too_close=too_close,
        shortest=shortest.value,
        longest=longest.value,
        n=rr.n,
        rules=", ".join(met),
    )
    if too_close or rr.n >= ENOUGH_INTERVALS:
        return [irregular]
    return [irregular, caution("few_beats_irregular", n=rr.n)]
