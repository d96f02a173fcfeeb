"""`NAME.reading.json`: written whole or not at all, and read with suspicion."""

from __future__ import annotations

import json
import logging
import os
import tempfile
from contextlib import suppress
from dataclasses import replace
from pathlib import Path

from app.reading.codec import DamagedError, reading_from_json, reading_to_json
from app.reading.model import Reading
from imaging.errors import SmallsquareError

FILE_KIND = "smallsquare reading"
SCHEMA_VERSION = 1
SUFFIX = ".reading.json"
# Only POSIX lets a folder be opened; elsewhere the rename is as safe as it gets.
_CAN_SYNC_FOLDERS = os.name == "posix"
LARGEST_FILE_BYTES = 64 * 1024 * 1024

_log = logging.getLogger(__name__)


class ReadingFileError(SmallsquareError):
    """A reading file that cannot be used or written."""


def save_reading(reading: Reading, path: Path, picture_path: Path | None = None) -> None:
    """Write a reading as a whole: temporary file beside it, fsync, rename.

    Parameters
    ----------
    reading : Reading
    path : Path
        Must end in ``.reading.json``, so that no picture can be overwritten.
    picture_path : Path or None
        Where the picture is; its way from `path` is noted as a hint for finding it again.

    Raises
    ------
    ReadingFileError
        With one sentence, the old file untouched.
    """
    if not path.name.endswith(SUFFIX):
        raise ReadingFileError(f"A reading must be saved under a name that ends in {SUFFIX}.")
    if picture_path is not None:
        hint = _relative(picture_path, path.parent)
        reading = replace(reading, picture=replace(reading.picture, relative_path=hint))
    body = {"kind": FILE_KIND, "schema_version": SCHEMA_VERSION, **reading_to_json(reading)}
    text = json.dumps(body, ensure_ascii=False, indent=1, allow_nan=False)
    write_whole(path, text.encode("utf-8"))


def load_reading(path: Path) -> Reading:
    """Read a reading file; the file is never changed.

    Raises
    ------
    ReadingFileError
        With one sentence: not there, not a reading, damaged, or of a newer version.
    """
    try:
        if path.stat().st_size > LARGEST_FILE_BYTES:
            raise ReadingFileError(f"{path.name} is too large to be a Smallsquare reading.")
        data = path.read_bytes()
    except OSError as error:
        _log.info("cannot read %s: %s", path, error)
        raise ReadingFileError(f"The reading {path.name} cannot be read from the disk.") from error
    return reading_from_bytes(data, path.name)


def reading_from_bytes(data: bytes, name: str) -> Reading:
    """Decode the bytes of a reading file called `name`; raises ReadingFileError."""
    foreign = ReadingFileError(f"{name} is not a Smallsquare reading.")
    try:
        body = json.loads(data.decode("utf-8"), parse_constant=_refuse_constant)
    except (ValueError, RecursionError) as error:
        _log.info("%s: %s", name, error)
        looks_like_ours = FILE_KIND.encode() in data[:200]
        damaged = ReadingFileError(f"The reading {name} is damaged; its file was left as it is.")
        raise (damaged if looks_like_ours else foreign) from error
    if not isinstance(body, dict) or body.get("kind") != FILE_KIND:
        raise foreign
    version = body.get("schema_version")
    if isinstance(version, int) and version > SCHEMA_VERSION:
        made_by = body.get("software_version") or "a newer version"
        raise ReadingFileError(
            f"{name} was written by a newer Smallsquare ({made_by}, file version {version}); "
            "open it with that version."
        )
    try:
        if version != SCHEMA_VERSION or isinstance(version, bool):
            raise DamagedError("schema_version", "a known file version")
        body = {key: body[key] for key in body if key not in ("kind", "schema_version")}
        return reading_from_json(body)
    except (DamagedError, ValueError) as error:
        _log.info("%s: %s", name, error)
        raise ReadingFileError(
            f"The reading {name} is damaged ({error}); its file was left as it is."
        ) from error


def write_whole(path: Path, data: bytes) -> None:
    """Put bytes at `path` so that a crash leaves either the old file or the new one.

    Raises
    ------
    ReadingFileError
        If the folder or disk refuses; the old file stands untouched.
    """
    temporary: str | None = None
    try:
        handle, temporary = tempfile.mkstemp(
            prefix=f".{path.name}.", suffix=".tmp", dir=path.parent
        )
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        _take_over_mode(path, Path(temporary))
        Path(temporary).replace(path)
        _sync_folder(path.parent)
    except OSError as error:
        _log.warning("cannot write %s: %s", path, error)
        if temporary is not None:
            with suppress(OSError):
                Path(temporary).unlink()
        raise ReadingFileError(
            f"{path.name} could not be written; choose a folder you may write to with space left."
        ) from error


def _refuse_constant(name: str) -> None:
    """JSON has no NaN or Infinity; Python's reader would let them in."""
    raise ValueError(f"{name} is not a number")


def _take_over_mode(path: Path, temporary: Path) -> None:
    """Give the new file the rights of the one it replaces, or those a new file would have."""
    if path.exists():
        temporary.chmod(path.stat().st_mode & 0o777)
        return
    mask = os.umask(0)
    os.umask(mask)
    temporary.chmod(0o666 & ~mask)


def _sync_folder(folder: Path) -> None:
    if not _CAN_SYNC_FOLDERS:
        return
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _relative(picture_path: Path, folder: Path) -> str | None:
    try:
        return os.path.relpath(picture_path.resolve(), folder.resolve())
    except ValueError:  # another drive on Windows
        return None
