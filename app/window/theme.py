"""How the window looks: light whatever the system says, since paper is light."""

from __future__ import annotations

from PySide6.QtGui import QColor, QGuiApplication, QPalette
from PySide6.QtWidgets import QApplication

INK = "#16242c"
QUIET_INK = "#4a5a63"
PAPER = "#ffffff"
DESK = "#eef1f2"
EDGE = "#c3ccd1"
EDGE_INK = "#8a979e"
ACCENT = "#0d5a6c"
ACCENT_WASH = "#d9eaee"
OFFER_WASH = "#e6f3d8"
OFFER_INK = "#2f6310"
WARN_INK = "#7a3f00"
WARN_WASH = "#fff1d2"
WARN_EDGE = "#d79b32"
STOP_INK = "#8c1620"
STOP_WASH = "#fbe6e6"
STOP_EDGE = "#cc5a62"

_COLOURS = {
    QPalette.ColorRole.Window: DESK,
    QPalette.ColorRole.WindowText: INK,
    QPalette.ColorRole.Base: PAPER,
    QPalette.ColorRole.AlternateBase: "#f7f9fa",
    QPalette.ColorRole.Text: INK,
    QPalette.ColorRole.Button: "#e4e9eb",
    QPalette.ColorRole.ButtonText: INK,
    QPalette.ColorRole.Highlight: ACCENT,
    QPalette.ColorRole.HighlightedText: PAPER,
    QPalette.ColorRole.ToolTipBase: PAPER,
    QPalette.ColorRole.ToolTipText: INK,
    QPalette.ColorRole.PlaceholderText: QUIET_INK,
    QPalette.ColorRole.Link: ACCENT,
}

_SHEET = f"""
QToolTip {{ background: {PAPER}; color: {INK}; border: 1px solid {EDGE}; padding: 3px; }}
#prompt {{ background: {PAPER}; border-bottom: 1px solid {EDGE}; }}
#promptText {{ color: {ACCENT}; font-weight: 600; }}
#hint {{ color: {WARN_INK}; font-size: 9pt; }}
#settings {{ background: {DESK}; border-bottom: 1px solid {EDGE}; }}
#notice[kind="warn"] {{ background: {WARN_WASH}; border-bottom: 1px solid {WARN_EDGE}; }}
#notice[kind="stop"] {{ background: {STOP_WASH}; border-bottom: 1px solid {STOP_EDGE}; }}
#notice[kind="tell"] {{ background: {ACCENT_WASH}; border-bottom: 1px solid {EDGE}; }}
#notice[kind="warn"] QLabel {{ color: {WARN_INK}; }}
#notice[kind="stop"] QLabel {{ color: {STOP_INK}; }}
#evidence[confirmed="false"] {{ color: {WARN_INK}; }}
#evidence[confirmed="true"] {{ color: {QUIET_INK}; }}
#fold {{ border: none; background: transparent; }}
#fold:focus {{ border: 1px solid {EDGE_INK}; }}
#quiet {{ color: {QUIET_INK}; }}
#detailTitle {{ font-weight: 600; font-size: 12pt; }}
QTreeView {{ border: 1px solid {EDGE}; }}
QHeaderView::section {{ background: {DESK}; color: {QUIET_INK}; border: none;
    border-bottom: 1px solid {EDGE}; padding: 3px 4px; }}
QPushButton[leading="true"] {{ font-weight: 600; padding: 5px 10px; }}
QDialogButtonBox {{ dialogbuttonbox-buttons-have-icons: 0; }}
QStatusBar::item {{ border: none; }}
"""


def apply_theme(app: QApplication) -> None:
    """Give the application its palette and style sheet; the font stays the system's."""
    app.setStyle("Fusion")
    palette = QPalette()
    for role, colour in _COLOURS.items():
        palette.setColor(role, QColor(colour))
    for role in (QPalette.ColorRole.Text, QPalette.ColorRole.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, role, QColor("#8b979d"))
    palette.setColor(QPalette.ColorGroup.Disabled, QPalette.ColorRole.WindowText, QColor("#8b979d"))
    app.setPalette(palette)
    app.setStyleSheet(_SHEET)
    QGuiApplication.setApplicationDisplayName("Smallsquare")
