from __future__ import annotations

import pytest

from app.reading import Calibration, Evidence, Setting


@pytest.mark.parametrize(
    ("speed_mm_per_s", "small_box_ms", "large_box_ms"),
    [(10.0, 100, 500), (12.5, 80, 400), (25.0, 40, 200), (50.0, 20, 100), (100.0, 10, 50)],
)
def test_a_box_lasts_what_the_table_says(
    speed_mm_per_s: float, small_box_ms: float, large_box_ms: float
) -> None:
    """Box values: computed from the definition of paper speed."""
    calibration = Calibration(paper_speed_mm_per_s=Setting(speed_mm_per_s))
    assert calibration.duration_ms(1.0) == pytest.approx(small_box_ms, rel=1e-12)
    assert calibration.duration_ms(5.0) == pytest.approx(large_box_ms, rel=1e-12)


def test_chest_gain_holds_in_chest_leads_only() -> None:
    calibration = Calibration(chest_gain_mm_per_mv=Setting(5.0))
    assert calibration.height_mv(10.0, "V3") == pytest.approx(2.0)
    assert calibration.height_mv(10.0, "aVF") == pytest.approx(1.0)
    assert calibration.height_mv(10.0, None) == pytest.approx(1.0)


def test_without_a_chest_gain_all_leads_share_one() -> None:
    assert Calibration().gain_for("V1") == Setting(10.0, Evidence.DEFAULT, confirmed=False)


@pytest.mark.parametrize("value", [0.0, -25.0, float("nan"), float("inf")])
def test_a_setting_must_be_a_positive_number(value: float) -> None:
    with pytest.raises(ValueError, match="positive number"):
        Setting(value)
