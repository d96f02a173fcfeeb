"""Cautions beside a QTc, at their boundaries."""

from __future__ import annotations

import pytest

from app.calculator.lines import measure_lines
from app.calculator.qtc_cautions import bazett_range, high_risk, wide_qrs, widest_qrs
from app.calculator.values import Caution
from tests.app.calculator.sheets import estimate, reading_of, time


def texts(cautions: list[Caution]) -> list[str]:
    return [caution.text for caution in cautions]


@pytest.mark.parametrize(
    ("qtc_ms", "begins"),
    [
        (491.9, None),
        (492.0, "QTc is too close to call against 500 ms"),
        (500.0, "QTc is too close to call against 500 ms"),
        (508.0, "QTc is too close to call against 500 ms"),
        (508.1, "QTc is 500 ms or more: measure again and have a clinician look now."),
    ],
)
def test_500_ms(qtc_ms: float, begins: str | None) -> None:
    found = texts(high_risk(estimate(qtc_ms, 8.0)))
    assert len(found) == (0 if begins is None else 1)
    assert begins is None or found[0].startswith(begins)


@pytest.mark.parametrize(
    ("rate", "text"),
    [
        (58.9, "Rate 59/min is outside 60 to 100: Bazett misleads there."),
        (59.0, "Rate 59.0 ± 1.0/min is too close to call against 60: "),
        (61.0, "Rate 61.0 ± 1.0/min is too close to call against 60: "),
        (61.1, None),
        (80.0, None),
        (98.9, None),
        (99.0, "Rate 99.0 ± 1.0/min is too close to call against 100: "),
        (101.0, "Rate 101.0 ± 1.0/min is too close to call against 100: "),
        (101.1, "Rate 101.1/min is outside 60 to 100: Bazett misleads there."),
    ],
)
def test_bazett_from_60_to_100(rate: float, text: str | None) -> None:
    found = texts(bazett_range(estimate(rate, 1.0)))
    assert len(found) == (0 if text is None else 1)
    if text is not None:
        assert found[0].startswith(text.replace("59/min", "58.9/min"))


@pytest.mark.parametrize(
    ("qrs_ms", "text"),
    [
        (111.9, None),
        (112.0, "QRS 112 ± 8 ms is too close to call against 120 ms, "),
        (128.0, "QRS 128 ± 8 ms is too close to call against 120 ms, "),
        (128.1, "QRS 128 ms is 120 ms or more: a plain QTc reads too long."),
    ],
)
def test_a_wide_qrs(qrs_ms: float, text: str | None) -> None:
    found = texts(wide_qrs(estimate(qrs_ms, 8.0)))
    assert len(found) == (0 if text is None else 1)
    assert text is None or found[0].startswith(text)


def test_no_qrs() -> None:
    assert [caution.code for caution in wide_qrs(None)] == ["qrs_not_measured_for_qtc"]
    refused = measure_lines(reading_of(time("qrs", 0.0)))
    assert widest_qrs(refused) is None


def test_the_widest_qrs_of_any_lead_counts() -> None:
    marked = measure_lines(
        reading_of(time("qrs", 2.5), time("qrs", 3.5, lead="V1"), time("qrs", 3.0, lead="V5"))
    )
    widest = widest_qrs(marked)
    assert widest is not None
    assert widest.value == pytest.approx(140.0)
