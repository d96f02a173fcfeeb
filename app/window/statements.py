"""Plain sentences about the sheet and its settings; no Qt."""

from __future__ import annotations

import math

import numpy as np

from app.calculator.caution_rules import COARSE_STEP_MM
from app.reading.calibration import Calibration, Evidence, Setting
from app.reading.marks import PicturePoint
from app.reading.model import Reading
from imaging.sheet_map import SheetMap

# Paper is ruled within 2 % (EC11, from memory); the rest is for a box drawn by eye.
_BELIEVABLE_STRETCH_PERCENT = 5.0
_EVIDENCE_WORDS = {
    Evidence.DEFAULT: "default",
    Evidence.PULSE: "pulse",
    Evidence.LEGEND: "legend",
    Evidence.READER: "reader",
}


def evidence_statement(setting: Setting) -> str:
    """What a setting rests on and whether somebody has confirmed it."""
    word = _EVIDENCE_WORDS[setting.evidence]
    if not setting.confirmed:
        return f"{word}, not confirmed"
    if setting.evidence is Evidence.READER:
        return "confirmed by reader"
    return f"{word}, confirmed"


def unconfirmed_settings(calibration: Calibration) -> tuple[str, ...]:
    """Each setting nobody has confirmed, with its value."""
    rows = [
        ("paper speed", calibration.paper_speed_mm_per_s, "mm/s"),
        ("gain", calibration.gain_mm_per_mv, "mm/mV"),
        ("chest gain", calibration.chest_gain_mm_per_mv, "mm/mV"),
    ]
    return tuple(
        f"{name} {setting.value:g} {unit}"
        for name, setting, unit in rows
        if setting is not None and not setting.confirmed
    )


def unconfirmed_statement(calibration: Calibration) -> str:
    """One sentence on what nobody has confirmed; empty when all is confirmed."""
    names = unconfirmed_settings(calibration)
    if not names:
        return ""
    listed = " and ".join(filter(None, [", ".join(names[:-1]), names[-1]]))
    listed = listed[0].upper() + listed[1:]
    are = "is" if len(names) == 1 else "are"
    return (
        f"{listed} {are} not confirmed: values marked ? rest on that. Check the legend or "
        "calibration pulse on the sheet, then confirm above."
    )


def grid_statement(sheet_map: SheetMap | None) -> str:
    """What is known of the grid, in one line for the status bar."""
    if sheet_map is None:
        return "No grid yet"
    pitch = (
        f"{sheet_map.x_pitch_px_per_mm:.2f} × {sheet_map.y_pitch_px_per_mm:.2f} px per small square"
    )
    error_mm = sheet_map.largest_standard_error_mm()
    error = "" if error_mm is None else f", standard error {_small_mm(error_mm)}"
    if sheet_map.source == "reader":
        return f"Scale given by hand: {pitch}{error}"
    if not sheet_map.scale_is_certain:
        return f"Grid found, scale NOT certain: {pitch}{error}"
    return f"Grid found: {pitch}{error}"


def _small_mm(error_mm: float) -> str:
    return f"{error_mm:.2g} mm" if error_mm >= 0.001 else "below 0.001 mm"


def pointer_statement(point: PicturePoint | None, sheet_map: SheetMap | None) -> str:
    """Where the pointer is, in mm of grid where that is known."""
    if point is None:
        return ""
    if sheet_map is None:
        return f"{point.x_px:.0f}, {point.y_px:.0f} px"
    x_mm, y_mm = sheet_map.to_mm(np.array([[point.x_px, point.y_px]]))[0]
    if not (math.isfinite(x_mm) and math.isfinite(y_mm)):
        return ""
    return f"x {x_mm:.1f} mm, y {y_mm:.1f} mm"


def coarse_zoom_statement(screen_px_per_picture_px: float, sheet_map: SheetMap | None) -> str:
    """Why to zoom in before marking; empty where the screen shows enough.

    The limit is that of the caution beside a value whose marks were placed so.
    """
    if sheet_map is None:
        return ""
    pitch_px_per_mm = min(sheet_map.x_pitch_px_per_mm, sheet_map.y_pitch_px_per_mm)
    screen_px_mm = 1.0 / (screen_px_per_picture_px * pitch_px_per_mm)
    if screen_px_mm <= COARSE_STEP_MM:
        return ""
    return (
        f"One screen pixel is {screen_px_mm:.1f} mm here: zoom in with the wheel, or press 1, "
        "for sharper marks."
    )


def miscount_statement(sheet_map: SheetMap) -> str:
    """Why the counts of a box are doubtful; empty where its squares are as high as wide."""
    ratio = sheet_map.x_pitch_px_per_mm / sheet_map.y_pitch_px_per_mm
    percent = 100.0 * (max(ratio, 1.0 / ratio) - 1.0)
    if percent <= _BELIEVABLE_STRETCH_PERCENT:
        return ""
    wider, high = ("wider", "high") if ratio > 1.0 else ("higher", "wide")
    return (
        f"By these counts the squares are {percent:.0f} % {wider} than {high}: "
        "one of the counts is probably wrong."
    )


def holds_work(reading: Reading) -> bool:
    """Whether a reading that has no file yet holds anything its reader put there."""
    by_hand = reading.sheet_map is not None and reading.sheet_map.source == "reader"
    return bool(
        by_hand
        or reading.calipers
        or reading.hand_figures
        or reading.reader
        or reading.colleague
        or reading.calibration != Calibration()
    )
