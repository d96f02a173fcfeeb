"""Measure the grid finder on drawn photographs of known geometry and print a table.

Run from the repository root: ``python tests/measure_photos.py [first seed] [number]``; every
second photo has 3 megapixels, the others 8 to 12.
"""

from __future__ import annotations

import os
import sys
from dataclasses import dataclass
from pathlib import Path

if __name__ == "__main__":  # run as a script, the repository root is not on the path
    # As the program itself does: the many small products are slower on several threads.
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

import numpy as np
from numpy.typing import NDArray

from imaging import GridNotFound, SheetMap, find_grid
from tests.measure_grid import as_picture
from tests.photos import Photo, photo

FloatArray = NDArray[np.float64]

LOST_MM = 0.5
_WRONG_FACTOR_MM = 1.0


@dataclass(frozen=True, slots=True)
class PhotoScore:
    """One photo held against its truth.

    Attributes
    ----------
    refused : str
        Code of the refusal; empty where a map was given.
    certain, wrong_factor : bool
        What the map says of its scale, and whether a square is off by more than it may be.
    span_95_mm : float
        95th percentile of the error of spans of 5 to 50 mm.
    lost : int
        Covered grid points that are off by half a small square or more.
    within : float
        Share of covered points within two of their standard errors.
    covered : float
        Share of the visible grid points.
    """

    refused: str = ""
    certain: bool = False
    wrong_factor: bool = False
    span_95_mm: float = 0.0
    lost: int = 0
    within: float = 0.0
    covered: float = 0.0


def covered_errors_mm(found: SheetMap, taken: Photo) -> tuple[FloatArray, FloatArray, float]:
    """Picture and error of covered visible grid points, (N, 2) each, and the covered share.

    Of several sheets in the photo the one counts of which most is covered. Which way up the
    sheet is, a grid does not tell: of the eight turns the nearest counts. Whole large squares
    between the origins are taken out, where 1 mm is certain.
    """
    seen = []
    for sheet in taken.sheets:
        points_mm = sheet.grid_points_mm(2.0)
        points_px = sheet.to_px(points_mm)
        seen.append((points_mm, points_px, found.covers(points_px)))
    points_mm, points_px, covered = max(seen, key=lambda one: int(one[2].sum()))
    points_mm, points_px = points_mm[covered], points_px[covered]
    seen_mm = found.to_mm(points_px)
    step_mm = 5.0 if found.scale_is_certain else 1.0
    tried = []
    for swapped in (seen_mm, seen_mm[:, ::-1]):
        for signs in ((1, 1), (1, -1), (-1, 1), (-1, -1)):
            errors = swapped * signs - points_mm
            tried.append(errors - step_mm * np.round(np.median(errors, axis=0) / step_mm))
    best = min(tried, key=lambda errors: float(np.median(np.abs(errors))))
    return points_px, best, float(covered.mean())


def span_error_95_mm(points_px: FloatArray, errors_mm: FloatArray, px_per_mm: float) -> float:
    """95th percentile of the error of spans of 5 to 50 mm."""
    rng = np.random.default_rng(0)
    start, end = rng.integers(0, len(errors_mm), (2, 20000))
    apart_mm = np.hypot(*(points_px[start] - points_px[end]).T) / px_per_mm
    fits = (apart_mm >= 5.0) & (apart_mm <= 50.0)
    return float(np.percentile(np.abs(errors_mm[start] - errors_mm[end])[fits], 95.0))


def score_photo(taken: Photo) -> PhotoScore:
    """Find the grid of a sheet in a photo and hold it against the truth."""
    found = find_grid(as_picture(taken.pixels))
    if isinstance(found, GridNotFound):
        return PhotoScore(refused=found.code)
    points_px, errors_mm, covered = covered_errors_mm(found, taken)
    if not len(points_px):
        return PhotoScore(certain=found.scale_is_certain, wrong_factor=True)
    off_mm = np.abs(errors_mm)
    return PhotoScore(
        certain=found.scale_is_certain,
        wrong_factor=float(np.median(off_mm)) > _WRONG_FACTOR_MM,
        span_95_mm=span_error_95_mm(points_px, errors_mm, found.x_pitch_px_per_mm),
        lost=int((off_mm.max(axis=1) >= LOST_MM).sum()),
        within=float((np.hypot(*errors_mm.T) < 2.0 * found.standard_error_mm(points_px)).mean()),
        covered=covered,
    )


def main() -> None:
    """Print a line for each photo, and the table."""
    first, number = (int(sys.argv[i]) if len(sys.argv) > i else n for i, n in ((1, 900), (2, 60)))
    scores = []
    for seed in range(first, first + number):
        taken = photo(seed, megapixels=3.0 if seed % 2 else None)
        scores.append(score_photo(taken))
        print(seed, taken.applied.get("copy_of", "photo"), scores[-1], file=sys.stderr, flush=True)
    mapped = [score for score in scores if not score.refused]
    right = [score for score in mapped if not score.wrong_factor]
    spans, shares = [s.span_95_mm for s in right], [s.covered for s in right]
    wrong = [score.certain for score in mapped if score.wrong_factor]
    print(f"photos {len(scores)}, refused {len(scores) - len(mapped)}")
    print(f"scale uncertain {sum(not s.certain for s in mapped)}")
    print(f"wrong factor: certain {sum(wrong)}, uncertain {len(wrong) - sum(wrong)}")
    print(f"span error 95 % of a photo, mm: median {np.median(spans):.4f}, worst {max(spans):.4f}")
    print(f"photos within 0.05 mm: {100 * np.mean(np.array(spans) <= 0.05):.0f} %")
    print(f"covered points off by {LOST_MM} mm or more: {sum(s.lost for s in right)}")
    print(f"within 2 standard errors: {100 * np.mean([s.within for s in right]):.0f} %")
    print(f"covered share: median {np.median(shares):.2f}, worst {min(shares):.2f}")


if __name__ == "__main__":
    main()
