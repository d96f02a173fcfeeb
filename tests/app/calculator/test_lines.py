"""Calipers grouped into lines."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest

from app.calculator.lines import lead_order, measure_lines, place
from app.calculator.spans import NO_SCALE
from app.reading import CaliperKind
from tests.app.calculator.sheets import (
    between,
    calibration,
    height,
    in_steps,
    reading_of,
    rr_chain,
    time,
)


def test_a_line_is_one_quantity_in_one_lead() -> None:
    reading = reading_of(
        time("qrs", 2.5),
        time("qrs", 3.0, lead="V1"),
        time("qrs", 3.5, beat=2, at_mm=(40.0, 20.0)),
        time(None, 9.0),
        time("a later quantity", 9.0),
    )
    marked = measure_lines(reading)
    assert set(marked.lines) == {("qrs", "II"), ("qrs", "V1")}
    line = marked.line("qrs", "II")
    assert line is not None
    assert line.mean is not None
    assert line.mean.value == pytest.approx(120.0)
    assert line.n == 2
    assert line.spread == pytest.approx(28.2842712)
    assert line.caliper_ids == (1, 3)
    assert marked.line("qrs", "V6") is None


def test_beats_stand_in_their_order_and_those_without_a_number_last() -> None:
    reading = reading_of(
        time("qrs", 4.0, beat=None),
        time("qrs", 3.0, beat=2),
        time("qrs", 2.0, beat=1),
        time("qrs", 5.0, beat=None),
    )
    line = measure_lines(reading).line("qrs", "II")
    assert line is not None
    assert [beat.value for beat in line.beats] == pytest.approx([80.0, 120.0, 160.0, 200.0])


def test_placings_of_one_beat_are_one_beat() -> None:
    reading = reading_of(*(time("qrs", width) for width in (2.0, 2.5, 3.0)))
    line = measure_lines(reading).line("qrs", "II")
    assert line is not None
    assert (line.n, line.caliper_ids) == (1, (1, 2, 3))
    assert line.beats[0].value == pytest.approx(100.0)
    assert line.spread is None


def test_leads_in_their_usual_order() -> None:
    leads = ["V1", None, "X", "I", "aVF"]
    assert sorted(leads, key=lead_order) == ["I", "aVF", "V1", "X", None]
    reading = reading_of(*(time("qrs", 2.5, lead=lead) for lead in leads))
    assert [line.lead for line in measure_lines(reading).lines_of("qrs")] == [
        *("I", "aVF", "V1", "X"),
        None,
    ]


def test_the_rhythm_is_where_most_intervals_are() -> None:
    short = rr_chain([20.0], lead="I")
    long = rr_chain([20.0, 21.0], lead="V1", y_mm=60.0)
    marked = measure_lines(reading_of(*short, *long))
    rhythm = marked.rhythm()
    assert rhythm is not None
    assert rhythm.lead == "V1"
    equal = measure_lines(reading_of(*long[:1], *short)).rhythm()
    assert equal is not None
    assert equal.lead == "I"
    assert measure_lines(reading_of()).rhythm() is None


def test_a_refused_line_is_the_rhythm_only_where_there_is_no_other() -> None:
    bad = [time("rr", 0.0, lead="I", beat=beat) for beat in (1, 2, 3)]
    alone = measure_lines(reading_of(*bad)).rhythm()
    assert alone is not None
    assert alone.mean is None
    with_good = measure_lines(reading_of(*bad, *rr_chain([20.0], lead="V6"))).rhythm()
    assert with_good is not None
    assert with_good.lead == "V6"


def test_a_place_in_words() -> None:
    assert place("qrs", "II") == "QRS in lead II"
    assert place("qt", None) == "QT (no lead)"
    assert place("later", "V1") == "later in lead V1"
    line = measure_lines(reading_of(time("qrs", 3.0))).line("qrs", "II")
    assert line is not None
    assert line.place == "QRS in lead II"


def test_a_line_is_refused_with_one_sentence() -> None:
    wrong_kind = between("qrs", (4.0, 9.0), (9.0, 4.0), kind=CaliperKind.HEIGHT)
    cases = {
        "QRS in lead II, beat 1, was marked with another kind of caliper: mark it anew.": [
            wrong_kind
        ],
        "QRS in lead II, beat 2, has both legs at the same place: move one of them.": [
            time("qrs", 2.0),
            time("qrs", 0.0, beat=2),
        ],
        "QRS in lead II has both legs at the same place: move one of them.": [
            time("qrs", 0.0, beat=None)
        ],
    }
    for sentence, calipers in cases.items():
        line = measure_lines(reading_of(*calipers)).line("qrs", "II")
        assert line is not None
        assert (line.mean, line.n, line.spread) == (None, 0, None)
        assert line.refusal == sentence
        assert len(line.caliper_ids) == len(calipers)


def test_without_a_scale_nothing_else_is_asked() -> None:
    reading = replace(reading_of(time("qrs", 0.0)), sheet_map=None)
    line = measure_lines(reading).line("qrs", "II")
    assert line is not None
    assert line.refusal == NO_SCALE


@pytest.mark.parametrize(
    ("key", "height_mm", "words"),
    [
        ("r_height", -3.0, "R height in lead I, beat 1, ends below its baseline"),
        ("q_height", 3.0, "Q depth in lead I, beat 1, ends above its baseline"),
        ("s_height", 3.0, "S depth in lead I, beat 1, ends above its baseline"),
        ("r_height", 3.0, ""),
        ("s_height", -3.0, ""),
        # Within its ± a deflection may point either way.
        ("r_height", -0.05, ""),
        ("s_height", 0.05, ""),
    ],
)
def test_a_deflection_points_to_its_own_side(key: str, height_mm: float, words: str) -> None:
    line = measure_lines(reading_of(height(key, height_mm))).line(key, "I")
    assert line is not None
    assert line.refusal.startswith(words)
    assert bool(line.refusal) == bool(words)
    if words:
        foot = "top" if key == "r_height" else "lowest point"
        assert line.refusal.endswith(f"its second on the {foot}.")


def test_placings_at_a_coarse_zoom_keep_their_resolution() -> None:
    """Three that agree show no spread, and still were placed in steps of 0.4 mm."""
    at_mm = [(8.0, y_mm) for y_mm in (20.0, 21.0, 22.0)]
    fine = [time("qrs", 2.0, at_mm=place_mm) for place_mm in at_mm]
    line = measure_lines(reading_of(*(in_steps(item, 0.4) for item in fine))).line("qrs", "II")
    assert line is not None
    assert line.mean is not None
    assert line.mean.sigma == pytest.approx(40.0 * 0.4 * math.sqrt(2.0 / 12.0 / 3.0))
    assert line.step_mm == pytest.approx(0.4)


def test_the_coarsest_mark_counts_for_the_line() -> None:
    beats = [time("qrs", 2.0, beat=n, at_mm=(20.0 * n, 20.0)) for n in (1, 2)]
    line = measure_lines(reading_of(in_steps(beats[0], 0.1, 0.3), beats[1])).line("qrs", "II")
    assert line is not None
    assert line.step_mm == pytest.approx(0.3)
    refused = measure_lines(reading_of(in_steps(time("qrs", 0.0), 0.3))).line("qrs", "II")
    assert refused is not None
    assert (refused.mean, refused.step_mm) == (None, pytest.approx(0.3))


def test_a_line_knows_whether_the_grid_was_seen() -> None:
    reading = reading_of(time("qrs", 3.0), settings=calibration())
    line = measure_lines(reading).line("qrs", "II")
    assert line is not None
    assert line.covered
