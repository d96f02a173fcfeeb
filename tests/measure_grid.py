"""Measure the grid finder against pages of known geometry and print a table.

Run from the repository root: ``python tests/measure_grid.py [pages a condition]``. The slow
test of `tests/imaging/test_lattice.py` holds the same figures against the bars.
"""

from __future__ import annotations

import os
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

if __name__ == "__main__":  # run as a script, the repository root is not on the path
    # As the program itself does: the many small products are slower on several threads.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

import cv2
import numpy as np
from numpy.typing import NDArray

from imaging import GridNotFound, Picture, SheetMap, find_grid
from sample_scans.page import GRID_COLOURS, RenderedPage
from tests.pages import flat_page, random_flat_page

FloatArray = NDArray[np.float64]

MM_PER_S = 25.0
SPANS_A_PAGE = 300
MODES = ("colour", "grey", "one_bit")
THIN = ("solid", "dotted", "absent")
DPI = (100.0, 150.0, 200.0, 300.0, 600.0)


@dataclass(frozen=True, slots=True, eq=False)
class Score:
    """One page held against its truth.

    Attributes
    ----------
    refused : str
        Code of the refusal; empty where a map was given.
    certain, wrong_factor : bool
        What the map says of its scale, and whether a square is off by more than 1 %.
    span_errors_mm, normalised : ndarray of float64, shape (N,)
        Errors of spans along x and y; the same over their stated standard error.
    origin_off_mm : float
        Distance of the origin from the nearest crossing of bold lines.
    covered, covered_outside : float
        Share of points on the grid, and of points well beside it, that the map covers.
    time_ratio : float
        Time over that of decoding the page from JPEG.
    """

    refused: str = ""
    certain: bool = False
    wrong_factor: bool = False
    span_errors_mm: FloatArray = field(default_factory=lambda: np.empty(0))
    normalised: FloatArray = field(default_factory=lambda: np.empty(0))
    origin_off_mm: float = 0.0
    covered: float = 1.0
    covered_outside: float = 0.0
    time_ratio: float = 0.0


def as_picture(pixels: NDArray[np.uint8], name: str = "page.png") -> Picture:
    """A picture as if opened."""
    pixels = np.ascontiguousarray(pixels)
    pixels.setflags(write=False)
    return Picture(pixels, name, None, "0" * 64)


def score_page(page: RenderedPage, *, timed: bool = False) -> Score:
    """Find the grid of a page and hold it against the truth."""
    picture = as_picture(page.pixels)
    begin = time.process_time()
    found = find_grid(picture)
    taken = time.process_time() - begin
    ratio = taken / _decode_s(page.pixels) if timed else 0.0
    if isinstance(found, GridNotFound):
        return Score(refused=found.code, time_ratio=ratio)
    return score_map(found, page, ratio)


def score_map(found: SheetMap, page: RenderedPage, ratio: float = 0.0) -> Score:
    """Hold a map against the truth of its page."""
    start_mm, end_mm = spans_on(page, seed=0)
    start_px, end_px = page.to_px(start_mm), page.to_px(end_mm)
    errors = found.to_mm(end_px) - found.to_mm(start_px) - (end_mm - start_mm)
    stated = found.span_standard_error_mm(start_px, end_px)
    pitches = np.array([found.x_pitch_px_per_mm, found.y_pitch_px_per_mm])
    factors = pitches / np.hypot(*page.px_from_mm[:, :2])
    origin_mm = page.to_mm(np.array([found.origin_px]))
    inside, outside = points_on_and_off(page)
    return Score(
        certain=found.scale_is_certain,
        wrong_factor=bool((np.abs(factors - 1.0) > 0.01).any()),
        span_errors_mm=np.abs(errors).ravel(),
        normalised=(errors / stated).ravel(),
        origin_off_mm=float(np.abs(origin_mm - 5.0 * np.round(origin_mm / 5.0)).max()),
        covered=float(found.covers(inside).mean()),
        covered_outside=float(found.covers(outside).mean()) if len(outside) else 0.0,
        time_ratio=ratio,
    )


