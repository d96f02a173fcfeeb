"""What is on the screen: looked at pixel by pixel, and label by label."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations

import numpy as np
import pytest
from numpy.typing import NDArray
from PySide6.QtCore import QPoint, QRectF, Qt
from PySide6.QtGui import QImage
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from app.reading import Caliper, CaliperKind, PicturePoint
from app.window.canvas import SheetView, look
from app.window.canvas.overlay import Drawn
from app.window.canvas.selection import Part, Selection
from app.window.document import Document
from tests.app.reading_examples import example_map
from tests.app.window.canvas.hands import (
    MIDDLE,
    blank_picture,
    click,
    comb_caliper,
    drag,
    hover,
    key,
    place,
    press,
    reading_of,
    release,
    time_caliper,
)


def pixels_of(image: QImage) -> NDArray[np.uint8]:
    """Shape (height, width, 3)."""
    rgb = image.convertToFormat(QImage.Format.Format_RGB888)
    flat = np.frombuffer(rgb.constBits(), dtype=np.uint8)
    rows = flat.reshape(rgb.height(), rgb.bytesPerLine())[:, : 3 * rgb.width()]
    return rows.reshape(rgb.height(), rgb.width(), 3).copy()


def painted(view: SheetView) -> NDArray[np.uint8]:
    """The viewport, all painted anew."""
    return pixels_of(view.viewport().grab().toImage())


def on_screen(view: SheetView) -> NDArray[np.uint8]:
    """The viewport as it stands on the screen, nothing painted for the purpose."""
    QApplication.processEvents()
    shown = view.screen().grabWindow(view.winId())
    return pixels_of(shown.toImage())


def nothing_is_stale(view: SheetView) -> bool:
    """Whether the screen comes to show what painting all of it anew does.

    Where a long line is cut its edges may be a few grey levels off. A window system takes a
    moment; what was forgotten stays wrong however long one waits.
    """
    wanted = pixels_of(view.grab().toImage()).astype(int)
    for _ in range(25):
        if int(np.abs(on_screen(view) - wanted).max()) <= 8:
            return True
        QTest.qWait(20)
    return False


def labels(drawn: list[Drawn]) -> list[QRectF]:
    return [QRectF(d.label[0], d.label[1].deviceIndependentSize()) for d in drawn if d.label]


def crowd() -> list[Caliper]:
    """A strip of twelve beats with RR throughout, and PR, QRS and QT on three of them."""
    calipers: list[Caliper] = []

    def add(quantity: str, x1: float, x2: float, y: float, beat: int) -> None:
        start, end = PicturePoint(x1, y), PicturePoint(x2, y)
        number = len(calipers) + 1
        calipers.append(Caliper(number, CaliperKind.TIME, start, end, quantity, "II", beat))

    for beat in range(6):
        add("rr", 60.0 + 180.0 * beat, 240.0 + 180.0 * beat, 400.0, beat + 1)
    for beat in range(3):
        onset = 400.0 + 180.0 * beat
        add("pr", onset - 36.0, onset, 420.0, beat + 1)
        add("qrs", onset, onset + 20.0, 420.0, beat + 1)
        add("qt", onset, onset + 88.0, 420.0, beat + 1)
    return calipers


@pytest.fixture
def crowded(view: SheetView, document: Document) -> SheetView:
    picture = blank_picture()
    document.open(picture, reading_of(picture, *crowd()))
    view.zoom_actual()
    return view


def test_around_the_picture_is_the_desk_wherever_one_pans(view: SheetView) -> None:
    view.fit_sheet()
    view.zoom_by(0.5)
    desk = (look.DESK.red(), look.DESK.green(), look.DESK.blue())
    for step in (QPoint(0, 0), QPoint(120, 80), QPoint(-200, -90)):
        view.pan(step.x(), step.y())
        shown = on_screen(view)
        assert tuple(shown[3, 3]) == tuple(shown[-3, -3]) == desk
        middle = place(view, 1000.0, 100.0)
        assert tuple(shown[middle.y(), middle.x()]) == (255, 255, 255)


@pytest.mark.parametrize("zoom", [1.0, 3.0, 8.0])
def test_a_pixel_is_shown_where_its_mark_would_be(
    view: SheetView, document: Document, zoom: float
) -> None:
    """Half a pixel off would be some 2 ms: (0, 0) is the centre of the first pixel."""
    picture = blank_picture()
    picture.pixels[:, 600] = 0
    document.open(picture, reading_of(picture))
    view.zoom_by(zoom / view.zoom())
    row = painted(view)[300, :, 0].astype(float)
    centre_px = float(np.average(np.arange(row.size), weights=255.0 - row))
    assert view.picture_px_from_view_px(QPoint(round(centre_px), 300)).x_px == pytest.approx(
        600.0, abs=0.6 / zoom
    )


def test_a_leg_is_drawn_through_the_middle_of_its_pixel(
    view: SheetView, document: Document
) -> None:
    picture = blank_picture()
    picture.pixels[:, 600] = (255, 255, 0)  # a stripe whose blue shows where the pixel is
    document.open(picture, reading_of(picture, time_caliper(1, (600.0, 450.0), 300.0)))
    view.zoom_by(12.0 / view.zoom())
    row = painted(view)[place(view, 600.0, 450.0).y()].astype(float)
    stripe = np.flatnonzero(row[:, 2] < 200.0)
    leg = row[:, 0] < 200.0
    assert len(stripe) == pytest.approx(12, abs=1)
    assert np.flatnonzero(leg).mean() == pytest.approx(stripe.mean(), abs=0.75)


def test_a_leg_lies_on_the_drawn_line_and_hides_nothing_beside_itself(
    view: SheetView, document: Document
) -> None:
    """What a leg is held against must stay to be seen: a bar has a pale rim, a leg has not."""
    picture = blank_picture()
    picture.pixels[380:420] = 0  # a thick black line through the marks
    document.open(picture, reading_of(picture, time_caliper()))
    view.zoom_actual()
    leg = place(view, 400.0, 400.0)
    row = painted(view)[leg.y(), leg.x() - 6 : leg.x() + 7].max(axis=1)
    assert row[6] > 0  # the leg itself is there
    assert (row[[0, 1, 2, 3, 9, 10, 11, 12]] == 0).all()
    assert row.max() < 150


def test_a_bar_runs_between_its_legs(view: SheetView) -> None:
    (leg, *_), bar = view._overlay.settled[0].legs, view._overlay.settled[0].bar[0]
    middle = (bar.center() + view._canvas_offset()).toPoint()
    shown = painted(view)
    assert shown[middle.y() - 2 : middle.y() + 3, middle.x(), 0].min() < 100
    beside = (leg.p2() + view._canvas_offset()).toPoint() + QPoint(80, -4)
    assert shown[beside.y(), beside.x()].min() == 255


def test_a_selected_caliper_is_told_by_more_than_its_colour(view: SheetView) -> None:
    mark = place(view, 560.0, 400.0)

    def marked_px() -> int:
        """Pixels around the end's mark that are not paper."""
        around = painted(view)[mark.y() - 8 : mark.y() + 9, mark.x() - 8 : mark.x() + 9]
        return int((around.min(axis=2) < 200).sum())

    plain = marked_px()
    view.set_selection(Selection(frozenset({1}), Part.END))
    assert marked_px() > plain + 30


