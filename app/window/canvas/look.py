"""Colours, pens and fonts of what is drawn over the picture.

Bars have a pale rim and stand out from pink, green and grey paper; legs and the cross have
none, because it would hide the very line they are held against. What is selected differs in
width and handles too, not in colour alone.

All that comes in numbers is opaque: Qt blends translucent lines some twenty times slower.
"""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtGui import QColor, QFont, QPen

DESK = QColor("#d5dbde")
TEAL = QColor("#0b5563")
ORANGE = QColor("#b8430b")
RIM = QColor("#f4faf9")
PLATE = QColor(250, 253, 253, 238)
PLATE_EDGE = QColor("#7fa6ad")
ON_ORANGE = QColor("#ffffff")
GRID_BOLD = QColor("#3156c4")
GRID_THIN = QColor("#6f8bdc")

LABEL_PX = 12
LABEL_PADDING_X_PX = 6
LABEL_PADDING_Y_PX = 2
HANDLE_RADIUS_PX = 5.0
TICK_PX = 4.0


def _pen(colour: QColor, width: float) -> QPen:
    pen = QPen(colour, width)
    pen.setCosmetic(True)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    return pen


def _dashed(pen: QPen, *lengths: float) -> QPen:
    """Ink and gaps, in view px."""
    pen.setDashPattern([length / pen.widthF() for length in lengths])
    return pen


@dataclass(frozen=True, slots=True)
class LineLook:
    """A pen and the wider pale one under its bars."""

    rim: QPen
    pen: QPen


PLAIN = LineLook(_pen(RIM, 3.2), _pen(TEAL, 1.3))
CHOSEN = LineLook(_pen(RIM, 3.6), _pen(ORANGE, 1.6))
HELD_PEN = _pen(ORANGE, 2.8)
AIM_PEN = _pen(ORANGE, 1.0)
# Dashed, so that the printed line shows in the gaps wherever the fit is good.
GRID_BOLD_PEN = _dashed(_pen(GRID_BOLD, 1.0), 3.0, 3.0)
GRID_THIN_PEN = _dashed(_pen(GRID_THIN, 1.0), 1.0, 3.0)


def box_pen() -> QPen:
    """The dashed outline of a box being drawn."""
    return _dashed(_pen(ORANGE, 1.6), 6.0, 4.0)


def label_font(*, strong: bool = False) -> QFont:
    """The system's own font at a size that does not change with the zoom."""
    font = QFont()
    font.setPixelSize(LABEL_PX)
    if strong:
        font.setWeight(QFont.Weight.DemiBold)
    return font
