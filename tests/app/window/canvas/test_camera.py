"""Zooming and panning: what is under the pointer stays under it."""

from __future__ import annotations

import math

import pytest
from PySide6.QtCore import QPoint, Qt
from pytestqt.qtbot import QtBot

from app.reading import PicturePoint
from app.window.canvas import SheetView
from app.window.canvas.camera import LARGEST_ZOOM
from tests.app.window.canvas.hands import CONTROL, SHIFT, place, wheel

NOTCH = 120


def apart_view_px(view: SheetView, point: PicturePoint, view_point: QPoint) -> float:
    there = view.view_px_from_picture_px(point) - view_point
    return math.hypot(there.x(), there.y())


@pytest.mark.parametrize("corner", [QPoint(20, 30), QPoint(500, 400), QPoint(980, 770)])
@pytest.mark.parametrize("notches", [3, -5])
@pytest.mark.parametrize("modifier", [Qt.KeyboardModifier.NoModifier, CONTROL])
def test_the_wheel_keeps_the_point_under_the_pointer(
    view: SheetView, corner: QPoint, notches: int, modifier: Qt.KeyboardModifier
) -> None:
    under, zoom = view.picture_px_from_view_px(corner), view.zoom()
    for _ in range(abs(notches)):
        wheel(view, corner, QPoint(0, int(math.copysign(NOTCH, notches))), modifiers=modifier)
    assert (view.zoom() > zoom) is (notches > 0)
    # Half a view px at most from each step's rounding of the scroll position.
    assert apart_view_px(view, under, corner) <= 0.75 * abs(notches)


def test_zooming_there_and_back_comes_back(view: SheetView) -> None:
    zoom = view.zoom()
    for angle in (NOTCH, NOTCH, -NOTCH, -NOTCH):
        wheel(view, QPoint(300, 300), QPoint(0, angle))
    assert view.zoom() == pytest.approx(zoom)


def test_shift_and_wheel_pan_sideways(view: SheetView) -> None:
    before, zoom = place(view, 600.0, 450.0), view.zoom()
    wheel(view, QPoint(500, 400), QPoint(0, -NOTCH), modifiers=SHIFT)
    after = place(view, 600.0, 450.0)
    assert after.x() < before.x()
    assert after.y() == before.y()
    assert view.zoom() == zoom


def test_two_fingers_pan(view: SheetView) -> None:
    before, zoom = place(view, 600.0, 450.0), view.zoom()
    wheel(
        view,
        QPoint(500, 400),
        QPoint(80, -160),
        pixels=QPoint(17, -40),
        phase=Qt.ScrollPhase.ScrollUpdate,
    )
    assert place(view, 600.0, 450.0) - before == QPoint(17, -40)
    assert view.zoom() == zoom


def test_a_mouse_that_reports_pixels_still_zooms(view: SheetView) -> None:
    zoom = view.zoom()
    wheel(view, QPoint(500, 400), QPoint(0, NOTCH), pixels=QPoint(0, 15))
    assert view.zoom() > zoom


def test_the_zoom_is_told_and_has_limits(view: SheetView, qtbot: QtBot) -> None:
    with qtbot.waitSignal(view.zoom_changed) as told:
        view.zoom_by(2.0)
    assert told.args == [view.zoom()]
    view.zoom_by(1e6)
    assert view.zoom() == LARGEST_ZOOM
    view.zoom_by(1e-9)
    assert 0.0 < view.zoom() < 0.5
    view.zoom_actual()
    assert view.zoom() == 1.0


def test_a_fitted_sheet_stays_fitted_when_the_window_grows(view: SheetView) -> None:
    view.fit_sheet()
    view.resize(500, 700)
    for corner in ((0.0, 0.0), (1199.0, 899.0)):
        assert view.viewport().rect().contains(place(view, *corner))
    smaller = view.zoom()
    view.resize(900, 700)
    assert view.zoom() > smaller


def test_a_zoomed_sheet_keeps_its_zoom_when_the_window_grows(view: SheetView) -> None:
    view.resize(700, 600)
    assert view.zoom() == 1.0


def test_the_sheet_cannot_be_pushed_out_of_sight(view: SheetView) -> None:
    view.pan(1e5, 1e5)
    assert view.viewport().rect().contains(place(view, 0.0, 0.0))
    view.pan(-1e5, -1e5)
    assert view.viewport().rect().contains(place(view, 1199.0, 899.0))
