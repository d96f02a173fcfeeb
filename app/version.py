"""The version of this program, as written into readings and annotated pictures."""

from __future__ import annotations

# As in pyproject.toml, which a test holds it to: looking the installed package's metadata up
# takes a twentieth of the time the window needs to appear.
VERSION = "0.1.0"


def software_version() -> str:
    """For example ``Smallsquare 0.1.0``."""
    return f"Smallsquare {VERSION}"
