"""When the cautions on settings, sheet, beats and rounding fire."""

from __future__ import annotations

from collections.abc import Sequence

from app.calculator.cautions import caution
from app.calculator.display import shown_number
from app.calculator.lines import Line
from app.calculator.uncertainty import PEN_WIDTH_MM, Axis, Estimate, pitch_px_per_mm
from app.calculator.values import Caution
from app.reading.calibration import Evidence
from app.reading.model import Reading
from imaging.sheet_map import SheetMap

# 150 dots an inch (computed).
COARSE_PX_PER_MM = 5.9
# As much as the pen's own share of a leg's error.
COARSE_STEP_MM = 0.5 * PEN_WIDTH_MM
# A printed ruling is within ±2 %: EC11, IEC 60601-2-51, from memory.
UNEQUAL_PERCENT = 2.0
# Nearer to a limit than this, a number lies on it: no side can be told in two decimals.
_NOISE = 0.005
_EVIDENCE = {
    Evidence.DEFAULT: "is only the usual setting",
    Evidence.PULSE: "comes from the calibration pulse",
    Evidence.LEGEND: "comes from the printed legend",
    Evidence.READER: "was set by the reader",
}


def sheet_cautions(
    reading: Reading, axis: Axis, lead: str | None, *, covered: bool, step_mm: float
) -> list[Caution]:
    """What belongs beside anything measured along an axis of the sheet in a lead.

    `covered` and `step_mm` as in `Span`.
    """
    found = [*_setting_cautions(reading, axis, lead)]
    sheet_map = reading.sheet_map
    if sheet_map is None:
        return found
    if not sheet_map.scale_is_certain:
        found.insert(0, caution("scale_uncertain"))
    if sheet_map.source == "reader":
        found.append(caution("scale_by_hand"))
    if not covered:
        found.append(caution("outside_seen_grid"))
    if sheet_map.bend is not None:
        found.append(caution("bent_sheet"))
    return [
        *found,
        *_coarse_picture(reading, sheet_map, axis, lead),
        *_coarse_placing(step_mm),
        *_unequal_pitch(sheet_map),
    ]


def line_cautions(reading: Reading, axis: Axis, lines: Sequence[Line]) -> list[Caution]:
    """What belongs beside anything that rests on these lines, the first one's lead leading."""
    covered = all(line.covered for line in lines)
    step_mm = max(line.step_mm for line in lines)
    found = sheet_cautions(reading, axis, lines[0].lead, covered=covered, step_mm=step_mm)
    if any(line.lead is None for line in lines):
        found.append(caution("no_lead"))
    return found


def single_beat(beats: int | None = None, intervals: int | None = None) -> list[Caution]:
    """Beside what rests on one beat, one RR interval, or both."""
    units = []
    if beats == 1:
        units.append("beat")
    if intervals == 1:
        units.append("RR interval")
    return [caution("single_beat", unit=" and one ".join(units))] if units else []


def rounding(estimate: Estimate, *limits: float) -> list[Caution]:
    """Where the number shown lies on another side of a limit than the one worked out."""
    text = shown_number(estimate.value, estimate.plus_minus)
    shown = float(text.replace("−", "-"))
    found = []
    for limit in limits:
        if abs(estimate.value - limit) < _NOISE:
            continue
        is_below = estimate.value < limit
        if (is_below and shown >= limit) or estimate.value > limit >= shown:
            side = "below" if is_below else "above"
            found.append(caution("rounding", value=estimate.value, side=side, limit=f"{limit:g}"))
    return found


def _setting_cautions(reading: Reading, axis: Axis, lead: str | None) -> list[Caution]:
    if axis is Axis.ALONG:
        speed = reading.calibration.paper_speed_mm_per_s
        if speed.confirmed:
            return []
        words = _EVIDENCE[speed.evidence]
        return [caution("speed_unconfirmed", speed=speed.value, evidence=words)]
    gain = reading.calibration.gain_for(lead)
    if gain.confirmed:
        return []
    return [caution("gain_unconfirmed", gain=gain.value, evidence=_EVIDENCE[gain.evidence])]


def _coarse_picture(
    reading: Reading, sheet_map: SheetMap, axis: Axis, lead: str | None
) -> list[Caution]:
    pitch = pitch_px_per_mm(sheet_map, axis)
    if axis is Axis.ALONG:
        pixel, unit = reading.calibration.duration_ms(1.0 / pitch), "ms"
    else:
        pixel, unit = reading.calibration.height_mv(1.0 / pitch, lead), "mV"
    if pitch >= COARSE_PX_PER_MM:
        return []
    return [caution("coarse_picture", pixel=pixel, unit=unit)]


def _coarse_placing(step_mm: float) -> list[Caution]:
    return [caution("coarse_placing", step=step_mm)] if step_mm > COARSE_STEP_MM else []


def _unequal_pitch(sheet_map: SheetMap) -> list[Caution]:
    if sheet_map.bend is not None:
        # A tilt shortens one direction, and the map that follows the sheet takes that out.
        return []
    across, down = sheet_map.x_pitch_px_per_mm, sheet_map.y_pitch_px_per_mm
    percent = 100.0 * (max(across, down) / min(across, down) - 1.0)
    if percent <= UNEQUAL_PERCENT:
        return []
    wider, higher = ("wider", "high") if across > down else ("higher", "wide")
    return [caution("unequal_pitch", percent=percent, wider=wider, higher=higher)]
