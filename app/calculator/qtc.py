"""QT corrected for rate by four formulas. QT in ms, RR in s inside every formula."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.cautions import caution
from app.calculator.display import shown_number
from app.calculator.intervals import WIDE_QRS_MS, marks_disagree, single_lead
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, given, refused
from app.calculator.rate import BAZETT_RANGE_PER_MIN, rate_of, rhythm_cautions
from app.calculator.uncertainty import Axis, Estimate, Verdict, against_limit, combine
from app.calculator.values import Caution, Value

HIGH_RISK_MS = 500.0


def bazett_ms(qt_ms: float, rr_s: float) -> float:
    """QT / RR^(1/2). Bazett 1920, Heart 7:353 (found, secondary source)."""
    return qt_ms / math.sqrt(rr_s)


def fridericia_ms(qt_ms: float, rr_s: float) -> float:
    """QT / RR^(1/3), an exact third. Fridericia 1920 (found, secondary source)."""
    return qt_ms / math.cbrt(rr_s)


def framingham_ms(qt_ms: float, rr_s: float) -> float:
    """QT + 154 (1 - RR). Sagie 1992, Am J Cardiol 70:797 (found, secondary source)."""
    return qt_ms + 154.0 * (1.0 - rr_s)


def hodges_ms(qt_ms: float, rr_s: float) -> float:
    """QT + 1.75 (60/RR - 60). Hodges 1983, JACC 1:694 (found, secondary source)."""
    return qt_ms + 105.0 * (1.0 / rr_s - 1.0)


@dataclass(frozen=True, slots=True)
class Formula:
    """One correction with its slopes.

    Attributes
    ----------
    words : str
        For the method.
    qtc_ms : callable
        ``(qt_ms, rr_s) -> ms``.
    per_qt, per_rr : callable
        Partial derivatives at ``(qt_ms, rr_s)``: without a unit, and in ms/s.
    """

    words: str
    qtc_ms: Callable[[float, float], float]
    per_qt: Callable[[float, float], float]
    per_rr: Callable[[float, float], float]

    def correct(self, qt_ms: Estimate, rr_ms: Estimate) -> Estimate:
        """QTc in ms from a QT and a mean RR, both in ms."""
        qt, rr_s = qt_ms.value, rr_ms.value / 1000.0
        return combine(
            self.qtc_ms(qt, rr_s),
            (self.per_qt(qt, rr_s), qt_ms),
            (self.per_rr(qt, rr_s) / 1000.0, rr_ms),
        )


FORMULAS: dict[str, Formula] = {
    "qtc_bazett": Formula(
        "QT / RR^(1/2)",
        bazett_ms,
        lambda _qt, rr: rr**-0.5,
        lambda qt, rr: -0.5 * qt * rr**-1.5,
    ),
    "qtc_fridericia": Formula(
        "QT / RR^(1/3)",
        fridericia_ms,
        lambda _qt, rr: rr ** (-1.0 / 3.0),
        lambda qt, rr: -qt / 3.0 * rr ** (-4.0 / 3.0),
    ),
    "qtc_framingham": Formula(
        "QT + 154 (1 - RR)", framingham_ms, lambda _qt, _rr: 1.0, lambda _qt, _rr: -154.0
    ),
    "qtc_hodges": Formula(
        "QT + 1.75 (60/RR - 60)", hodges_ms, lambda _qt, _rr: 1.0, lambda _qt, rr: -105.0 / rr**2
    ),
}


def qtc_values(marked: Marked) -> list[Value]:
    """The four corrections for every lead with a QT line, by the rhythm line's mean RR."""
    rr = marked.rhythm()
    return [
        _value_of(marked, key, formula, qt, rr)
        for key, formula in FORMULAS.items()
        for qt in marked.lines_of("qt")
    ]


