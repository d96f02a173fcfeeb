"""Where a sheet of paper lands in a photograph: a bent surface, a place on a desk, a camera.

Everything forward is a closed formula in float64, so that the truth of a photo does not
depend on how the photo was drawn. Frames: `sheet_mm` (the grid), `paper_mm` (the flat paper in
real millimetres about its centre), `space_mm` (x right, y down, z from the desk to the
camera) and `sensor_px` ((0, 0) is the centre of the first pixel).
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import cv2
import numpy as np
from numpy.typing import NDArray

from sample_scans.page import apply_affine, invert_affine

FloatArray = NDArray[np.float64]

BEYOND_PAPER_MM = 20.0
"""The formulas are followed this far past the paper's edge, to draw the edge itself."""
SETTLED_PX = 1e-5
NEWTON_STEPS = 30
REFINING_STEPS = 8
COARSE_STEP = 8


@dataclass(frozen=True, slots=True)
class Fold:
    """A crease: the paper on the far side of a line rises by `angle_deg` from the near side.

    The line stands `offset_mm` from the paper's centre along the direction `across_deg`; the
    crease is rounded over about `crease_mm`.
    """

    angle_deg: float
    across_deg: float = 0.0
    offset_mm: float = 0.0
    crease_mm: float = 2.0


@dataclass(frozen=True, slots=True)
class Wave:
    """One ripple of crumpled paper: height, wavelength, direction and phase."""

    height_mm: float
    length_mm: float
    along_deg: float
    phase: float


@dataclass(frozen=True, slots=True)
class Surface:
    """How the paper is bent: folded, then rippled, then rolled about a cylinder.

    `curl_per_m` is the cylinder's curvature in 1/m; positive lifts the paper's ends and
    negative its middle. Fold and roll keep lengths (the fold to 0.1 % within the crease).
    """

    curl_per_m: float = 0.0
    curl_along_deg: float = 0.0
    fold: Fold | None = None
    waves: tuple[Wave, ...] = ()

    def to_space(self, paper_mm: FloatArray) -> FloatArray:
        """Points of the flat paper, (N, 2), to points of the bent one, (N, 3)."""
        x, y = paper_mm[:, 0].copy(), paper_mm[:, 1].copy()
        z = np.zeros_like(x)
        for wave in self.waves:
            across = _along(paper_mm, wave.along_deg)
            z += wave.height_mm * np.sin(2.0 * np.pi * across / wave.length_mm + wave.phase)
        if self.fold is not None:
            z += _fold(x, y, paper_mm, self.fold)
        if self.curl_per_m:
            z += _roll(x, y, self.curl_per_m / 1000.0, self.curl_along_deg)
        return np.column_stack([x, y, z])


def _direction(degrees: float) -> tuple[float, float]:
    angle = np.deg2rad(degrees)
    return float(np.cos(angle)), float(np.sin(angle))


def _along(points: FloatArray, degrees: float) -> FloatArray:
    cosine, sine = _direction(degrees)
    return points[:, 0] * cosine + points[:, 1] * sine


def _fold(x: FloatArray, y: FloatArray, paper_mm: FloatArray, fold: Fold) -> FloatArray:
    """Move x and y in place; the height is returned. Half of the angle goes to each side."""
    cosine, sine = _direction(fold.across_deg)
    half = np.deg2rad(fold.angle_deg / 2.0)
    t = (_along(paper_mm, fold.across_deg) - fold.offset_mm) / fold.crease_mm
    shorter = (np.cos(half) - 1.0) * fold.crease_mm * (t - np.tanh(t))
    x += cosine * shorter
    y += sine * shorter
    # log(cosh t) without overflow.
    height = np.abs(t) + np.log1p(np.exp(-2.0 * np.abs(t))) - np.log(2.0)
    return np.asarray(np.sin(half) * fold.crease_mm * height)


def _roll(x: FloatArray, y: FloatArray, curvature: float, degrees: float) -> FloatArray:
    """Move x and y in place; the height is returned."""
    cosine, sine = _direction(degrees)
    s = x * cosine + y * sine
    nearer = np.sin(curvature * s) / curvature - s
    x += cosine * nearer
    y += sine * nearer
    return np.asarray((1.0 - np.cos(curvature * s)) / curvature)


