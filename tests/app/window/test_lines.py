"""The worksheet's lines without a window."""

from __future__ import annotations

from dataclasses import replace

import pytest

from app.reading import CaliperKind, HandFigure, Reading
from app.window.panels.lines import Lines
from tests.app.reading_examples import example_caliper, example_reading


def marked(*lines: tuple[str, str]) -> Reading:
    """A reading with one caliper on each line."""
    calipers = tuple(
        example_caliper(
            number,
            CaliperKind.HEIGHT if key.endswith("height") else CaliperKind.TIME,
            quantity=key,
            lead=lead,
        )
        for number, (key, lead) in enumerate(lines, start=1)
    )
    return replace(
        example_reading(),
        calipers=calipers,
        hand_figures=(),
        next_caliper_id=len(calipers) + 1,
    )


def names(lines: Lines) -> list[tuple[str, str | None]]:
    """Quantity and lead of every line in order."""
    return [(line.key, line.lead) for line in lines.in_order()]


USUAL = [
    *(("rr", "II"), ("p_duration", "II"), ("pr", "II"), ("qrs", "II"), ("qt", "II")),
    *(("q_height", "I"), ("r_height", "I"), ("s_height", "I")),
    *(("q_height", "aVF"), ("r_height", "aVF"), ("s_height", "aVF")),
]


def test_the_usual_lines_stand_in_walk_order() -> None:
    assert names(Lines()) == USUAL


def test_marks_in_another_lead_take_the_empty_usual_line() -> None:
    lines = Lines()
    lines.follow(marked(("qt", "V5")))
    assert ("qt", "V5") in names(lines)
    assert ("qt", "II") not in names(lines)


def test_heights_in_a_third_lead_leave_those_of_the_axis() -> None:
    lines = Lines()
    lines.follow(marked(("r_height", "V5")))
    assert len(lines.in_order()) == len(USUAL) + 1


def test_a_second_lead_of_a_marked_quantity_is_a_line_of_its_own() -> None:
    lines = Lines()
    lines.follow(marked(("qt", "II"), ("qt", "V5")))
    assert [lead for key, lead in names(lines) if key == "qt"] == ["II", "V5"]


def test_a_figure_alone_brings_its_line() -> None:
    lines = Lines()
    reading = replace(marked(), hand_figures=(HandFigure("rr_mean", 800.0, "V1"),))
    lines.follow(reading)
    assert ("rr", "V1") in names(lines)


def test_calipers_of_a_later_version_bring_no_line() -> None:
    lines = Lines()
    lines.follow(marked(("u_wave", "II")))
    assert names(lines) == USUAL


def test_a_moved_line_keeps_its_id_and_only_free_leads_are_offered() -> None:
    lines = Lines()
    qt = lines.find("qt", "II")
    assert qt is not None
    lines.move(qt.line_id, "V5")
    moved = lines.line(qt.line_id)
    assert moved is not None
    assert moved.lead == "V5"
    other = lines.add("qt", "V1")
    assert "V1" not in lines.free_leads(moved)
    assert "V5" in lines.free_leads(moved)
    with pytest.raises(ValueError, match="may move to lead V1"):
        lines.move(moved.line_id, "V1")
    assert lines.add("qt", "V1") == other


def test_the_next_line_goes_round_once() -> None:
    lines = Lines()
    order = lines.in_order()
    reading = marked(*[(line.key, str(line.lead)) for line in order if line.key != "pr"])
    pr = lines.find("pr", "II")
    assert lines.next_to_mark(order[-1], reading) == pr
    assert lines.next_to_mark(pr, reading) is None
    assert lines.next_to_mark(None, marked()) == order[0]