def spans_on(page: RenderedPage, seed: int) -> tuple[FloatArray, FloatArray]:
    """Ends of spans of 5 to 50 mm in any direction, both on the grid, in sheet_mm."""
    rng = np.random.default_rng(seed)
    left, top, right, bottom = page.grid_mm
    count = 20 * SPANS_A_PAGE
    start = rng.uniform((left, top), (right, bottom), (count, 2))
    angle, length = rng.uniform(0.0, 2.0 * np.pi, count), rng.uniform(5.0, 50.0, count)
    end = start + length[:, None] * np.column_stack([np.cos(angle), np.sin(angle)])
    width_px, height_px = page.pixels.shape[1], page.pixels.shape[0]
    fits = ((end >= (left, top)) & (end <= (right, bottom))).all(axis=1)
    for ends_px in (page.to_px(start), page.to_px(end)):
        fits &= ((ends_px >= 0) & (ends_px <= (width_px - 1, height_px - 1))).all(axis=1)
    return start[fits][:SPANS_A_PAGE], end[fits][:SPANS_A_PAGE]


def points_on_and_off(page: RenderedPage) -> tuple[FloatArray, FloatArray]:
    """Points of the picture 2.5 mm inside the grid's edge, and 2.5 mm beside it, in picture_px."""
    rng = np.random.default_rng(1)
    height_px, width_px = page.pixels.shape[:2]
    points_px = rng.uniform((0, 0), (width_px - 1, height_px - 1), (2000, 2))
    points_mm = page.to_mm(points_px)
    left, top, right, bottom = page.grid_mm
    depth = np.minimum(points_mm - (left, top), (right, bottom) - points_mm).min(axis=1)
    return points_px[depth > 2.5], points_px[depth < -2.5]


def _decode_s(pixels: NDArray[np.uint8]) -> float:
    """Shortest of three decodings of the page as JPEG, in seconds."""
    _, data = cv2.imencode(".jpg", np.ascontiguousarray(pixels[:, :, ::-1]), [1, 88])
    times = []
    for _ in range(3):
        begin = time.process_time()
        cv2.imdecode(data, cv2.IMREAD_COLOR)
        times.append(time.process_time() - begin)
    return min(times)


