"""The frontal QRS axis from the net heights in leads I and aVF."""

from __future__ import annotations

import math
from collections.abc import Mapping

from app.calculator.caution_rules import line_cautions, single_beat
from app.calculator.cautions import caution
from app.calculator.display import shown_number
from app.calculator.heights import NetHeight, net_heights, not_marked
from app.calculator.lines import Marked
from app.calculator.make_value import caliper_ids, given, refused
from app.calculator.uncertainty import Axis, Estimate, Verdict, against_limit, combine
from app.calculator.values import Caution, Value

LEADS = ("I", "aVF")
# Augmented leads are smaller than the limb leads by √3/2: Novosel 1999 (found).
AUGMENTED = 2.0 / math.sqrt(3.0)
SMALL_VECTOR_MM = 5.0
# Less than any mark can show; an angle of it would be made of rounding.
_NO_VECTOR_MV = 1e-9
_METHOD = "atan2(2/√3 aVF, I) from net QRS heights in I and aVF"


def frontal_axis_deg(lead_i: float, lead_avf: float) -> float:
    """Angle in the frontal plane, clockwise from lead I, above -180 and up to 180.

    Parameters
    ----------
    lead_i, lead_avf : float
        Net QRS in the two leads, in one unit.

    Notes
    -----
    Source: Novosel 1999 (found).
    """
    angle_deg = math.degrees(math.atan2(AUGMENTED * lead_avf, lead_i))
    return 180.0 if angle_deg == -180.0 else angle_deg


def vector_size(lead_i: float, lead_avf: float) -> float:
    """Length of the frontal vector, in the unit of its leads."""
    return math.hypot(lead_i, AUGMENTED * lead_avf)


def axis_values(marked: Marked) -> list[Value]:
    """The axis, once a part of the QRS was marked in lead I or aVF."""
    nets = {net.lead: net for net in net_heights(marked) if net.lead in LEADS}
    if not nets:
        return []
    found = [nets[lead] for lead in LEADS if lead in nets]
    lines = [line for net in found for line in net.lines]
    ids = caliper_ids(lines)
    sentence = _what_is_missing(nets)
    if sentence:
        return [refused("qrs_axis", sentence, _METHOD, ids, lead=None)]
    lead_i, lead_avf = (net.estimate for net in found)
    assert lead_i is not None  # what is missing was said above
    assert lead_avf is not None
    if _is_indeterminate(lead_i, lead_avf):
        sentence = "The net QRS in I and aVF is not told from none: the axis is indeterminate."
        return [refused("qrs_axis", sentence, _METHOD, ids, lead=None)]
    beats = min(net.n for net in found)
    cautions = [
        *small_vector(_size_mm(marked, lead_i, lead_avf)),
        *line_cautions(marked.reading, Axis.DOWN, lines),
        *(said for net in found for said in not_marked(net)),
        *single_beat(beats=beats),
    ]
    axis = axis_of(lead_i, lead_avf)
    return [given("qrs_axis", axis, _METHOD, ids, cautions, n=beats, lead=None)]


def axis_of(lead_i: Estimate, lead_avf: Estimate) -> Estimate:
    """The axis in degrees with the errors of both leads carried over; not for no vector."""
    square = vector_size(lead_i.value, lead_avf.value) ** 2
    return combine(
        frontal_axis_deg(lead_i.value, lead_avf.value),
        (math.degrees(-AUGMENTED * lead_avf.value / square), lead_i),
        (math.degrees(AUGMENTED * lead_i.value / square), lead_avf),
    )


def small_vector(size_mm: Estimate) -> list[Caution]:
    """A vector below 5 mm on the paper, or too close to call."""
    verdict = against_limit(size_mm.value, size_mm.plus_minus, SMALL_VECTOR_MM)
    if verdict is Verdict.ABOVE:
        return []
    return [
        caution(
            "axis_small_vector",
            too_close=verdict is Verdict.TOO_CLOSE,
            size_mm=shown_number(size_mm.value, size_mm.plus_minus),
            size_pm_mm=shown_number(size_mm.plus_minus, size_mm.plus_minus),
        )
    ]


def _what_is_missing(nets: Mapping[str, NetHeight]) -> str:
    for lead in LEADS:
        if lead not in nets:
            return f"Mark the QRS heights in lead {lead} too: the axis needs I and aVF."
    return next((net.refusal for net in nets.values() if net.refusal), "")


def _is_indeterminate(lead_i: Estimate, lead_avf: Estimate) -> bool:
    """Whether a vector of no size lies within two sigma of both leads together."""
    if vector_size(lead_i.value, lead_avf.value) < _NO_VECTOR_MV:
        return True
    size = _size(lead_i, lead_avf)
    # An error at right angles to the vector that is as long as the vector itself is 1 rad.
    across = math.radians(axis_of(lead_i, lead_avf).plus_minus) * size.value
    return size.value <= max(size.plus_minus, across)


def _size(lead_i: Estimate, lead_avf: Estimate) -> Estimate:
    size = vector_size(lead_i.value, lead_avf.value)
    return combine(
        size,
        (lead_i.value / size, lead_i),
        (AUGMENTED**2 * lead_avf.value / size, lead_avf),
    )


def _size_mm(marked: Marked, lead_i: Estimate, lead_avf: Estimate) -> Estimate:
    """The size on the paper, where the error of a mark is what it is at every gain."""
    size_mv = _size(lead_i, lead_avf)
    gain = marked.reading.calibration.gain_for(LEADS[0]).value
    return combine(size_mv.value * gain, (gain, size_mv))
