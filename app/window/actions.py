"""The one table of actions: everything the menus and keys can do, as rows of data."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QMenuBar

from app.reading.marks import CaliperKind

if TYPE_CHECKING:
    from app.window.main_window import MainWindow


@dataclass(frozen=True, slots=True)
class Situation:
    """What decides which actions make sense now."""

    has_picture: bool = False
    has_map: bool = False
    has_selection: bool = False
    has_line: bool = False
    has_next_line: bool = False
    can_undo: bool = False
    can_redo: bool = False
    is_busy: bool = False


def always(_now: Situation) -> bool:
    """An action that always makes sense."""
    return True


def picture(now: Situation) -> bool:
    """An action on the picture or its reading."""
    return now.has_picture


def measured(now: Situation) -> bool:
    """An action that needs the grid."""
    return now.has_map


@dataclass(frozen=True, slots=True)
class ActionRow:
    """One action.

    Attributes
    ----------
    name : str
        Stable name.
    menu : str
        Menu it stands in; a row with an empty `text` is a separator there.
    text : str
        As shown, with the mnemonic.
    keys : str
        Shortcut, portable text; empty for none.
    slot : callable
        Takes the window; a checkable action's takes the new state too.
    enabled_when : callable
        Takes the Situation.
    checked : bool or None
        First state of a checkable action; None for a plain one.
    """

    name: str
    menu: str
    text: str = ""
    keys: str = ""
    slot: Callable[[MainWindow], None] | None = None
    enabled_when: Callable[[Situation], bool] = always
    toggle: Callable[[MainWindow, bool], None] | None = None
    checked: bool | None = None


FILE, EDIT, VIEW, MEASURE, HELP = "&File", "&Edit", "&View", "&Measure", "&Help"

ACTIONS: tuple[ActionRow, ...] = (
    ActionRow("open", FILE, "&Open picture or reading…", "Ctrl+O", lambda w: w.opening.choose()),
    ActionRow("paste", FILE, "&Paste picture", "Ctrl+V", lambda w: w.paste()),
    ActionRow("file_1", FILE),
    ActionRow("save", FILE, "&Save reading", "Ctrl+S", lambda w: w.save(), picture),
    ActionRow("save_as", FILE, "Save reading &as…", "Ctrl+Shift+S", lambda w: w.save_as(), picture),
    ActionRow("file_2", FILE),
    ActionRow(
        "save_annotated",
        FILE,
        "Save a&nnotated picture…",
        "Ctrl+E",
        lambda w: w.saving.save_annotated(),
        lambda now: now.has_picture and not now.is_busy,
    ),
    ActionRow(
        "save_json",
        FILE,
        "Save values as &JSON…",
        "",
        lambda w: w.saving.save_values_json(),
        picture,
    ),
    ActionRow(
        "save_csv", FILE, "Save values as &CSV…", "", lambda w: w.saving.save_values_csv(), picture
    ),
    ActionRow("file_3", FILE),
    ActionRow("quit", FILE, "&Quit", "Ctrl+Q", lambda w: w.quit()),
    ActionRow(
        "undo", EDIT, "&Undo", "Ctrl+Z", lambda w: w.document.undo(), lambda now: now.can_undo
    ),
    ActionRow(
        "redo",
        EDIT,
        "&Redo",
        "Ctrl+Shift+Z",
        lambda w: w.document.redo(),
        lambda now: now.can_redo,
    ),
    ActionRow("edit_1", EDIT),
    ActionRow(
        "delete",
        EDIT,
        "&Delete caliper",
        "Del",
        lambda w: w.view.delete_selected(),
        lambda now: now.has_selection,
    ),
    ActionRow(
        "select_all", EDIT, "Select &all calipers", "Ctrl+A", lambda w: w.view.select_all(), picture
    ),
    ActionRow("fit", VIEW, "&Fit sheet", "F", lambda w: w.view.fit_sheet(), picture),
    ActionRow("actual", VIEW, "&Actual size (1:1)", "1", lambda w: w.zoom_actual(), picture),
    ActionRow("zoom_in", VIEW, "Zoom &in", "Ctrl++", lambda w: w.view.zoom_by(1.25), picture),
    ActionRow("zoom_out", VIEW, "Zoom &out", "Ctrl+-", lambda w: w.view.zoom_by(0.8), picture),
    ActionRow("view_1", VIEW),
    ActionRow(
        "grid",
        VIEW,
        "&Grid overlay",
        "G",
        enabled_when=measured,
        toggle=lambda w, on: w.view.set_grid_visible(on),
        checked=False,
    ),
    ActionRow(
        "loupe",
        VIEW,
        "&Loupe",
        "L",
        enabled_when=picture,
        toggle=lambda w, on: w.view.set_loupe_visible(on),
        checked=True,
    ),
    ActionRow("view_2", VIEW),
    ActionRow(
        "turn_right",
        VIEW,
        "Turn sheet &clockwise",
        "Ctrl+R",
        lambda w: w.turn_sheet(1),
        measured,
    ),
    ActionRow(
        "turn_left",
        VIEW,
        "Turn sheet &anticlockwise",
        "Ctrl+Shift+R",
        lambda w: w.turn_sheet(-1),
        measured,
    ),
    ActionRow(
        "another",
        MEASURE,
        "Another &beat",
        "B",
        lambda w: w.walk.another_beat(),
        lambda now: now.has_map and now.has_line,
    ),
    ActionRow(
        "next",
        MEASURE,
        "&Next line",
        "N",
        lambda w: w.walk.next_line(),
        lambda now: now.has_next_line,
    ),
    ActionRow("measure_1", MEASURE),
    ActionRow(
        "time",
        MEASURE,
        "&Time caliper",
        "T",
        lambda w: w.walk.begin_free(CaliperKind.TIME),
        measured,
    ),
    ActionRow(
        "height",
        MEASURE,
        "&Height caliper",
        "H",
        lambda w: w.walk.begin_free(CaliperKind.HEIGHT),
        measured,
    ),
    ActionRow(
        "comb",
        MEASURE,
        "Beat &comb",
        "C",
        lambda w: w.walk.begin_free(CaliperKind.COMB),
        measured,
    ),
    ActionRow("measure_2", MEASURE),
    ActionRow(
        "scale", MEASURE, "Give the &scale by hand…", "", lambda w: w.grid.begin_box(), picture
    ),
    ActionRow(
        "find_grid", MEASURE, "&Find the grid again", "", lambda w: w.opening.find_grid(), picture
    ),
    ActionRow("keys", HELP, "&Keys", "F1", lambda w: w.show_keys()),
    ActionRow("details", HELP, "&Copy technical details", "", lambda w: w.copy_details()),
    ActionRow("about", HELP, "&About Smallsquare", "", lambda w: w.show_about()),
)


class Actions:
    """The table as QActions in the menus of a window."""

    def __init__(self, window: MainWindow, bar: QMenuBar) -> None:
        self._by_name: dict[str, QAction] = {}
        self.menus: dict[str, QMenu] = {}
        for row in ACTIONS:
            if row.menu not in self.menus:
                self.menus[row.menu] = bar.addMenu(row.menu)
            menu = self.menus[row.menu]
            if row.text:
                self._by_name[row.name] = _action(window, row)
                menu.addAction(self._by_name[row.name])
            else:
                menu.addSeparator()

    def action(self, name: str) -> QAction:
        """The action of a row."""
        return self._by_name[name]

    def follow(self, now: Situation) -> None:
        """Switch every action on or off."""
        for row in ACTIONS:
            if row.text:
                self._by_name[row.name].setEnabled(row.enabled_when(now))


def _action(window: MainWindow, row: ActionRow) -> QAction:
    action = QAction(row.text, window)
    action.setObjectName(row.name)
    if row.keys:
        action.setShortcut(QKeySequence(row.keys))
    if row.name == "quit":
        action.setMenuRole(QAction.MenuRole.QuitRole)
    slot, toggle = row.slot, row.toggle
    if toggle is not None:
        action.setCheckable(True)
        action.setChecked(bool(row.checked))
        action.toggled.connect(lambda on: toggle(window, on))
    elif slot is not None:
        action.triggered.connect(lambda: slot(window))
    return action


def keys_list() -> list[tuple[str, str]]:
    """Every key with what it does, in menu order."""
    return [
        (
            QKeySequence(row.keys).toString(QKeySequence.SequenceFormat.NativeText),
            row.text.replace("&", "").rstrip("…"),
        )
        for row in ACTIONS
        if row.keys
    ]
