"""RR intervals to mean, rate and spread, and how regular they are."""

from __future__ import annotations

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.cautions import caution
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, given, refused
from app.calculator.uncertainty import Axis, Estimate, Verdict, against_limit, combine
from app.calculator.values import Caution, Value

SLOWEST_PER_MIN = 20.0
FASTEST_PER_MIN = 300.0
ENOUGH_INTERVALS = 10
BAZETT_RANGE_PER_MIN = (60.0, 100.0)
_RATE_METHOD = "60 n / sum of RR in s"
_SPREAD_METHOD = "(longest - shortest) / longest RR"


def rate_per_min(rr_mean_ms: float) -> float:
    """Rate from the mean RR, which is 60 n / sum of RR (never the mean of single rates).

    Source: 60 / RR in teaching texts (found, secondary source); the mean is computed.
    """
    return 60_000.0 / rr_mean_ms


def rate_of(rr_mean: Estimate) -> Estimate:
    """The rate in /min with the mean RR's error carried over."""
    rate = rate_per_min(rr_mean.value)
    return combine(rate, (-rate / rr_mean.value, rr_mean))


def rate_values(marked: Marked) -> list[Value]:
    """Rate, mean RR and RR spread for every lead with RR intervals."""
    return [value for rr in marked.lines_of("rr") for value in _values_of(marked, rr)]


def _values_of(marked: Marked, rr: Line) -> list[Value]:
    if rr.mean is None:
        methods = {"rate": _RATE_METHOD, "rr_mean": "mean of RR", "rr_spread": _SPREAD_METHOD}
        return [
            refused(key, rr.refusal, method, [rr], lead=rr.lead) for key, method in methods.items()
        ]
    words = beats_in_words(rr, "interval")
    rate = rate_of(rr.mean)
    cautions = [
        *line_cautions(marked.reading, Axis.ALONG, [rr]),
        *rhythm_cautions(rr),
    ]
    with_count = [*cautions, *single_beat(intervals=rr.n)]
    return [
        given(
            "rate",
            rate,
            f"{_RATE_METHOD}, {words}",
            [rr],
            [*with_count, *rounding(rate, *BAZETT_RANGE_PER_MIN)],
            n=rr.n,
            lead=rr.lead,
        ),
        given("rr_mean", rr.mean, words, [rr], with_count, n=rr.n, lead=rr.lead, spread=rr.spread),
        _spread_value(rr, cautions),
    ]


def _spread_value(rr: Line, cautions: list[Caution]) -> Value:
    if rr.n < 2:
        sentence = "Mark a second RR interval: one alone has no spread."
        return refused("rr_spread", sentence, _SPREAD_METHOD, [rr], lead=rr.lead)
    shortest, longest = _extremes(rr)
    method = (
        f"{_SPREAD_METHOD}, {shortest.value:.0f} to {longest.value:.0f} ms over {rr.n} intervals"
    )
    return given("rr_spread", spread_percent(rr), method, [rr], cautions, n=rr.n, lead=rr.lead)


def _extremes(rr: Line) -> tuple[Estimate, Estimate]:
    ordered = sorted(rr.beats, key=lambda beat: beat.value)
    return ordered[0], ordered[-1]


def spread_percent(rr: Line) -> Estimate:
    """(longest - shortest) / longest of a line with a mean, in %."""
    shortest, longest = _extremes(rr)
    ratio = shortest.value / longest.value
    return combine(
        100.0 * (1.0 - ratio),
        (100.0 * ratio / longest.value, longest),
        (-100.0 / longest.value, shortest),
    )


def rhythm_cautions(rr: Line) -> list[Caution]:
    """Beside everything that uses the mean RR: irregular, too few, hardly possible."""
    assert rr.mean is not None  # asked only of lines that were not refused
    found = _irregular(rr)
    rate = rate_per_min(rr.mean.value)
    if not SLOWEST_PER_MIN <= rate <= FASTEST_PER_MIN:
        found.append(caution("implausible_rate", rate=rate))
    return found


def _irregular(rr: Line) -> list[Caution]:
    """By the rules in use: more than 10 %, more than 120 ms, 160 ms or more (no standard)."""
    if rr.n < 2:
        return []
    shortest, longest = _extremes(rr)
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
