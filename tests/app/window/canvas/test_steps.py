"""How finely a hand could place a mark: what is kept beside it, and what the ± makes of it."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt

from app.calculator import measure_caliper
from app.reading import Caliper, CaliperKind
from app.window.canvas import SheetView
from app.window.canvas.selection import Part, Selection
from app.window.document import Document
from tests.app.window.canvas.hands import (
    CONTROL,
    SHIFT,
    caliper_of,
    click,
    drag,
    key,
    place,
)

KEY_STEP_PX = 0.8  # 0.1 mm at the fixture's 8 px/mm
NEW = 4  # the fixture's document has calipers 1 to 3


def steps_px(caliper: Caliper) -> tuple[float, float]:
    return caliper.start.step_px, caliper.end.step_px


def place_qrs(view: SheetView, document: Document) -> Caliper:
    """Two clicks, 40 px apart."""
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    click(view, place(view, 340.0, 500.0))
    return caliper_of(document, NEW)


def plus_minus(document: Document, caliper_id: int = NEW) -> float:
    assert document.reading is not None
    (value,) = measure_caliper(document.reading, caliper_of(document, caliper_id))
    assert value.plus_minus is not None
    return value.plus_minus


@pytest.fixture
def small_view(view: SheetView) -> SheetView:
    """The whole sheet in a small window, as on a small screen: 4 to 5 px to a screen pixel."""
    view.resize(300, 240)
    view.fit_sheet()
    assert 0.2 < view.zoom() < 0.25
    return view


def test_at_one_to_one_a_mark_is_as_fine_as_a_pixel(view: SheetView, document: Document) -> None:
    assert steps_px(place_qrs(view, document)) == (1.0, 1.0)


def test_with_the_whole_sheet_in_view_a_mark_is_as_coarse_as_a_screen_pixel(
    small_view: SheetView, document: Document
) -> None:
    step_px = 1.0 / small_view.zoom()
    assert steps_px(place_qrs(small_view, document)) == pytest.approx((step_px, step_px))


def test_places_between_two_screen_pixels_cannot_be_pointed_at(
    small_view: SheetView, document: Document
) -> None:
    """The step kept is the distance of the marks that neighbouring pixels give."""
    small_view.begin_placing(CaliperKind.TIME, None, None)
    first = place(small_view, 300.0, 500.0)
    click(small_view, first)
    for steps in (9, 10):
        click(small_view, QPoint(first.x() + steps, first.y()))
        small_view.begin_placing(CaliperKind.TIME, None, None)
        click(small_view, first)
    nine, ten = caliper_of(document, NEW), caliper_of(document, NEW + 1)
    assert ten.end.x_px - nine.end.x_px == pytest.approx(ten.end.step_px)


def test_each_leg_keeps_the_zoom_it_was_placed_at(view: SheetView, document: Document) -> None:
    view.begin_placing(CaliperKind.TIME, None, None)
    click(view, place(view, 500.0, 400.0))
    view.zoom_by(4.0)
    click(view, place(view, 560.0, 400.0))
    assert steps_px(caliper_of(document, NEW)) == pytest.approx((1.0, 0.25))


def test_zooming_in_and_dragging_the_leg_makes_it_finer_and_undo_coarser_again(
    small_view: SheetView, document: Document
) -> None:
    coarse = place_qrs(small_view, document)
    before_ms = plus_minus(document)
    small_view.resize(1000, 800)
    small_view.zoom_actual()
    grip = place(small_view, coarse.end.x_px, 500.0)
    drag(small_view, grip, place(small_view, coarse.end.x_px + 9.0, 500.0))
    finer = caliper_of(document, NEW)
    assert steps_px(finer) == (coarse.start.step_px, 1.0)
    assert plus_minus(document) < before_ms
    document.undo()
    assert caliper_of(document, NEW) == coarse
    document.redo()
    assert caliper_of(document, NEW) == finer


def test_dragging_the_leg_at_a_coarse_zoom_makes_it_coarser(
    view: SheetView, document: Document
) -> None:
    view.zoom_by(0.5)
    before = caliper_of(document)
    drag(view, place(view, before.end.x_px, 400.0), place(view, before.end.x_px + 40.0, 400.0))
    assert steps_px(caliper_of(document)) == (0.0, pytest.approx(2.0))


def test_dragging_the_whole_makes_no_leg_finer(view: SheetView, document: Document) -> None:
    view.zoom_by(0.5)
    coarse = place_qrs(view, document)
    assert steps_px(coarse) == pytest.approx((2.0, 2.0))
    view.zoom_actual()
    view.select([NEW])
    drag_bar(view, NEW)
    moved = caliper_of(document, NEW)
    assert moved.start.x_px != coarse.start.x_px
    assert steps_px(moved) == steps_px(coarse)


def test_dragging_the_whole_at_a_coarse_zoom_makes_its_legs_as_coarse(
    view: SheetView, document: Document
) -> None:
    fine = place_qrs(view, document)
    view.zoom_by(0.5)
    drag_bar(view, NEW)
    moved = caliper_of(document, NEW)
    assert moved.start.x_px != fine.start.x_px
    assert steps_px(moved) == pytest.approx((2.0, 2.0))


def drag_bar(view: SheetView, caliper_id: int) -> None:
    """Take a caliper where a press holds it whole, and drag it aside."""
    room = view.viewport().rect()
    held = next(
        QPoint(x, y)
        for y in range(0, room.height(), 2)
        for x in range(0, room.width(), 4)
        if (hit := view.hit(QPointF(x, y))) is not None
        and hit.caliper_id == caliper_id
        and hit.tooth is None
    )
    drag(view, held, held + QPoint(20, 0))


@pytest.mark.parametrize("arrow", [Qt.Key.Key_Left, Qt.Key.Key_Right])
def test_an_arrow_key_makes_the_leg_it_moves_finer(
    small_view: SheetView, document: Document, arrow: Qt.Key
) -> None:
    coarse = place_qrs(small_view, document)
    before_ms = plus_minus(document)
    key(small_view, arrow)
    assert steps_px(caliper_of(document, NEW)) == (
        coarse.start.step_px,
        pytest.approx(KEY_STEP_PX, rel=1e-3),
    )
    assert plus_minus(document) < before_ms


@pytest.mark.parametrize("modifier", [SHIFT, CONTROL])
def test_long_key_steps_make_nothing_finer(
    small_view: SheetView, document: Document, modifier: Qt.KeyboardModifier
) -> None:
    coarse = place_qrs(small_view, document)
    key(small_view, Qt.Key.Key_Left, modifier)
    moved = caliper_of(document, NEW)
    assert moved.end.x_px < coarse.end.x_px
    assert steps_px(moved) == steps_px(coarse)


def test_arrow_keys_on_the_whole_make_nothing_finer(
    small_view: SheetView, document: Document
) -> None:
    coarse = place_qrs(small_view, document)
    small_view.set_selection(Selection(frozenset({NEW}), Part.WHOLE))
    key(small_view, Qt.Key.Key_Left)
    assert steps_px(caliper_of(document, NEW)) == steps_px(coarse)


def test_placed_by_keys_alone_a_leg_is_as_fine_as_they_were(
    small_view: SheetView, document: Document
) -> None:
    """The first place is taken where the aim began, then ten steps at once, then one."""
    small_view.begin_placing(CaliperKind.TIME, None, None)
    key(small_view, Qt.Key.Key_Up)  # across: a time is measured along the paper
    key(small_view, Qt.Key.Key_Return)
    key(small_view, Qt.Key.Key_Right, SHIFT)
    key(small_view, Qt.Key.Key_Right)
    key(small_view, Qt.Key.Key_Return)
    caliper = caliper_of(document, NEW)
    assert caliper.start.step_px == pytest.approx(1.0 / small_view.zoom())
    assert caliper.end.step_px == pytest.approx(KEY_STEP_PX, rel=1e-3)


def test_in_a_chain_neighbours_share_the_leg_with_its_step(
    view: SheetView, document: Document
) -> None:
    view.begin_placing(CaliperKind.TIME, "rr", "II")
    click(view, place(view, 200.0, 500.0))
    view.zoom_by(0.5)
    for x in (300.0, 405.0):
        click(view, place(view, x, 500.0))
    first, second = caliper_of(document, NEW), caliper_of(document, NEW + 1)
    assert first.end == second.start
    assert steps_px(first) == pytest.approx((1.0, 2.0))


def test_on_a_fine_screen_a_mark_is_as_fine_as_its_pixels(
    view: SheetView, document: Document, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Where a view px has two pixels of the screen, the pointer goes by those."""
    monkeypatch.setattr(view, "devicePixelRatioF", lambda: 2.0)
    assert view.screen_px_per_picture_px() == 2.0
    assert steps_px(place_qrs(view, document)) == (0.5, 0.5)
