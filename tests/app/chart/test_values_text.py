"""The values as lines for a terminal, and the footnotes they share with the panel."""

from __future__ import annotations

from dataclasses import replace

from app.calculator import work_out
from app.chart import values_as_text
from app.chart.grid_report import grid_document
from app.chart.report import footnotes
from app.chart.wording import value_text
from tests.app.chart.chart_examples import (
    confirmed_calibration,
    full_reading,
    reading_of,
    upright_map,
)


def test_every_value_every_caution_and_every_figure_is_said() -> None:
    reading = full_reading()
    text = values_as_text(reading)
    lines = text.splitlines()
    for value in work_out(reading):
        assert any(line.startswith(value.label) and value_text(value) in line for line in lines)
        assert all(caution.text in text for caution in value.cautions)
    assert "NOT CONFIRMED: Paper speed 25 mm/s" in text
    assert "Figures of B. Colleague:" in text
    assert "PR V2 170 ms" in text
    assert "Comb 12 ×5 II" in text
    assert "ab" * 32 in text
    assert "diagnoses nothing" in text


def test_an_empty_reading_says_that_nothing_was_marked() -> None:
    text = values_as_text(reading_of(calibration=confirmed_calibration()))
    assert "nothing was marked" in text
    assert "NOT CONFIRMED" not in text
    assert "Figures of" not in text


def test_a_refusal_stands_in_the_place_of_its_value() -> None:
    text = values_as_text(replace(full_reading(), sheet_map=None, reader="", colleague=""))
    assert "Give the scale first" in text
    assert "a reader who is not named" in text
    assert "Figures of a colleague:" in text


def test_a_caution_of_several_values_has_one_number() -> None:
    values = work_out(full_reading())
    notes = footnotes(values)
    assert [number for number, _ in notes.values()] == list(range(1, len(notes) + 1))
    met = [c for value in values for c in value.cautions]
    assert len(notes) < len(met)
    assert {caution.text for _, caution in notes.values()} == {c.text for c in met}


def test_a_grid_for_other_programs() -> None:
    document = grid_document(replace(upright_map(), turn_deg=90))
    assert document["x_pitch_px_per_mm"] == 8.0
    assert document["turn_deg"] == 90
    assert document["scale_is_certain"] is True
    assert 0.0 < document["largest_standard_error_mm"] < 0.1
