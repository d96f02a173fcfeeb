"""P, PR, QRS and QT: one value for each lead they were marked in."""

from __future__ import annotations

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.cautions import caution
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, given, refused
from app.calculator.uncertainty import Axis, Verdict, against_limit, combine
from app.calculator.values import Caution, Value

INTERVALS = ("p_duration", "pr", "qrs", "qt")
WIDE_QRS_MS = 120.0
_LIMITS_MS = {"qrs": (WIDE_QRS_MS,)}


def interval_values(marked: Marked) -> list[Value]:
    """The interval of every line of P, PR, QRS and QT."""
    return [_value_of(marked, line) for key in INTERVALS for line in marked.lines_of(key)]


def _value_of(marked: Marked, line: Line) -> Value:
    speed = marked.reading.calibration.paper_speed_mm_per_s.value
    method = f"width in mm / {speed:g} mm/s"
    if line.mean is None:
        return refused(line.key, line.refusal, method, [line], lead=line.lead)
    cautions = [
        *line_cautions(marked.reading, Axis.ALONG, [line]),
        *single_beat(beats=line.n),
        *single_lead(line),
        *rounding(line.mean, *_LIMITS_MS.get(line.key, ())),
    ]
    if line.key == "qt":
        cautions += [caution("qt_method"), *marks_disagree(line, marked.rhythm())]
    return given(
        line.key,
        line.mean,
        f"{method}, {beats_in_words(line)}",
        [line],
        cautions,
        n=line.n,
        lead=line.lead,
        spread=line.spread,
    )


def single_lead(line: Line) -> list[Caution]:
    """Beside an interval of one named lead; without a name `no_lead` stands instead."""
    return [] if line.lead is None else [caution("single_lead_interval")]


def marks_disagree(qt: Line, rr: Line | None) -> list[Caution]:
    """Beside a QT that is not shorter than the mean RR by more than their ±."""
    if qt.mean is None or rr is None or rr.mean is None:
        return []
    room = combine(rr.mean.value - qt.mean.value, (1.0, rr.mean), (-1.0, qt.mean))
    if against_limit(-room.value, room.plus_minus, 0.0) is Verdict.BELOW:
        return []
    return [caution("marks_disagree", lead=qt.lead if qt.lead is not None else "no lead")]
