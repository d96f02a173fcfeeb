"""What to do now, in large plain words, and what the program is busy with."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QFontMetrics, QResizeEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QProgressBar,
    QPushButton,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

_TYPE_SIZES_PT = (14.0, 13.0, 12.0, 11.0, 10.0)


class FittingLabel(QLabel):
    """One line in the largest type that fits; what does not fit even so is cut and tipped."""

    def __init__(self) -> None:
        super().__init__()
        self._words = ""
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)

    def set_words(self, words: str) -> None:
        """What to say."""
        self._words = words
        self.setAccessibleName(words)
        self._fit()

    def words(self) -> str:
        """What is said, uncut."""
        return self._words

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._fit()

    def _fit(self) -> None:
        font = self.font()
        for size_pt in _TYPE_SIZES_PT:
            font.setPointSizeF(size_pt)
            if QFontMetrics(font).horizontalAdvance(self._words) <= self.width():
                break
        self.setFont(font)
        cut = QFontMetrics(font).elidedText(
            self._words, Qt.TextElideMode.ElideRight, max(self.width(), 1)
        )
        self.setText(cut)
        self.setToolTip(self._words if cut != self._words else "")


class Prompt(QFrame):
    """The line above the canvas.

    Signals
    -------
    cancel_wanted()
        The reader does not want to wait for the present work.
    """

    cancel_wanted = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("prompt")
        self._idle = ""
        self._gesture = ""
        self.text = FittingLabel()
        self.text.setObjectName("promptText")
        self.busy = QLabel()
        self.bar = QProgressBar()
        self.bar.setRange(0, 0)
        self.bar.setFixedWidth(110)
        self.bar.setTextVisible(False)
        self.cancel = QPushButton("Cancel")
        self.cancel.clicked.connect(self.cancel_wanted)
        self.hint = QLabel()
        self.hint.setObjectName("hint")
        self.hint.setVisible(False)
        words = QVBoxLayout()
        words.setSpacing(0)
        words.addWidget(self.text)
        words.addWidget(self.hint)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(14, 2, 12, 2)
        layout.addLayout(words, 1)
        for widget in (self.busy, self.bar, self.cancel):
            layout.addWidget(widget)
        # Of one height whatever it says: the canvas must not move under a hand that aims.
        self.setFixedHeight(46)
        self.set_busy("", can_be_given_up=False)

    def set_idle(self, words: str) -> None:
        """What to say while no gesture is going on."""
        self._idle = words
        self._show()

    def set_gesture(self, words: str) -> None:
        """What a gesture on the canvas asks for; empty when it has ended."""
        self._gesture = words
        self._show()

    def set_hint(self, words: str) -> None:
        """A quieter line below; empty for none."""
        self.hint.setText(words)
        self.hint.setVisible(bool(words))

    def set_busy(self, title: str, *, can_be_given_up: bool) -> None:
        """Show what is being worked on; an empty title hides bar and button."""
        self.busy.setText(title)
        for widget in (self.busy, self.bar):
            widget.setVisible(bool(title))
        self.cancel.setVisible(can_be_given_up)

    def _show(self) -> None:
        self.text.set_words(self._gesture or self._idle)
