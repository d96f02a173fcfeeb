"""Rate, mean RR and RR spread: for each lead with RR intervals."""

from __future__ import annotations

from collections.abc import Sequence

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, given, refused
from app.calculator.qtc_cautions import BAZETT_RANGE_PER_MIN
from app.calculator.rhythm import rate_of, rhythm_cautions, shortest_and_longest, spread_percent
from app.calculator.uncertainty import Axis, Estimate
from app.calculator.values import Caution, Value

_METHODS = {
    "rate": "60 n / sum of RR in s",
    "rr_mean": "sum of RR / n",
    "rr_spread": "(longest - shortest) / longest RR",
}


def rate_values(marked: Marked) -> list[Value]:
    """Rate, mean RR and RR spread for every lead with RR intervals."""
    return [value for rr in marked.lines_of("rr") for value in _values_of(marked, rr)]


def _values_of(marked: Marked, rr: Line) -> list[Value]:
    if rr.mean is None:
        return [_refused(key, rr, rr.refusal) for key in _METHODS]
    rate = rate_of(rr.mean)
    cautions = [
        *line_cautions(marked.reading, Axis.ALONG, [rr]),
        *rhythm_cautions(rr, rate),
    ]
    of_a_mean = [*cautions, *single_beat(intervals=rr.n)]
    words = beats_in_words(rr, "interval")
    return [
        _given("rate", rr, rate, words, [*of_a_mean, *rounding(rate, *BAZETT_RANGE_PER_MIN)]),
        _given("rr_mean", rr, rr.mean, words, of_a_mean, spread=rr.spread),
        _spread(rr, cautions),
    ]


def _spread(rr: Line, cautions: Sequence[Caution]) -> Value:
    if rr.n < 2:
        return _refused("rr_spread", rr, "Mark a second RR interval: one alone has no spread.")
    shortest, longest = shortest_and_longest(rr)
    words = f"{shortest.value:.0f} to {longest.value:.0f} ms over {rr.n} intervals"
    return _given("rr_spread", rr, spread_percent(rr), words, cautions)


def _given(
    key: str,
    rr: Line,
    estimate: Estimate,
    words: str,
    cautions: Sequence[Caution],
    spread: float | None = None,
) -> Value:
    method = f"{_METHODS[key]}, {words}"
    ids = rr.caliper_ids
    return given(key, estimate, method, ids, cautions, n=rr.n, lead=rr.lead, spread=spread)


def _refused(key: str, rr: Line, sentence: str) -> Value:
    return refused(key, sentence, _METHODS[key], rr.caliper_ids, lead=rr.lead)