@dataclass(frozen=True, slots=True)
class Camera:
    """A camera that looks at the desk.

    Attributes
    ----------
    size_px : tuple of int
        Width and height of the sensor.
    focal_px : float
        Focal length.
    distance_mm : float
        From the lens to the point aimed at.
    aim_mm : tuple of float
        That point on the desk.
    tilt_deg, tilt_towards_deg, roll_deg : float
        How far the camera leans from upright, towards where on the desk, and its turn about
        its own axis.
    distortion : tuple of float
        Radial terms of second and fourth order, relative, at the picture's corner; negative
        is barrel.
    """

    size_px: tuple[int, int]
    focal_px: float
    distance_mm: float
    aim_mm: tuple[float, float] = (0.0, 0.0)
    tilt_deg: float = 0.0
    tilt_towards_deg: float = 0.0
    roll_deg: float = 0.0
    distortion: tuple[float, float] = (0.0, 0.0)

    def to_px(self, space_mm: FloatArray) -> FloatArray:
        """Points of space, (N, 3), to sensor_px, (N, 2)."""
        turned = (space_mm - np.array([*self.aim_mm, 0.0])) @ self.rotation().T
        seen = turned[:, :2] / (self.distance_mm - turned[:, 2:])
        half = np.array(self.size_px) / 2.0
        corner_sq = float((half**2).sum()) / self.focal_px**2
        r_sq = (seen**2).sum(axis=1, keepdims=True) / corner_sq
        first, second = self.distortion
        bent = seen * (1.0 + r_sq * (first + r_sq * second))
        return np.asarray(self.focal_px * bent + half - 0.5)

    def rotation(self) -> FloatArray:
        """Space about the point aimed at, to the camera's own axes, (3, 3)."""
        tilt = np.deg2rad(self.tilt_deg)
        lean = np.eye(3)
        lean[1:, 1:] = [[np.cos(tilt), -np.sin(tilt)], [np.sin(tilt), np.cos(tilt)]]
        towards = _about_z(self.tilt_towards_deg)
        return np.asarray(_about_z(self.roll_deg) @ towards @ lean @ towards.T)


def _about_z(degrees: float) -> FloatArray:
    cosine, sine = _direction(degrees)
    return np.array([[cosine, -sine, 0.0], [sine, cosine, 0.0], [0.0, 0.0, 1.0]])


@dataclass(frozen=True, slots=True)
class Place:
    """Where the paper's centre lies on the desk, how it is turned, how high it lies."""

    x_mm: float = 0.0
    y_mm: float = 0.0
    turn_deg: float = 0.0
    above_desk_mm: float = 0.0

    def to_space(self, bent_mm: FloatArray) -> FloatArray:
        """Points of the bent paper to points over the desk, (N, 3)."""
        return np.asarray(
            bent_mm @ _about_z(self.turn_deg).T
            + np.array([self.x_mm, self.y_mm, self.above_desk_mm])
        )


