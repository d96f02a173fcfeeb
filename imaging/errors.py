"""The one family of exceptions a user may meet, and the value for 'no grid here'."""

from __future__ import annotations

from dataclasses import dataclass


class SmallsquareError(Exception):
    """Something the user can act on; `str(error)` is one sentence for a clinician."""


class PictureError(SmallsquareError):
    """A file that cannot be used as a picture."""


@dataclass(frozen=True, slots=True)
class GridNotFound:
    """Why no millimetre grid could be placed on a picture.

    Attributes
    ----------
    reason : str
        One sentence a clinician can act on.
    code : str
        Short stable name for tests and logs: ``no_lines``, ``one_direction``,
        ``not_a_millimetre_grid``, ``too_coarse``, ``not_flat``, ``unclear_scale`` ...
    """

    reason: str
    code: str
