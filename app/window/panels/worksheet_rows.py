"""What stands in each row of the worksheet, worked out from a reading; no Qt."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from app.calculator import (
    Comparison,
    Value,
    compare_all,
    format_value,
    measure_caliper,
    work_out,
)
from app.calculator.display import is_doubt, is_unconfirmed, with_mark
from app.reading.marks import Caliper, CaliperKind
from app.reading.model import HandFigure, Reading
from app.window.panels.lines import MARKED_VALUE_KEYS, Line

RowId = tuple[str, int | str, str | None]
NO_VALUE = "–"
_UNITS = {
    CaliperKind.TIME: "ms",
    CaliperKind.COMB: "ms",
    CaliperKind.HEIGHT: "mV",
}
_OTHER_SPELLINGS = {"/min": ("bpm", "min-1"), "deg": ("degrees",)}
_DECIMALS = {"mV": 2, "%": 1}
_NUMBER = re.compile(r"[+-]?\d+(?:[.,]\d+)?")
# "1,034" is a thousand to one reader and one to another.
_THOUSANDS = re.compile(r"[+-]?\d+,\d{3}")
# Shown before there is anything to work them out from, so that the reader sees what is to come
# and a colleague's figure can be typed first: key, name, unit, the line whose lead they take.
_EXPECTED = (
    ("rate", "Rate", "/min", "rr"),
    ("rr_spread", "RR spread", "%", "rr"),
    ("qtc_bazett", "QTc Bazett", "ms", "qt"),
    ("qtc_fridericia", "QTc Fridericia", "ms", "qt"),
    ("qtc_framingham", "QTc Framingham", "ms", "qt"),
    ("qtc_hodges", "QTc Hodges", "ms", "qt"),
    ("qrs_axis", "QRS axis", "deg", None),
)


@dataclass(frozen=True, slots=True)
class Row:
    """One row of the worksheet as text, with what it stands for.

    Attributes
    ----------
    row_id : tuple
        Kind ("group", "line", "beat", "value", "free"), id or key, lead: stable over edits.
    name, lead, count, value, hand, difference : str
        The six columns.
    line : Line or None
        For a row that can be marked.
    given : Value or None
        What the value column shows, for the cautions below.
    hand_key : (str, str or None) or None
        Key and lead under which a colleague's figure is kept; None: none can be typed.
    unit : str
        UCUM, of the value and of the colleague's figure.
    within : bool or None
        Whether the colleague's figure lies within the ±; None without one.
    caliper_ids : tuple of int
        What to show on the canvas when the row is picked.
    children : tuple of Row
    """

    row_id: RowId
    name: str
    lead: str = ""
    count: str = ""
    value: str = ""
    hand: str = ""
    difference: str = ""
    line: Line | None = None
    given: Value | None = None
    hand_key: tuple[str, str | None] | None = None
    unit: str = ""
    within: bool | None = None
    comparison: str = ""
    caliper_ids: tuple[int, ...] = ()
    children: tuple[Row, ...] = ()

    @property
    def is_unconfirmed(self) -> bool:
        """Whether the value rests on something nobody has confirmed."""
        return self.given is not None and is_unconfirmed(self.given)

    @property
    def other_cautions(self) -> int:
        """Cautions beside those that the question mark stands for."""
        if self.given is None:
            return 0
        return sum(not is_doubt(caution) for caution in self.given.cautions)


@dataclass(frozen=True, slots=True)
class _Worked:
    """A reading with all that is worked out from it."""

    reading: Reading
    values: Sequence[Value]
    comparisons: Sequence[Comparison]

    def value(self, key: str, lead: str | None) -> Value | None:
        return next((v for v in self.values if (v.key, v.lead) == (key, lead)), None)

    def comparison(self, key: str, lead: str | None) -> Comparison | None:
        return next((c for c in self.comparisons if (c.key, c.lead) == (key, lead)), None)


def value_text(value: Value | None) -> str:
    """A value as the worksheet shows it, marked while what it rests on is not confirmed."""
    if value is None:
        return NO_VALUE
    if value.value is None:
        return "refused"
    return with_mark(format_value(value), value)


def worksheet_rows(reading: Reading, lines: Sequence[Line]) -> tuple[Row, ...]:
    """The whole worksheet: groups of rows, in the order of the trade's walk."""
    values = work_out(reading)
    worked = _Worked(reading, values, compare_all(reading, values))
    time = [line for line in lines if line.quantity.kind is not CaliperKind.HEIGHT]
    rhythm = [line for line in time if line.key == "rr"]
    intervals = [line for line in time if line.key != "rr"]
    heights = [line for line in lines if line.quantity.kind is CaliperKind.HEIGHT]
    groups = [
        _group("Rhythm", [_line_row(line, worked) for line in rhythm]),
        _group("Intervals", [_line_row(line, worked) for line in intervals]),
        _group("QRS heights, for the axis", [_line_row(line, worked) for line in heights]),
        _group("Worked out from the marks", _derived_rows(worked, lines)),
    ]
    free = [
        row
        for item in reading.calipers
        if item.quantity is None
        for row in _free_rows(item, reading)
    ]
    if free:
        groups.append(_group("Free calipers", free))
    return tuple(groups)


def _group(name: str, rows: Sequence[Row]) -> Row:
    return Row(("group", name, None), name, children=tuple(rows))


