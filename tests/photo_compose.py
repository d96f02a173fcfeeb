"""Lay drawn sheets into a photograph: warped through the inverse map, sampled finely."""

from __future__ import annotations

from dataclasses import dataclass

import cv2
import numpy as np
from numpy.typing import NDArray

from tests.photo_desk import DESK_PX, DESK_PX_PER_MM
from tests.photo_geometry import Camera, View, desk_mm, inverse_grid
from tests.photo_pages import Sheet

Pixels = NDArray[np.uint8]
Plane = NDArray[np.float32]
FloatArray = NDArray[np.float64]

SAMPLES = 2
"""Samples a pixel in each direction. The drawings have 1.5 pixels or more for each pixel of
the photo's finest part, so that samples are about as close as the drawing's pixels."""
ROWS_AT_ONCE = 256
NOWHERE = -1.0e4
DESK_MARK = 0
FINGER_MARK = 255
SHADOW_SHRINK = 8


@dataclass(frozen=True, slots=True, eq=False)
class Canvas:
    """The photo while it is put together: `pixels` (H, W, 3) and who `owner` (H, W) each is."""

    pixels: Pixels
    owner: Pixels


def empty_canvas(size_px: tuple[int, int]) -> Canvas:
    """Black, all of it desk."""
    width_px, height_px = size_px
    pixels = np.zeros((height_px, width_px, 3), dtype=np.uint8)
    return Canvas(pixels, np.full((height_px, width_px), DESK_MARK, dtype=np.uint8))


