"""P, PR, QRS and QT: one value for each lead they were marked in."""

from __future__ import annotations

from app.calculator.caution_rules import line_cautions, rounding, single_beat
from app.calculator.cautions import caution
from app.calculator.lines import Line, Marked
from app.calculator.make_value import beats_in_words, given, refused
from app.calculator.qtc_cautions import WIDE_QRS_MS, marks_disagree
from app.calculator.uncertainty import Axis
from app.calculator.values import Caution, Value

INTERVALS = ("p_duration", "pr", "qrs", "qt")
_LIMITS_MS = {"qrs": (WIDE_QRS_MS,)}


def interval_values(marked: Marked) -> list[Value]:
    """The interval of every line of P, PR, QRS and QT."""
    return [_value_of(marked, line) for key in INTERVALS for line in marked.lines_of(key)]


def _value_of(marked: Marked, line: Line) -> Value:
    speed = marked.reading.calibration.paper_speed_mm_per_s.value
    method = f"width in mm / {speed:g} mm/s"
    if line.mean is None:
        return refused(line.key, line.refusal, method, line.caliper_ids, lead=line.lead)
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
        line.caliper_ids,
        cautions,
        n=line.n,
        lead=line.lead,
        spread=line.spread,
    )


def single_lead(line: Line) -> list[Caution]:
    """Beside an interval of one named lead; without a name `no_lead` stands instead."""
    return [] if line.lead is None else [caution("single_lead_interval")]
