"""The fitted lattice as straight pieces, where the grid was seen. No Qt.

On a bent sheet a line is many short pieces that follow it.
"""

from __future__ import annotations

import math

import numpy as np

from imaging.sheet_map import FloatArray, SheetMap

BOLD_EVERY = 5
_PIECE_MM = 2.5


def lattice_lines(sheet_map: SheetMap, *, bold: bool) -> FloatArray:
    """Every line of one weight, cut where the grid was not seen.

    Parameters
    ----------
    sheet_map : SheetMap
    bold : bool
        The lines every 5 mm, or the ones between them.

    Returns
    -------
    ndarray of float64, shape (N, 4)
        Pieces (x1, y1, x2, y2) in picture_px; they end within half a coverage cell of where
        the grid was last seen.
    """
    if sheet_map.bend is not None:
        return np.concatenate([_bent_pieces(sheet_map, axis, bold=bold) for axis in (0, 1)])
    steps_px = np.array([sheet_map.x_step_px, sheet_map.y_step_px])
    return np.concatenate(
        [
            _seen_pieces(
                np.asarray(sheet_map.origin_px) + numbers[:, np.newaxis] * steps_px[axis],
                steps_px[1 - axis],
                sheet_map,
            )
            for axis in (0, 1)
            for numbers in [_line_numbers(sheet_map, axis, bold=bold)]
        ]
    )


def _bent_pieces(sheet_map: SheetMap, axis: int, *, bold: bool) -> FloatArray:
    """Lines across one axis of a bent sheet, in pieces both ends of which were seen."""
    cells = sheet_map.coverage.cells()
    rows, columns = np.nonzero(cells)
    if rows.size == 0:
        return np.empty((0, 4))
    centres_px = (np.column_stack([columns, rows]) + 0.5) * sheet_map.coverage.cell_px - 0.5
    seen_mm = sheet_map.to_mm(np.minimum(centres_px, np.array(sheet_map.picture_size_px) - 1.0))
    low, high = seen_mm.min(axis=0) - _PIECE_MM, seen_mm.max(axis=0) + _PIECE_MM
    numbers = np.arange(math.ceil(low[axis]), math.floor(high[axis]) + 1)
    numbers = numbers[(numbers % BOLD_EVERY == 0) == bold]
    along = np.arange(low[1 - axis], high[1 - axis] + _PIECE_MM, _PIECE_MM)
    line, place = np.meshgrid(numbers, along, indexing="ij")
    points_mm = np.stack([place, line] if axis else [line, place], axis=-1).reshape(-1, 2)
    points_px = sheet_map.to_px(points_mm)
    # The last cells reach past the picture's edge.
    on_picture = np.isfinite(sheet_map.to_mm(points_px)).all(axis=1)
    seen = (sheet_map.covers(points_px) & on_picture).reshape(line.shape)
    points_px = points_px.reshape(*line.shape, 2)
    both = seen[:, :-1] & seen[:, 1:]
    pieces: FloatArray = np.hstack([points_px[:, :-1][both], points_px[:, 1:][both]])
    return pieces


def _line_numbers(sheet_map: SheetMap, axis: int, *, bold: bool) -> FloatArray:
    """The whole millimetres of the lines that may cross the picture."""
    width_px, height_px = sheet_map.picture_size_px
    right, bottom = width_px - 0.5, height_px - 0.5
    corners_px = np.array([[-0.5, -0.5], [right, -0.5], [right, bottom], [-0.5, bottom]])
    places_mm = sheet_map.to_mm(corners_px)[:, axis]
    numbers = np.arange(math.ceil(places_mm.min()), math.floor(places_mm.max()) + 1)
    chosen: FloatArray = numbers[(numbers % BOLD_EVERY == 0) == bold].astype(np.float64)
    return chosen


def _seen_pieces(through_px: FloatArray, along_px: FloatArray, sheet_map: SheetMap) -> FloatArray:
    """Parallel lines through points, shape (K, 2), clipped to the picture and to the grid seen."""
    enter, leave = _clipped(through_px, along_px, sheet_map.picture_size_px)
    crosses = enter < leave
    through_px, enter, leave = through_px[crosses], enter[crosses], leave[crosses]
    if not crosses.any():
        return np.empty((0, 4))
    longest_px = float((leave - enter).max()) * math.hypot(*along_px)
    # Two points in each cell on the way, so that none is passed over.
    count = 2 + math.ceil(2.0 * longest_px / sheet_map.coverage.cell_px)
    places = np.linspace(enter, leave, count, axis=1)
    points_px = through_px[:, np.newaxis, :] + places[:, :, np.newaxis] * along_px
    seen = sheet_map.covers(points_px.reshape(-1, 2)).reshape(places.shape)
    unseen = np.zeros((len(seen), 1), dtype=bool)
    changes = np.diff(np.hstack([unseen, seen, unseen]).astype(np.int8), axis=1)
    rows, firsts = np.nonzero(changes == 1)
    _, afters = np.nonzero(changes == -1)
    pieces: FloatArray = np.hstack([points_px[rows, firsts], points_px[rows, afters - 1]])
    return pieces


def _clipped(
    through_px: FloatArray, along_px: FloatArray, size_px: tuple[int, int]
) -> tuple[FloatArray, FloatArray]:
    """Where lines enter and leave the picture, in steps of `along_px`, shape (K,) each.

    Slab method: Kay and Kajiya, "Ray tracing complex scenes", SIGGRAPH 1986 (from memory).
    """
    low = np.full(2, -0.5 + 1e-6)
    high = np.asarray(size_px) - 0.5 - 1e-6  # just inside: the edge itself has no cell
    along_px = np.where(along_px == 0.0, 1e-12, along_px)
    edges = np.sort([(low - through_px) / along_px, (high - through_px) / along_px], axis=0)
    enter: FloatArray = edges[0].max(axis=1)
    leave: FloatArray = edges[1].min(axis=1)
    return enter, leave