def lay_desk(canvas: Canvas, camera: Camera, desk: Pixels, shift_mm: FloatArray) -> None:
    """Fill the canvas with a desk top, in place."""
    height_px, width_px = canvas.owner.shape
    block_px = 32
    x, y = (
        (np.arange(-1, -(-side // block_px) + 1) + 0.5) * block_px - 0.5
        for side in (width_px, height_px)
    )
    points_px = np.stack(np.meshgrid(x, y), axis=-1)
    places_mm = desk_mm(camera, points_px.reshape(-1, 2)) + shift_mm
    nodes = np.clip(places_mm, -1500.0, 1500.0) * DESK_PX_PER_MM + DESK_PX / 2
    nodes = nodes.reshape(*points_px.shape).astype(np.float32)
    for rows, columns, places in _bands(nodes, (0, 0), block_px, canvas.owner.shape, 1):
        canvas.pixels[rows, columns] = cv2.remap(
            desk, places, None, cv2.INTER_LINEAR, borderMode=cv2.BORDER_REFLECT
        )


def lay_sheet(
    canvas: Canvas, view: View, sheet: Sheet, mark: int, lamp: FloatArray, relief: float
) -> None:
    """Lay one sheet over what is there, in place; its pixels' owner becomes `mark`.

    `lamp` is the direction the light comes from, (3,); `relief` is how much slopes shade.
    """
    grid = inverse_grid(view)
    if grid is None:
        return
    _cast_shadow(canvas, view, lamp)
    known = np.isfinite(grid.paper_mm)
    nodes = np.where(known, sheet.px_from_paper(grid.paper_mm), NOWHERE).astype(np.float32)
    shade = _shade(view, grid.paper_mm, lamp, relief)
    texture = cv2.cvtColor(sheet.pixels, cv2.COLOR_RGB2RGBA)
    shape = canvas.owner.shape
    for rows, columns, places in _bands(nodes, grid.first_px, grid.block_px, shape, SAMPLES):
        # Outside the paper all four channels are 0: colours come out multiplied by coverage.
        fine = cv2.remap(texture, places, None, cv2.INTER_LINEAR, borderMode=cv2.BORDER_CONSTANT)
        size = (columns.stop - columns.start, rows.stop - rows.start)
        drawn = cv2.resize(fine, size, interpolation=cv2.INTER_AREA)
        lit = drawn[:, :, :3]
        if shade is not None:
            lit = _shaded(lit, shade, rows, columns, grid.first_px, grid.block_px)
        _blend(canvas, rows, columns, lit, drawn[:, :, 3], mark)


def _blend(
    canvas: Canvas, rows: slice, columns: slice, lit: Pixels, cover: Pixels, mark: int
) -> None:
    under = canvas.pixels[rows, columns]
    bare = cv2.cvtColor(cv2.bitwise_not(cover), cv2.COLOR_GRAY2RGB)
    canvas.pixels[rows, columns] = cv2.add(cv2.multiply(under, bare, scale=1.0 / 255.0), lit)
    canvas.owner[rows, columns][cover > 127] = mark


def _bands(  # type: ignore[no-untyped-def]
    nodes: Plane, first_px: tuple[int, int], block_px: int, shape: tuple[int, ...], samples: int
):
    """Rows and columns of the canvas a band at a time, with the nodes' values at every sample.

    `nodes`, (rows + 2, columns + 2, 2), stand at the centres of blocks, one block more on
    each side. Between them values are linear.
    """
    grow, blocks = samples * block_px, max(1, ROWS_AT_ONCE // block_px)
    left, top = first_px
    right = min(left + (nodes.shape[1] - 2) * block_px, shape[1])
    for first in range(0, nodes.shape[0] - 2, blocks):
        part = nodes[first : first + blocks + 2]
        high = part.shape[0] - 2
        above = top + first * block_px
        below = min(above + high * block_px, shape[0])
        if below <= above:
            return
        grown = cv2.resize(part, None, fx=grow, fy=grow, interpolation=cv2.INTER_LINEAR)
        places = grown[
            grow : grow + (below - above) * samples, grow : grow + (right - left) * samples
        ]
        yield slice(above, below), slice(left, right), np.ascontiguousarray(places)


def _shade(view: View, paper_mm: FloatArray, lamp: FloatArray, relief: float) -> Plane | None:
    """Factor of the light on sloping paper at each node; None for flat paper."""
    surface = view.surface
    if relief == 0.0 or not (surface.waves or surface.fold or surface.curl_per_m):
        return None
    flat = np.nan_to_num(paper_mm.reshape(-1, 2))
    here, step_mm = surface.to_space(flat), 0.5
    across = surface.to_space(flat + np.array([step_mm, 0.0])) - here
    down = surface.to_space(flat + np.array([0.0, step_mm])) - here
    normal = np.cross(across, down)
    normal /= np.linalg.norm(normal, axis=1, keepdims=True)
    facing = normal @ lamp / lamp[2]
    shade = np.clip(1.0 + relief * (facing - 1.0), 0.5, 1.3)
    return np.asarray(shade.reshape(paper_mm.shape[:2]), dtype=np.float32)


def _shaded(
    drawn: Pixels,
    shade: Plane,
    rows: slice,
    columns: slice,
    first_px: tuple[int, int],
    block_px: int,
) -> Pixels:
    first = (rows.start - first_px[1]) // block_px
    count = -(-(rows.stop - rows.start) // block_px)
    part = shade[first : first + count + 2]
    grown = cv2.resize(part, None, fx=block_px, fy=block_px, interpolation=cv2.INTER_LINEAR)
    high, wide = rows.stop - rows.start, columns.stop - columns.start
    factor = grown[block_px : block_px + high, block_px : block_px + wide]
    colours = cv2.cvtColor(np.ascontiguousarray(factor), cv2.COLOR_GRAY2RGB)
    return np.asarray(cv2.multiply(np.ascontiguousarray(drawn), colours, dtype=cv2.CV_8U))


def _cast_shadow(canvas: Canvas, view: View, lamp: FloatArray) -> None:
    """A soft dark rim on what lies under the sheet, away from the lamp, in place."""
    height_px, width_px = canvas.owner.shape
    _, finest = view.px_per_mm(5)
    # Capped: of a sheet whose corner stands right before the lens only a blur is seen.
    reach_px = min(2.5 * finest, 0.05 * width_px)
    outline = view.outline_px() - lamp[:2] * reach_px
    if not np.isfinite(outline).all():
        return  # a sheet that reaches behind the camera
    low = np.maximum(outline.min(axis=0) - 4 * reach_px, 0).astype(int)
    high = np.minimum(outline.max(axis=0) + 4 * reach_px, (width_px, height_px)).astype(int)
    if (high <= low).any():
        return
    small = (int(high[0] - low[0]) // SHADOW_SHRINK + 1, int(high[1] - low[1]) // SHADOW_SHRINK + 1)
    mask = np.zeros((small[1], small[0]), dtype=np.uint8)
    # A corner right before the lens lies very far out: more than a whole number can say.
    corners = np.rint(np.clip((outline - low) / SHADOW_SHRINK, -3e4, 3e4)).astype(np.int32)
    cv2.fillPoly(mask, [corners], 120)
    mask = cv2.GaussianBlur(mask, (0, 0), max(reach_px / SHADOW_SHRINK, 0.6))
    size = (int(high[0] - low[0]), int(high[1] - low[1]))
    bare = cv2.cvtColor(cv2.resize(cv2.bitwise_not(mask), size), cv2.COLOR_GRAY2RGB)
    part = canvas.pixels[low[1] : high[1], low[0] : high[0]]
    part[:] = cv2.multiply(np.ascontiguousarray(part), bare, scale=1.0 / 255.0)
