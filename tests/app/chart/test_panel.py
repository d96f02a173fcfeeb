"""The panel says everything, and nothing of it is cut off or over something else."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import pytest

from app.calculator import Caution, Value, measure_caliper, work_out
from app.chart.blocks import Block, Words
from app.chart.panel import Panel
from app.chart.report import footnotes, report_of
from app.chart.wording import DISCLAIMER, caliper_name, value_text
from app.reading import Calibration, Evidence, Reading, Setting
from app.version import software_version
from tests.app.chart.chart_examples import beats, confirmed_calibration, full_reading, reading_of


def panel(reading: Reading, letter_px: int = 14, **options: tuple[int, ...]) -> Block:
    width_px = 96.0 * letter_px
    sha256 = reading.picture.sha256
    return Panel(report_of(reading), width_px, letter_px, sha256, **options).block()


def said(block: Block) -> str:
    return " ".join(words.text for words in block.words)


def box(words: Words) -> tuple[float, float, float, float]:
    """Where the letters of a run are, without the room between lines."""
    size = words.face.size_px
    right = words.x + words.face.width_px(words.text)
    return words.x, words.baseline - 0.7 * size, right, words.baseline + 0.2 * size


def long_cautions(reading: Reading) -> tuple[Value, ...]:
    """The values with cautions of an unlikely length."""
    endless = Caution("long", "Much to say here. " * 40, "Why it is so. " * 40, "W" * 300)
    return tuple(
        replace(value, cautions=(*value.cautions, endless), method="a way of working " * 20)
        for value in work_out(reading)
    )


def test_every_value_stands_there_with_its_method_and_cautions() -> None:
    reading = full_reading()
    text = said(panel(reading, 14))
    for value in work_out(reading):
        assert value.label in text
        assert value_text(value) in text
        for caution in value.cautions:
            assert caution.text in text
            assert caution.reason in text


def test_a_value_names_its_cautions_by_their_numbers() -> None:
    reading = full_reading()
    block = panel(reading)
    values = work_out(reading)
    notes = footnotes(values)
    qrs = next(value for value in values if value.key == "qrs")
    baseline = next(w.baseline for w in block.words if w.text == value_text(qrs))
    row = [w.text for w in block.words if w.baseline == baseline]
    numbers = sorted(notes[c.code, c.text][0] for c in qrs.cautions)
    assert len(numbers) >= 2
    assert ", ".join(map(str, numbers)) in row
    # The same number stands before the caution's words.
    for number in numbers:
        caution = next(c for n, c in notes.values() if n == number)
        beside = next(w.baseline for w in block.words if w.text == caution.text)
        assert str(number) in [w.text for w in block.words if w.baseline == beside]


def test_what_it_rests_on_stands_there() -> None:
    reading = replace(
        full_reading(),
        calibration=Calibration(Setting(25.0, Evidence.LEGEND, confirmed=True), Setting(10.0)),
    )
    text = said(panel(reading))
    assert "Paper speed 25 mm/s: rests on the printed legend; confirmed by A. Reader." in text
    assert "Gain 10 mm/mV: rests on a default, nothing on the page; NOT confirmed." in text
    assert "8.000 px per small square" in text
    assert "Bold lines seen every fifth line." in text
    assert reading.picture.sha256 in text
    assert "sheet éñ 1.png" in text
    assert "page 1, 1200 × 900 px" in text
    assert "Marked by A. Reader" in text
    assert "2026-01-02 03:05:05+00:00" in text
    assert software_version() in text
    assert "last changed with Smallsquare 0.0.9" in text
    assert DISCLAIMER in text


def test_what_nobody_confirmed_is_at_the_top_on_a_ground_of_its_own() -> None:
    block = panel(full_reading())
    (banner,) = [words for words in block.words if words.text.startswith("NOT CONFIRMED")]
    values = next(words for words in block.words if words.text == "Values")
    assert banner.baseline < values.baseline
    ground = [
        area
        for area in block.areas[1:]
        if area.top < banner.baseline < area.bottom and area.right - area.left > 1000
    ]
    assert len(ground) == 1
    assert ground[0].colour != block.areas[0].colour
    assert ground[0].bottom < values.baseline


def test_there_is_no_such_banner_where_all_is_confirmed() -> None:
    text = said(panel(reading_of(calipers=beats(2), calibration=confirmed_calibration())))
    assert "CONFIRMED" not in text
    assert " ms ?" not in text


def test_a_colleagues_figures_stand_beside_ours() -> None:
    text = said(panel(full_reading()))
    assert "Colleague: B. Colleague." in text
    assert "101 ms" in text
    assert "−11, outside ±" in text
    assert "Figures without a value here: PR V2 170 ms." in text
    alone = said(panel(replace(full_reading(), hand_figures=())))
    assert "olleague" not in alone


def test_a_figure_beside_a_refused_value_has_no_difference() -> None:
    text = said(panel(replace(full_reading(), sheet_map=None)))
    assert "101 ms" in text
    assert "outside ±" not in text
    assert "no value" in text
    assert "Give the scale first" in text
    assert "values marked ?" not in text
    # Once for the comb, which would give two values.
    comb = text[text.index("Comb 12") : text.index("± is two")]
    assert comb.count("Give the scale first") == 1


def test_each_caliper_is_listed_by_its_number() -> None:
    reading = full_reading()
    text = said(panel(reading, without_label=(3, 5)))
    for item in reading.calipers:
        measured = ", ".join(value_text(v) for v in measure_caliper(reading, item))
        assert f"{item.caliper_id} {caliper_name(item)}: {measured}" in text
    assert "No room for a label on the picture: caliper 3, 5." in text


def test_an_empty_reading_has_a_panel_too() -> None:
    text = said(panel(replace(reading_of(), sheet_map=None, created_at="", changed_at="")))
    assert "No values: nothing was marked." in text
    assert "The scale is not known" in text
    assert "not recorded" in text
    assert "Cautions" not in text
    assert "Each caliper" not in text


@pytest.mark.parametrize("letter_px", [14, 23, 110])
@pytest.mark.parametrize(
    "reading",
    [
        full_reading(),
        reading_of(),
        reading_of(calipers=beats(20)),
        replace(full_reading(), reader="Reader " * 60, colleague="C" * 400),
    ],
    ids=["full", "empty", "sixty", "long names"],
)
def test_nothing_is_cut_off_and_nothing_lies_over_another(reading: Reading, letter_px: int) -> None:
    hold_together(panel(reading, letter_px))


def test_long_cautions_make_the_panel_grow(monkeypatch: pytest.MonkeyPatch) -> None:
    reading = full_reading()
    plain = panel(reading)
    values = long_cautions(reading)
    monkeypatch.setattr("app.chart.report.work_out", lambda _: values)
    grown = panel(reading)
    assert grown.height > plain.height + 300
    assert "".join(("Much to say here. " * 40).split()) in said(grown).replace(" ", "")
    hold_together(grown)


def hold_together(block: Block) -> None:
    """Every run lies within the block and clear of every other."""
    boxes = [box(words) for words in block.words if words.text.strip()]
    for left, top, right, bottom in boxes:
        assert left >= 0.0
        assert top >= 0.0
        assert right <= block.width
        assert bottom <= block.height
    boxes.sort(key=lambda item: item[1])
    for one, other in combinations(boxes, 2):
        if other[1] >= one[3]:
            continue
        assert one[2] <= other[0] or other[2] <= one[0] or other[1] >= one[3]
