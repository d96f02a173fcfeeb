"""Each edit set down as it is made, beside the reading file, until the reading is saved.

One line is one whole reading. A crash or power cut can only cut the last line short, and a
line cut short is passed over. The journal lies beside the reading file because nothing of a
patient is written outside the places the reader chose: before the first save there is none.
"""

from __future__ import annotations

import json
import logging
import os
from contextlib import suppress
from pathlib import Path

from app.reading.codec import DamagedError, reading_from_json, reading_to_json
from app.reading.file_format import ReadingFileError
from app.reading.model import Reading

_log = logging.getLogger(__name__)


def journal_path(reading_path: Path) -> Path:
    """Where the journal of a reading file lies."""
    return reading_path.with_name(f".{reading_path.name}.journal")


def append_to_journal(reading_path: Path, reading: Reading) -> None:
    """Set down a reading and wait until the disk has it.

    Raises
    ------
    ReadingFileError
        If the folder or disk refuses.
    """
    # A line break before as well: the line before may have been cut short.
    line = f"\n{json.dumps(reading_to_json(reading), ensure_ascii=False, allow_nan=False)}\n"
    try:
        with journal_path(reading_path).open("ab") as file:
            file.write(line.encode("utf-8"))
            file.flush()
            os.fsync(file.fileno())
    except OSError as error:
        _log.warning("journal of %s: %s", reading_path, error)
        raise ReadingFileError(
            "Your edits cannot be kept safe beside the reading; save it to another folder."
        ) from error


def read_journal(reading_path: Path) -> Reading | None:
    """The last whole reading in the journal, or None."""
    try:
        lines = journal_path(reading_path).read_bytes().splitlines()
    except OSError:
        return None
    for line in reversed(lines):
        try:
            return reading_from_json(json.loads(line.decode("utf-8")))
        except (ValueError, DamagedError, RecursionError) as error:
            _log.info("a line of the journal of %s is passed over: %s", reading_path, error)
    return None


def discard_journal(reading_path: Path) -> None:
    """Remove the journal, once its last reading stands in the file or is not wanted."""
    with suppress(FileNotFoundError):
        journal_path(reading_path).unlink()
