"""The version of this program, as written into readings and annotated pictures."""

from __future__ import annotations

from importlib.metadata import PackageNotFoundError, version


def software_version() -> str:
    """For example ``Smallsquare 0.1.0``; says so where it runs from an uninstalled tree."""
    try:
        return f"Smallsquare {version('smallsquare')}"
    except PackageNotFoundError:
        return "Smallsquare (not installed)"