def page_options(dpi: float, number: int) -> dict[str, Any]:
    """Options of `flat_page`: every colour, mode and thin line in turn, the rest by lot."""
    colours = list(GRID_COLOURS)
    colour = colours[number % len(colours)]
    mode = MODES[number // len(colours) % len(MODES)]
    thin = THIN[number // (len(colours) * len(MODES)) % len(THIN)]
    rng = np.random.default_rng([round(dpi), number])
    one_bit = mode == "one_bit"
    strength = float(rng.uniform(0.6, 0.9) if one_bit else rng.uniform(0.3, 0.7))
    yellowing = 0.0 if one_bit else float(rng.choice([0.0, rng.uniform(0.0, 40.0)]))
    line_grey = float(np.dot(GRID_COLOURS[colour], (0.299, 0.587, 0.114)))
    return {
        "dpi": dpi,
        "colour": colour,
        "mode": mode,
        "thin": thin,
        "thin_strength": strength,
        "bold_strength": float(min(1.0, strength + rng.uniform(0.15, 0.4))),
        "thin_width_mm": float(rng.uniform(0.1, 0.15)),
        "bold_width_mm": float(rng.uniform(0.2, 0.4)),
        "one_bit_threshold": 248.0 - 0.25 * strength * (248.0 - line_grey),
        "skew_deg": float(rng.choice([0.0, rng.uniform(-1.0, 1.0), rng.uniform(-5.0, 5.0)])),
        "y_over_x": float(rng.choice([1.0, rng.uniform(0.98, 1.02)])),
        "printed_scale": float(rng.choice([1.0, 0.94, rng.uniform(0.85, 1.1)])),
        "shift_px": (float(rng.uniform(-3, 3)), float(rng.uniform(-3, 3))),
        "paper": (253, round(251 - 0.3 * yellowing), round(247 - yellowing)),
        "shading": 0.0 if one_bit else float(rng.choice([0.0, rng.uniform(0.0, 30.0)])),
        "noise": 0.3 if one_bit else float(rng.choice([0.0, rng.uniform(0.0, 5.0)])),
        "blur_sigma_px": float(rng.uniform(0.0, 0.3 if one_bit else 1.0)),
        "jpeg_quality": None if one_bit else [None, 60, 80, 92][int(rng.integers(0, 4))],
    }


def pages_at(dpi: float, count: int) -> Iterator[RenderedPage]:
    """Pages of one resolution; 63 of them hold every colour, mode and thin line."""
    for number in range(count):
        yield flat_page(seed=number, **page_options(dpi, number))


def random_pages(count: int) -> Iterator[RenderedPage]:
    """Pages with everything by lot, 150 to 400 dots per inch."""
    for seed in range(count):
        yield random_flat_page(seed)


def conditions(count: int) -> dict[str, Callable[[], Iterator[RenderedPage]]]:
    """Name of each row of the table and its pages."""
    rows: dict[str, Callable[[], Iterator[RenderedPage]]] = {
        "random 150-400 dpi": lambda: random_pages(count)
    }
    for dpi in DPI:
        rows[f"{dpi:.0f} dpi"] = lambda dpi=dpi: pages_at(dpi, min(count, 63))
    return rows


@dataclass(frozen=True, slots=True)
class Summary:
    """A row of the table."""

    pages: int
    refused: int
    uncertain: int
    wrong_certain: int
    wrong_uncertain: int
    median_mm: float
    p95_mm: float
    worst_page_mm: float
    normalised: float
    origin_off_mm: float
    covered: float
    covered_outside: float
    time_ratio: float


def summary_of(scores: list[Score]) -> Summary:
    """Pool the pages; errors over those with the right factor."""
    mapped = [score for score in scores if not score.refused]
    right = [score for score in mapped if not score.wrong_factor]
    certain = [score for score in right if score.certain]
    errors = np.concatenate([score.span_errors_mm for score in right])
    return Summary(
        pages=len(scores),
        refused=len(scores) - len(mapped),
        uncertain=sum(not score.certain for score in mapped),
        wrong_certain=sum(score.wrong_factor and score.certain for score in mapped),
        wrong_uncertain=sum(score.wrong_factor and not score.certain for score in mapped),
        median_mm=float(np.median(errors)),
        p95_mm=float(np.percentile(errors, 95.0)),
        worst_page_mm=max(float(np.percentile(score.span_errors_mm, 95.0)) for score in right),
        normalised=float(np.sqrt(np.mean([np.mean(score.normalised**2) for score in right]))),
        origin_off_mm=max((score.origin_off_mm for score in certain), default=0.0),
        covered=float(np.mean([score.covered for score in right])),
        covered_outside=float(np.mean([score.covered_outside for score in right])),
        time_ratio=float(np.median([score.time_ratio for score in scores])),
    )


def row_of(name: str, row: Summary) -> str:
    """One line of the table, as Markdown."""
    cells = [
        name,
        str(row.pages),
        str(row.refused),
        str(row.uncertain),
        f"{row.wrong_certain} / {row.wrong_uncertain}",
        f"{row.median_mm:.4f} / {row.p95_mm:.4f} / {row.worst_page_mm:.4f}",
        f"{row.p95_mm / MM_PER_S * 1000:.3f}",
        f"{row.normalised:.2f}",
        f"{row.origin_off_mm:.3f}",
        f"{100 * row.covered:.1f} / {100 * row.covered_outside:.1f}",
        f"{row.time_ratio:.1f}",
    ]
    return "| " + " | ".join(cells) + " |"


HEADER = (
    "| pages | number | refused | scale uncertain | wrong factor, certain / uncertain "
    "| span error, mm: median / 95 % / worst page's 95 % | 95 %, ms at 25 mm/s "
    "| error / stated | origin off, mm | covered on / off grid, % | time / decode |\n"
    + "|" + " --- |" * 11
)  # fmt: skip


def main() -> None:
    """Print the table."""
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 200
    print(HEADER)
    for name, pages in conditions(count).items():
        scores = [score_page(page, timed=True) for page in pages()]
        print(row_of(name, summary_of(scores)), flush=True)
        codes = [score.refused for score in scores if score.refused]
        if codes:
            print(f"  refused: {', '.join(codes)}", file=sys.stderr)


if __name__ == "__main__":
    main()
