"""How many large squares the reader's box spans."""

from __future__ import annotations

from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QDoubleSpinBox,
    QFormLayout,
    QLabel,
    QVBoxLayout,
    QWidget,
)

_MOST_SQUARES = 80.0  # 400 mm; no sheet is wider than that


class ScaleDialog(QDialog):
    """Two counts of large squares (5 mm each).

    Both begin empty: a count that nobody made must not become a scale.
    """

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Give the scale by hand")
        words = QLabel(
            "How many large squares (five small ones each) does your box span? "
            "The larger the box, the smaller the error of every value."
        )
        words.setWordWrap(True)
        self.across = self._count("Large squares across")
        self.down = self._count("Large squares down")
        form = QFormLayout()
        form.addRow("Large squares &across", self.across)
        form.addRow("Large squares &down", self.down)
        buttons = QDialogButtonBox(
            QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel
        )
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        self.ok = buttons.button(QDialogButtonBox.StandardButton.Ok)
        layout = QVBoxLayout(self)
        layout.addWidget(words)
        layout.addLayout(form)
        layout.addWidget(buttons)
        self.setMinimumWidth(380)
        for count in (self.across, self.down):
            count.valueChanged.connect(self._follow)
        self._follow()

    def ask(self) -> tuple[float, float] | None:
        """Show, wait, and give the two counts, or None."""
        if self.exec() != QDialog.DialogCode.Accepted:
            return None
        return self.across.value(), self.down.value()

    def _follow(self) -> None:
        self.ok.setEnabled(min(self.across.value(), self.down.value()) >= 1.0)

    @staticmethod
    def _count(name: str) -> QDoubleSpinBox:
        box = QDoubleSpinBox()
        box.setAccessibleName(name)
        box.setRange(0.0, _MOST_SQUARES)
        box.setDecimals(1)
        # What is shown in the place of 0: nothing has been counted yet.
        box.setSpecialValueText(" ")
        return box
