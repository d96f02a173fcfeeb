"""PySide6 below 6.12.

6.12.0 on Python 3.11 drops a reference to None with each call that returns nothing; after some
thousand None itself is freed and the interpreter aborts.
"""

from __future__ import annotations

import os
import re
import subprocess
import sys
import tomllib
from importlib.metadata import version
from pathlib import Path

REPOSITORY = Path(__file__).resolve().parent.parent.parent
CALLS = 20_000
SCRIPT = f"""
import sys
from PySide6.QtCore import QObject, QPoint
from PySide6.QtGui import QColor
thing, point, colour = QObject(), QPoint(), QColor()
before = sys.getrefcount(None)
for _ in range({CALLS}):
    thing.blockSignals(False)
    thing.setObjectName("a")
    point.setX(3)
    colour.setAlpha(9)
print(before, sys.getrefcount(None))
"""


def release(text: str) -> tuple[int, int]:
    """Major and minor number of a version."""
    major, minor = text.split(".")[:2]
    return int(major), int(minor)


def test_the_installed_binding_is_below_the_bound() -> None:
    assert (6, 8) <= release(version("PySide6-Essentials")) < (6, 12)


def test_the_bound_is_asked_for() -> None:
    project = tomllib.loads((REPOSITORY / "pyproject.toml").read_text(encoding="utf-8"))
    (asked,) = [line for line in project["project"]["dependencies"] if "PySide6" in line]
    bound = re.search(r"<(\d+\.\d+)", asked)
    assert bound is not None
    assert release(bound[1]) <= (6, 12)


def test_calls_that_return_nothing_leave_none_alone() -> None:
    ended = subprocess.run(
        [sys.executable, "-c", SCRIPT],
        env={**os.environ, "QT_QPA_PLATFORM": "offscreen"},
        capture_output=True,
        text=True,
        timeout=60,
        check=True,
    )
    before, after = map(int, ended.stdout.split())
    # From Python 3.12 on None is immortal and its count does not move at all.
    assert abs(after - before) < CALLS // 100