@dataclass(frozen=True, slots=True, eq=False)
class View:
    """One sheet before one camera: `paper_from_sheet` is (2, 3), `half_size_mm` real paper."""

    paper_from_sheet: FloatArray
    half_size_mm: tuple[float, float]
    surface: Surface
    place: Place
    camera: Camera

    def paper_to_px(self, paper_mm: FloatArray) -> FloatArray:
        """paper_mm to sensor_px, (N, 2) -> (N, 2)."""
        return self.camera.to_px(self.place.to_space(self.surface.to_space(paper_mm)))

    def to_px(self, points_mm: FloatArray) -> FloatArray:
        """sheet_mm to sensor_px, (N, 2) -> (N, 2); also past the paper's edge."""
        return self.paper_to_px(apply_affine(self.paper_from_sheet, points_mm))

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """sensor_px to sheet_mm, (N, 2) -> (N, 2); NaN off the paper."""
        points_px = np.asarray(points_px, dtype=np.float64).reshape(-1, 2)
        paper_mm = solve_paper_mm(self, points_px, self.first_guess(points_px))
        with np.errstate(invalid="ignore"):
            off = (np.abs(paper_mm) > np.array(self.half_size_mm) + 1e-9).any(axis=1)
        paper_mm[off] = np.nan
        return apply_affine(invert_affine(self.paper_from_sheet), paper_mm)

    def first_guess(self, points_px: FloatArray) -> FloatArray:
        """paper_mm of a plane sheet that lies about where this one does."""
        paper_mm = self.samples_mm(9)
        plane, _ = cv2.findHomography(self.paper_to_px(paper_mm), paper_mm)
        homogeneous = np.column_stack([points_px, np.ones(len(points_px))]) @ plane.T
        return np.asarray(homogeneous[:, :2] / homogeneous[:, 2:])

    def samples_mm(self, count: int) -> FloatArray:
        """count by count points over the whole paper, in paper_mm."""
        x, y = (np.linspace(-half, half, count) for half in self.half_size_mm)
        return np.stack(np.meshgrid(x, y), axis=-1).reshape(-1, 2)

    def outline_px(self, count: int = 40) -> FloatArray:
        """The paper's edge in sensor_px, clockwise, (4 * count, 2)."""
        width, height = self.half_size_mm
        corners = np.array([(-1, -1), (1, -1), (1, 1), (-1, 1)]) * (width, height)
        share = np.arange(count)[:, None] / count
        sides = [
            start + share * (end - start)
            for start, end in zip(corners, np.roll(corners, -1, axis=0), strict=True)
        ]
        return self.paper_to_px(np.concatenate(sides))

    def px_per_mm(self, count: int = 15) -> tuple[float, float]:
        """Least and greatest magnification of the paper, in any direction."""
        paper_mm = self.samples_mm(count)
        stretch = np.linalg.svd(slopes(self, paper_mm), compute_uv=False)
        return float(stretch.min()), float(stretch.max())


def slopes(view: View, paper_mm: FloatArray) -> FloatArray:
    """d(sensor_px) / d(paper_mm), shape (N, 2, 2)."""
    step_mm = 1e-3
    columns = [
        (view.paper_to_px(paper_mm + move) - view.paper_to_px(paper_mm - move)) / (2.0 * step_mm)
        for move in (np.array([step_mm, 0.0]), np.array([0.0, step_mm]))
    ]
    return np.stack(columns, axis=2)


def solve_paper_mm(
    view: View, points_px: FloatArray, guess_mm: FloatArray, steps: int = NEWTON_STEPS
) -> FloatArray:
    """Newton's method for the paper point seen at each pixel, (N, 2); NaN where there is none."""
    limit_mm = np.array(view.half_size_mm) + BEYOND_PAPER_MM
    found_mm = np.clip(guess_mm, -limit_mm, limit_mm)
    error_px = np.full(len(points_px), np.inf)
    open_ones = np.arange(len(points_px))
    for _ in range(steps):
        here_mm = found_mm[open_ones]
        miss_px = view.paper_to_px(here_mm) - points_px[open_ones]
        error_px[open_ones] = np.abs(miss_px).max(axis=1)
        unsettled = error_px[open_ones] > SETTLED_PX
        open_ones, here_mm, miss_px = (part[unsettled] for part in (open_ones, here_mm, miss_px))
        if not len(open_ones):
            break
        change_mm = np.linalg.solve(slopes(view, here_mm), miss_px[:, :, None])[:, :, 0]
        # A long step may leave the region where the formulas are one-to-one.
        change_mm *= np.minimum(1.0, 40.0 / np.maximum(np.hypot(*change_mm.T), 1e-9))[:, None]
        found_mm[open_ones] = np.clip(here_mm - change_mm, -limit_mm, limit_mm)
    found_mm[error_px > 100.0 * SETTLED_PX] = np.nan
    return found_mm


@dataclass(frozen=True, slots=True, eq=False)
class InverseGrid:
    """paper_mm at the centres of square blocks of pixels.

    Block (0, 0) has its outer corner at pixel `first_px`, half a pixel before that pixel's
    centre. `paper_mm` is float64, shape (rows, columns, 2), NaN where no paper is.
    """

    first_px: tuple[int, int]
    block_px: int
    paper_mm: FloatArray