def test_labels_do_not_lie_on_each_other_in_an_ordinary_crowd(crowded: SheetView) -> None:
    for factor in (1.0, 1.4, 2.0):
        crowded.zoom_by(factor)
        shown = labels(crowded._overlay.settled)
        assert len(shown) == len(crowd())
        assert not any(one.intersects(other) for one, other in combinations(shown, 2))


def test_a_label_stays_in_view_while_its_bar_is(crowded: SheetView, document: Document) -> None:
    wide = time_caliper(1, (100.0, 400.0), 900.0)
    picture = blank_picture()
    document.open(picture, reading_of(picture, wide))
    crowded.zoom_actual()
    crowded.zoom_by(2.0)
    for step in (700.0, -500.0, -500.0, -400.0):
        crowded.pan(step, 0.0)
        (box,) = labels(crowded._overlay.settled)
        in_view = box.translated(crowded._canvas_offset())
        assert QRectF(crowded.viewport().rect()).contains(in_view)


def test_the_label_can_be_grasped_where_it_slid_to(view: SheetView, document: Document) -> None:
    picture = blank_picture()
    document.open(picture, reading_of(picture, time_caliper(1, (100.0, 400.0), 900.0)))
    view.zoom_actual()
    view.zoom_by(2.0)
    view.pan(-700.0, 0.0)
    (box,) = labels(view._overlay.settled)
    there = box.translated(view._canvas_offset()).center().toPoint()
    before = document.reading
    drag(view, there, there + QPoint(20, 10))
    assert document.reading is not before
    assert view.selected_ids() == frozenset({1})


