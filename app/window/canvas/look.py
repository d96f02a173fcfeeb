"""Colours, pens and fonts of what is drawn over the picture.

Every line has a pale rim, so that it stands out from pink, green and grey paper and from the
pen line alike; what is selected differs in width and handles too, not in colour alone.
"""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QPen

DESK = QColor("#d5dbde")
TEAL = QColor("#0b5563")
ORANGE = QColor("#b8430b")
# Opaque where many lines are drawn: Qt blends a translucent line some twenty times slower.
RIM = QColor("#f4faf9")
PLATE = QColor(250, 253, 253, 238)
PLATE_EDGE = QColor("#7fa6ad")
ON_ORANGE = QColor("#ffffff")
GRID_BOLD = QColor("#4a68c8")
GRID_THIN = QColor(20, 60, 190, 90)

LABEL_PX = 12
LABEL_PADDING_X_PX = 6
LABEL_PADDING_Y_PX = 2
HANDLE_RADIUS_PX = 4.0
TICK_PX = 4.0


def _pen(colour: QColor, width: float) -> QPen:
    pen = QPen(colour, width)
    pen.setCosmetic(True)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    return pen


@dataclass(frozen=True, slots=True)
class LineLook:
    """A pen and the wider pale one under it."""

    rim: QPen
    pen: QPen


PLAIN = LineLook(_pen(RIM, 2.8), _pen(TEAL, 1.3))
CHOSEN = LineLook(_pen(RIM, 3.2), _pen(ORANGE, 1.6))
HELD = LineLook(_pen(RIM, 4.4), _pen(ORANGE, 2.8))
AIM = LineLook(_pen(RIM, 2.4), _pen(ORANGE, 1.0))
GRID_BOLD_PEN = _pen(GRID_BOLD, 1.0)
GRID_THIN_PEN = _pen(GRID_THIN, 1.0)


def box_pen() -> QPen:
    """The dashed outline of a box being drawn."""
    pen = _pen(ORANGE, 1.6)
    pen.setStyle(Qt.PenStyle.DashLine)
    return pen


def label_font(*, strong: bool = False) -> QFont:
    """The system's own font at a size that does not change with the zoom."""
    font = QFont()
    font.setPixelSize(LABEL_PX)
    if strong:
        font.setWeight(QFont.Weight.DemiBold)
    return font
