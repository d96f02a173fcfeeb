"""A document and a view of it, shown."""

from __future__ import annotations

import pytest
from pytestqt.qtbot import QtBot

from app.window.canvas import SheetView
from app.window.document import Document
from tests.app.window.canvas.hands import (
    blank_picture,
    comb_caliper,
    height_caliper,
    reading_of,
    time_caliper,
)


@pytest.fixture
def document(qtbot: QtBot) -> Document:
    """A time caliper, a height caliper and a comb on white paper."""
    document = Document()
    picture = blank_picture()
    document.open(picture, reading_of(picture, time_caliper(), height_caliper(), comb_caliper()))
    return document


@pytest.fixture
def view(qtbot: QtBot, document: Document) -> SheetView:
    """The sheet at 1:1 in a window that shows nearly all of it."""
    view = SheetView(document)
    qtbot.addWidget(view)
    view.resize(1000, 800)
    with qtbot.waitExposed(view):
        view.show()
    view.zoom_actual()
    view.setFocus()
    return view
