"""One version, wherever it is written."""

from __future__ import annotations

import tomllib
from pathlib import Path

from app.version import software_version

REPOSITORY = Path(__file__).resolve().parent.parent.parent


def test_the_version_is_that_of_the_package() -> None:
    project = tomllib.loads((REPOSITORY / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert software_version() == f"Smallsquare {project['version']}"