def _value_of(marked: Marked, key: str, formula: Formula, qt: Line, rr: Line | None) -> Value:
    lines = [qt] if rr is None else [qt, rr]
    if qt.mean is None:
        return refused(key, qt.refusal, formula.words, lines, lead=qt.lead)
    if rr is None or rr.mean is None:
        sentence = rr.refusal if rr is not None else "Mark an RR interval: QTc needs the rate."
        missing = [caution("no_rr_for_qtc")]
        return refused(key, sentence, formula.words, lines, lead=qt.lead, cautions=missing)
    disagree = marks_disagree(qt, rr)
    if disagree:
        sentence = "QT leaves no room in the mean RR: check both before QTc is worked out."
        return refused(key, sentence, formula.words, lines, lead=qt.lead, cautions=disagree)
    qtc = formula.correct(qt.mean, rr.mean)
    rate = rate_of(rr.mean)
    if qtc.value <= 0.0:
        sentence = f"This formula has no meaning at a rate of {rate.value:.0f}/min."
        return refused(key, sentence, formula.words, lines, lead=qt.lead)
    cautions = [
        *high_risk(qtc),
        *line_cautions(marked.reading, Axis.ALONG, lines),
        *(bazett_range(rate) if key == "qtc_bazett" else ()),
        *wide_qrs(widest_qrs(marked)),
        *rhythm_cautions(rr),
        *single_beat(qt.n, rr.n),
        *single_lead(qt),
        caution("qt_method"),
        *rounding(qtc, HIGH_RISK_MS),
    ]
    method = (
        f"{formula.words}, QT {shown_number(qt.mean.value, qt.mean.plus_minus)} ms "
        f"({beats_in_words(qt)}), RR {rr.mean.value / 1000.0:.3f} s "
        f"({beats_in_words(rr, 'interval')})"
    )
    return given(key, qtc, method, lines, cautions, n=qt.n, lead=qt.lead)


def high_risk(qtc: Estimate) -> list[Caution]:
    """500 ms or more, or too close to call."""
    verdict = against_limit(qtc.value, qtc.plus_minus, HIGH_RISK_MS)
    if verdict is Verdict.BELOW:
        return []
    return [caution("qtc_500", too_close=verdict is Verdict.TOO_CLOSE)]


def bazett_range(rate: Estimate) -> list[Caution]:
    """A rate below 60 or above 100, or too close to call against one of them."""
    lowest, highest = BAZETT_RANGE_PER_MIN
    text = shown_number(rate.value, rate.plus_minus)
    against_lowest = against_limit(rate.value, rate.plus_minus, lowest)
    against_highest = against_limit(rate.value, rate.plus_minus, highest)
    for verdict, limit in ((against_lowest, lowest), (against_highest, highest)):
        if verdict is Verdict.TOO_CLOSE:
            plus_minus = shown_number(rate.plus_minus, rate.plus_minus)
            return [
                caution(
                    "bazett_outside_60_100",
                    too_close=True,
                    rate=text,
                    rate_pm=plus_minus,
                    limit=f"{limit:g}",
                )
            ]
    if against_lowest is Verdict.BELOW or against_highest is Verdict.ABOVE:
        return [caution("bazett_outside_60_100", rate=text)]
    return []


def widest_qrs(marked: Marked) -> Estimate | None:
    """The longest QRS over the leads it was marked in: the nearest there is to a global one."""
    means = [line.mean for line in marked.lines_of("qrs") if line.mean is not None]
    return max(means, key=lambda mean: mean.value, default=None)


def wide_qrs(qrs: Estimate | None) -> list[Caution]:
    """QRS not measured, 120 ms or more, or too close to call."""
    if qrs is None:
        return [caution("qrs_not_measured_for_qtc")]
    verdict = against_limit(qrs.value, qrs.plus_minus, WIDE_QRS_MS)
    if verdict is Verdict.BELOW:
        return []
    return [
        caution(
            "wide_qrs_qtc",
            too_close=verdict is Verdict.TOO_CLOSE,
            qrs=shown_number(qrs.value, qrs.plus_minus),
            qrs_pm=shown_number(qrs.plus_minus, qrs.plus_minus),
        )
    ]
