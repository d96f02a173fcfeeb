"""What every gesture has: a start, moves, an end, and a way to leave all as it was."""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

from PySide6.QtCore import QPointF

from app.drawing.frame import SheetFrame
from app.reading import Caliper, CaliperKind, PicturePoint
from app.window.canvas.selection import Selection
from app.window.document import Document

CLICK_VIEW_PX = 3.0


@dataclass(frozen=True, slots=True)
class Pointer:
    """Where the pointer is.

    Attributes
    ----------
    view : QPointF
        In view px.
    picture : QPointF
        In picture_px; may lie off the picture.
    step_px : float
        From one screen pixel to the next, in picture_px: places between cannot be pointed at.
    """

    view: QPointF
    picture: QPointF
    step_px: float

    def distance_view_px(self, other: Pointer) -> float:
        """How far the pointer went between two events."""
        step = self.view - other.view
        return math.hypot(step.x(), step.y())


@dataclass(frozen=True, slots=True)
class Aim:
    """A place shown by a cross and magnified.

    Attributes
    ----------
    place : PicturePoint
    kind : CaliperKind or None
        Gives the cross a long arm the way a leg of that kind runs.
    crosshair : bool
        Whether the cross is drawn on the picture too, not in the loupe alone.
    """

    place: PicturePoint
    kind: CaliperKind | None
    crosshair: bool = True


class Host(Protocol):
    """What a gesture may ask of the view."""

    @property
    def document(self) -> Document:
        """Where edits go."""

    def frame(self) -> SheetFrame:
        """The grid of the present reading."""

    def show_preview(self, calipers: Sequence[Caliper], aim: Aim | None) -> None:
        """Draw calipers as they would be; nothing is written."""

    def show_box(self, corner: PicturePoint, opposite: PicturePoint) -> None:
        """Draw a box as it would be."""

    def clear_preview(self) -> None:
        """Draw the reading as it is."""

    def set_selection(self, selection: Selection) -> None:
        """Select calipers, or one leg."""

    def pan(self, dx: float, dy: float) -> None:
        """Move the picture by view px."""


class Gesture(ABC):
    """Something a hand does between pressing and releasing."""

    def __init__(self, host: Host) -> None:
        self._host = host

    @abstractmethod
    def start(self, pointer: Pointer) -> None:
        """A button went down."""

    @abstractmethod
    def move(self, pointer: Pointer) -> None:
        """The pointer moved."""

    @abstractmethod
    def end(self, pointer: Pointer) -> None:
        """The button came up: the one moment something is written."""

    def cancel(self) -> None:
        """Leave everything as it was."""
        self._host.clear_preview()