def inverse_grid(view: View) -> InverseGrid | None:
    """The paper seen by each block of the sensor that it covers; None if it covers none.

    The map is solved on blocks of 64 pixels and refined on blocks of 8, or of 4 where a crease
    bends it: linear interpolation between those is within 0.02 px.
    """
    width_px, height_px = view.camera.size_px
    edge_px = view.outline_px()
    low = np.maximum(np.floor(edge_px.min(axis=0)).astype(int) - 2, 0)
    high = np.minimum(np.ceil(edge_px.max(axis=0)).astype(int) + 2, [width_px, height_px])
    if (high <= low).any():
        return None
    block_px = COARSE_STEP if view.surface.fold is None else COARSE_STEP // 2
    low -= low % 64
    counts = -(-(high - low) // 64)
    rough = _rough_blocks(view, low, counts)
    factor = 64 // block_px
    guess = cv2.resize(rough, None, fx=factor, fy=factor, interpolation=cv2.INTER_LINEAR)
    # One block of 64 was added on each side for this interpolation; one small block is kept.
    guess = guess[factor - 1 : 1 - factor, factor - 1 : 1 - factor]
    rows, columns = guess.shape[:2]
    points_px = _centres(low - block_px, block_px, columns, rows)
    flat = guess.reshape(-1, 2)
    known = np.isfinite(flat).all(axis=1)
    paper_mm = np.full_like(flat, np.nan)
    paper_mm[known] = solve_paper_mm(view, points_px[known], flat[known], REFINING_STEPS)
    first = (int(low[0]), int(low[1]))
    return InverseGrid(first, block_px, paper_mm.reshape(rows, columns, 2))


def _rough_blocks(view: View, low: NDArray[np.int64], counts: NDArray[np.int64]) -> FloatArray:
    """paper_mm of blocks of 64 pixels, one more on each side; kept finite past the paper."""
    columns, rows = int(counts[0]) + 2, int(counts[1]) + 2
    points_px = _centres(low - 64, 64, columns, rows)
    guess_mm = view.first_guess(points_px)
    paper_mm = solve_paper_mm(view, points_px, guess_mm, REFINING_STEPS)
    lost = ~np.isfinite(paper_mm).all(axis=1)
    paper_mm[lost] = guess_mm[lost]
    return paper_mm.reshape(rows, columns, 2)


def _centres(first_px: NDArray[np.int64], block_px: int, columns: int, rows: int) -> FloatArray:
    x = first_px[0] - 0.5 + (np.arange(columns) + 0.5) * block_px
    y = first_px[1] - 0.5 + (np.arange(rows) + 0.5) * block_px
    return np.stack(np.meshgrid(x, y), axis=-1).reshape(-1, 2)


def desk_mm(camera: Camera, points_px: FloatArray) -> FloatArray:
    """Points of the flat desk, (N, 2), seen at these pixels; far away above the horizon."""
    half = np.array(camera.size_px) / 2.0
    bent = (points_px - half + 0.5) / camera.focal_px
    corner_sq = float((half**2).sum()) / camera.focal_px**2
    first, second = camera.distortion
    seen = bent.copy()
    for _ in range(20):
        r_sq = (seen**2).sum(axis=1, keepdims=True) / corner_sq
        seen = bent / (1.0 + r_sq * (first + r_sq * second))
    turn = camera.rotation()
    lean_x, lean_y, upright = turn[:, 2]
    towards = np.maximum(upright - lean_x * seen[:, 0] - lean_y * seen[:, 1], 0.02)
    depth = upright * camera.distance_mm / towards
    turned = np.column_stack([seen * depth[:, None], camera.distance_mm - depth])
    return np.asarray((turned @ turn)[:, :2] + np.array(camera.aim_mm))


def framed(camera: Camera, points_mm: FloatArray, fill: float) -> Camera:
    """The camera moved so that points of space, (N, 3), span a share of the picture's middle."""
    size_px = np.array(camera.size_px)
    for _ in range(12):
        seen_px = camera.to_px(points_mm)
        low, high = seen_px.min(axis=0), seen_px.max(axis=0)
        middle_px = np.stack([(low + high) / 2.0, (size_px - 1.0) / 2.0])
        now_mm, wanted_mm = desk_mm(camera, middle_px)
        aim_mm = np.array(camera.aim_mm) + now_mm - wanted_mm
        nearer = float(((high - low) / size_px).max()) / fill
        camera = replace(
            camera,
            aim_mm=(float(aim_mm[0]), float(aim_mm[1])),
            distance_mm=camera.distance_mm * float(np.clip(nearer, 0.5, 2.0)),
        )
    return camera
