"""A colleague's hand figures held against the values worked out."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.calculator.catalogue import CATALOGUE
from app.calculator.display import format_value, shown_number, with_unit
from app.calculator.values import Value
from app.reading.model import HandFigure, Reading


@dataclass(frozen=True, slots=True)
class Comparison:
    """One hand figure beside the value of its key and lead.

    Attributes
    ----------
    key : str
    lead : str or None
    difference : float or None
        Mine less the colleague's, in the value's unit, not rounded; for an angle the short
        way round, above -180 and up to 180. None where there is no value.
    within : bool or None
        Whether it is no more than the value's ±; None where there is no value.
    sentence : str
        The same in words.
    """

    key: str
    lead: str | None
    difference: float | None
    within: bool | None
    sentence: str


def compare_all(reading: Reading, values: Sequence[Value]) -> list[Comparison]:
    """One comparison for each hand figure of a reading, in their order."""
    by_place = {(value.key, value.lead): value for value in values}
    return [
        _compare(figure, by_place.get((figure.key, figure.lead))) for figure in reading.hand_figures
    ]


def _compare(figure: HandFigure, value: Value | None) -> Comparison:
    place = (figure.key, figure.lead)
    if value is None:
        entry = CATALOGUE.get(figure.key)
        name = entry.label if entry is not None else figure.key
        where = f" in lead {figure.lead}" if figure.lead is not None else ""
        sentence = f"{name}{where} is not marked yet: nothing to hold the figure against."
        return Comparison(*place, None, None, sentence)
    if value.value is None or value.plus_minus is None:
        return Comparison(*place, None, None, f"Nothing to compare with: {value.refusal}")
    difference = value.value - figure.value
    if value.unit == "deg":
        difference = _short_way_round_deg(difference)
    within = abs(difference) <= value.plus_minus
    sentence = _sentence(value, value.plus_minus, difference, within=within)
    return Comparison(*place, difference, within, sentence)


def _short_way_round_deg(angle_deg: float) -> float:
    """Above -180 and up to 180."""
    return 180.0 - (180.0 - angle_deg) % 360.0


def _sentence(value: Value, plus_minus: float, difference: float, *, within: bool) -> str:
    """Mine, the difference and on which side of the ± it lies."""
    amount = shown_number(abs(difference), plus_minus)
    mine = format_value(value)
    if float(amount) == 0.0:
        return f"No difference in the digits that count: mine is {mine}."
    side = "more" if difference > 0.0 else "less"
    where = "within" if within else "outside"
    return (
        f"Mine is {with_unit(amount, value.unit)} {side} than the colleague's: "
        f"{where} my ± ({mine})."
    )
