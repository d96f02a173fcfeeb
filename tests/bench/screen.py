"""A virtual screen for the benchmarks that need a real X server."""

from __future__ import annotations

import os
import shutil
import subprocess
from collections.abc import Iterator
from contextlib import contextmanager


def xvfb_is_there() -> bool:
    """Whether a virtual screen can be made here."""
    return shutil.which("Xvfb") is not None


@contextmanager
def virtual_screen(size: str) -> Iterator[dict[str, str]]:
    """The environment of a program on a screen of its own.

    Parameters
    ----------
    size : str
        Width, height and depth ("1366x768x24").

    Raises
    ------
    RuntimeError
        If there is no display to open here.
    """
    reading_end, writing_end = os.pipe()
    # By itself the server starts anew whenever its last client has gone, and refuses those who
    # come meanwhile.
    options = ["-screen", "0", size, "-nolisten", "tcp", "-noreset"]
    with subprocess.Popen(
        ["Xvfb", "-displayfd", str(writing_end), *options],
        pass_fds=[writing_end],
        stderr=subprocess.DEVNULL,
    ) as server:
        os.close(writing_end)
        try:
            with os.fdopen(reading_end) as numbers:
                display = numbers.readline().strip()
            if not display:
                raise RuntimeError("Xvfb found no display to open here")
            yield {**os.environ, "DISPLAY": f":{display}", "QT_QPA_PLATFORM": "xcb"}
        finally:
            server.terminate()
