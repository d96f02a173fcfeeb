"""When the cautions beside a rate-corrected QT fire."""

from __future__ import annotations

from app.calculator.cautions import caution
from app.calculator.display import shown_number
from app.calculator.lines import Line, Marked
from app.calculator.uncertainty import Estimate, Verdict, against_limit, combine
from app.calculator.values import Caution

# AHA/ACCF 2010, from memory.
HIGH_RISK_MS = 500.0
# AHA/ACCF/HRS 2009 part III (found, secondary source).
WIDE_QRS_MS = 120.0
# Review text (found, secondary source).
BAZETT_RANGE_PER_MIN = (60.0, 100.0)


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
    verdicts = {
        limit: against_limit(rate.value, rate.plus_minus, limit) for limit in (lowest, highest)
    }
    if verdicts[lowest] is Verdict.BELOW or verdicts[highest] is Verdict.ABOVE:
        return [caution("bazett_outside_60_100", rate=text)]
    return [
        caution(
            "bazett_outside_60_100",
            too_close=True,
            rate=text,
            rate_pm=shown_number(rate.plus_minus, rate.plus_minus),
            limit=f"{limit:g}",
        )
        for limit, verdict in verdicts.items()
        if verdict is Verdict.TOO_CLOSE
    ]


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


def marks_disagree(qt: Line, rr: Line | None) -> list[Caution]:
    """A QT that is not shorter than the mean RR by more than their ±."""
    if qt.mean is None or rr is None or rr.mean is None:
        return []
    excess = combine(qt.mean.value - rr.mean.value, (1.0, qt.mean), (-1.0, rr.mean))
    if against_limit(excess.value, excess.plus_minus, 0.0) is Verdict.BELOW:
        return []
    return [caution("marks_disagree", place=qt.place)]
