"""What one caliper measures by itself: for one beat's row, a free caliper, a label."""

from __future__ import annotations

from app.calculator.caution_rules import sheet_cautions
from app.calculator.make_value import given, refused
from app.calculator.rhythm import rate_of
from app.calculator.spans import NO_SCALE, axis_of, measure_spans
from app.calculator.uncertainty import Axis
from app.calculator.values import Value
from app.reading.marks import Caliper, CaliperKind
from app.reading.model import Reading

_KEYS = {
    CaliperKind.TIME: ("span",),
    CaliperKind.HEIGHT: ("height",),
    CaliperKind.COMB: ("comb", "comb_rate"),
}


def measure_caliper(reading: Reading, caliper: Caliper) -> list[Value]:
    """The value of one caliper: time in ms, height in mV (up is positive).

    A comb gives two: the distance of its teeth in ms, and the rate that is. The caliper need
    not belong to the reading, whose map and calibration alone count.
    """
    (span,) = measure_spans(reading, [caliper])
    axis, lead, ids = axis_of(caliper), caliper.lead, (caliper.caliper_id,)
    method = _method(reading, caliper, axis)
    keys = _KEYS[caliper.kind]
    if span.estimate is None:
        sentence = span.refusal if span.refusal == NO_SCALE else f"This caliper {span.refusal}"
        return [refused(key, sentence, method, ids, lead=lead) for key in keys]
    cautions = sheet_cautions(reading, axis, lead, covered=span.covered, step_mm=span.step_mm)
    gaps = caliper.teeth - 1
    values = [given(keys[0], span.estimate, method, ids, cautions, n=gaps, lead=lead)]
    for key in keys[1:]:
        rate = rate_of(span.estimate)
        values.append(given(key, rate, f"60 / pitch, {method}", ids, cautions, n=gaps, lead=lead))
    return values


def _method(reading: Reading, caliper: Caliper, axis: Axis) -> str:
    if axis is Axis.DOWN:
        gain = reading.calibration.gain_for(caliper.lead).value
        return f"height in mm / {gain:g} mm/mV"
    speed = reading.calibration.paper_speed_mm_per_s.value
    if caliper.kind is CaliperKind.COMB:
        gaps = caliper.teeth - 1
        return f"width in mm / {gaps} gap{'s' if gaps > 1 else ''} / {speed:g} mm/s"
    return f"width in mm / {speed:g} mm/s"
