"""Every caution there is: its line, its reason, its source. One function produces each.

When a caution fires is decided in `caution_rules`, `rhythm`, `intervals`, `qtc_cautions`,
`heights` and `axis`; here is only what it says.
"""

from __future__ import annotations

from dataclasses import dataclass

from app.calculator.values import Caution

NO_SOURCE = "common practice, no source"


@dataclass(frozen=True, slots=True)
class CautionEntry:
    """One row of the table.

    Attributes
    ----------
    text : str
        The line beside the value, with ``{names}`` for the facts it needs.
    reason, source : str
        As in `Caution`.
    too_close : str
        The line instead of `text` where the limit is too close to call; empty for cautions
        without a limit.
    """

    text: str
    reason: str
    source: str
    too_close: str = ""


_RECORDER = (
    "AHA/ACC/HRS 2007 part I (found, secondary source); "
    "recorder tolerance ±5 %, IEC 60601-2-25:2011 (found, secondary source)"
)
_RATE_RANGE = "Vandenberk 2016 (found); review text (found, secondary source)"
_PART_III = "AHA/ACCF/HRS 2009 part III (found, secondary source)"

TABLE: dict[str, CautionEntry] = {
    "speed_unconfirmed": CautionEntry(
        "Paper speed {speed:g} mm/s {evidence}; nobody has confirmed it.",
        "Every duration scales with the paper speed, and the ± does not contain that doubt.",
        _RECORDER,
    ),
    "gain_unconfirmed": CautionEntry(
        "Gain {gain:g} mm/mV {evidence}; nobody has confirmed it.",
        "Every height scales with the gain, and the ± does not contain that doubt.",
        _RECORDER,
    ),
    "scale_uncertain": CautionEntry(
        "The grid may be 1 mm or 5 mm: check it against the paper.",
        "Thin and bold lines could not be told apart, so every value may be off five times.",
        "grid of 1 mm and 5 mm: AHA/ACC/HRS 2007 part I (found, secondary source)",
    ),
    "scale_by_hand": CautionEntry(
        "The scale comes from a box drawn by the reader.",
        "The grid was not found on the picture: tilt and unevenness are not taken out.",
        NO_SOURCE,
    ),
    "bent_sheet": CautionEntry(
        "The sheet is tilted or bent on the picture; the grid was followed over it.",
        "The scale differs from place to place: each mark is read on the grid around it, and "
        "the ± contains how well the grid was seen there.",
        "lock-in of the grid's own lines (computed)",
    ),
    "unequal_pitch": CautionEntry(
        "Squares are {percent:.1f} % {wider} than {higher} on this picture.",
        "A stretched copy, print or photo: each direction is measured with its own scale, "
        "but where the stretch varies over the page the values do not follow.",
        "ruling within ±2 %: EC11, IEC 60601-2-51 (from memory); non-uniform scale (computed)",
    ),
    "coarse_picture": CautionEntry(
        "Coarse picture: one pixel is {pixel:.3g} {unit}.",
        "Below 150 dots an inch (5.9 pixels to a small square) one pixel is more than "
        "6.8 ms at 25 mm/s.",
        "quantisation (computed)",
    ),
    "coarse_placing": CautionEntry(
        "A mark was placed at a coarse zoom, in steps of about {step:.2g} mm.",
        "The ± contains that: zoom in and place it again, or nudge it with the arrow keys, for "
        "a smaller one.",
        "quantisation (computed)",
    ),
    "outside_seen_grid": CautionEntry(
        "A mark lies where the grid was not seen.",
        "The scale there is carried over from elsewhere on the page.",
        "computed",
    ),
    "no_lead": CautionEntry(
        "No lead was named.",
        "Leads differ (QT by 50 to 65 ms), and the gain may differ in chest leads.",
        "Garson 1993 (found); Braunwald 2019 (found, secondary source)",
    ),
    "single_beat": CautionEntry(
        "From one {unit} only.",
        "Beats differ, and so does each placing: the mean of several is steadier.",
        NO_SOURCE,
    ),
    "single_lead_interval": CautionEntry(
        "Measured in one lead: an interval over all leads is longer.",
        "A global interval runs from the earliest onset to the latest end in any lead. The ± "
        "covers map and marks, not two readers' different idea of where a wave ends.",
        _PART_III,
    ),
    "qt_method": CautionEntry(
        "T end rule not recorded: compare only with the same rule and lead.",
        "A tangent gives about 10 ms less than the threshold rule and leads differ by up to "
        "65 ms; a slower paper (50 to 25 mm/s) reads 16 ms longer.",
        "ESC teaching text (found, secondary source); Murray 1994 (found)",
    ),
    "irregular_rhythm": CautionEntry(
        "Irregular RR: {shortest:.0f} to {longest:.0f} ms over {n} intervals ({rules}).",
        "One mean hides the spread; the rules for 'irregular' differ between texts: more than "
        "10 %, more than 120 ms, 160 ms or more.",
        "four teaching texts (found, secondary source); no single standard",
        too_close="RR may be irregular: {shortest:.0f} to {longest:.0f} ms over {n} "
        "intervals ({rules}).",
    ),
    "few_beats_irregular": CautionEntry(
        "Irregular RR and only {n} intervals: average ten or more.",
        "With irregular RR a short stretch may miss the mean rate, and QTc with it.",
        "AHA/ACCF/HRS 2009 part IV (from memory)",
    ),
    "implausible_rate": CautionEntry(
        "A rate of {rate:.0f}/min is hardly possible: check scale, paper speed and marks.",
        "A grid taken five times too large or small gives such a rate.",
        NO_SOURCE,
    ),
    "marks_disagree": CautionEntry(
        "{place} was marked as long as the mean RR: one of them is wrong.",
        "A QT as long as the RR leaves no room for the next beat.",
        "computed",
    ),
    "no_rr_for_qtc": CautionEntry(
        "No usable RR interval: QTc is not worked out.",
        "Every correction needs the rate of the same recording.",
        "all formulas (found, secondary source)",
    ),
    "bazett_outside_60_100": CautionEntry(
        "Rate {rate}/min is outside 60 to 100: Bazett misleads there.",
        "Bazett corrects too much at fast and too little at slow rates: see a second formula.",
        _RATE_RANGE,
        too_close="Rate {rate} ± {rate_pm}/min is too close to call against {limit}: "
        "outside 60 to 100 Bazett misleads.",
    ),
    "wide_qrs_qtc": CautionEntry(
        "QRS {qrs} ms is 120 ms or more: a plain QTc reads too long.",
        "The wide QRS itself lengthens QT; published corrections differ by more than 20 ms.",
        "Bogossian 2014; Wang 2017 (found); 120 ms: " + _PART_III,
        too_close="QRS {qrs} ± {qrs_pm} ms is too close to call against 120 ms, "
        "from where on a plain QTc reads too long.",
    ),
    "qrs_not_measured_for_qtc": CautionEntry(
        "QRS was not measured: whether it is 120 ms or more cannot be told.",
        "With a wide QRS a plain QTc reads too long.",
        "Bogossian 2014 (found); 120 ms: " + _PART_III,
    ),
    "qtc_500": CautionEntry(
        "QTc is 500 ms or more: measure again and have a clinician look now.",
        "500 ms is a published line for high risk in hospital; whether it applies is for a "
        "licensed clinician and the local guideline.",
        "AHA/ACCF 2010 (from memory)",
        too_close="QTc is too close to call against 500 ms: measure again; from there on a "
        "clinician should look now.",
    ),
    "axis_small_vector": CautionEntry(
        "Small net QRS ({size_mm} mm): the angle is hardly determined.",
        "Below 5 mm an error of 0.5 mm turns the axis by 5.7° and more.",
        "AHA/ACCF/HRS 2009 part III (found, secondary source); angle error (computed)",
        too_close="Net QRS {size_mm} ± {size_pm_mm} mm is too close to call against "
        "5 mm, below which the angle is hardly determined.",
    ),
    "one_sided_deflection": CautionEntry(
        "{parts} not marked in lead {lead}: taken as none.",
        "The net height is R less Q and S; an unmarked one would turn the axis.",
        "Novosel 1999 (found)",
    ),
    "rounding": CautionEntry(
        "Shown rounded; worked out it is {value:.2f}, {side} {limit}.",
        "Limits are compared before rounding.",
        "JCGM 100:2008, 7.2.6 (from memory)",
    ),
}


def caution(code: str, *, too_close: bool = False, **facts: object) -> Caution:
    """The caution of that code with its facts filled in.

    Raises
    ------
    KeyError
        If there is no such code, or a fact of its line is missing.
    """
    entry = TABLE[code]
    text = entry.too_close if too_close else entry.text
    return Caution(code, text.format(**facts), entry.reason, entry.source)
