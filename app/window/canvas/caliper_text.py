"""The words on a caliper's label. No Qt."""

from __future__ import annotations

from dataclasses import dataclass

from app.calculator import Value, format_value, measure_caliper
from app.calculator.display import shown_number, with_mark, with_unit
from app.reading import Caliper, CaliperKind, Reading, quantity

NO_GRID = "no grid yet"

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


@dataclass(frozen=True, slots=True)
class ValueText:
    """A measured span in words.

    Attributes
    ----------
    full : str
        With its ±, and for a comb its rate.
    short : str
        The number alone, for a crowd.
    """

    full: str
    short: str


def caliper_value(reading: Reading, caliper: Caliper) -> ValueText:
    """What a caliper measures, or why that is not known.

    While something that the number rests on is not confirmed, or the scale is uncertain, a
    question mark stands beside it, in the short form too.
    """
    if reading.sheet_map is None:
        return ValueText(NO_GRID, NO_GRID)
    values = measure_caliper(reading, caliper)
    full = ", ".join(format_value(value) for value in values)
    return ValueText(with_mark(full, *values), with_mark(_number_alone(values[0]), *values))


def _number_alone(value: Value) -> str:
    if value.value is None or value.plus_minus is None:
        return format_value(value)
    return with_unit(shown_number(value.value, value.plus_minus), value.unit)