@pytest.mark.parametrize("selected", [(), (7,), (1, 8)])
def test_the_screen_is_as_if_painted_anew_after_panning(
    crowded: SheetView, selected: tuple[int, ...]
) -> None:
    """Pieces of the screen are moved, only the rest is painted: nothing stale may stay."""
    crowded.zoom_by(2.0)
    crowded.select(selected)
    on_screen(crowded)
    for step in (QPoint(-37, 11), QPoint(-61, -7), QPoint(190, 40), QPoint(333, -23)):
        crowded.pan(step.x(), step.y())
        assert nothing_is_stale(crowded)


def test_the_screen_is_as_if_painted_anew_through_a_placing(view: SheetView) -> None:
    view.begin_placing(CaliperKind.TIME, "qrs", "V1")
    click(view, place(view, 300.0, 500.0))
    for x in (340.0, 420.0, 330.0):
        hover(view, place(view, x, 510.0))
        assert nothing_is_stale(view)
    drag(view, QPoint(500, 300), QPoint(430, 340), MIDDLE)
    assert nothing_is_stale(view)
    key(view, Qt.Key.Key_Escape)
    key(view, Qt.Key.Key_Escape)
    assert nothing_is_stale(view)


def test_the_screen_is_as_if_painted_anew_through_a_drag(view: SheetView) -> None:
    leg = place(view, 560.0, 400.0)
    press(view, leg)
    for x in (20, 90, -40):
        hover(view, leg + QPoint(x, 0))
        assert nothing_is_stale(view)
    release(view, leg)
    assert nothing_is_stale(view)


class TestGridOverlay:
    """The fitted lattice, to judge the fit by eye."""

    def blue_share(self, view: SheetView, x_px: float, y_px: float) -> float:
        """How much of the picture column at x is blue, over 100 px down from y."""
        top = place(view, x_px, y_px)
        column = painted(view)[top.y() : top.y() + 100, top.x()].astype(int)
        return float((column[:, 2] - column[:, 0] > 60).mean())

    def test_it_is_off_until_asked_for(self, view: SheetView) -> None:
        assert not view.grid_visible()
        bold_x = 12.0 + 8.0 * 50
        assert self.blue_share(view, bold_x, 100.0) == 0.0
        view.set_grid_visible(True)
        assert view.grid_visible()
        assert self.blue_share(view, bold_x, 100.0) > 0.3
        assert self.blue_share(view, bold_x + 4.0, 100.0) < 0.2
        view.set_grid_visible(False)
        assert self.blue_share(view, bold_x, 100.0) == 0.0

    def test_it_follows_the_map(self, view: SheetView, document: Document) -> None:
        view.set_grid_visible(True)
        reading = document.reading
        assert reading is not None
        upright = replace(example_map(), x_step_px=(10.0, 0.0), y_step_px=(0.0, 10.0))
        document.edit(replace(reading, sheet_map=upright), "Find grid")
        assert self.blue_share(view, 12.0 + 10.0 * 45, 100.0) > 0.3
        assert self.blue_share(view, 12.0 + 8.0 * 55 + 5.0, 100.0) < 0.2
        document.edit(replace(reading, sheet_map=None), "Drop the grid")
        assert self.blue_share(view, 12.0 + 10.0 * 45, 100.0) == 0.0

    def test_far_off_only_the_bold_lines_are_laid_out(self, view: SheetView) -> None:
        view.set_grid_visible(True)
        view.zoom_by(0.4)
        painted(view)
        assert set(view._grid._paths) == {True}
        view.zoom_actual()
        painted(view)
        assert set(view._grid._paths) == {True, False}

    def test_from_very_far_off_nothing_is_drawn(self, view: SheetView) -> None:
        view.zoom_by(1e-9)
        without = painted(view)
        view._grid.set_map(replace(example_map(), x_step_px=(3.0, 0.0), y_step_px=(0.0, 3.0)))
        view.set_grid_visible(True)
        assert (painted(view) == without).all()


