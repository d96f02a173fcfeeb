"""Moving, selecting and deleting as a hand does it; what the model is after each."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from app.reading import PicturePoint
from app.window.canvas import SheetView
from app.window.canvas.selection import Part
from app.window.document import Document
from tests.app.reading_examples import example_map
from tests.app.window.canvas.hands import (
    CONTROL,
    MIDDLE,
    RIGHT,
    SHIFT,
    blank_picture,
    caliper_of,
    click,
    comb_caliper,
    drag,
    height_caliper,
    hover,
    key,
    place,
    press,
    reading_of,
    release,
    time_caliper,
)

CORNER_MM = np.array([[0.0, 0.0], [40.0, 0.0], [0.0, 40.0]])
ONE_VIEW_PX = 1.0  # the fixture's view is at 1:1


def test_a_view_px_and_its_picture_point_lead_back_to_each_other(view: SheetView) -> None:
    for point in (QPoint(0, 0), QPoint(517, 333), QPoint(999, 799)):
        assert view.view_px_from_picture_px(view.picture_px_from_view_px(point)) == point


def test_the_centre_of_a_pixel_is_its_whole_number(view: SheetView) -> None:
    """At 1:1 the view px that shows pixel (300, 200) has picture_px (300, 200) in its middle."""
    middle = view.picture_px_from_view_px(place(view, 300.0, 200.0))
    assert (middle.x_px, middle.y_px) == pytest.approx((300.0, 200.0), abs=1e-9)


def test_dragging_a_leg_moves_it_along_the_paper_in_one_step(
    view: SheetView, document: Document
) -> None:
    before = caliper_of(document)
    drag(view, place(view, 560.0, 400.0), place(view, 600.0, 430.0))
    after = caliper_of(document)
    assert after.end.x_px == pytest.approx(600.0, abs=ONE_VIEW_PX)
    assert after.end.y_px == pytest.approx(400.0, abs=0.1)  # the leg slides, it does not climb
    assert after.start == before.start
    assert document.undo_label() == "Move caliper leg"
    document.undo()
    assert caliper_of(document) == before
    assert document.undo_label() is None


def test_a_leg_does_not_jump_to_the_pointer(view: SheetView, document: Document) -> None:
    """Grasped 5 px beside the leg, it moves by what the pointer moved."""
    drag(view, place(view, 565.0, 400.0), place(view, 585.0, 400.0))
    assert caliper_of(document).end.x_px == pytest.approx(580.0, abs=0.1)


def test_a_height_leg_moves_down_the_paper_only(view: SheetView, document: Document) -> None:
    drag(view, place(view, 706.0, 520.0), place(view, 730.0, 500.0))
    end = caliper_of(document, 2).end
    assert end.y_px == pytest.approx(500.0, abs=ONE_VIEW_PX)
    assert end.x_px == pytest.approx(716.0, abs=0.1)


def test_an_inner_tooth_stretches_the_comb_from_its_start(
    view: SheetView, document: Document
) -> None:
    before = caliper_of(document, 3)
    drag(view, place(view, 320.0, 700.0), place(view, 330.0, 700.0))
    after = caliper_of(document, 3)
    assert after.start == before.start
    assert after.end.x_px == pytest.approx(440.0 + 20.0, abs=0.1)  # tooth 2 of 4 moved by 10


def test_the_first_and_the_last_tooth_stretch_the_comb_from_the_other_end(
    view: SheetView, document: Document
) -> None:
    before = caliper_of(document, 3)
    drag(view, place(view, 200.0, 700.0), place(view, 180.0, 705.0))
    after = caliper_of(document, 3)
    assert after.start.x_px == pytest.approx(180.0, abs=ONE_VIEW_PX)
    assert (after.end, after.teeth) == (before.end, 5)
    drag(view, place(view, 440.0, 700.0), place(view, 480.0, 695.0))
    assert caliper_of(document, 3).end.x_px == pytest.approx(480.0, abs=ONE_VIEW_PX)
    assert caliper_of(document, 3).start == after.start
    document.undo()
    assert caliper_of(document, 3) == after


def test_dragging_the_bar_moves_the_whole(view: SheetView, document: Document) -> None:
    before = caliper_of(document)
    bar = _middle_of_bar(view, 1)
    drag(view, bar, bar + QPoint(30, 50))
    after = caliper_of(document)
    for leg_before, leg_after in ((before.start, after.start), (before.end, after.end)):
        assert leg_after.x_px - leg_before.x_px == pytest.approx(30.0, abs=1e-6)
        assert leg_after.y_px - leg_before.y_px == pytest.approx(50.0, abs=1e-6)
    assert document.undo_label() == "Move caliper"
    document.undo()
    assert document.undo_label() is None


def _middle_of_bar(view: SheetView, caliper_id: int) -> QPoint:
    """Where the bar is: found by what lies under the pointer."""
    for y in range(250, 550):
        point = place(view, 480.0, float(y))
        hit = view.hit(QPointF(point))
        if hit is not None and hit.caliper_id == caliper_id and hit.tooth is None:
            return point + QPoint(0, 8)
    raise AssertionError("the bar was not found")


def test_a_press_without_a_move_writes_nothing(view: SheetView, document: Document) -> None:
    before = document.reading
    click(view, place(view, 560.0, 400.0))
    assert document.reading is before
    assert view.selected_ids() == frozenset({1})
    assert view.selection.part is Part.END


def test_during_a_drag_only_a_preview_changes(view: SheetView, document: Document) -> None:
    before = document.reading
    press(view, place(view, 560.0, 400.0))
    hover(view, place(view, 640.0, 400.0))
    assert document.reading is before
    release(view, place(view, 640.0, 400.0))
    assert document.reading is not before


@pytest.mark.parametrize("way_out", ["escape", "right button"])
def test_a_drag_can_be_taken_back(view: SheetView, document: Document, way_out: str) -> None:
    before = document.reading
    press(view, place(view, 560.0, 400.0))
    hover(view, place(view, 640.0, 400.0))
    if way_out == "escape":
        key(view, Qt.Key.Key_Escape)
    else:
        press(view, place(view, 640.0, 400.0), RIGHT)
    release(view, place(view, 640.0, 400.0))
    assert document.reading is before


def test_an_undo_during_a_drag_ends_the_drag(view: SheetView, document: Document) -> None:
    drag(view, place(view, 560.0, 400.0), place(view, 600.0, 400.0))
    press(view, place(view, 600.0, 400.0))
    hover(view, place(view, 640.0, 400.0))
    document.undo()
    release(view, place(view, 640.0, 400.0))
    assert caliper_of(document).end.x_px == pytest.approx(560.0)


def test_a_leg_stops_at_the_edge_of_the_picture(view: SheetView, document: Document) -> None:
    view.fit_sheet()
    edge = place(view, 1199.0, 400.0)
    drag(view, place(view, 560.0, 400.0), edge + QPoint(60, 0))
    end = caliper_of(document).end
    assert end.x_px == pytest.approx(1199.0, abs=1e-6)


def test_shift_click_takes_a_second_caliper_in_and_a_drag_moves_both(
    view: SheetView, document: Document
) -> None:
    view.select([1])
    press(view, place(view, 706.0, 520.0), modifiers=SHIFT)
    release(view, place(view, 706.0, 520.0))
    assert view.selected_ids() == frozenset({1, 2})
    bar = _middle_of_bar(view, 1)
    drag(view, bar, bar + QPoint(20, 0))
    assert caliper_of(document, 1).start.x_px == pytest.approx(420.0)
    assert caliper_of(document, 2).start.x_px == pytest.approx(720.0)
    document.undo()
    assert document.undo_label() is None


@pytest.mark.parametrize("modifier", [SHIFT, CONTROL])
def test_a_click_with_shift_or_control_takes_in_and_lets_go(
    view: SheetView, document: Document, modifier: Qt.KeyboardModifier
) -> None:
    before = document.reading
    leg, other = place(view, 560.0, 400.0), place(view, 706.0, 520.0)
    for point, selected in ((leg, {1}), (other, {1, 2}), (leg, {2}), (other, set())):
        press(view, point, modifiers=modifier)
        hover(view, point + QPoint(20, 20))
        release(view, point + QPoint(20, 20))
        assert view.selected_ids() == selected
    assert document.reading is before


def test_a_click_on_an_empty_place_lets_go_of_the_selection(view: SheetView, qtbot: QtBot) -> None:
    view.select([1, 2])
    with qtbot.waitSignal(view.selection_changed):
        click(view, place(view, 900.0, 200.0))
    assert view.selected_ids() == frozenset()


def test_dragging_an_empty_place_pans_and_keeps_the_selection(view: SheetView) -> None:
    view.select([1])
    grasped = view.picture_px_from_view_px(QPoint(700, 100))
    drag(view, QPoint(700, 100), QPoint(650, 160))
    assert view.picture_px_from_view_px(QPoint(650, 160)) == grasped
    assert view.selected_ids() == frozenset({1})


def test_the_middle_button_pans_even_from_a_caliper(view: SheetView, document: Document) -> None:
    before, leg = document.reading, place(view, 560.0, 400.0)
    drag(view, leg, leg + QPoint(40, 30), MIDDLE)
    assert place(view, 560.0, 400.0) == leg + QPoint(40, 30)
    assert document.reading is before


def test_the_space_bar_makes_the_left_button_pan(view: SheetView, document: Document) -> None:
    before, leg = document.reading, place(view, 560.0, 400.0)
    QTest.keyPress(view, Qt.Key.Key_Space)
    drag(view, leg, leg + QPoint(-40, 30))
    QTest.keyRelease(view, Qt.Key.Key_Space)
    assert place(view, 560.0, 400.0) == leg + QPoint(-40, 30)
    assert document.reading is before


def test_a_double_click_on_a_leg_selects_the_whole(view: SheetView, qtbot: QtBot) -> None:
    leg = place(view, 560.0, 400.0)
    click(view, leg)
    qtbot.mouseDClick(view.viewport(), Qt.MouseButton.LeftButton, pos=leg)
    assert view.selected_ids() == frozenset({1})
    assert view.selection.part is Part.WHOLE


def test_deleting_several_is_one_step(view: SheetView, document: Document) -> None:
    view.select_all()
    assert view.selected_ids() == frozenset({1, 2, 3})
    key(view, Qt.Key.Key_Delete)
    assert document.reading is not None
    assert document.reading.calipers == ()
    assert view.selected_ids() == frozenset()
    document.undo()
    assert document.reading.calipers == (time_caliper(), height_caliper(), comb_caliper())
    assert document.undo_label() is None


def test_selecting_passes_over_what_is_not_there(view: SheetView) -> None:
    view.select([2, 99])
    assert view.selected_ids() == frozenset({2})


def test_the_selection_is_told_once(view: SheetView, qtbot: QtBot) -> None:
    with qtbot.waitSignal(view.selection_changed):
        view.select([1])
    with qtbot.assertNotEmitted(view.selection_changed):
        view.select([1])


def test_undoing_a_placing_takes_the_caliper_out_of_the_selection(
    view: SheetView, document: Document, qtbot: QtBot
) -> None:
    assert document.reading is not None
    document.edit(document.reading.with_caliper(time_caliper(4)), "Place QRS caliper")
    view.select([4])
    with qtbot.waitSignal(view.selection_changed):
        document.undo()
    assert view.selected_ids() == frozenset()


def test_the_pointer_is_told_in_picture_px_and_off_the_picture_as_none(
    view: SheetView, qtbot: QtBot
) -> None:
    with qtbot.waitSignal(view.pointer_moved) as told:
        hover(view, place(view, 300.0, 200.0))
    assert told.args == [PicturePoint(300.0, 200.0)]
    view.fit_sheet()
    with qtbot.waitSignal(view.pointer_moved) as told:
        hover(view, QPoint(2, 2))
    assert told.args == [None]


def test_another_picture_is_fitted_and_nothing_stays_selected(
    view: SheetView, document: Document
) -> None:
    view.select([1])
    other = blank_picture((400, 300))
    document.open(other, reading_of(other))
    assert view.selected_ids() == frozenset()
    for corner in ((0.0, 0.0), (399.0, 299.0)):
        assert view.viewport().rect().contains(place(view, *corner))
    assert view.zoom() > 1.0


def test_before_a_picture_is_opened_nothing_fails(qtbot: QtBot) -> None:
    view = SheetView(Document())
    qtbot.addWidget(view)
    with qtbot.waitExposed(view):
        view.show()
    view.fit_sheet()
    view.zoom_by(2.0)
    view.select_all()
    view.delete_selected()
    view.begin_scale_box()
    click(view, QPoint(50, 50))
    for which in (Qt.Key.Key_Left, Qt.Key.Key_Plus, Qt.Key.Key_Tab, Qt.Key.Key_Escape):
        key(view, which)
    assert view.selected_ids() == frozenset()
    assert not view.is_placing()


@pytest.mark.parametrize("quarter_turns", [0, 1, 2, 3])
def test_the_paper_reads_to_the_right_however_it_was_scanned(
    document: Document, qtbot: QtBot, quarter_turns: int
) -> None:
    view = SheetView(document)
    qtbot.addWidget(view)
    with qtbot.waitExposed(view):
        view.show()
    assert document.reading is not None
    sheet_map = example_map().turned(quarter_turns)
    document.edit(replace(document.reading, sheet_map=sheet_map), "Turn the sheet")
    (x0, y0), (x1, y1), (x2, y2) = sheet_map.to_px(CORNER_MM)
    origin, right, down = (place(view, x, y) for x, y in ((x0, y0), (x1, y1), (x2, y2)))
    assert right.x() > origin.x() + 10 * abs(right.y() - origin.y())
    assert down.y() > origin.y() + 10 * abs(down.x() - origin.x())
    for corner in ((0.0, 0.0), (1199.0, 899.0)):
        assert view.viewport().rect().contains(place(view, *corner))


def test_a_mirrored_picture_is_shown_unmirrored(document: Document, qtbot: QtBot) -> None:
    view = SheetView(document)
    qtbot.addWidget(view)
    assert document.reading is not None
    upright = example_map()
    mirrored = replace(
        upright,
        x_step_px=(-upright.x_step_px[0], 0.0),
        turn_deg=180,
        mirrored=True,
        origin_px=(1190.0, 9.0),
    )
    document.edit(replace(document.reading, sheet_map=mirrored), "Mirror")
    (x0, y0), (x1, y1), (x2, y2) = mirrored.to_px(CORNER_MM)
    origin, right, down = (place(view, x, y) for x, y in ((x0, y0), (x1, y1), (x2, y2)))
    assert right.x() > origin.x()
    assert down.y() > origin.y()


def test_a_turned_sheet_is_dragged_along_its_own_paper(document: Document, view: SheetView) -> None:
    assert document.reading is not None
    turned = replace(document.reading, sheet_map=example_map().turned(1))
    document.edit(turned, "Turn the sheet")
    view.zoom_actual()
    # +x of the sheet is up the picture now, so a time caliper's legs are apart up the picture.
    before = caliper_of(document)
    view.select([1])
    key(view, Qt.Key.Key_Right, SHIFT)
    after = caliper_of(document)
    assert after.end.y_px == pytest.approx(before.end.y_px - 8.0, abs=0.2)
    assert after.end.x_px == pytest.approx(before.end.x_px, abs=0.2)
