"""Is the picture beside a reading still the one that was read?"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

from app.reading.model import PictureIdentity


class PictureState(StrEnum):
    """What became of a reading's picture."""

    SAME = "same"
    CHANGED = "changed"
    MISSING = "missing"


@dataclass(frozen=True, slots=True)
class PictureCheck:
    """Where a reading's picture was looked for, and what was there.

    Attributes
    ----------
    state : PictureState
    path : Path
        The picture (same, changed), or where it was looked for last (missing).
    sentence : str
        One sentence for the reader; empty when the picture is the same.
    """

    state: PictureState
    path: Path
    sentence: str


def check_picture(identity: PictureIdentity, reading_path: Path) -> PictureCheck:
    """Look for the picture beside the reading file and where it lay when that was saved."""
    beside = reading_path.parent / identity.file_name
    places = [beside]
    if identity.relative_path is not None:
        places.insert(0, reading_path.parent / identity.relative_path)
    changed: Path | None = None
    for place in places:
        try:
            digest = _sha256(place)
        except OSError:
            continue
        if digest == identity.sha256:
            return PictureCheck(PictureState.SAME, place, "")
        changed = changed or place
    if changed is not None:
        sentence = (
            f"The picture {identity.file_name} is not the one that was read: "
            "its content has changed since."
        )
        return PictureCheck(PictureState.CHANGED, changed, sentence)
    sentence = f"The picture {identity.file_name} is no longer where it was when it was read."
    return PictureCheck(PictureState.MISSING, beside, sentence)


def _sha256(path: Path) -> str:
    if not path.is_file():
        raise FileNotFoundError(path)
    with path.open("rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()
