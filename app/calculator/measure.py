"""What one caliper measures by itself: for one beat's row, a free caliper, a label."""

from __future__ import annotations

from dataclasses import replace

from app.calculator.catalogue import CATALOGUE
from app.calculator.caution_rules import sheet_cautions
from app.calculator.rate import rate_of
from app.calculator.spans import NO_SCALE, Span, axis_of, measure_spans
from app.calculator.uncertainty import Axis, Estimate
from app.calculator.values import Caution, Value
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
    axis = axis_of(caliper)
    method = _method(reading, caliper, axis)
    keys = _KEYS[caliper.kind]
    if span.estimate is None:
        sentence = span.refusal if span.refusal == NO_SCALE else f"This caliper {span.refusal}"
        return [replace(_value(key, span, None, method), refusal=sentence) for key in keys]
    cautions = sheet_cautions(reading, axis, caliper.lead, covered=span.covered)
    estimates = [span.estimate]
    if len(keys) > 1:
        estimates.append(rate_of(span.estimate))
    return [
        _value(key, span, estimate, method, tuple(cautions))
        for key, estimate in zip(keys, estimates, strict=True)
    ]


def _method(reading: Reading, caliper: Caliper, axis: Axis) -> str:
    if axis is Axis.DOWN:
        gain = reading.calibration.gain_for(caliper.lead).value
        return f"height in mm / {gain:g} mm/mV"
    speed = reading.calibration.paper_speed_mm_per_s.value
    if caliper.kind is CaliperKind.COMB:
        return f"width in mm / {caliper.teeth - 1} gaps / {speed:g} mm/s"
    return f"width in mm / {speed:g} mm/s"


def _value(
    key: str,
    span: Span,
    estimate: Estimate | None,
    method: str,
    cautions: tuple[Caution, ...] = (),
) -> Value:
    entry = CATALOGUE[key]
    return Value(
        key=key,
        label=entry.label,
        value=None if estimate is None else estimate.value,
        unit=entry.unit,
        plus_minus=None if estimate is None else estimate.plus_minus,
        method=method,
        source=entry.source,
        n=0 if estimate is None else span.caliper.teeth - 1,
        lead=span.caliper.lead,
        cautions=cautions,
        caliper_ids=(span.caliper.caliper_id,),
    )
