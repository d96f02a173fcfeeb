"""The words on a caliper's label. No Qt."""

from __future__ import annotations

from app.reading import Caliper, CaliperKind, Reading, quantity

_FREE_NAMES = {
    CaliperKind.TIME: "Time",
    CaliperKind.HEIGHT: "Height",
    CaliperKind.COMB: "Comb",
}


def quantity_name(kind: CaliperKind, key: str | None) -> str:
    """ "QRS", or the kind of a free caliper; a key this version does not know as it stands."""
    if key is None:
        return _FREE_NAMES[kind]
    known = quantity(key)
    return key if known is None else known.label


def short_name(caliper: Caliper) -> str:
    """ "QRS", or "Comb ×5"."""
    name = quantity_name(caliper.kind, caliper.quantity)
    return f"{name} ×{caliper.teeth}" if caliper.kind is CaliperKind.COMB else name


def caliper_name(caliper: Caliper) -> str:
    """ "QRS II·1": what, in which lead, which beat."""
    name = short_name(caliper)
    if caliper.lead is not None:
        name += f" {caliper.lead}"
    if caliper.beat is not None:
        name += f"·{caliper.beat}"
    return name


def caliper_value(reading: Reading, caliper: Caliper) -> str:
    """The measured span in words, or why there is none."""
    sheet_map = reading.sheet_map
    if sheet_map is None:
        return "no grid yet"
    if caliper.kind is CaliperKind.HEIGHT:
        return f"{caliper.height_mm(sheet_map):.1f} mm"
    if caliper.kind is CaliperKind.COMB:
        return f"{caliper.tooth_pitch_mm(sheet_map):.1f} mm"
    return f"{caliper.width_mm(sheet_map):.1f} mm"
