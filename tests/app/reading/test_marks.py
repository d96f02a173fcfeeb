from __future__ import annotations

import math

import pytest

from app.reading import Caliper, CaliperKind, PicturePoint
from imaging.sheet_map import Coverage, SheetMap

FLAT_10_PX_PER_MM = SheetMap(
    picture_size_px=(500, 400),
    origin_px=(0.0, 0.0),
    x_step_px=(10.0, 0.0),
    y_step_px=(0.0, 10.0),
    covariance=tuple((0.0,) * 6 for _ in range(6)),
    scatter_mm=0.0,
    coverage=Coverage(100.0, ("11111",) * 4),
    scale_is_certain=True,
)


def caliper(start: tuple[float, float], end: tuple[float, float], teeth: int = 2) -> Caliper:
    return Caliper(1, CaliperKind.TIME, PicturePoint(*start), PicturePoint(*end), teeth=teeth)


def test_width_has_no_sign_and_height_is_positive_upwards() -> None:
    item = caliper((220.0, 100.0), (100.0, 70.0))
    assert item.span_mm(FLAT_10_PX_PER_MM) == pytest.approx((-12.0, -3.0))
    assert item.width_mm(FLAT_10_PX_PER_MM) == pytest.approx(12.0)
    assert item.height_mm(FLAT_10_PX_PER_MM) == pytest.approx(3.0)


def test_a_leg_off_the_picture_measures_nothing() -> None:
    assert math.isnan(caliper((100.0, 100.0), (900.0, 100.0)).width_mm(FLAT_10_PX_PER_MM))


def test_a_comb_needs_two_teeth() -> None:
    with pytest.raises(ValueError, match="at least two teeth"):
        caliper((0.0, 0.0), (1.0, 1.0), teeth=1)


def test_a_mark_must_be_finite() -> None:
    with pytest.raises(ValueError, match="finite place"):
        PicturePoint(float("nan"), 0.0)


@pytest.mark.parametrize("step_px", [-0.1, float("nan"), float("inf")])
def test_a_step_is_finite_and_not_negative(step_px: float) -> None:
    with pytest.raises(ValueError, match="finite and not negative"):
        PicturePoint(1.0, 2.0, step_px)
    assert PicturePoint(1.0, 2.0).step_px == 0.0
