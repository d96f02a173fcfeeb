"""The reading: what a reader marked on one picture, and what it rests on. No Qt."""

from app.reading.calibration import (
    USUAL_GAINS_MM_PER_MV,
    USUAL_SPEEDS_MM_PER_S,
    Calibration,
    Evidence,
    Setting,
)
from app.reading.file_format import ReadingFileError, load_reading, save_reading
from app.reading.history import History
from app.reading.marks import Caliper, CaliperKind, PicturePoint
from app.reading.model import HandFigure, PictureIdentity, Reading, new_reading
from app.reading.picture_check import PictureCheck, PictureState, check_picture
from app.reading.quantities import LEADS, QUANTITIES, Quantity, quantity

__all__ = [
    "LEADS",
    "QUANTITIES",
    "USUAL_GAINS_MM_PER_MV",
    "USUAL_SPEEDS_MM_PER_S",
    "Calibration",
    "Caliper",
    "CaliperKind",
    "Evidence",
    "HandFigure",
    "History",
    "PictureCheck",
    "PictureIdentity",
    "PicturePoint",
    "PictureState",
    "Quantity",
    "Reading",
    "ReadingFileError",
    "Setting",
    "check_picture",
    "load_reading",
    "new_reading",
    "quantity",
    "save_reading",
]
