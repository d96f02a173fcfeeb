"""Q, R, S and the net height."""

from __future__ import annotations

import math

import pytest

from app.calculator.uncertainty import Axis, leg_error
from tests.app.calculator.sheets import (
    calibration,
    codes,
    exact_map,
    height,
    number,
    reading_of,
    text_of,
    worked,
)

ALL_PARTS = [height("q_height", -1.0), height("r_height", 12.0), height("s_height", -3.5)]


@pytest.mark.parametrize(
    ("key", "millivolt"), [("q_height", -0.1), ("r_height", 1.2), ("s_height", -0.35)]
)
def test_each_part_with_its_sign(key: str, millivolt: float) -> None:
    value = worked(reading_of(*ALL_PARTS), key, "I")
    assert number(value) == pytest.approx(millivolt)
    assert (value.unit, value.n, value.method) == (
        *("mV", 1),
        "height in mm / 10 mm/mV, one beat in lead I",
    )
    assert codes(value) == {"single_beat"}


def test_the_net_height_is_the_signed_sum() -> None:
    value = worked(reading_of(*ALL_PARTS), "net_qrs", "I")
    assert number(value) == pytest.approx(1.2 - 0.1 - 0.35)
    assert value.caliper_ids == (1, 2, 3)
    assert value.method.endswith("Q + R + S marked")
    assert codes(value) == {"single_beat"}


def test_a_shared_baseline_is_one_error() -> None:
    """Three heights from one baseline mark: its leg counts three times, each top once."""
    leg_mm = leg_error(exact_map(), Axis.DOWN).sigma_mm
    shared = worked(reading_of(*ALL_PARTS), "net_qrs", "I")
    assert shared.plus_minus == pytest.approx(2.0 * 0.1 * leg_mm * math.sqrt(9.0 + 3.0))
    apart = [
        height(key, mm, at_mm=(8.0 + place, 100.0))
        for place, (key, mm) in enumerate((("q_height", -1.0), ("r_height", 12.0)))
    ]
    own = worked(reading_of(*apart), "net_qrs", "I")
    assert own.plus_minus == pytest.approx(2.0 * 0.1 * leg_mm * math.sqrt(4.0))


@pytest.mark.parametrize(
    ("marked", "words"),
    [
        ((0, 1, 2), None),
        ((0, 1), "S not marked in lead I: taken as none."),
        ((1, 2), "Q not marked in lead I: taken as none."),
        ((1,), "Q and S not marked in lead I: taken as none."),
        ((0, 2), "R not marked in lead I: taken as none."),
        ((2,), "Q and R not marked in lead I: taken as none."),
    ],
)
def test_parts_not_marked(marked: tuple[int, ...], words: str | None) -> None:
    value = worked(reading_of(*(ALL_PARTS[part] for part in marked)), "net_qrs", "I")
    assert ("one_sided_deflection" in codes(value)) == (words is not None)
    if words is not None:
        assert text_of(value, "one_sided_deflection") == words


def test_a_lead_not_named() -> None:
    reading = reading_of(height("r_height", 5.0, lead=None))
    value = worked(reading, "net_qrs", None)
    assert text_of(value, "one_sided_deflection").startswith("Q and S not marked in lead not named")
    assert "no_lead" in codes(value)


def test_beats_are_those_of_the_part_with_the_fewest() -> None:
    beats = [height("r_height", 10.0 + beat, beat=beat) for beat in (1, 2, 3)]
    two = [height("s_height", -2.0, beat=beat) for beat in (1, 2)]
    value = worked(reading_of(*beats, *two), "net_qrs", "I")
    assert number(value) == pytest.approx(1.2 - 0.2)
    assert value.n == 2
    assert "single_beat" not in codes(value)
    part = worked(reading_of(*beats, *two), "r_height", "I")
    assert part.spread == pytest.approx(0.1)


def test_a_part_refused_refuses_the_net_height() -> None:
    reading = reading_of(height("r_height", 5.0), height("s_height", 4.0))
    net, part = worked(reading, "net_qrs", "I"), worked(reading, "s_height", "I")
    assert (net.value, part.value) == (None, None)
    assert net.refusal == part.refusal
    assert net.refusal.startswith("S depth in lead I, beat 1, ends above its baseline")
    assert net.caliper_ids == (1, 2)
    assert number(worked(reading, "r_height", "I")) == pytest.approx(0.5)


def test_the_gain_is_doubted_and_not_the_speed() -> None:
    reading = reading_of(*ALL_PARTS, settings=calibration(confirmed=False))
    for key in ("r_height", "net_qrs"):
        found = codes(worked(reading, key, "I"))
        assert "gain_unconfirmed" in found
        assert "speed_unconfirmed" not in found
