"""Readings for the tests: invented, small, with every field in use."""

from __future__ import annotations

import numpy as np

from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    HandFigure,
    PictureIdentity,
    PicturePoint,
    Reading,
    Setting,
)
from imaging.sheet_map import Coverage, SheetMap


def example_map(size_px: tuple[int, int] = (1200, 900), px_per_mm: float = 8.0) -> SheetMap:
    """An upright map with a slightly different pitch down the paper, covered everywhere."""
    width_px, height_px = size_px
    cells = np.ones((-(-height_px // 40), -(-width_px // 40)), dtype=bool)
    variances = np.diag([1e-4, 1e-4, 1e-8, 1e-8, 1e-8, 1e-8])
    return SheetMap(
        picture_size_px=size_px,
        origin_px=(12.0, 9.0),
        x_step_px=(px_per_mm, 0.01),
        y_step_px=(-0.01, px_per_mm * 0.99),
        covariance=tuple(tuple(float(number) for number in row) for row in variances),
        scatter_mm=0.001,
        coverage=Coverage.from_cells(cells, 40.0),
        scale_is_certain=True,
        evidence=("Bold lines seen every fifth line.",),
    )


def example_caliper(
    caliper_id: int = 1,
    kind: CaliperKind = CaliperKind.TIME,
    quantity: str | None = "qrs",
    lead: str | None = "II",
    beat: int | None = 1,
) -> Caliper:
    """A caliper 20 px wide and 10 px high."""
    start, end = PicturePoint(100.0, 200.0, 2.5), PicturePoint(120.0, 190.0, 0.25)
    return Caliper(caliper_id, kind, start, end, quantity, lead, beat)


def example_reading() -> Reading:
    """A reading with a map, settings of several kinds, two calipers and a hand figure."""
    calibration = Calibration(
        paper_speed_mm_per_s=Setting(25.0, Evidence.READER, confirmed=True),
        gain_mm_per_mv=Setting(10.0),
        chest_gain_mm_per_mv=Setting(5.0, Evidence.LEGEND),
    )
    return Reading(
        picture=PictureIdentity("sheet éñ 1.png", "ab" * 32, (1200, 900)),
        sheet_map=example_map(),
        calibration=calibration,
        calipers=(
            example_caliper(1),
            example_caliper(2, CaliperKind.COMB, quantity=None, lead=None, beat=None),
        ),
        hand_figures=(HandFigure("qrs", 92.0, "II"),),
        reader="A. Reader",
        colleague="B. Colleague",
        next_caliper_id=3,
        created_at="2026-01-02T03:04:05+00:00",
        changed_at="2026-01-02T03:05:05+00:00",
        software_version="Smallsquare 0.1.0",
    )
