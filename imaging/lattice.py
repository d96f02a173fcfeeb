"""Find the millimetre lattice on a flat picture."""

from __future__ import annotations

from imaging.errors import GridNotFound
from imaging.picture import Picture
from imaging.sheet_map import SheetMap


def find_grid(picture: Picture) -> SheetMap | GridNotFound:
    raise NotImplementedError
