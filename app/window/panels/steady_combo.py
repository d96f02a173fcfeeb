"""A list to choose from that the wheel does not change."""

from __future__ import annotations

from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QComboBox


class SteadyCombo(QComboBox):
    """Changed by choosing only: a wheel turned over it is meant for the sheet or the rows."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave it to whatever lies below."""
        event.ignore()
