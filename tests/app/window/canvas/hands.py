"""What a hand does on the canvas, and the small document it does it to."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QMouseEvent, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.reading import Caliper, CaliperKind, PicturePoint, Reading, new_reading
from app.window.canvas import SheetView
from app.window.document import Document
from imaging.picture import Picture
from imaging.sheet_map import SheetMap
from tests.app.reading_examples import example_map

LEFT, RIGHT, MIDDLE = (
    Qt.MouseButton.LeftButton,
    Qt.MouseButton.RightButton,
    Qt.MouseButton.MiddleButton,
)
NONE, SHIFT, CONTROL = (
    Qt.KeyboardModifier.NoModifier,
    Qt.KeyboardModifier.ShiftModifier,
    Qt.KeyboardModifier.ControlModifier,
)
SIZE_PX = (1200, 900)


def blank_picture(size_px: tuple[int, int] = SIZE_PX) -> Picture:
    """White paper."""
    pixels = np.full((size_px[1], size_px[0], 3), 255, dtype=np.uint8)
    return Picture(pixels, "blank.png", None, "00" * 32)


def reading_of(picture: Picture, *calipers: Caliper, sheet_map: SheetMap | None = None) -> Reading:
    """A reading with a grid of 8 px/mm (unless given) and calipers."""
    reading = new_reading(picture, now="2026-01-02T03:04:05+00:00", software_version="test")
    reading = replace(reading, sheet_map=sheet_map or example_map(picture.size_px))
    for caliper in calipers:
        reading = reading.with_caliper(caliper)
    return reading


def time_caliper(
    caliper_id: int = 1, start: tuple[float, float] = (400.0, 400.0), width_px: float = 160.0
) -> Caliper:
    """A QRS caliper, by default 20 small squares wide, at the middle of the picture."""
    return Caliper(
        caliper_id,
        CaliperKind.TIME,
        PicturePoint(*start),
        PicturePoint(start[0] + width_px, start[1]),
        "qrs",
        "II",
        caliper_id,
    )


def height_caliper(caliper_id: int = 2) -> Caliper:
    """An R height, 80 px up."""
    start, end = PicturePoint(700.0, 600.0), PicturePoint(716.0, 520.0)
    return Caliper(caliper_id, CaliperKind.HEIGHT, start, end, "r_height", "V5", 1)


def comb_caliper(caliper_id: int = 3) -> Caliper:
    """Five teeth, 60 px apart."""
    start, end = PicturePoint(200.0, 700.0), PicturePoint(440.0, 700.0)
    return Caliper(caliper_id, CaliperKind.COMB, start, end, teeth=5)


def caliper_of(document: Document, caliper_id: int = 1) -> Caliper:
    """The caliper as it now stands in the document."""
    assert document.reading is not None
    caliper = document.reading.caliper(caliper_id)
    assert caliper is not None
    return caliper


def place(view: SheetView, x_px: float, y_px: float) -> QPoint:
    """The view px that shows a picture point."""
    return view.view_px_from_picture_px(PicturePoint(x_px, y_px))


def hover(view: SheetView, point: QPoint) -> None:
    """Move to a point of the viewport.

    The event is sent and not the pointer moved: a window system takes its time to tell.
    """
    viewport = view.viewport()
    event = QMouseEvent(
        QEvent.Type.MouseMove,
        QPointF(point),
        QPointF(viewport.mapToGlobal(point)),
        Qt.MouseButton.NoButton,
        QApplication.mouseButtons(),
        NONE,
    )
    QApplication.sendEvent(viewport, event)


def click(view: SheetView, point: QPoint, button: Qt.MouseButton = LEFT) -> None:
    """Go there, press and release."""
    hover(view, point)
    QTest.mouseClick(view.viewport(), button, NONE, point)
    # Two clicks at different places are two clicks, however quickly a test makes them.
    QTest.qWait(0)


def press(
    view: SheetView,
    point: QPoint,
    button: Qt.MouseButton = LEFT,
    modifiers: Qt.KeyboardModifier = NONE,
) -> None:
    """Go there and press."""
    hover(view, point)
    QTest.mousePress(view.viewport(), button, modifiers, point)


def release(view: SheetView, point: QPoint, button: Qt.MouseButton = LEFT) -> None:
    """Let go."""
    QTest.mouseRelease(view.viewport(), button, NONE, point)


def drag(view: SheetView, start: QPoint, end: QPoint, button: Qt.MouseButton = LEFT) -> None:
    """Press, move in two steps, release."""
    press(view, start, button)
    hover(view, (start + end) / 2)
    hover(view, end)
    release(view, end, button)


def key(view: SheetView, which: Qt.Key, modifiers: Qt.KeyboardModifier = NONE) -> None:
    """Press and release a key."""
    QTest.keyClick(view, which, modifiers)


def wheel(
    view: SheetView,
    point: QPoint,
    angle: QPoint,
    *,
    pixels: QPoint | None = None,
    modifiers: Qt.KeyboardModifier = NONE,
    phase: Qt.ScrollPhase = Qt.ScrollPhase.NoScrollPhase,
) -> None:
    """Turn the wheel, or move two fingers."""
    event = QWheelEvent(
        QPointF(point),
        QPointF(view.viewport().mapToGlobal(point)),
        pixels or QPoint(),
        angle,
        Qt.MouseButton.NoButton,
        modifiers,
        phase,
        False,
    )
    QApplication.sendEvent(view.viewport(), event)
