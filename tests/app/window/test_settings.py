"""Paper speed and gain: choosing confirms, and values follow."""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from app.reading import Evidence, Setting
from app.window.main_window import MainWindow
from app.window.panels.row_tree import Column
from app.window.panels.settings import SettingField
from tests.app.window.bench import cell, measure, reading_of


def choose(field: SettingField, value: float | None) -> None:
    """Choose a value in a combo as a hand does."""
    index = field.combo.findData(value)
    assert index >= 0
    field.combo.setCurrentIndex(index)
    field.combo.activated.emit(index)


def number(text: str) -> float:
    """The number in a value cell."""
    return float(text.split(" ", maxsplit=1)[0])


def test_a_speed_chosen_is_confirmed_and_values_follow(opened: MainWindow) -> None:
    measure(opened, "qrs", "II", 300.0, 340.0)
    at_25 = number(cell(opened, "qrs", "II", Column.VALUE))
    choose(opened.settings.speed, 50.0)
    opened.worksheet.refresh()
    setting = reading_of(opened).calibration.paper_speed_mm_per_s
    assert setting == Setting(50.0, Evidence.READER, confirmed=True)
    assert number(cell(opened, "qrs", "II", Column.VALUE)) == pytest.approx(at_25 / 2.0, abs=1.0)
    assert opened.settings.speed.evidence.text() == "confirmed by reader"
    assert not opened.settings.speed.confirm.isVisible()


def test_a_default_says_so_until_confirmed(opened: MainWindow) -> None:
    assert opened.settings.gain.evidence.text() == "default, not confirmed"
    opened.settings.gain.confirm.click()
    assert reading_of(opened).calibration.gain_mm_per_mv == Setting(
        10.0, Evidence.READER, confirmed=True
    )
    assert opened.document.undo_label() == "Confirm gain"


def test_chest_gain_may_be_given_and_taken_back(opened: MainWindow) -> None:
    choose(opened.settings.chest_gain, 5.0)
    assert reading_of(opened).calibration.gain_for("V2").value == 5.0
    assert reading_of(opened).calibration.gain_for("II").value == 10.0
    choose(opened.settings.chest_gain, None)
    assert reading_of(opened).calibration.chest_gain_mm_per_mv is None


def test_every_usual_speed_and_gain_is_offered(opened: MainWindow) -> None:
    speeds, gains = opened.settings.speed.combo, opened.settings.gain.combo
    offered = {speeds.itemText(index) for index in range(speeds.count())}
    assert offered == {"10 mm/s", "12.5 mm/s", "25 mm/s", "50 mm/s", "100 mm/s"}
    offered = {gains.itemText(index) for index in range(gains.count())}
    assert offered == {"2.5 mm/mV", "5 mm/mV", "10 mm/mV", "20 mm/mV", "40 mm/mV"}


def test_a_setting_is_not_changed_in_passing(opened: MainWindow) -> None:
    """Turning the wheel over the strip, or moving a leg with arrow keys after a click on it."""
    combo = opened.settings.speed.combo
    middle = QPointF(combo.rect().center())
    turn = QWheelEvent(
        middle,
        combo.mapToGlobal(middle),
        QPoint(),
        QPoint(0, -120),
        Qt.MouseButton.NoButton,
        Qt.KeyboardModifier.NoModifier,
        Qt.ScrollPhase.NoScrollPhase,
        False,
    )
    QApplication.sendEvent(combo, turn)
    assert reading_of(opened).calibration.paper_speed_mm_per_s == Setting(25.0)
    opened.view.setFocus()
    QTest.mouseClick(combo, Qt.MouseButton.LeftButton)
    combo.hidePopup()
    assert not combo.hasFocus()


def test_a_pulse_s_chest_gain_is_confirmed_as_it_is(opened: MainWindow) -> None:
    reading = reading_of(opened)
    by_pulse = replace(reading.calibration, chest_gain_mm_per_mv=Setting(5.0, Evidence.PULSE))
    opened.document.edit(replace(reading, calibration=by_pulse), "Pulse")
    assert opened.settings.chest_gain.evidence.text() == "pulse, not confirmed"
    opened.settings.chest_gain.confirm.click()
    setting = reading_of(opened).calibration.chest_gain_mm_per_mv
    assert setting == Setting(5.0, Evidence.PULSE, confirmed=True)


def test_undo_shows_the_setting_before(opened: MainWindow) -> None:
    choose(opened.settings.speed, 50.0)
    opened.document.undo()
    assert opened.settings.speed.combo.currentData() == 25.0
    assert opened.settings.speed.evidence.text() == "default, not confirmed"
    assert opened.settings.speed.confirm.isVisible()


def test_before_a_picture_no_setting_is_shown(window: MainWindow) -> None:
    assert window.settings.speed.combo.currentText() == ""
    assert window.settings.gain.combo.currentText() == ""
