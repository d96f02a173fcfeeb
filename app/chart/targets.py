"""Where something may be written: never on the picture, never on a reading, never unasked."""

from __future__ import annotations

import hashlib
import os
from pathlib import Path

from app.chart.errors import FileExistsRefused, TargetRefused
from app.reading.file_format import FILE_KIND, SUFFIX
from app.reading.model import PictureIdentity

_HEAD_BYTES = 200


def check_target(
    path: Path,
    picture: PictureIdentity,
    *,
    ending: str,
    overwrite: bool = False,
    picture_path: Path | None = None,
) -> None:
    """Say nothing where `path` may be written.

    Parameters
    ----------
    path : Path
    picture : PictureIdentity
        The picture that was read; told by its content wherever it lies and whatever it is called.
    ending : str
        What the name must end in, upper case or lower.
    overwrite : bool
        Whether a file that is there may be replaced; the picture and readings never are.
    picture_path : Path or None
        Where the picture was opened from, to know it even if its content has changed since.

    Raises
    ------
    TargetRefused
        For the picture itself, a reading file, or a name of another kind.
    FileExistsRefused
        If something is there and `overwrite` is false.
    """
    if path.name.lower().endswith(SUFFIX) or _is_reading(path):
        raise TargetRefused(f"{path.name} is a reading file's name or place: choose another name.")
    if (picture_path is not None and _same_file(path, picture_path)) or _has_hash(path, picture):
        raise TargetRefused(
            f"{path.name} is the picture itself, which is never written to: choose another name."
        )
    if not path.name.lower().endswith(ending):
        raise TargetRefused(
            f"This is written under a name that ends in {ending}: {path.name} does not."
        )
    # A link that leads nowhere is something that is there, too.
    if not overwrite and os.path.lexists(path):
        raise FileExistsRefused(
            f"{path.name} is there already and was left as it is: choose another name."
        )


def _same_file(path: Path, other: Path) -> bool:
    try:
        return path.resolve() == other.resolve() or path.samefile(other)
    except (OSError, RuntimeError):
        # Nothing there, or a link that leads in a circle.
        return False


def _is_reading(path: Path) -> bool:
    try:
        if not path.is_file():
            return False
        with path.open("rb") as file:
            return FILE_KIND.encode() in file.read(_HEAD_BYTES)
    except OSError:
        return False


def _has_hash(path: Path, picture: PictureIdentity) -> bool:
    try:
        if not path.is_file():
            return False
        with path.open("rb") as file:
            return hashlib.file_digest(file, "sha256").hexdigest() == picture.sha256
    except OSError:
        return False
