"""Why something was not written."""

from __future__ import annotations

from imaging.errors import SmallsquareError


class FileExistsRefused(SmallsquareError):  # noqa: N818 - a refusal is an answer, not a fault
    """A file of that name is there, and nobody said that it may be replaced."""


class TargetRefused(SmallsquareError):  # noqa: N818 - likewise
    """A place that is never written to: the picture itself, a reading, a foreign ending."""


class PictureDiffers(SmallsquareError):  # noqa: N818 - likewise
    """A picture on which the marks of a reading would lie in the wrong places."""
