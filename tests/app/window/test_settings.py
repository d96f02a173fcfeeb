"""Paper speed and gain: choosing confirms, and values follow."""

from __future__ import annotations

import pytest

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


def test_undo_shows_the_setting_before(opened: MainWindow) -> None:
    choose(opened.settings.speed, 50.0)
    opened.document.undo()
    assert opened.settings.speed.combo.currentData() == 25.0
    assert opened.settings.speed.evidence.text() == "default, not confirmed"
    assert opened.settings.speed.confirm.isVisible()


def test_before_a_picture_no_setting_is_shown(window: MainWindow) -> None:
    assert window.settings.speed.combo.currentText() == ""
    assert window.settings.gain.combo.currentText() == ""
