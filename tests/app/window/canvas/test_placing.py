"""Placing calipers by mouse and by keyboard, and drawing the box that gives a scale."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPoint, Qt
from pytestqt.qtbot import QtBot

from app.reading import Caliper, CaliperKind, PicturePoint
from app.window.canvas import SheetView
from app.window.canvas.selection import Part
from app.window.document import Document
from imaging.sheet_map import Coverage
from tests.app.window.canvas.hands import (
    LEFT,
    MIDDLE,
    RIGHT,
    SHIFT,
    blank_picture,
    caliper_of,
    click,
    drag,
    hover,
    key,
    place,
    press,
    reading_of,
    release,
)

ONE_VIEW_PX = 1.0  # the fixture's view is at 1:1
PX_PER_MM = 8.0


def near(x_px: float, y_px: float) -> object:
    """A place to within one view px."""
    return pytest.approx((x_px, y_px), abs=ONE_VIEW_PX)


def xy(point: PicturePoint) -> tuple[float, float]:
    return point.x_px, point.y_px


def placed(document: Document) -> tuple[Caliper, ...]:
    """What was added to the three calipers of the fixture."""
    assert document.reading is not None
    return document.reading.calipers[3:]


def test_two_clicks_place_a_caliper_in_one_step(
    view: SheetView, document: Document, qtbot: QtBot
) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    assert placed(document) == ()
    with qtbot.waitSignal(view.placing_finished) as finished:
        click(view, place(view, 340.0, 510.0))
    (caliper,) = placed(document)
    assert finished.args == [caliper.caliper_id]
    assert (caliper.kind, caliper.quantity, caliper.lead) == (CaliperKind.TIME, "qrs", "V1")
    assert caliper.beat == 1
    assert xy(caliper.start) == near(300.0, 500.0)
    assert xy(caliper.end) == near(340.0, 510.0)
    assert document.undo_label() == "Place QRS caliper"
    document.undo()
    assert placed(document) == ()
    assert document.undo_label() is None


def test_pressing_dragging_and_releasing_does_the_same(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, "pr", "II")
    drag(view, place(view, 300.0, 500.0), place(view, 340.0, 500.0))
    (caliper,) = placed(document)
    assert xy(caliper.start) == near(300.0, 500.0)
    assert xy(caliper.end) == near(340.0, 500.0)
    assert not view.is_placing()


def test_a_height_runs_from_the_baseline_to_the_peak(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.HEIGHT, "r_height", "I")
    click(view, place(view, 300.0, 500.0))
    click(view, place(view, 310.0, 420.0))
    (caliper,) = placed(document)
    assert caliper.kind is CaliperKind.HEIGHT
    assert document.reading is not None
    assert document.reading.sheet_map is not None
    assert caliper.height_mm(document.reading.sheet_map) == pytest.approx(80 / 7.92, abs=0.05)


def test_the_prompts_say_what_and_where(view: SheetView, qtbot: QtBot) -> None:
    prompts: list[str] = []
    view.prompt_changed.connect(prompts.append)
    view.begin_placing(CaliperKind.TIME, "qrs", "II")
    click(view, place(view, 300.0, 500.0))
    click(view, place(view, 340.0, 500.0))
    assert prompts == [
        "QRS, lead II, beat 2: click where the QRS begins (first of Q or R)",
        "QRS, lead II, beat 2: now click the J point, where the QRS ends",
        "",
    ]


def test_the_last_leg_placed_is_held_for_the_arrow_keys(
    view: SheetView, document: Document
) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    click(view, place(view, 340.0, 500.0))
    (before,) = placed(document)
    assert view.selection.ids == frozenset({before.caliper_id})
    assert view.selection.part is Part.END
    key(view, Qt.Key.Key_Left)
    (after,) = placed(document)
    assert after.start == before.start
    assert after.end.x_px == pytest.approx(before.end.x_px - 0.1 * PX_PER_MM, abs=0.01)


def test_nothing_is_written_while_the_preview_follows(view: SheetView, document: Document) -> None:
    before = document.reading
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    for x in (320.0, 360.0, 340.0):
        hover(view, place(view, x, 500.0))
    assert document.reading is before


@pytest.mark.parametrize("way", ["escape", "right button"])
def test_stepping_back_asks_for_the_first_place_again_then_gives_up(
    view: SheetView, document: Document, qtbot: QtBot, way: str
) -> None:
    def step_back() -> None:
        if way == "escape":
            key(view, Qt.Key.Key_Escape)
        else:
            click(view, place(view, 320.0, 500.0), RIGHT)

    prompts: list[str] = []
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    view.prompt_changed.connect(prompts.append)
    click(view, place(view, 300.0, 500.0))
    step_back()
    assert [prompt.partition(": ")[2] for prompt in prompts] == [
        "now click the J point, where the QRS ends",
        "click where the QRS begins (first of Q or R)",
    ]
    with qtbot.waitSignal(view.placing_cancelled):
        step_back()
    assert prompts[-1] == ""
    assert placed(document) == ()


def test_a_double_click_is_not_two_places(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    there = place(view, 300.0, 500.0)
    click(view, there)
    from PySide6.QtTest import QTest

    QTest.mouseDClick(view.viewport(), LEFT, pos=there + QPoint(1, 0))
    assert placed(document) == ()
    assert view.is_placing()


def test_a_click_of_a_hand_that_trembles_is_a_click(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    drag(view, place(view, 300.0, 500.0), place(view, 304.0, 502.0))
    assert placed(document) == ()
    drag(view, place(view, 340.0, 500.0), place(view, 343.0, 501.0))
    (caliper,) = placed(document)
    assert xy(caliper.start) == near(300.0, 500.0)
    assert xy(caliper.end) == near(343.0, 501.0)  # the last place seen in the loupe counts


def test_two_clicks_in_one_column_measure_nothing(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    click(view, place(view, 300.0, 560.0))
    assert placed(document) == ()
    click(view, place(view, 330.0, 560.0))
    assert len(placed(document)) == 1


def test_a_press_beside_the_picture_marks_its_edge(view: SheetView, document: Document) -> None:
    view.fit_sheet()
    view.zoom_by(0.5)
    view.begin_placing(CaliperKind.TIME, None, None)
    click(view, place(view, -40.0, 450.0))
    click(view, place(view, 1240.0, 450.0))
    (caliper,) = placed(document)
    assert (caliper.start.x_px, caliper.end.x_px) == (0.0, 1199.0)


def test_one_can_pan_and_zoom_between_the_two_clicks(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, "qt", "V1")
    click(view, place(view, 300.0, 500.0))
    drag(view, QPoint(400, 300), QPoint(350, 250), MIDDLE)
    view.zoom_by(2.0)
    click(view, place(view, 380.0, 500.0))
    (caliper,) = placed(document)
    assert xy(caliper.start) == near(300.0, 500.0)
    assert xy(caliper.end) == near(380.0, 500.0)


def test_beginning_another_placing_gives_the_first_up(view: SheetView, qtbot: QtBot) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    with qtbot.waitSignal(view.placing_cancelled):
        view.begin_placing(CaliperKind.TIME, "qt", "V1")
    assert view.is_placing()


def test_cancelling_from_outside(view: SheetView, document: Document, qtbot: QtBot) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    with qtbot.waitSignal(view.placing_cancelled):
        view.cancel_gesture()
    click(view, place(view, 340.0, 500.0))
    assert placed(document) == ()


class TestChain:
    """RR after RR."""

    @pytest.fixture(autouse=True)
    def begin(self, view: SheetView) -> None:
        view.begin_placing(CaliperKind.TIME, "rr", "II")
        for x in (200.0, 300.0, 405.0, 500.0):
            click(view, place(view, x, 500.0))

    def test_each_click_adds_one_that_starts_where_the_last_ended(self, document: Document) -> None:
        spans = placed(document)
        assert [span.beat for span in spans] == [1, 2, 3]
        assert [span.end for span in spans[:-1]] == [span.start for span in spans[1:]]
        assert [span.end.x_px for span in spans] == pytest.approx([300.0, 405.0, 500.0], abs=1.0)

    @pytest.mark.parametrize("way", ["enter", "escape", "right button", "double click"])
    def test_it_ends_and_tells_once(
        self, view: SheetView, document: Document, qtbot: QtBot, way: str
    ) -> None:
        last = place(view, 500.0, 500.0)
        with qtbot.waitSignal(view.placing_finished) as finished:
            if way == "enter":
                key(view, Qt.Key.Key_Return)
            elif way == "escape":
                key(view, Qt.Key.Key_Escape)
            elif way == "right button":
                press(view, last, RIGHT)
            else:
                qtbot.mouseDClick(view.viewport(), LEFT, pos=last)
        assert len(placed(document)) == 3
        assert finished.args == [placed(document)[-1].caliper_id]
        assert not view.is_placing()

    def test_an_undo_in_between_goes_on_from_where_it_was(
        self, view: SheetView, document: Document
    ) -> None:
        document.undo()
        click(view, place(view, 510.0, 500.0))
        spans = placed(document)
        assert len(spans) == 3
        assert spans[-1].start == spans[-2].end
        assert spans[-1].end.x_px == pytest.approx(510.0, abs=1.0)

    def test_undoing_all_of_it_leaves_the_first_place(
        self, view: SheetView, document: Document
    ) -> None:
        for _ in range(3):
            document.undo()
        click(view, place(view, 290.0, 500.0))
        (span,) = placed(document)
        assert (span.start.x_px, span.end.x_px) == pytest.approx((200.0, 290.0), abs=1.0)

    def test_each_span_is_a_step_of_its_own(self, document: Document) -> None:
        document.undo()
        assert len(placed(document)) == 2


class TestComb:
    """Evenly spaced teeth from the first two."""

    def test_it_fills_the_row_up_to_eight_teeth(self, view: SheetView, document: Document) -> None:
        view.begin_placing(CaliperKind.COMB, None, None)
        click(view, place(view, 200.0, 300.0))
        click(view, place(view, 260.0, 330.0))
        (comb,) = placed(document)
        assert comb.teeth == 8
        assert comb.end.x_px == pytest.approx(200.0 + 7 * 60.0, abs=7.0)
        # Level on the paper, although the second click was lower.
        assert comb.end.y_px == pytest.approx(comb.start.y_px, abs=1.0)

    def test_it_stays_on_the_picture(self, view: SheetView, document: Document) -> None:
        view.fit_sheet()
        view.begin_placing(CaliperKind.COMB, None, None)
        click(view, place(view, 200.0, 300.0))
        click(view, place(view, 500.0, 300.0))
        (comb,) = placed(document)
        assert comb.teeth == 4  # 200, 500, 800, 1100

    def test_it_ends_where_the_grid_was_seen_last(
        self, view: SheetView, document: Document
    ) -> None:
        reading = document.reading
        assert reading is not None
        assert reading.sheet_map is not None
        cells = np.ones((23, 30), dtype=bool)
        cells[:, 15:] = False  # nothing seen from 600 px on
        half_seen = replace(reading.sheet_map, coverage=Coverage.from_cells(cells, 40.0))
        document.edit(replace(reading, sheet_map=half_seen), "Find grid")
        view.begin_placing(CaliperKind.COMB, None, None)
        click(view, place(view, 200.0, 300.0))
        click(view, place(view, 300.0, 300.0))
        (comb,) = placed(document)
        assert comb.teeth == 4  # 200, 300, 400, 500

    def test_leftward_it_fills_leftward(self, view: SheetView, document: Document) -> None:
        view.begin_placing(CaliperKind.COMB, None, None)
        click(view, place(view, 500.0, 300.0))
        click(view, place(view, 400.0, 300.0))
        (comb,) = placed(document)
        assert comb.teeth == 6
        assert comb.end.x_px == pytest.approx(0.0, abs=6.0)

    def test_plus_and_minus_change_the_teeth_and_not_the_pitch(
        self, view: SheetView, document: Document
    ) -> None:
        before = caliper_of(document, 3)
        view.select([3])
        key(view, Qt.Key.Key_Plus)
        key(view, Qt.Key.Key_Plus)
        after = caliper_of(document, 3)
        assert after.teeth == 7
        assert after.start == before.start
        assert after.end.x_px == pytest.approx(200.0 + 6 * 60.0)
        key(view, Qt.Key.Key_Minus)
        assert caliper_of(document, 3).teeth == 6
        document.undo()
        assert caliper_of(document, 3) == before  # a run of presses is one step
        assert document.undo_label() is None

    def test_a_comb_keeps_two_teeth(self, view: SheetView, document: Document) -> None:
        view.select([3])
        for _ in range(9):
            key(view, Qt.Key.Key_Minus)
        comb = caliper_of(document, 3)
        assert (comb.teeth, comb.end.x_px) == (2, pytest.approx(260.0))

    def test_teeth_that_do_not_fit_are_not_added(self, view: SheetView, document: Document) -> None:
        view.select([3])
        for _ in range(30):
            key(view, Qt.Key.Key_Plus)
        comb = caliper_of(document, 3)
        assert comb.teeth == 17  # 200 + 16 * 60 = 1160; the next would be at 1220
        assert comb.end.x_px == pytest.approx(1160.0)

    def test_plus_does_nothing_to_other_calipers(self, view: SheetView, document: Document) -> None:
        before = document.reading
        view.select([1])
        key(view, Qt.Key.Key_Plus)
        assert document.reading is before


class TestWithoutAMouse:
    """Arrow keys move the aim, Enter takes it."""

    def test_a_caliper_is_placed_by_keys_alone(self, view: SheetView, document: Document) -> None:
        view.begin_placing(CaliperKind.TIME, "qrs", "V1")
        key(view, Qt.Key.Key_Return)
        for _ in range(2):
            key(view, Qt.Key.Key_Right, SHIFT)
        for _ in range(3):
            key(view, Qt.Key.Key_Right)
        key(view, Qt.Key.Key_Return)
        (caliper,) = placed(document)
        assert document.reading is not None
        assert document.reading.sheet_map is not None
        assert caliper.width_mm(document.reading.sheet_map) == pytest.approx(2.3)

    def test_in_a_chain_enter_takes_the_place_aimed_at_and_then_ends(
        self, view: SheetView, document: Document
    ) -> None:
        view.begin_placing(CaliperKind.TIME, "rr", "II")
        key(view, Qt.Key.Key_Enter)
        for _ in range(2):
            key(view, Qt.Key.Key_Right, SHIFT)
            key(view, Qt.Key.Key_Enter)
        assert len(placed(document)) == 2
        assert view.is_placing()
        key(view, Qt.Key.Key_Enter)
        assert not view.is_placing()
        assert len(placed(document)) == 2

    def test_the_aim_stays_in_sight_and_on_the_picture(
        self, view: SheetView, document: Document
    ) -> None:
        view.begin_placing(CaliperKind.TIME, None, None)
        key(view, Qt.Key.Key_Return)
        for _ in range(200):
            key(view, Qt.Key.Key_Right, SHIFT)
        assert view.viewport().rect().contains(place(view, 1199.0, 450.0))
        key(view, Qt.Key.Key_Return)
        (caliper,) = placed(document)
        assert caliper.end.x_px == 1199.0


class TestScaleBox:
    """A box over a known number of large squares."""

    def test_a_dragged_box_is_handed_on_and_nothing_is_written(
        self, view: SheetView, document: Document, qtbot: QtBot
    ) -> None:
        before = document.reading
        view.begin_scale_box()
        with qtbot.waitSignal(view.scale_box_drawn) as drawn:
            drag(view, place(view, 300.0, 300.0), place(view, 500.0, 420.0))
        corner, opposite = drawn.args
        assert xy(corner) == near(300.0, 300.0)
        assert xy(opposite) == near(500.0, 420.0)
        assert document.reading is before

    def test_two_clicks_draw_it_too(self, view: SheetView, qtbot: QtBot) -> None:
        view.begin_scale_box()
        click(view, place(view, 500.0, 420.0))
        with qtbot.waitSignal(view.scale_box_drawn):
            click(view, place(view, 300.0, 300.0))

    def test_a_line_is_no_box(self, view: SheetView, qtbot: QtBot) -> None:
        view.begin_scale_box()
        with qtbot.assertNotEmitted(view.scale_box_drawn):
            drag(view, place(view, 300.0, 300.0), place(view, 500.0, 301.0))
        assert view.is_placing()

    def test_it_can_be_given_up(self, view: SheetView, qtbot: QtBot) -> None:
        view.begin_scale_box()
        press(view, place(view, 300.0, 300.0))
        hover(view, place(view, 400.0, 400.0))
        key(view, Qt.Key.Key_Escape)
        release(view, place(view, 400.0, 400.0))
        with qtbot.waitSignal(view.placing_cancelled):
            key(view, Qt.Key.Key_Escape)


def test_another_picture_ends_a_chain_without_telling_of_calipers_it_does_not_have(
    view: SheetView, document: Document, qtbot: QtBot
) -> None:
    view.begin_placing(CaliperKind.TIME, "rr", "II")
    for x in (200.0, 300.0, 405.0):
        click(view, place(view, x, 500.0))
    other = blank_picture((400, 300))
    with (
        qtbot.assertNotEmitted(view.placing_finished),
        qtbot.waitSignal(view.placing_cancelled),
    ):
        document.open(other, reading_of(other))
    assert not view.is_placing()
    click(view, place(view, 100.0, 100.0))
    assert document.reading is not None
    assert document.reading.calipers == ()
