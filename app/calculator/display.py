"""Numbers as people read them: rounded so that the last digit means something."""

from __future__ import annotations

from app.calculator.values import Caution, Value

NO_VALUE = "–"
UNCONFIRMED_MARK = "?"
_MINUS = "−"
_MOST_DECIMALS = 3
_SHOWN_UNITS = {"deg": "°"}


def format_value(value: Value) -> str:
    """A value with its ± and unit ("162 ± 8 ms"); a dash where it was refused.

    The ± keeps two significant digits where it begins with 1, else one; the value is
    shown to the same decimal (at most two digits of an uncertainty: JCGM 100:2008, 7.2.6,
    from memory).
    """
    if value.value is None:
        return NO_VALUE
    if value.plus_minus is None:
        return with_unit(_plain(f"{value.value:.3g}"), value.unit)
    number = shown_number(value.value, value.plus_minus)
    plus_minus = shown_number(value.plus_minus, value.plus_minus)
    return with_unit(f"{number} ± {plus_minus}", value.unit)


def is_doubt(caution: Caution) -> bool:
    """Whether a caution says that a setting is not confirmed or the scale not certain."""
    return caution.code.endswith("_unconfirmed") or caution.code == "scale_uncertain"


def is_unconfirmed(value: Value) -> bool:
    """Whether a value rests on a setting nobody has confirmed, or on an uncertain scale."""
    return any(is_doubt(caution) for caution in value.cautions)


def with_mark(text: str, *values: Value) -> str:
    """A text about values, with the mark that says that one of them is unconfirmed."""
    return f"{text} {UNCONFIRMED_MARK}" if any(map(is_unconfirmed, values)) else text


def with_unit(number: str, unit: str) -> str:
    """A number with its UCUM unit as people write it."""
    return number + _SHOWN_UNITS.get(unit, f" {unit}")


def shown_number(value: float, plus_minus: float) -> str:
    """A value rounded as `format_value` rounds it, alone."""
    decimals = decimals_of(plus_minus)
    return _plain(f"{round(value, decimals):.{max(decimals, 0)}f}")


def decimals_of(plus_minus: float) -> int:
    """Decimals that mean something beside a ±; negative for tens and hundreds."""
    if plus_minus <= 0.0:
        return _MOST_DECIMALS
    first, exponent = f"{plus_minus:.1e}".split("e")
    extra = 1 if float(first) < 2.0 else 0
    return min(extra - int(exponent), _MOST_DECIMALS)


def _plain(text: str) -> str:
    """A true minus sign, and none before a zero."""
    if float(text) == 0.0:
        return text.removeprefix("-")
    return text.replace("-", _MINUS)
