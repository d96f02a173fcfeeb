"""QT corrected for rate by four formulas. QT in ms, RR in s inside every formula."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.cautions import caution
from app.calculator.display import shown_number
from app.calculator.intervals import single_lead
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, caliper_ids, given, refused
from app.calculator.qtc_cautions import (
    HIGH_RISK_MS,
    bazett_range,
    high_risk,
    marks_disagree,
    wide_qrs,
    widest_qrs,
)
from app.calculator.rhythm import rate_of, rhythm_cautions
from app.calculator.uncertainty import Axis, Estimate, combine
from app.calculator.values import Caution, Value


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
    ids = caliper_ids(lines)
    sentence, why = _refusal(qt, rr)
    if sentence:
        return refused(key, sentence, formula.words, ids, lead=qt.lead, cautions=why)
    assert qt.mean is not None  # a missing mean was refused above
    assert rr is not None
    assert rr.mean is not None
    qtc, rate = formula.correct(qt.mean, rr.mean), rate_of(rr.mean)
    if qtc.value <= 0.0:
        sentence = f"This formula has no meaning at a rate of {rate.value:.0f}/min."
        return refused(key, sentence, formula.words, ids, lead=qt.lead)
    cautions = [
        *high_risk(qtc),
        *line_cautions(marked.reading, Axis.ALONG, lines),
        *(bazett_range(rate) if key == "qtc_bazett" else ()),
        *wide_qrs(widest_qrs(marked)),
        *rhythm_cautions(rr, rate),
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
    return given(key, qtc, method, ids, cautions, n=qt.n, lead=qt.lead)


def _refusal(qt: Line, rr: Line | None) -> tuple[str, list[Caution]]:
    """Why there is no QTc, with the caution that says more; empty where there is one."""
    if qt.mean is None:
        return qt.refusal, []
    if rr is None:
        return "Mark an RR interval: QTc needs the rate.", [caution("no_rr_for_qtc")]
    if rr.mean is None:
        return rr.refusal, [caution("no_rr_for_qtc")]
    disagree = marks_disagree(qt, rr)
    if disagree:
        return "QT leaves no room in the mean RR: check both first.", disagree
    return "", []
