"""A bend keeps what its nodes say, interpolates smoothly, and finds its own way back."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from imaging.bend import UNIT_MM, Bend
from tests.bends import curved_bend, curved_mm


def _points(count: int = 400, low: float = 20.0) -> Any:
    rng = np.random.default_rng(3)
    return rng.uniform((low, low), (1180.0, 880.0), (count, 2))


def test_between_the_nodes_it_is_the_surface_to_a_micrometre_or_two() -> None:
    points_px = _points(low=40.0)[:300]
    error_mm = np.abs(curved_bend().to_mm(points_px) - curved_mm(points_px))
    assert error_mm.max() < 0.002


def test_there_and_back() -> None:
    bend, points_px = curved_bend(), _points()
    back_px = bend.to_px(bend.to_mm(points_px), points_px + np.array([300.0, -200.0]))
    assert np.abs(back_px - points_px).max() < 1e-6


def test_its_slopes_are_those_of_its_places() -> None:
    bend, points_px = curved_bend(), _points()
    step = 1e-4
    for column, move in enumerate(((step, 0.0), (0.0, step))):
        numeric = (bend.to_mm(points_px + move) - bend.to_mm(points_px - move)) / (2.0 * step)
        assert np.allclose(bend.mm_per_px(points_px)[:, :, column], numeric, atol=1e-6)


def test_beyond_the_nodes_it_goes_straight_on() -> None:
    bend = curved_bend()
    inside, edge, beyond = np.array([[0.0, 400.0], [-50.0, 400.0], [-100.0, 400.0]])
    places = bend.to_mm(np.array([inside, edge, beyond]))
    assert np.allclose(places[1] - places[0], places[2] - places[1], atol=1e-9)


def test_no_number_gives_no_number() -> None:
    assert np.isnan(curved_bend().to_mm(np.array([[np.nan, 3.0]]))).all()
    assert np.isnan(curved_bend().to_px(np.array([[3.0, 3.0]]), np.array([[np.nan, 0.0]]))).all()


def test_a_place_it_does_not_show_is_not_found() -> None:
    x, y = np.meshgrid(np.arange(12.0), np.arange(12.0))
    # A parabola: no x_mm above 9 exists anywhere.
    bend = Bend((0.0, 0.0), 1.0, 9.0 - (x - 5.5) ** 2, y, np.zeros(x.shape))
    assert np.isnan(bend.to_px(np.array([[20.0, 5.0]]), np.array([[2.0, 5.0]]))).all()


def test_a_flat_spot_ends_the_search() -> None:
    zeros = np.zeros((4, 4))
    bend = Bend((0.0, 0.0), 1.0, zeros, zeros, zeros)
    assert np.isnan(bend.to_px(np.array([[1.0, 1.0]]), np.array([[1.0, 1.0]]))).all()


def test_errors_are_linear_between_nodes_and_unknown_beside_an_unknown_one() -> None:
    errors = np.full((3, 3), 0.01)
    errors[0, 1] = 0.03
    errors[2, 2] = np.nan
    x, y = np.meshgrid(np.arange(3.0), np.arange(3.0))
    bend = Bend((0.0, 0.0), 10.0, x, y, errors)
    found = bend.errors_mm(
        np.array([[5.0, 0.0], [10.0, 0.0], [20.0, 10.0], [19.0, 19.0], [31.0, 0.0], [21.0, 0.0]])
    )
    assert found[:3] == pytest.approx([0.02, 0.03, 0.01])
    assert np.isnan(found[3:5]).all()
    assert found[5] == pytest.approx(0.01)


def test_a_quarter_turn_makes_down_the_new_left() -> None:
    bend, points_px = curved_bend(), _points()
    x_mm, y_mm = bend.to_mm(points_px).T
    assert np.allclose(bend.turned().to_mm(points_px), np.column_stack([-y_mm, x_mm]))


def test_nodes_are_kept_in_whole_units_and_cannot_be_written() -> None:
    bend = curved_bend()
    assert np.allclose(bend.x_mm / UNIT_MM, np.rint(bend.x_mm / UNIT_MM), atol=1e-6)
    with pytest.raises(ValueError, match="read-only"):
        bend.x_mm[0, 0] = 1.0


def test_equal_bends_are_equal() -> None:
    assert curved_bend() == curved_bend()
    assert hash(curved_bend()) == hash(curved_bend())
    assert curved_bend() != curved_bend(error_mm=0.02)
    assert curved_bend() != curved_bend().turned()
    assert curved_bend() != "a bend"


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"x_mm": np.zeros((1, 5))}, "two rows"),
        ({"y_mm": np.zeros((2, 2))}, "one shape"),
        ({"standard_error_mm": np.zeros((2, 2))}, "one shape"),
        ({"x_mm": np.full((3, 3), np.nan)}, "finite"),
        ({"pitch_px": 0.0}, "a step apart"),
        ({"first_px": (np.inf, 0.0)}, "finite places"),
    ],
)
def test_nonsense_is_refused(change: dict[str, Any], message: str) -> None:
    nodes = np.zeros((3, 3))
    fields: dict[str, Any] = {
        "first_px": (0.0, 0.0),
        "pitch_px": 4.0,
        "x_mm": nodes,
        "y_mm": nodes,
        "standard_error_mm": nodes,
    }
    with pytest.raises(ValueError, match=message):
        Bend(**{**fields, **change})