def _line_row(line: Line, worked: _Worked) -> Row:
    calipers = worked.reading.calipers_of(line.key, line.lead)
    value = worked.value(line.value_key, line.lead)
    row = _value_row(
        ("line", line.line_id, None),
        line.quantity.label,
        line.lead or "none",
        value,
        (line.value_key, line.lead),
        _UNITS[line.quantity.kind],
        worked,
    )
    return replace(
        row,
        line=line,
        caliper_ids=tuple(item.caliper_id for item in calipers),
        children=tuple(_beat_row(item, worked.reading) for item in calipers),
    )


def _derived_rows(worked: _Worked, lines: Sequence[Line]) -> list[Row]:
    """Everything that is worked out and not marked itself, and what is still to come."""
    rows = [
        _value_row(
            ("value", value.key, value.lead),
            value.label,
            value.lead or "",
            value,
            (value.key, value.lead),
            value.unit,
            worked,
        )
        for value in worked.values
        if value.key not in MARKED_VALUE_KEYS
    ]
    present = {row.row_id[1] for row in rows}
    for key, name, unit, line_key in _EXPECTED:
        if key not in present:
            lead = next((line.lead for line in lines if line.key == line_key), None)
            rows.append(
                _value_row(("value", key, lead), name, lead or "", None, (key, lead), unit, worked)
            )
    rows += _orphan_rows(worked, rows)
    order = {key: place for place, (key, *_) in enumerate(_EXPECTED)}
    return sorted(rows, key=lambda row: order.get(str(row.row_id[1]), len(order)))


def _orphan_rows(worked: _Worked, rows: Sequence[Row]) -> list[Row]:
    """A colleague's figures for values that are not worked out (any more)."""
    shown = {row.hand_key for row in rows}
    names = {key: (name, unit) for key, name, unit, _ in _EXPECTED}
    return [
        _value_row(
            ("value", figure.key, figure.lead),
            names.get(figure.key, (figure.key, ""))[0],
            figure.lead or "",
            None,
            (figure.key, figure.lead),
            names.get(figure.key, ("", ""))[1],
            worked,
        )
        for figure in worked.reading.hand_figures
        if figure.key not in MARKED_VALUE_KEYS and (figure.key, figure.lead) not in shown
    ]


def _value_row(
    row_id: RowId,
    name: str,
    lead: str,
    value: Value | None,
    hand_key: tuple[str, str | None],
    unit: str,
    worked: _Worked,
) -> Row:
    comparison = worked.comparison(*hand_key)
    return Row(
        row_id,
        name,
        lead=lead,
        count=str(value.n) if value is not None and value.value is not None else "",
        value=value_text(value),
        hand=hand_text(worked.reading.hand_figure(*hand_key), unit),
        difference=_difference_text(comparison, unit),
        given=value,
        hand_key=hand_key,
        unit=unit,
        within=None if comparison is None else comparison.within,
        comparison="" if comparison is None else comparison.sentence,
        caliper_ids=() if value is None else value.caliper_ids,
    )


def _beat_row(caliper: Caliper, reading: Reading) -> Row:
    value = measure_caliper(reading, caliper)[0]
    return Row(
        ("beat", caliper.caliper_id, None),
        f"beat {caliper.beat}" if caliper.beat is not None else "beat",
        value=value_text(value),
        given=value,
        caliper_ids=(caliper.caliper_id,),
    )


_FREE_NAMES = {
    CaliperKind.TIME: "Time",
    CaliperKind.HEIGHT: "Height",
    CaliperKind.COMB: "Comb",
}


def _free_rows(caliper: Caliper, reading: Reading) -> list[Row]:
    """One row for each value: a comb gives its interval and its rate."""
    name = f"{_FREE_NAMES[caliper.kind]} {caliper.caliper_id}"
    return [
        Row(
            ("free", caliper.caliper_id, None if place == 0 else value.key),
            name if place == 0 else f"{name}, as rate",
            lead=caliper.lead or "",
            value=value_text(value),
            given=value,
            caliper_ids=(caliper.caliper_id,),
        )
        for place, value in enumerate(measure_caliper(reading, caliper))
    ]


def hand_text(figure: HandFigure | None, unit: str) -> str:
    """A colleague's figure with its unit; empty where there is none."""
    if figure is None:
        return ""
    return f"{figure.value:g} {shown_unit(unit)}".strip()


def shown_unit(unit: str) -> str:
    """A UCUM unit as people write it."""
    return "°" if unit == "deg" else unit


def hand_figure_from_text(text: str, unit: str) -> float | None:
    """The number a reader typed, with or without the row's own unit; None for an empty text.

    Raises
    ------
    ValueError
        If it is no number, or carries another unit; one sentence.
    """
    stripped = text.strip().replace("−", "-")
    for ending in (unit, shown_unit(unit), *_OTHER_SPELLINGS.get(unit, ())):
        stripped = stripped.removesuffix(ending).rstrip()
    if not stripped:
        return None
    if not _NUMBER.fullmatch(stripped) or _THOUSANDS.fullmatch(stripped):
        raise ValueError(
            f"'{text.strip()}' is not a figure in {shown_unit(unit)}: type the number alone."
        )
    return float(stripped.replace(",", "."))


def _difference_text(comparison: Comparison | None, unit: str) -> str:
    if comparison is None or comparison.difference is None:
        return ""
    decimals = _DECIMALS.get(unit, 0)
    rounded = round(comparison.difference, decimals)
    number = f"{rounded:+.{decimals}f}".replace("-", "−") if rounded else "0"
    if comparison.within is None:
        return number
    return f"{number} {'within' if comparison.within else 'outside'}"
