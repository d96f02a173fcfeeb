"""Notices above the canvas: they stay until dealt with and never stop the work."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

Answer = tuple[str, Callable[[], None]]


class Notice(QFrame):
    """One sentence with its buttons."""

    def __init__(self, kind: str, text: str, answers: Sequence[Answer]) -> None:
        super().__init__()
        self.setObjectName("notice")
        self.setProperty("kind", kind)
        self.label = QLabel(text)
        self.label.setWordWrap(True)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(12, 5, 12, 5)
        layout.addWidget(self.label, 1)
        self.buttons: list[QPushButton] = []
        for words, slot in answers:
            button = QPushButton(words)
            button.clicked.connect(slot)
            layout.addWidget(button)
            self.buttons.append(button)


class Notices(QWidget):
    """A stack of notices, one for each subject."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._layout = QVBoxLayout(self)
        self._layout.setContentsMargins(0, 0, 0, 0)
        self._layout.setSpacing(0)
        self._notices: dict[str, tuple[Notice, tuple[str, ...]]] = {}

    def put(
        self,
        subject: str,
        kind: str,
        text: str,
        answers: Sequence[Answer] = (),
        *,
        closable: bool = False,
    ) -> None:
        """Show a notice in the place of the one on the same subject.

        `kind` is "tell", "warn" or "stop".
        """
        if closable:
            answers = [*answers, ("Close", lambda: self.take_away(subject))]
        content = (kind, text, *(words for words, _ in answers))
        if subject in self._notices and self._notices[subject][1] == content:
            return
        self.take_away(subject)
        notice = Notice(kind, text, answers)
        self._notices[subject] = notice, content
        self._layout.addWidget(notice)

    def take_away(self, subject: str) -> None:
        """Remove the notice on a subject, if there is one."""
        entry = self._notices.pop(subject, None)
        if entry is not None:
            self._layout.removeWidget(entry[0])
            entry[0].hide()
            entry[0].deleteLater()

    def notice(self, subject: str) -> Notice | None:
        """The notice on a subject, or None."""
        entry = self._notices.get(subject)
        return None if entry is None else entry[0]
