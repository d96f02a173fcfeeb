"""What a filed reading says in words, the same on the picture, in JSON and in CSV."""

from __future__ import annotations

import math
from collections.abc import Sequence

from app.calculator import Value, format_value
from app.calculator.catalogue import CATALOGUE
from app.calculator.display import shown_number, with_mark, with_unit
from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    HandFigure,
    Reading,
    Setting,
    quantity,
)
from imaging.sheet_map import SheetMap

DISCLAIMER = (
    "A calculation aid: it diagnoses nothing. A licensed clinician decides, by the local "
    "guideline; the original tracing remains the record, the marks are an addition to it."
)
PLUS_MINUS_MEANS = (
    "± is two standard errors of the grid and the marks. It does not contain a recorder whose "
    "speed or gain is off, nor two readers' different idea of where a wave ends."
)

_RESTS_ON = {
    Evidence.DEFAULT: "a default, nothing on the page",
    Evidence.PULSE: "the calibration pulse",
    Evidence.LEGEND: "the printed legend",
    Evidence.READER: "what the reader entered",
}
_FREE_NAMES = {
    CaliperKind.TIME: "Time",
    CaliperKind.HEIGHT: "Height",
    CaliperKind.COMB: "Comb",
}


def rests_on(setting: Setting) -> str:
    """What a setting rests on."""
    return _RESTS_ON[setting.evidence]


def settings_of(calibration: Calibration) -> list[tuple[str, Setting, str]]:
    """Name, setting and unit of each setting there is."""
    rows = [
        ("Paper speed", calibration.paper_speed_mm_per_s, "mm/s"),
        ("Gain", calibration.gain_mm_per_mv, "mm/mV"),
    ]
    if calibration.chest_gain_mm_per_mv is not None:
        rows.append(("Gain in V1 to V6", calibration.chest_gain_mm_per_mv, "mm/mV"))
    return rows


def confirmed_by(reading: Reading, setting: Setting) -> str | None:
    """Who says that a setting is so; None where nobody does."""
    if not setting.confirmed:
        return None
    return reading.reader.strip() or "a reader who is not named"


def setting_sentence(reading: Reading, name: str, setting: Setting, unit: str) -> str:
    """One setting with what it rests on and who has confirmed it."""
    who = confirmed_by(reading, setting)
    said = "NOT confirmed" if who is None else f"confirmed by {who}"
    return f"{name} {setting.value:g} {unit}: rests on {rests_on(setting)}; {said}."


def grid_sentences(sheet_map: SheetMap | None) -> list[str]:
    """What is known of the grid, a sentence each."""
    if sheet_map is None:
        return ["Grid: none found and no scale given."]
    found = "given by a box the reader drew" if sheet_map.source == "reader" else "found"
    error_mm = sheet_map.largest_standard_error_mm()
    # Rounded up: "at most" stays true.
    error = "not known"
    if error_mm is not None:
        error = f"at most {math.ceil(1e4 * error_mm) / 1e4:.4f} mm where it was seen"
    certain = "certain" if sheet_map.scale_is_certain else "NOT certain"
    sentences = [
        f"Grid {found}: {sheet_map.x_pitch_px_per_mm:.3f} px per small square along the paper, "
        f"{sheet_map.y_pitch_px_per_mm:.3f} px down it.",
        f"Standard error of a point: {error}. Scale (1 mm or 5 mm): {certain}.",
    ]
    if sheet_map.turn_deg or sheet_map.mirrored:
        mirrored = ", mirrored" if sheet_map.mirrored else ""
        sentences.append(
            f"The sheet lies turned by {sheet_map.turn_deg}°{mirrored} on the picture."
        )
    return [*sentences, *sheet_map.evidence]


def unconfirmed_sentences(reading: Reading, shown_sha256: str | None = None) -> list[str]:
    """Everything a filed value rests on that nobody vouches for, a sentence each.

    `shown_sha256` is that of the picture the marks are shown on, where they are shown on one.
    """
    said = []
    if shown_sha256 is not None and shown_sha256 != reading.picture.sha256:
        said.append(
            "The picture shown is not the one that was read: its content has changed since "
            f"(SHA-256 now {shown_sha256})."
        )
    if reading.sheet_map is None:
        said.append("The scale is not known: no grid was found and none was given.")
    elif not reading.sheet_map.scale_is_certain:
        said.append(
            "The scale is not certain: lines of 1 mm and 5 mm could not be told apart, so every "
            "value may be off five times."
        )
    said += [
        f"{name} {setting.value:g} {unit} rests on {rests_on(setting)}; nobody has confirmed it."
        for name, setting, unit in settings_of(reading.calibration)
        if not setting.confirmed
    ]
    if not reading.reader.strip():
        said.append("The reader is not named.")
    return said


def value_text(value: Value) -> str:
    """A value with its ±, marked while what it rests on is not confirmed."""
    if value.value is None:
        return "no value"
    return with_mark(format_value(value), value)


def spoken(values: Sequence[Value]) -> str:
    """What a caliper measures, or why it measures nothing, in one line."""
    said = dict.fromkeys(value.refusal or value_text(value) for value in values)
    return ", ".join(said)


def short_value_text(value: Value) -> str:
    """A value without its ±, for a label in a crowd; the panel has it in full."""
    if value.value is None or value.plus_minus is None:
        return value_text(value)
    number = shown_number(value.value, value.plus_minus)
    return with_mark(with_unit(number, value.unit), value)


def hand_figure_text(figure: HandFigure) -> str:
    """A colleague's figure with its name, lead and unit."""
    entry = CATALOGUE.get(figure.key)
    name, unit = (figure.key, "") if entry is None else (entry.label, entry.unit)
    number = f"{figure.value:g}"
    return " ".join(filter(None, [name, figure.lead, with_unit(number, unit) if unit else number]))


def caliper_name(caliper: Caliper) -> str:
    """ "QRS II·1": what, in which lead, which beat; a free caliper by its number."""
    if caliper.quantity is None:
        name = f"{_FREE_NAMES[caliper.kind]} {caliper.caliper_id}"
    else:
        known = quantity(caliper.quantity)
        name = caliper.quantity if known is None else known.label
    if caliper.kind is CaliperKind.COMB:
        name += f" ×{caliper.teeth}"
    if caliper.lead is not None:
        name += f" {caliper.lead}"
    return name if caliper.beat is None else f"{name}·{caliper.beat}"


def moment(text: str) -> str:
    """An ISO 8601 moment with a space where people expect one; says so where there is none."""
    return text.replace("T", " ", 1) if text else "not recorded"
