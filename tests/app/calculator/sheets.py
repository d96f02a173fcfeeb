"""Readings on a synthetic sheet whose millimetres come out exactly."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise

import numpy as np

from app.calculator import Value, work_out
from app.calculator.uncertainty import Estimate
from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    PictureIdentity,
    PicturePoint,
    Reading,
    Setting,
    quantity,
)
from imaging.sheet_map import Coverage, SheetMap

SIZE_PX = (8192, 4096)
# A power of two: half and quarter millimetres are exact in picture_px.
PX_PER_MM = 16.0
CELL_PX = 512.0


def exact_map(
    x_px_per_mm: float = PX_PER_MM,
    y_px_per_mm: float = PX_PER_MM,
    *,
    scatter_mm: float = 0.0,
    step_variance_px2: float = 0.0,
    seen: bool = True,
    scale_is_certain: bool = True,
    source: str = "grid",
) -> SheetMap:
    """An upright map with its origin at (0, 0) px; only the steps have a variance."""
    cells = np.full((8, 16), seen)
    variances = np.diag([0.0, 0.0] + [step_variance_px2] * 4)
    return SheetMap(
        picture_size_px=SIZE_PX,
        origin_px=(0.0, 0.0),
        x_step_px=(x_px_per_mm, 0.0),
        y_step_px=(0.0, y_px_per_mm),
        covariance=tuple(tuple(float(number) for number in row) for row in variances),
        scatter_mm=scatter_mm,
        coverage=Coverage.from_cells(cells, CELL_PX),
        scale_is_certain=scale_is_certain,
        source=source,
    )


def calibration(
    speed_mm_per_s: float = 25.0, gain_mm_per_mv: float = 10.0, *, confirmed: bool = True
) -> Calibration:
    """A speed and a gain that somebody has confirmed, or nobody."""
    return Calibration(
        Setting(speed_mm_per_s, Evidence.READER, confirmed=confirmed),
        Setting(gain_mm_per_mv, Evidence.READER, confirmed=confirmed),
    )


def between(
    key: str | None,
    start_mm: tuple[float, float],
    end_mm: tuple[float, float],
    *,
    lead: str | None = "II",
    beat: int | None = 1,
    kind: CaliperKind | None = None,
    teeth: int = 2,
) -> Caliper:
    """A caliper between two places in sheet_mm of `exact_map`; its id is given by `reading_of`."""
    if kind is None:
        known = quantity(key) if key is not None else None
        kind = known.kind if known is not None else CaliperKind.TIME
    start, end = (PicturePoint(x * PX_PER_MM, y * PX_PER_MM) for x, y in (start_mm, end_mm))
    return Caliper(1, kind, start, end, key, lead, beat, teeth)


def time(
    key: str | None,
    width_mm: float,
    *,
    lead: str | None = "II",
    beat: int | None = 1,
    at_mm: tuple[float, float] = (8.0, 20.0),
) -> Caliper:
    """A time caliper of a width."""
    return between(key, at_mm, (at_mm[0] + width_mm, at_mm[1]), lead=lead, beat=beat)


def height(
    key: str,
    height_mm: float,
    *,
    lead: str | None = "I",
    beat: int | None = 1,
    at_mm: tuple[float, float] = (8.0, 100.0),
) -> Caliper:
    """A height caliper; up is positive."""
    return between(key, at_mm, (at_mm[0], at_mm[1] - height_mm), lead=lead, beat=beat)


def rr_chain(widths_mm: Sequence[float], *, lead: str = "II", y_mm: float = 30.0) -> list[Caliper]:
    """RR intervals one after the other; neighbours share a leg."""
    places_mm = 4.0 + np.concatenate([[0.0], np.cumsum(widths_mm)])
    return [
        between("rr", (float(start), y_mm), (float(end), y_mm), lead=lead, beat=beat)
        for beat, (start, end) in enumerate(pairwise(places_mm), start=1)
    ]


def in_steps(caliper: Caliper, start_mm: float, end_mm: float | None = None) -> Caliper:
    """The caliper as if its legs were placed in such steps on the paper of `exact_map`."""
    start_px = start_mm * PX_PER_MM
    end_px = start_px if end_mm is None else end_mm * PX_PER_MM
    return replace(
        caliper,
        start=replace(caliper.start, step_px=start_px),
        end=replace(caliper.end, step_px=end_px),
    )


def reading_of(
    *calipers: Caliper,
    sheet_map: SheetMap | None = None,
    settings: Calibration | None = None,
) -> Reading:
    """A reading on `exact_map` with confirmed settings; calipers numbered from 1."""
    return Reading(
        picture=PictureIdentity("sheet.png", "ab" * 32, SIZE_PX),
        sheet_map=exact_map() if sheet_map is None else sheet_map,
        calibration=calibration() if settings is None else settings,
        calipers=tuple(
            replace(item, caliper_id=number) for number, item in enumerate(calipers, start=1)
        ),
    )


def find(values: Sequence[Value], key: str, lead: str | None = "II") -> Value:
    """The one value of a key and lead."""
    (value,) = (value for value in values if (value.key, value.lead) == (key, lead))
    return value


def worked(reading: Reading, key: str, lead: str | None = "II") -> Value:
    """The one value of a key and lead of a reading."""
    return find(work_out(reading), key, lead)


def number(value: Value) -> float:
    """The value's number, which there must be."""
    assert value.value is not None, value.refusal
    return value.value


def codes(value: Value) -> set[str]:
    """The codes of its cautions; none twice."""
    listed = [caution.code for caution in value.cautions]
    assert len(listed) == len(set(listed))
    return set(listed)


def text_of(value: Value, code: str) -> str:
    """The line of one caution."""
    (text,) = (caution.text for caution in value.cautions if caution.code == code)
    return text


def estimate(value: float, plus_minus: float) -> Estimate:
    """A number with one leg's error."""
    return Estimate(value, np.array([0.0, 0.0, plus_minus / 2.0]))
