"""Paper speed and gain, each beside what it rests on."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QWidget

from app.reading import (
    USUAL_GAINS_MM_PER_MV,
    USUAL_SPEEDS_MM_PER_S,
    Calibration,
    Evidence,
    Setting,
)
from app.window.document import Document
from app.window.panels.steady_combo import SteadyCombo
from app.window.statements import evidence_statement

_AS_LIMB_LEADS = "as limb leads"


class SettingField(QWidget):
    """One setting: its value, what that rests on, and a button that confirms it."""

    def __init__(
        self,
        name: str,
        values: tuple[float, ...],
        unit: str,
        choose: Callable[[float | None], None],
        confirm: Callable[[], None],
        *,
        may_be_absent: bool = False,
    ) -> None:
        super().__init__()
        self._unit = unit
        self._choose = choose
        # What is chosen counts as confirmed, so nothing must be chosen in passing: a click opens
        # the list and leaves the keyboard with the sheet, whose legs the arrow keys move.
        self.combo = SteadyCombo()
        self.combo.setFocusPolicy(Qt.FocusPolicy.TabFocus)
        self.combo.setAccessibleName(name)
        if may_be_absent:
            self.combo.addItem(_AS_LIMB_LEADS, None)
        for value in values:
            self.combo.addItem(f"{value:g} {unit}", value)
        self.combo.activated.connect(self._chosen)
        self.evidence = QLabel()
        self.evidence.setObjectName("evidence")
        self.confirm = QPushButton("Confirm")
        self.confirm.setAccessibleName(f"Confirm {name.lower()}")
        self.confirm.setToolTip(f"Say that the {name.lower()} shown is that of this sheet")
        self.confirm.clicked.connect(confirm)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(6)
        label = QLabel(name)
        label.setBuddy(self.combo)
        for widget in (label, self.combo, self.evidence, self.confirm):
            layout.addWidget(widget)

    def show_nothing(self) -> None:
        """There is no sheet yet, and so no setting."""
        self.combo.setCurrentIndex(-1)
        self.confirm.setVisible(False)

    def show_setting(self, setting: Setting | None) -> None:
        """Display a setting; None: there is none of its own."""
        value = None if setting is None else setting.value
        index = self.combo.findData(value)
        if index < 0:
            self.combo.addItem(f"{value:g} {self._unit}", value)
            index = self.combo.count() - 1
        self.combo.setCurrentIndex(index)
        self.evidence.setText("" if setting is None else evidence_statement(setting))
        confirmed = setting is None or setting.confirmed
        self.evidence.setProperty("confirmed", confirmed)
        # A style sheet looks at a property only when it is told to.
        self.evidence.style().unpolish(self.evidence)
        self.evidence.style().polish(self.evidence)
        self.confirm.setVisible(not confirmed)

    def _chosen(self, index: int) -> None:
        self._choose(self.combo.itemData(index, Qt.ItemDataRole.UserRole))


class SettingsStrip(QFrame):
    """The strip with all calibration settings; choosing one by hand confirms it."""

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("settings")
        self._document = document
        self.speed = SettingField(
            "Paper speed", USUAL_SPEEDS_MM_PER_S, "mm/s", self._set_speed, self._confirm_speed
        )
        self.gain = SettingField(
            "Gain", USUAL_GAINS_MM_PER_MV, "mm/mV", self._set_gain, self._confirm_gain
        )
        self.chest_gain = SettingField(
            "Chest gain",
            USUAL_GAINS_MM_PER_MV,
            "mm/mV",
            self._set_chest_gain,
            self._confirm_chest_gain,
            may_be_absent=True,
        )
        layout = QHBoxLayout(self)
        layout.setContentsMargins(14, 5, 12, 5)
        layout.setSpacing(22)
        for field in (self.speed, self.gain, self.chest_gain):
            layout.addWidget(field)
        layout.addStretch(1)
        document.changed.connect(self._show)
        self._show()

    def _show(self) -> None:
        reading = self._document.reading
        self.setEnabled(reading is not None)
        if reading is None:
            for field in (self.speed, self.gain, self.chest_gain):
                field.show_nothing()
            return
        calibration = reading.calibration
        self.speed.show_setting(calibration.paper_speed_mm_per_s)
        self.gain.show_setting(calibration.gain_mm_per_mv)
        self.chest_gain.show_setting(calibration.chest_gain_mm_per_mv)

    def _set_speed(self, value: float | None) -> None:
        if value is not None:
            self._change("Paper speed", paper_speed_mm_per_s=_by_reader(value))

    def _set_gain(self, value: float | None) -> None:
        if value is not None:
            self._change("Gain", gain_mm_per_mv=_by_reader(value))

    def _set_chest_gain(self, value: float | None) -> None:
        setting = None if value is None else _by_reader(value)
        self._change("Chest gain", chest_gain_mm_per_mv=setting)

    def _confirm_speed(self) -> None:
        setting = self._calibration().paper_speed_mm_per_s
        self._change("Confirm paper speed", paper_speed_mm_per_s=_confirmed(setting))

    def _confirm_gain(self) -> None:
        setting = self._calibration().gain_mm_per_mv
        self._change("Confirm gain", gain_mm_per_mv=_confirmed(setting))

    def _confirm_chest_gain(self) -> None:
        setting = self._calibration().chest_gain_mm_per_mv
        if setting is not None:
            self._change("Confirm chest gain", chest_gain_mm_per_mv=_confirmed(setting))

    def _calibration(self) -> Calibration:
        reading = self._document.reading
        return Calibration() if reading is None else reading.calibration

    def _change(self, label: str, **settings: Setting | None) -> None:
        reading = self._document.reading
        if reading is None:
            return
        calibration = replace(reading.calibration, **settings)  # type: ignore[arg-type]
        self._document.edit(replace(reading, calibration=calibration), label)


def _by_reader(value: float) -> Setting:
    return Setting(value, Evidence.READER, confirmed=True)


def _confirmed(setting: Setting) -> Setting:
    """Confirmed; a default that a reader vouches for rests on the reader."""
    if setting.evidence is Evidence.DEFAULT:
        return replace(setting, evidence=Evidence.READER, confirmed=True)
    return replace(setting, confirmed=True)
