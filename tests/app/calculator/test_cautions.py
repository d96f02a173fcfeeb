"""The table of cautions: every line of it is fired by some reading."""

from __future__ import annotations

import re
from functools import cache

import pytest

from app.calculator import Caution, work_out
from app.calculator.cautions import NO_SOURCE, TABLE, caution
from app.reading import Reading
from tests.app.calculator.sheets import (
    calibration,
    exact_map,
    height,
    in_steps,
    reading_of,
    rr_chain,
    time,
)
from tests.bends import bent

STATUSES = ("found", "from memory", "computed", NO_SOURCE)


def rhythm_readings() -> list[Reading]:
    """Irregular, too close to call, implausible, and QTc on both sides of its limits."""
    readings = []
    for widths_mm in ([20.0, 26.0], [20.0, 22.3], [4.0, 4.0]):
        readings.append(reading_of(*rr_chain(widths_mm)))
    for rr_mm, qt_mm, qrs_mm in (
        (12.0, 10.0, 4.0),
        (25.1, 12.5, 3.0),
        (20.0, 21.0, 2.0),
        (25.0, 10.0, 2.99),
    ):
        readings.append(
            reading_of(
                *rr_chain([rr_mm]),
                time("qt", qt_mm, at_mm=(8.0, 60.0)),
                time("qrs", qrs_mm, at_mm=(8.0, 90.0)),
            )
        )
    return [*readings, reading_of(*rr_chain([20.0, 20.0]), time("qt", 10.0, lead=None))]


def other_readings() -> list[Reading]:
    """Doubtful sheets, missing marks, small vectors."""
    doubtful = exact_map(5.0, 4.0, seen=False, scale_is_certain=False, source="reader")
    marks = [in_steps(time("qt", 10.0), 0.5), height("r_height", 9.0)]
    readings = [
        reading_of(*marks, sheet_map=doubtful, settings=calibration(confirmed=False)),
        reading_of(time("qt", 10.0), sheet_map=bent(exact_map(8.0, 8.0))),
    ]
    for size_mm in (2.0, 5.0):
        readings.append(
            reading_of(
                height("r_height", size_mm), height("r_height", 0.0, lead="aVF", at_mm=(8, 180.0))
            )
        )
    return readings


@cache
def fired() -> dict[str, frozenset[str]]:
    """Every line the readings bring, by code."""
    found: dict[str, set[str]] = {}
    for reading in (*rhythm_readings(), *other_readings()):
        for value in work_out(reading):
            for item in value.cautions:
                found.setdefault(item.code, set()).add(item.text)
    return {code: frozenset(texts) for code, texts in found.items()}


def pattern(line: str) -> str:
    """A line of the table with anything in the place of its facts."""
    return ".+".join(re.escape(part) for part in re.split(r"\{[^}]*\}", line))


@pytest.mark.parametrize("code", TABLE)
def test_every_caution_is_fired(code: str) -> None:
    texts = fired()[code]
    for line in filter(None, (TABLE[code].text, TABLE[code].too_close)):
        assert any(re.fullmatch(pattern(line), text) for text in texts), line


def test_no_caution_is_fired_that_is_not_in_the_table() -> None:
    assert fired().keys() <= TABLE.keys()


@pytest.mark.parametrize("code", TABLE)
def test_every_caution_names_its_source_with_its_status(code: str) -> None:
    entry = TABLE[code]
    assert any(status in entry.source for status in STATUSES)
    assert entry.reason.endswith(".")
    assert entry.text.endswith(".")


def test_a_caution_is_filled_with_its_facts() -> None:
    assert caution("single_beat", unit="beat") == Caution(
        "single_beat",
        "From one beat only.",
        TABLE["single_beat"].reason,
        TABLE["single_beat"].source,
    )
    with pytest.raises(KeyError):
        caution("single_beat")
    with pytest.raises(KeyError):
        caution("no such caution")
