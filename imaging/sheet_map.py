"""From picture pixels to millimetres of grid and back, with the standard error of both.

A flat sheet is an affine picture of its grid: one origin and two steps, each a vector in
picture_px, so that x and y pitch, turn and skew are all free. A sheet that is tilted or bent
has a `Bend` besides, which then says where each point lies; origin and steps are the flat
map nearest to it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from imaging.bend import Bend

Vector = tuple[float, float]
FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True, slots=True)
class Coverage:
    """Where on the picture the grid was really seen, in square cells.

    Attributes
    ----------
    cell_px : float
        Side of a cell in picture_px; the first cell begins at the picture's corner (-0.5, -0.5).
    rows : tuple of str
        One string of ``0`` and ``1`` for each row of cells, top to bottom.
    """

    cell_px: float
    rows: tuple[str, ...]

    @classmethod
    def from_cells(cls, cells: BoolArray, cell_px: float) -> Coverage:
        """Pack a boolean array, shape (rows, columns)."""
        return cls(cell_px, tuple("".join("1" if cell else "0" for cell in row) for row in cells))

    def cells(self) -> BoolArray:
        """Unpack to a boolean array, shape (rows, columns)."""
        width = len(self.rows[0]) if self.rows else 0
        characters = np.frombuffer("".join(self.rows).encode("ascii"), dtype=np.uint8)
        return np.asarray(characters.reshape(len(self.rows), width) == ord("1"))

    def covers(self, points_px: FloatArray) -> BoolArray:
        """Say for each point, shape (N, 2), whether its cell was seen; outside is False."""
        cells = self.cells()
        if cells.ndim != 2 or cells.size == 0:
            return np.zeros(len(points_px), dtype=bool)
        known: BoolArray = np.asarray(np.isfinite(points_px).all(axis=1))
        place = np.floor((np.where(known[:, np.newaxis], points_px, -9.0) + 0.5) / self.cell_px)
        # Looked at as floats: a number too large for an integer would come out as any cell.
        inside = known & (place >= 0).all(axis=1) & (place < cells.shape[::-1]).all(axis=1)
        seen = np.zeros(len(points_px), dtype=bool)
        column, row = place[inside].astype(np.int64).T
        seen[inside] = cells[row, column]
        return seen


@dataclass(frozen=True, slots=True)
class SheetMap:
    """Where the millimetre grid lies on one picture.

    ``picture_px = origin_px + x_mm * x_step_px + y_mm * y_step_px``; one small square is 1 mm
    whatever the printed size, and the origin lies on a crossing of bold lines.

    Attributes
    ----------
    picture_size_px : (int, int)
        Width and height of the picture the map belongs to.
    origin_px, x_step_px, y_step_px : (float, float)
        Origin, and the picture_px vectors of one small square along the paper and down it.
    covariance : tuple of tuple, shape (6, 6)
        Of (origin x, y, x_step x, y, y_step x, y), in px².
    scatter_mm : float
        One sigma of the printed grid's own unevenness at a point, independent between points.
    coverage : Coverage
        Cells in which the grid was seen.
    scale_is_certain : bool
        1 mm told from 5 mm by evidence, or given by the reader.
    source : str
        ``grid`` (found on the picture) or ``reader`` (a box drawn over known squares).
    evidence : tuple of str
        Plain sentences on what the map rests on.
    turn_deg : int
        Clockwise turn (0, 90, 180, 270) from the picture's own right to the reading direction.
    mirrored : bool
        Whether the picture had to be mirrored.
    bend : Bend, optional
        Where the grid runs on a sheet that does not lie flat before the camera; its errors
        then replace the covariance's.
    extra : mapping
        Fields of a later software version, kept for the round trip through a file.
    """

    picture_size_px: tuple[int, int]
    origin_px: Vector
    x_step_px: Vector
    y_step_px: Vector
    covariance: tuple[tuple[float, ...], ...]
    scatter_mm: float
    coverage: Coverage
    scale_is_certain: bool
    source: str = "grid"
    evidence: tuple[str, ...] = ()
    turn_deg: int = 0
    mirrored: bool = False
    bend: Bend | None = None
    extra: Mapping[str, Any] = field(default_factory=dict)

    def __post_init__(self) -> None:
        if not np.isfinite([self.origin_px, self.x_step_px, self.y_step_px]).all():
            raise ValueError("the origin and the steps of a SheetMap are finite numbers")
        if abs(np.linalg.det(self._px_from_mm())) < 1e-9:
            raise ValueError("the two grid steps of a SheetMap must not be parallel")
        if np.shape(self.covariance) != (6, 6):
            raise ValueError("the covariance of a SheetMap has shape (6, 6)")

    def _px_from_mm(self) -> FloatArray:
        return np.array([self.x_step_px, self.y_step_px], dtype=np.float64).T

    @property
    def x_pitch_px_per_mm(self) -> float:
        """Length of one small square along the paper."""
        return float(np.hypot(*self.x_step_px))

    @property
    def y_pitch_px_per_mm(self) -> float:
        """Length of one small square down the paper."""
        return float(np.hypot(*self.y_step_px))

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """Picture points to sheet points, both shape (N, 2); NaN outside the picture."""
        points_px = _as_points(points_px)
        width_px, height_px = self.picture_size_px
        inside = (points_px >= -0.5) & (points_px <= (width_px - 0.5, height_px - 0.5))
        if self.bend is None:
            mm = (points_px - self.origin_px) @ np.linalg.inv(self._px_from_mm()).T
        else:
            mm = self.bend.to_mm(points_px)
        mm[~inside.all(axis=1)] = np.nan
        return mm

    def to_px(self, points_mm: FloatArray) -> FloatArray:
        """Sheet points to picture points, both shape (N, 2); not limited to the picture.

        On a bent sheet NaN where no point of the picture's plane shows the place.
        """
        points_mm = _as_points(points_mm)
        points_px: FloatArray = points_mm @ self._px_from_mm().T + self.origin_px
        return points_px if self.bend is None else self.bend.to_px(points_mm, points_px)

    def steps_px_at(self, point_px: Vector) -> tuple[Vector, Vector]:
        """The picture_px vectors of one small square along and down the paper at a point."""
        if self.bend is None:
            return self.x_step_px, self.y_step_px
        slopes = self.bend.mm_per_px(np.array([point_px], dtype=np.float64))[0]
        if abs(np.linalg.det(slopes)) < 1e-9:
            return self.x_step_px, self.y_step_px
        (xx, yx), (xy, yy) = np.linalg.inv(slopes)
        return (float(xx), float(xy)), (float(yx), float(yy))

    def covers(self, points_px: FloatArray) -> BoolArray:
        """Whether the grid was really seen at each point, shape (N, 2) -> (N,)."""
        return self.coverage.covers(_as_points(points_px))

    def standard_error_mm(self, points_px: FloatArray) -> FloatArray:
        """One sigma of a point's place on the grid (both axes together), (N, 2) -> (N,).

        The first-order propagation of the parameters' covariance (JCGM 100:2008, 5.2.2),
        with the grid's own scatter added. On a bent sheet NaN where the grid was not followed.
        """
        if self.bend is not None:
            return np.asarray(np.sqrt(2.0) * self._bend_errors_mm(self.bend, points_px))
        mm = self.to_mm(points_px)
        weights = np.column_stack([np.ones(len(mm)), mm])
        per_axis = self._axis_errors_mm(weights)
        return np.asarray(np.hypot(per_axis[:, 0], per_axis[:, 1]))

    def largest_standard_error_mm(self) -> float | None:
        """The largest one-sigma error of a point where the grid was seen; None if nowhere."""
        rows, columns = np.nonzero(self.coverage.cells())
        if rows.size == 0:
            return None
        centres_px = (np.column_stack([columns, rows]) + 0.5) * self.coverage.cell_px - 0.5
        last_px = np.array(self.picture_size_px, dtype=np.float64) - 1.0
        return float(np.max(self.standard_error_mm(np.minimum(centres_px, last_px))))

    def span_standard_error_mm(self, start_px: FloatArray, end_px: FloatArray) -> FloatArray:
        """One sigma of ``end - start`` along x and y, (N, 2) and (N, 2) -> (N, 2).

        The origin's error cancels: the two ends share one map. On a bent sheet the errors of
        both ends count.
        """
        if self.bend is not None:
            ends = [self._bend_errors_mm(self.bend, points) for points in (start_px, end_px)]
            both = np.hypot(*ends)
            return np.column_stack([both, both])
        span_mm = self.to_mm(end_px) - self.to_mm(start_px)
        weights = np.column_stack([np.zeros(len(span_mm)), span_mm])
        return self._axis_errors_mm(weights, ends=2)

    def _bend_errors_mm(self, bend: Bend, points_px: FloatArray) -> FloatArray:
        """One sigma along one axis, (N, 2) -> (N,); NaN outside the picture."""
        errors = bend.errors_mm(_as_points(points_px))
        errors[np.isnan(self.to_mm(points_px)).any(axis=1)] = np.nan
        return errors

    def _axis_errors_mm(self, weights: FloatArray, ends: int = 1) -> FloatArray:
        """Per-axis sigma of ``w0 origin + w1 x_step + w2 y_step`` seen in mm, (N, 3) -> (N, 2)."""
        covariance = np.asarray(self.covariance, dtype=np.float64).reshape(3, 2, 3, 2)
        in_px = np.einsum("ni,iajb,nj->nab", weights, covariance, weights)
        inverse = np.linalg.inv(self._px_from_mm())
        in_mm = inverse @ in_px @ inverse.T
        variances = np.diagonal(in_mm, axis1=1, axis2=2) + ends * self.scatter_mm**2
        return np.sqrt(np.maximum(variances, 0.0))

    def turned(self, quarter_turns: int) -> SheetMap:
        """The same grid read after turning the sheet clockwise by quarter turns.

        Sheet x follows the new reading direction: turning the page clockwise once makes
        the picture's upward direction the new +x.
        """
        turned = self
        for _ in range(quarter_turns % 4):
            covariance = np.asarray(turned.covariance)
            x, y = turned.x_step_px, turned.y_step_px
            change = np.kron(np.array([[1, 0, 0], [0, 0, -1], [0, 1, 0]]), np.eye(2))
            turned = replace(
                turned,
                x_step_px=(-y[0], -y[1]),
                y_step_px=x,
                covariance=_as_nested(change @ covariance @ change.T),
                bend=None if turned.bend is None else turned.bend.turned(),
                turn_deg=(turned.turn_deg + 270) % 360,
            )
        return turned


def sheet_map_from_box(
    picture_size_px: tuple[int, int],
    corner_px: Vector,
    opposite_px: Vector,
    squares_across: float,
    squares_down: float,
    corner_error_px: float = 1.0,
) -> SheetMap:
    """A map from a box the reader drew over a known number of large (5 mm) squares.

    Parameters
    ----------
    picture_size_px : (int, int)
        Width and height of the picture.
    corner_px, opposite_px : (float, float)
        Two opposite corners of the box, upright in the picture.
    squares_across, squares_down : float
        Large squares the box spans; both at least one.
    corner_error_px : float
        One sigma of each drawn side.

    Raises
    ------
    ValueError
        If the box has no size or the counts are below one.
    """
    left, right = sorted((corner_px[0], opposite_px[0]))
    top, bottom = sorted((corner_px[1], opposite_px[1]))
    if not (right - left >= 2.0 and bottom - top >= 2.0):
        raise ValueError("draw the box over at least one large square")
    if not (squares_across >= 1.0 and squares_down >= 1.0):
        raise ValueError("the box must span at least one large square each way")
    x_mm, y_mm = 5.0 * squares_across, 5.0 * squares_down
    covariance = np.zeros((6, 6))
    for axis, step_index, span_mm in ((0, 2, x_mm), (1, 5, y_mm)):
        variance = corner_error_px**2
        covariance[axis, axis] = variance
        covariance[step_index, step_index] = 2.0 * variance / span_mm**2
        covariance[axis, step_index] = covariance[step_index, axis] = -variance / span_mm
    width_px, height_px = picture_size_px
    cell_px = 16.0
    rows, columns = int(np.ceil(height_px / cell_px)), int(np.ceil(width_px / cell_px))
    centres_x = (np.arange(columns) + 0.5) * cell_px - 0.5
    centres_y = (np.arange(rows) + 0.5) * cell_px - 0.5
    cells = ((centres_y >= top) & (centres_y <= bottom))[:, None] & (
        (centres_x >= left) & (centres_x <= right)
    )[None, :]
    return SheetMap(
        picture_size_px=picture_size_px,
        origin_px=(left, top),
        x_step_px=((right - left) / x_mm, 0.0),
        y_step_px=(0.0, (bottom - top) / y_mm),
        covariance=_as_nested(covariance),
        scatter_mm=0.0,
        coverage=Coverage.from_cells(cells, cell_px),
        scale_is_certain=True,
        source="reader",
        evidence=(
            f"The reader drew a box over {squares_across:g} by {squares_down:g} large squares.",
        ),
    )


def _as_points(points: FloatArray) -> FloatArray:
    points = np.array(points, dtype=np.float64)
    if points.ndim != 2 or points.shape[1] != 2:
        raise ValueError(f"points have shape (N, 2), not {points.shape}")
    return points


def _as_nested(matrix: FloatArray) -> tuple[tuple[float, ...], ...]:
    return tuple(tuple(float(number) for number in row) for row in matrix)
