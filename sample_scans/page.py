"""Draw an invented ECG page as a flat-bed scanner would deliver it, with its geometry known.

Frames: ``picture_px``, (0, 0) the centre of the first pixel, y down; ``sheet_mm``, one small
square = 1 whatever the printed size, x right, y down, bold lines at multiples of 5.
Grid lines and the pen are drawn analytically (see `pen.line_overlap`), so that the centre of
a line is where the map says: the tests measure it, and ask for 0.05 px.
Colours mix in sRGB values, so that centroids of darkness are exact.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, Literal

import cv2
import numpy as np
from numpy.typing import NDArray

from sample_scans.pen import draw_pen_lines, line_overlap
from sample_scans.text import Label, draw_labels

FloatArray = NDArray[np.float64]
Colour = tuple[int, int, int]

MM_PER_INCH = 25.4
ROWS_AT_ONCE = 256

GRID_COLOURS: dict[str, Colour] = {
    "red": (226, 80, 80),
    "pink": (244, 150, 165),
    "orange": (240, 150, 80),
    "blue": (110, 150, 220),
    "green": (100, 180, 120),
    "grey": (150, 150, 150),
    "brown": (175, 130, 90),
}


@dataclass(frozen=True, slots=True, eq=False)
class Strip:
    """One lead's drawn line.

    Attributes
    ----------
    name : str
        Lead name.
    x_mm, baseline_mm : float
        Where the first sample stands, and the height of zero, in sheet_mm.
    heights_mm : ndarray of float64, shape (N,)
        Samples above the baseline; up is positive.
    step_mm : float
        Distance from sample to sample along the paper.
    """

    name: str
    x_mm: float
    baseline_mm: float
    heights_mm: FloatArray
    step_mm: float

    def points_mm(self) -> FloatArray:
        """The drawn line in sheet_mm, shape (N, 2)."""
        x_mm = self.x_mm + self.step_mm * np.arange(len(self.heights_mm))
        return np.column_stack([x_mm, self.baseline_mm - self.heights_mm])


@dataclass(frozen=True, slots=True, eq=False)
class Stroke:
    """Any other pen line: calibration pulse, separator tick; `points_mm` has shape (N, 2)."""

    points_mm: FloatArray
    width_mm: float | None = None


@dataclass(frozen=True, slots=True, eq=False)
class Page:
    """What stands on the sheet.

    Attributes
    ----------
    paper_mm : (float, float)
        Width and height of the paper in real millimetres (A4 landscape is 297 by 210).
    origin_on_paper_mm : (float, float)
        Where the sheet's origin lies on the paper, in real millimetres from its corner.
    grid_mm : (float, float, float, float)
        Left, top, right, bottom of the printed grid in sheet_mm.
    strips, strokes, labels : tuple
        Leads, other pen lines, printed words.
    """

    paper_mm: tuple[float, float]
    origin_on_paper_mm: tuple[float, float]
    grid_mm: tuple[float, float, float, float]
    strips: tuple[Strip, ...] = ()
    strokes: tuple[Stroke, ...] = ()
    labels: tuple[Label, ...] = ()


@dataclass(frozen=True, slots=True)
class Scan:
    """How the sheet lies on the glass; `y_over_x` is the ratio of y pitch to x pitch."""

    dpi: float = 300.0
    printed_scale: float = 1.0
    y_over_x: float = 1.0
    skew_deg: float = 0.0
    shift_px: tuple[float, float] = (0.0, 0.0)


@dataclass(frozen=True, slots=True)
class Ruling:
    """Print of the grid. Strengths run from 0 (paper) to 1 (`colour`)."""

    colour: Colour = GRID_COLOURS["red"]
    thin: Literal["solid", "dotted", "absent"] = "solid"
    thin_width_mm: float = 0.12
    thin_strength: float = 0.5
    bold_width_mm: float = 0.25
    bold_strength: float = 0.85
    bold: bool = True
    dots_per_mm: int = 5


@dataclass(frozen=True, slots=True)
class Finish:
    """Paper, ink and what the scanner adds. `shading` and `noise` are in grey levels of 255."""

    paper: Colour = (252, 250, 246)
    ink: Colour = (25, 25, 35)
    pen_width_mm: float = 0.35
    shading: float = 0.0
    blur_sigma_px: float = 0.0
    noise: float = 0.0
    mode: Literal["colour", "grey", "one_bit"] = "colour"
    one_bit_threshold: float = 200.0
    jpeg_quality: int | None = None


@dataclass(frozen=True, slots=True, eq=False)
class RenderedPage:
    """A drawn page and where everything on it is.

    Attributes
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        sRGB.
    px_from_mm : ndarray of float64, shape (2, 3)
        ``picture_px = px_from_mm @ (x_mm, y_mm, 1)``.
    page, scan, ruling, finish
        What was asked for; `page.grid_mm` is where the grid is printed.
    """

    pixels: NDArray[np.uint8]
    px_from_mm: FloatArray
    page: Page
    scan: Scan
    ruling: Ruling
    finish: Finish

    @property
    def grid_mm(self) -> tuple[float, float, float, float]:
        """Left, top, right, bottom of the printed grid in sheet_mm."""
        return self.page.grid_mm

    def to_px(self, points_mm: FloatArray) -> FloatArray:
        """Sheet points to picture points, (N, 2) -> (N, 2)."""
        return apply_affine(self.px_from_mm, points_mm)

    def to_mm(self, points_px: FloatArray) -> FloatArray:
        """Picture points to sheet points, (N, 2) -> (N, 2)."""
        return apply_affine(invert_affine(self.px_from_mm), points_px)

    @property
    def truth(self) -> dict[str, Any]:
        """The geometry in plain values, ready for JSON."""
        return {
            "picture_size_px": [self.pixels.shape[1], self.pixels.shape[0]],
            "px_from_mm": self.px_from_mm.tolist(),
            "grid_mm": list(self.page.grid_mm),
            "bold_every_mm": 5 if self.ruling.bold else None,
            "pen_width_mm": self.finish.pen_width_mm,
            "dpi": self.scan.dpi,
            "strips": [
                {
                    "lead": strip.name,
                    "x_mm": strip.x_mm,
                    "baseline_mm": strip.baseline_mm,
                    "length_mm": strip.step_mm * (len(strip.heights_mm) - 1),
                }
                for strip in self.page.strips
            ],
        }


def apply_affine(matrix: FloatArray, points: FloatArray) -> FloatArray:
    """Map points, shape (N, 2), by a 2 by 3 affine."""
    mapped: FloatArray = np.asarray(points, dtype=np.float64) @ matrix[:, :2].T + matrix[:, 2]
    return mapped


def invert_affine(matrix: FloatArray) -> FloatArray:
    """The 2 by 3 affine that undoes another."""
    linear = np.linalg.inv(matrix[:, :2])
    return np.column_stack([linear, -linear @ matrix[:, 2]])


def picture_size_px(page: Page, scan: Scan) -> tuple[int, int]:
    """Width and height of the scan of the whole paper."""
    width_mm, height_mm = page.paper_mm
    px_per_real_mm = scan.dpi / MM_PER_INCH
    return round(width_mm * px_per_real_mm), round(height_mm * px_per_real_mm)


def px_from_mm(page: Page, scan: Scan) -> FloatArray:
    """The map of a page on the glass, shape (2, 3): scaled, turned about its centre, shifted.

    A positive skew turns the sheet clockwise.
    """
    px_per_real_mm = scan.dpi / MM_PER_INCH
    x_pitch_px = px_per_real_mm * scan.printed_scale
    angle = np.deg2rad(scan.skew_deg)
    turn = np.array([[np.cos(angle), -np.sin(angle)], [np.sin(angle), np.cos(angle)]])
    centre_px = (np.array(picture_size_px(page, scan)) - 1.0) / 2.0
    # A length on the paper starts at the picture's edge, half a pixel before the first centre.
    origin_px = np.array(page.origin_on_paper_mm) * px_per_real_mm - 0.5
    origin_px = centre_px + turn @ (origin_px - centre_px) + np.array(scan.shift_px)
    linear = turn @ np.diag([x_pitch_px, x_pitch_px * scan.y_over_x])
    return np.column_stack([linear, origin_px])


def render_page(
    page: Page,
    scan: Scan = Scan(),
    ruling: Ruling = Ruling(),
    finish: Finish = Finish(),
    seed: int = 0,
) -> RenderedPage:
    """Draw a page. The same arguments and seed give the same pixels on the same libraries."""
    matrix = px_from_mm(page, scan)
    width_px, height_px = picture_size_px(page, scan)
    ink = np.zeros((height_px, width_px), dtype=np.float32)
    pitch_px = float(np.sqrt(abs(np.linalg.det(matrix[:, :2]))))
    for line in (*page.strips, *page.strokes):
        is_stroke = isinstance(line, Stroke)
        points_mm = line.points_mm if isinstance(line, Stroke) else line.points_mm()
        width_mm = (line.width_mm if is_stroke else None) or finish.pen_width_mm
        draw_pen_lines(ink, apply_affine(matrix, points_mm), width_mm * pitch_px)
    draw_labels(ink, page.labels, matrix)
    canvas = _print_on_paper(ink, page, ruling, finish, matrix)
    pixels = _scan_canvas(canvas, finish, np.random.default_rng(seed))
    return RenderedPage(pixels, matrix, page, scan, ruling, finish)


def _print_on_paper(
    ink: NDArray[np.float32], page: Page, ruling: Ruling, finish: Finish, matrix: FloatArray
) -> NDArray[np.float32]:
    """Paper, grid and ink as grey levels, shape (height, width, 3), a band of rows at a time."""
    height_px, width_px = ink.shape
    canvas = np.empty((height_px, width_px, 3), dtype=np.float32)
    for top in range(0, height_px, ROWS_AT_ONCE):
        rows = slice(top, min(top + ROWS_AT_ONCE, height_px))
        ruled = grid_strength(rows, width_px, page.grid_mm, ruling, matrix)
        for channel in range(3):
            paper, line, pen = (
                float(colour[channel]) for colour in (finish.paper, ruling.colour, finish.ink)
            )
            band = paper + (line - paper) * ruled
            canvas[rows, :, channel] = band + (pen - band) * ink[rows]
    return canvas


def grid_strength(
    rows: slice,
    width_px: int,
    grid_mm: tuple[float, float, float, float],
    ruling: Ruling,
    matrix: FloatArray,
) -> NDArray[np.float32]:
    """How strongly the grid colours each pixel of a band of rows, 0 to 1."""
    inverse = invert_affine(matrix)
    x_px = np.arange(width_px, dtype=np.float64)
    y_px = np.arange(rows.start, rows.stop, dtype=np.float64)[:, None]
    # Both coordinates are kept as float32: 3e-5 mm at 300 mm is below 0.001 px at 600 dpi.
    x_mm, y_mm = ((row[0] * x_px + (row[1] * y_px + row[2])).astype(np.float32) for row in inverse)
    px_per_mm = (
        1.0 / float(np.hypot(*inverse[0, :2])),
        1.0 / float(np.hypot(*inverse[1, :2])),
    )
    left, top, right, bottom = grid_mm
    half_mm = max(ruling.thin_width_mm, ruling.bold_width_mm) / 2.0
    inside = _inside(x_mm, left - half_mm, right + half_mm, px_per_mm[0])
    inside *= _inside(y_mm, top - half_mm, bottom + half_mm, px_per_mm[1])
    upright = _lines(x_mm, y_mm, ruling, px_per_mm)
    level = _lines(y_mm, x_mm, ruling, px_per_mm[::-1])
    strength: NDArray[np.float32] = inside * (1.0 - (1.0 - upright) * (1.0 - level))
    return strength


def _inside(
    place_mm: NDArray[np.float32], start_mm: float, end_mm: float, px_per_mm: float
) -> NDArray[np.float32]:
    """Share of each pixel between two edges."""
    middle_mm, width_px = (start_mm + end_mm) / 2.0, (end_mm - start_mm) * px_per_mm
    return line_overlap(np.abs(place_mm - np.float32(middle_mm)) * np.float32(px_per_mm), width_px)


def _lines(
    across_mm: NDArray[np.float32],
    along_mm: NDArray[np.float32],
    ruling: Ruling,
    px_per_mm: tuple[float, float],
) -> NDArray[np.float32]:
    """Strength of one family of lines, those at whole millimetres of `across_mm`."""
    nearest = np.round(across_mm)
    distance_px = np.abs(across_mm - nearest) * np.float32(px_per_mm[0])
    thin = line_overlap(distance_px, ruling.thin_width_mm * px_per_mm[0])
    thin *= np.float32(0.0 if ruling.thin == "absent" else ruling.thin_strength)
    if ruling.thin == "dotted":
        dots = along_mm * np.float32(ruling.dots_per_mm)
        dot_px = np.float32(px_per_mm[1] / ruling.dots_per_mm)
        thin *= line_overlap(np.abs(dots - np.round(dots)) * dot_px, 0.5 * float(dot_px))
    if not ruling.bold:
        return thin
    bold = line_overlap(distance_px, ruling.bold_width_mm * px_per_mm[0])
    bold *= np.float32(ruling.bold_strength)
    chosen: NDArray[np.float32] = np.where(np.mod(nearest, 5.0) == 0.0, bold, thin)
    return chosen


def _scan_canvas(
    canvas: NDArray[np.float32], finish: Finish, rng: np.random.Generator
) -> NDArray[np.uint8]:
    """Blur, shade, add noise and reduce to 8 bits; `canvas` is used up."""
    height_px, width_px = canvas.shape[:2]
    if finish.blur_sigma_px > 0.0:
        for channel in range(3):
            plane = np.ascontiguousarray(canvas[:, :, channel])
            canvas[:, :, channel] = cv2.GaussianBlur(plane, (0, 0), finish.blur_sigma_px)
    slope_x, slope_y, bow = rng.uniform(-1.0, 1.0, 3) * finish.shading / 3.0
    x = np.linspace(-1.0, 1.0, width_px, dtype=np.float32)
    pixels = np.empty((height_px, width_px, 3), dtype=np.uint8)
    for top in range(0, height_px, ROWS_AT_ONCE):
        band = canvas[top : top + ROWS_AT_ONCE]
        y = np.linspace(-1.0, 1.0, height_px, dtype=np.float32)[top : top + ROWS_AT_ONCE, None]
        shade = 1.0 + (slope_x * x + slope_y * y + bow * (x * x - 0.5)) / 255.0
        band = band * shade.astype(np.float32)[:, :, None]
        if finish.noise > 0.0:
            band += np.float32(finish.noise) * rng.standard_normal(band.shape, dtype=np.float32)
        pixels[top : top + ROWS_AT_ONCE] = np.clip(np.rint(band), 0, 255).astype(np.uint8)
    return _reduce(pixels, finish)


def _reduce(pixels: NDArray[np.uint8], finish: Finish) -> NDArray[np.uint8]:
    """Colour to grey or one bit, then through JPEG if asked."""
    if finish.mode != "colour":
        grey = cv2.cvtColor(pixels, cv2.COLOR_RGB2GRAY)
        if finish.mode == "one_bit":
            grey = np.where(grey < finish.one_bit_threshold, 0, 255).astype(np.uint8)
        pixels = np.repeat(grey[:, :, None], 3, axis=2)
    if finish.jpeg_quality is not None:
        quality = [cv2.IMWRITE_JPEG_QUALITY, finish.jpeg_quality]
        _, data = cv2.imencode(".jpg", np.ascontiguousarray(pixels[:, :, ::-1]), quality)
        pixels = np.ascontiguousarray(cv2.imdecode(data, cv2.IMREAD_COLOR)[:, :, ::-1])
    return pixels.astype(np.uint8, copy=False)
