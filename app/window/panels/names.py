"""Who reads and whose figures are compared; kept in the reading only."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QWidget

from app.window.document import Document


class Names(QWidget):
    """Two name fields."""

    def __init__(self, document: Document, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._document = document
        self.reader = QLineEdit()
        self.reader.setPlaceholderText("your name")
        self.reader.setToolTip("Kept in the reading and on the annotated picture, nowhere else")
        self.colleague = QLineEdit()
        self.colleague.setPlaceholderText("whose figures, if any")
        self.colleague.setToolTip("Whose hand figures stand in the Colleague column")
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        for words, field in (("&Reader", self.reader), ("&Colleague", self.colleague)):
            label = QLabel(words)
            label.setBuddy(field)
            row.addWidget(label)
            row.addWidget(field, 1)
        self.reader.editingFinished.connect(self.commit)
        self.colleague.editingFinished.connect(self.commit)
        document.changed.connect(self._show)
        self._show()

    def commit(self) -> None:
        """Put what was typed into the reading."""
        reading = self._document.reading
        if reading is None:
            return
        named = replace(
            reading,
            reader=self.reader.text().strip(),
            colleague=self.colleague.text().strip(),
        )
        self._document.edit(named, "Name")

    def _show(self) -> None:
        reading = self._document.reading
        self.setEnabled(reading is not None)
        for field, name in (
            (self.reader, reading.reader if reading else ""),
            (self.colleague, reading.colleague if reading else ""),
        ):
            # What is being typed stays as it is, so that another edit does not take it away.
            if not (field.hasFocus() and field.isModified()) and field.text().strip() != name:
                field.setText(name)
