"""Texts of the worksheet without a window."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    HandFigure,
    PicturePoint,
    Reading,
    Setting,
)
from app.window.panels.lines import Lines
from app.window.panels.worksheet_rows import (
    Row,
    hand_figure_from_text,
    hand_text,
    worksheet_rows,
)
from tests.app.reading_examples import example_reading


@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("92", "ms", 92.0),
        (" 92 ms ", "ms", 92.0),
        ("0,4", "mV", 0.4),
        ("-30", "deg", -30.0),
        ("−30°", "deg", -30.0),
        ("72 bpm", "/min", 72.0),
        ("72 /min", "/min", 72.0),
        ("", "ms", None),
        ("ms", "ms", None),
    ],
)
def test_a_figure_is_read_with_or_without_its_unit(
    text: str, unit: str, value: float | None
) -> None:
    assert hand_figure_from_text(text, unit) == value


@pytest.mark.parametrize("text", ["abc", "1,034", "92 s", "nan", "inf", "9e9", "1.2.3", "90-100"])
def test_what_could_mean_two_things_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="type the number alone"):
        hand_figure_from_text(text, "ms")


def test_figures_are_shown_with_the_unit_people_write() -> None:
    assert hand_text(HandFigure("qrs_axis", -30.0), "deg") == "-30 °"
    assert hand_text(None, "ms") == ""


def rows_of(reading: Reading) -> dict[str, Row]:
    """Every row of the first two levels by group or name and lead."""
    lines = Lines()
    lines.follow(reading)
    groups = worksheet_rows(reading, lines.in_order())
    return {f"{row.name} {row.lead}".strip(): row for group in groups for row in group.children}


def test_a_reading_without_a_grid_shows_its_marks_and_no_numbers() -> None:
    rows = rows_of(replace(example_reading(), sheet_map=None))
    qrs = rows["QRS II"]
    assert qrs.caliper_ids == (1,)
    assert qrs.hand == "92 ms"
    assert not any(letter.isdigit() for letter in qrs.value)
    assert not any(letter.isdigit() for letter in qrs.children[0].value)


def test_what_is_to_come_is_listed_with_the_lead_it_will_have() -> None:
    rows = rows_of(replace(example_reading(), calipers=(), hand_figures=()))
    assert rows["Rate II"].value == "–"
    assert rows["Rate II"].hand_key == ("rate", "II")
    assert rows["QTc Hodges II"].hand_key == ("qtc_hodges", "II")
    assert rows["QRS axis"].unit == "deg"


def test_a_figure_for_a_value_that_is_gone_stays_in_sight() -> None:
    reading = replace(
        example_reading(), calipers=(), hand_figures=(HandFigure("qtc_bazett", 420.0, "V5"),)
    )
    assert rows_of(reading)["QTc Bazett V5"].hand == "420 ms"


def test_figures_typed_before_there_is_a_value_are_compared_when_it_comes() -> None:
    """The leads expected beforehand are those the calculator gives."""
    ends = {"rr": (100.0, 300.0), "qt": (100.0, 180.0)}
    calipers = tuple(
        Caliper(
            number,
            CaliperKind.TIME,
            PicturePoint(start, 200.0),
            PicturePoint(end, 200.0),
            key,
            "II",
            1,
        )
        for number, (key, (start, end)) in enumerate(ends.items(), start=1)
    )
    empty = replace(example_reading(), calipers=(), hand_figures=())
    expected = {key: row.hand_key for key, row in rows_of(empty).items()}
    figures = tuple(
        HandFigure(hand_key[0], 70.0, hand_key[1])
        for name, hand_key in expected.items()
        if hand_key is not None and name.startswith(("Rate", "QTc"))
    )
    assert len(figures) == 5
    rows = rows_of(replace(empty, calipers=calipers, hand_figures=figures))
    for name in ("Rate II", "QTc Bazett II", "QTc Hodges II"):
        assert rows[name].given is not None, name
        assert rows[name].within is not None, name


def test_a_free_comb_has_a_row_for_its_interval_and_one_for_its_rate() -> None:
    # Six gaps over 480 px: 80 px, 10 squares of 8 px, 400 ms at 25 mm/s.
    ends = PicturePoint(100.0, 200.0), PicturePoint(580.0, 200.0)
    comb = Caliper(3, CaliperKind.COMB, *ends, teeth=7)
    rows = rows_of(replace(example_reading(), calipers=(comb,)))
    assert rows["Comb 3"].value.startswith("400.0 ± ")
    assert rows["Comb 3, as rate"].value.startswith("150.0 ± ")
    assert rows["Comb 3, as rate"].caliper_ids == (3,)


def test_an_uncertain_scale_is_marked_as_an_unconfirmed_setting_is() -> None:
    reading = example_reading()
    confirmed = Setting(25.0, Evidence.READER, confirmed=True)
    gain = Setting(10.0, Evidence.READER, confirmed=True)
    reading = replace(reading, calibration=Calibration(confirmed, gain))
    assert reading.sheet_map is not None
    assert not rows_of(reading)["QRS II"].value.endswith("?")
    uncertain = replace(reading.sheet_map, scale_is_certain=False)
    qrs = rows_of(replace(reading, sheet_map=uncertain))["QRS II"]
    assert qrs.value.endswith("?")
    assert qrs.children[0].value.endswith("?")


@pytest.mark.parametrize(
    ("figure_ms", "difference"),
    [(98.0, "+2 within"), (100.2, "0 within"), (99.8, "0 within"), (150.0, "−50 outside")],
)
def test_a_difference_is_rounded_and_has_a_sign_where_it_is_one(
    figure_ms: float, difference: str
) -> None:
    ends = PicturePoint(100.0, 200.0), PicturePoint(120.0, 200.0)
    qrs = Caliper(1, CaliperKind.TIME, *ends, "qrs", "II", 1)
    figures = (HandFigure("qrs", figure_ms, "II"),)
    reading = replace(example_reading(), calipers=(qrs,), hand_figures=figures)
    assert rows_of(reading)["QRS II"].difference == difference
