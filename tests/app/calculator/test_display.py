"""Numbers as people read them."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.calculator import Caution, Value, format_value
from app.calculator.cautions import TABLE
from app.calculator.display import is_doubt, is_unconfirmed, shown_number, with_mark


def value_of(number: float | None, plus_minus: float | None, unit: str = "ms") -> Value:
    return Value("key", "Name", number, unit, plus_minus, "method", "source", 1)


def caution_of(code: str) -> Caution:
    return Caution(code, "text", "reason", "source")


@pytest.mark.parametrize(
    ("number", "plus_minus", "unit", "text"),
    [
        (162.3, 8.2, "ms", "162 ± 8 ms"),
        (162.3, 12.4, "ms", "162 ± 12 ms"),
        (162.34, 1.94, "ms", "162.3 ± 1.9 ms"),
        (162.34, 1.96, "ms", "162 ± 2 ms"),
        (162.34, 0.96, "ms", "162.3 ± 1.0 ms"),
        (162.34, 0.94, "ms", "162.3 ± 0.9 ms"),
        (1234.0, 123.0, "ms", "1230 ± 120 ms"),
        (1234.0, 432.0, "ms", "1200 ± 400 ms"),
        (0.1234, 0.0312, "mV", "0.12 ± 0.03 mV"),
        (-0.1234, 0.0142, "mV", "−0.123 ± 0.014 mV"),
        (61.54, 0.24, "/min", "61.5 ± 0.2 /min"),
        (-16.1, 3.3, "deg", "−16 ± 3°"),
        (5.04, 1.3, "%", "5.0 ± 1.3 %"),
        (-0.04, 0.3, "mV", "0.0 ± 0.3 mV"),
        (1.23456, 0.00012, "mV", "1.235 ± 0.000 mV"),
        (1.23456, 0.0, "mV", "1.235 ± 0.000 mV"),
        (162.34, None, "ms", "162 ms"),
        (-0.1234, None, "mV", "−0.123 mV"),
        (None, None, "ms", "–"),
    ],
)
def test_the_last_digit_means_something(
    number: float | None, plus_minus: float | None, unit: str, text: str
) -> None:
    assert format_value(value_of(number, plus_minus, unit)) == text


def test_a_number_alone_is_rounded_as_beside_its_error() -> None:
    assert shown_number(119.6, 8.0) == "120"
    assert shown_number(-119.6, 1.2) == "−119.6"


@pytest.mark.parametrize(
    ("code", "doubts"),
    [
        ("speed_unconfirmed", True),
        ("gain_unconfirmed", True),
        ("scale_uncertain", True),
        ("scale_by_hand", False),
        ("single_beat", False),
    ],
)
def test_what_rests_on_something_unconfirmed_is_marked(code: str, doubts: bool) -> None:
    caution = caution_of(code)
    sure = value_of(90.0, 8.0)
    value = replace(sure, cautions=(caution_of("no_lead"), caution))
    assert is_doubt(caution) == is_unconfirmed(value) == doubts
    assert with_mark("90 ms", value) == ("90 ms ?" if doubts else "90 ms")
    assert with_mark("90 ms, 60 /min", sure, value).endswith("?") == doubts
    assert with_mark("90 ms") == with_mark("90 ms", sure) == "90 ms"


def test_every_doubt_the_table_knows() -> None:
    doubts = {code for code in TABLE if is_doubt(caution_of(code))}
    assert doubts == {"speed_unconfirmed", "gain_unconfirmed", "scale_uncertain"}