class TestLoupe:
    """The magnified square beside what is being placed."""

    def test_it_shows_the_place_magnified(self, view: SheetView, document: Document) -> None:
        picture = blank_picture()
        picture.pixels[:, 500:] = 0  # black from x = 500 on
        document.open(picture, reading_of(picture))
        view.zoom_actual()
        loupe = view._aim_mark._loupe
        assert not loupe.isVisible()
        view.begin_placing(CaliperKind.TIME, None, None)
        hover(view, place(view, 490.0, 450.0))
        assert loupe.isVisible()
        shown = pixels_of(loupe.grab().toImage())
        # The edge of pixel 500 is 9.5 picture px from the middle of 490, three times as large.
        edge = loupe.width() // 2 + round(3 * 9.5)
        quarter = shown[loupe.height() // 4]
        assert (quarter[edge - 12 : edge - 1].min(axis=1) > 150).all()
        assert (quarter[edge + 1 : edge + 12].max(axis=1) < 60).all()

    def test_it_never_covers_the_place_and_stays_in_the_view(self, view: SheetView) -> None:
        loupe = view._aim_mark._loupe
        view.begin_placing(CaliperKind.TIME, None, None)
        room = view.viewport().rect()
        for point in (QPoint(5, 5), QPoint(990, 5), QPoint(5, 790), QPoint(990, 790)):
            hover(view, point)
            assert room.contains(loupe.geometry())
            assert not loupe.geometry().contains(point)

    def test_it_lets_the_mouse_through(self, view: SheetView) -> None:
        view.begin_placing(CaliperKind.TIME, None, None)
        hover(view, QPoint(500, 400))
        under = view._aim_mark._loupe.geometry().center()
        assert view.childAt(under) is not view._aim_mark._loupe

    def test_it_can_be_switched_off_and_on(self, view: SheetView) -> None:
        loupe = view._aim_mark._loupe
        view.begin_placing(CaliperKind.TIME, None, None)
        hover(view, QPoint(500, 400))
        view.set_loupe_visible(False)
        assert not loupe.isVisible()
        hover(view, QPoint(520, 400))
        assert not loupe.isVisible()
        view.set_loupe_visible(True)
        assert loupe.isVisible()

    def test_close_up_it_is_not_needed(self, view: SheetView) -> None:
        view.zoom_by(10.0)
        view.begin_placing(CaliperKind.TIME, None, None)
        hover(view, QPoint(500, 400))
        assert not view._aim_mark._loupe.isVisible()

    def test_a_dragged_leg_is_magnified_too_and_then_it_goes(self, view: SheetView) -> None:
        loupe, leg = view._aim_mark._loupe, place(view, 560.0, 400.0)
        press(view, leg)
        hover(view, leg + QPoint(20, 0))
        assert loupe.isVisible()
        release(view, leg + QPoint(20, 0))
        assert not loupe.isVisible()


def test_a_picture_made_small_is_averaged_and_made_large_is_exact(
    qtbot: QtBot, document: Document
) -> None:
    """Lines thinner than a screen pixel fade evenly; close up every pixel is itself."""
    picture = blank_picture((1600, 1200))
    picture.pixels[:, ::4] = 0
    document.open(picture, reading_of(picture, comb_caliper()).without_calipers({3}))
    view = SheetView(document)
    qtbot.addWidget(view)
    view.resize(600, 500)
    with qtbot.waitExposed(view):
        view.show()
    view.zoom_by(0.25 / view.zoom())
    middle = painted(view)[230:270, 280:320, 0].astype(float)
    assert middle.mean() == pytest.approx(255 * 0.75, abs=6.0)
    assert middle.std() < 12.0
    view.zoom_by(8.0 / view.zoom())
    assert set(np.unique(painted(view)[200:300, 200:400])) == {0, 255}
