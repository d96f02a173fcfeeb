"""Pictures of paper, and the millimetre grid on them. Knows nothing of Qt or of `app`.

The heavy libraries are loaded inside the functions that need them, so that importing
this package costs little and the window appears quickly.
"""

from imaging.errors import GridNotFound, PictureError, SmallsquareError
from imaging.picture import Picture, open_picture, picture_from_bytes
from imaging.sheet_map import Coverage, SheetMap, sheet_map_from_box


def find_grid(picture: Picture) -> SheetMap | GridNotFound:
    """Find the millimetre lattice on a scan or photograph; see `imaging.lattice.find_grid`."""
    # Loaded when first asked for: a picture is on the screen before that.
    from imaging.lattice import find_grid as find

    return find(picture)


__all__ = [
    "Coverage",
    "GridNotFound",
    "Picture",
    "PictureError",
    "SheetMap",
    "SmallsquareError",
    "find_grid",
    "open_picture",
    "picture_from_bytes",
    "sheet_map_from_box",
]
