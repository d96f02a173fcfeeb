"""Pixels to millimetres and back, and how far off a place or a span may be."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from imaging import Coverage, SheetMap, sheet_map_from_box

FloatArray = NDArray[np.float64]

WIDTH_PX, HEIGHT_PX = 1200, 800
EVERYWHERE = Coverage(16.0, ("1" * 75,) * 50)
NO_ERROR = ((0.0,) * 6,) * 6


def correlated_covariance(seed: int = 3) -> FloatArray:
    """A full 6 x 6 covariance: origin good to 0.2 px, steps to 0.002 px, all correlated."""
    mixing = np.random.default_rng(seed).normal(size=(6, 6)) / np.sqrt(6.0)
    scale = np.diag([0.2, 0.2, 0.002, 0.002, 0.002, 0.002])
    return scale @ mixing @ mixing.T @ scale


def nested(matrix: FloatArray) -> tuple[tuple[float, ...], ...]:
    return tuple(tuple(float(number) for number in row) for row in matrix)


def example_map(**changes: object) -> SheetMap:
    """Turned by a few degrees, a little skewed, and wider than high in its pitch."""
    plain = SheetMap(
        picture_size_px=(WIDTH_PX, HEIGHT_PX),
        origin_px=(130.25, 90.75),
        x_step_px=(11.9, 0.4),
        y_step_px=(-0.35, 11.7),
        covariance=nested(correlated_covariance()),
        scatter_mm=0.01,
        coverage=EVERYWHERE,
        scale_is_certain=True,
    )
    return replace(plain, **changes)  # type: ignore[arg-type]


def points_inside(count: int, seed: int = 1) -> FloatArray:
    random = np.random.default_rng(seed)
    return random.uniform((0.0, 0.0), (WIDTH_PX - 1.0, HEIGHT_PX - 1.0), size=(count, 2))


# --- places


def test_the_origin_and_the_steps_are_where_they_were_said_to_be() -> None:
    points_mm = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [5.0, 2.0]])
    expected_px = np.array(
        [[130.25, 90.75], [142.15, 91.15], [129.9, 102.45], [130.25 + 58.8, 90.75 + 25.4]]
    )
    sheet_map = example_map()
    np.testing.assert_allclose(sheet_map.to_px(points_mm), expected_px, atol=1e-12)
    np.testing.assert_allclose(sheet_map.to_mm(expected_px), points_mm, atol=1e-12)


def test_the_pitches_are_the_lengths_of_the_steps() -> None:
    sheet_map = example_map(x_step_px=(3.0, 4.0), y_step_px=(-12.0, 5.0))
    assert sheet_map.x_pitch_px_per_mm == pytest.approx(5.0, abs=1e-12)
    assert sheet_map.y_pitch_px_per_mm == pytest.approx(13.0, abs=1e-12)


steps = st.tuples(st.floats(2.0, 60.0), st.floats(-0.3, 0.3))


@given(
    origin=st.tuples(st.floats(-500, 2000), st.floats(-500, 2000)),
    x=steps,
    y=steps,
    turn=st.integers(0, 3),
    place=st.tuples(st.floats(0, WIDTH_PX - 1), st.floats(0, HEIGHT_PX - 1)),
)
def test_there_and_back_is_the_same_place(
    origin: tuple[float, float],
    x: tuple[float, float],
    y: tuple[float, float],
    turn: int,
    place: tuple[float, float],
) -> None:
    sheet_map = example_map(
        origin_px=origin,
        x_step_px=(x[0], x[0] * x[1]),
        y_step_px=(-y[0] * y[1], y[0]),
        covariance=NO_ERROR,
    ).turned(turn)
    points_px = np.array([place])
    np.testing.assert_allclose(sheet_map.to_px(sheet_map.to_mm(points_px)), points_px, atol=1e-8)


def test_outside_the_picture_there_are_no_millimetres() -> None:
    edges = np.array(
        [[-0.5, -0.5], [WIDTH_PX - 0.5, HEIGHT_PX - 0.5], [-0.5, 400.0], [600.0, HEIGHT_PX - 0.5]]
    )
    outside = np.array(
        [
            [-0.51, 10.0],
            [10.0, -0.51],
            [WIDTH_PX - 0.49, 10.0],
            [10.0, HEIGHT_PX - 0.49],
            [np.nan, 10.0],
            [10.0, np.nan],
            [np.inf, 10.0],
            [-1e300, 10.0],
        ]
    )
    sheet_map = example_map()
    assert np.isfinite(sheet_map.to_mm(edges)).all()
    assert np.isnan(sheet_map.to_mm(outside)).all()
    assert np.isnan(sheet_map.standard_error_mm(outside)).all()
    assert np.isnan(sheet_map.span_standard_error_mm(outside, edges[[0] * 8])).all()
    mixed = sheet_map.to_mm(np.vstack([edges, outside]))
    np.testing.assert_array_equal(np.isnan(mixed).all(axis=1), [False] * 4 + [True] * 8)


def test_millimetres_may_lie_outside_the_picture() -> None:
    assert np.isfinite(example_map().to_px(np.array([[-1000.0, 5000.0]]))).all()


def test_points_are_not_changed_and_may_be_none_at_all() -> None:
    sheet_map, points_px = example_map(), points_inside(5)
    before = points_px.copy()
    for method in (sheet_map.to_mm, sheet_map.to_px, sheet_map.covers, sheet_map.standard_error_mm):
        method(points_px)
        assert len(method(np.empty((0, 2)))) == 0
    sheet_map.span_standard_error_mm(points_px, points_px[::-1])
    np.testing.assert_array_equal(points_px, before)


@pytest.mark.parametrize("shape", [(2,), (3, 3), (1, 2, 2), ()])
def test_points_of_another_shape_are_refused(shape: tuple[int, ...]) -> None:
    for method in ("to_mm", "to_px", "covers", "standard_error_mm"):
        with pytest.raises(ValueError, match=r"points have shape \(N, 2\)"):
            getattr(example_map(), method)(np.zeros(shape))


# --- what is no map


@pytest.mark.parametrize("y_step_px", [(11.9, 0.4), (-23.8, -0.8), (0.0, 0.0)])
def test_parallel_steps_are_refused(y_step_px: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="must not be parallel"):
        example_map(y_step_px=y_step_px)


@pytest.mark.parametrize("name", ["origin_px", "x_step_px", "y_step_px"])
@pytest.mark.parametrize("value", [np.nan, np.inf, -np.inf])
def test_numbers_that_are_not_finite_are_refused(name: str, value: float) -> None:
    with pytest.raises(ValueError, match="finite"):
        example_map(**{name: (value, 1.0)})


@pytest.mark.parametrize("shape", [(5, 5), (6,), (2, 6)])
def test_a_covariance_of_another_shape_is_refused(shape: tuple[int, ...]) -> None:
    with pytest.raises(ValueError, match=r"shape \(6, 6\)"):
        example_map(covariance=np.zeros(shape))


# --- where the grid was seen


def test_coverage_is_packed_and_unpacked_the_same() -> None:
    cells = np.random.default_rng(5).random((7, 11)) > 0.5
    coverage = Coverage.from_cells(cells, 8.0)
    assert coverage.cell_px == 8.0
    assert len(coverage.rows) == 7
    assert set("".join(coverage.rows)) == {"0", "1"}
    np.testing.assert_array_equal(coverage.cells(), cells)


def test_a_point_is_covered_when_its_cell_was_seen() -> None:
    coverage = Coverage(10.0, ("010", "001"))
    points_px = np.array(
        [
            [9.49, 0.0],  # the first cell ends at 9.5
            [9.5, 0.0],
            [19.49, 9.49],
            [19.5, 0.0],
            [29.49, 9.5],
            [29.5, 9.5],
            [-0.51, 0.0],
            [10.0, -0.51],
            [25.0, 19.49],
            [25.0, 19.5],
            [-30.0, -10.0],  # not counted from the other end
            [np.nan, 5.0],
            [15.0, np.nan],
            [np.inf, 5.0],
            [1e300, 5.0],
            [15.0, -1e300],
        ]
    )
    expected = [False, True, True, False, True] + [False] * 3 + [True] + [False] * 7
    np.testing.assert_array_equal(coverage.covers(points_px), expected)
    sheet_map = example_map(coverage=coverage)
    np.testing.assert_array_equal(sheet_map.covers(points_px), expected)


@pytest.mark.parametrize("rows", [(), ("",), ("", "")])
def test_a_grid_seen_nowhere_covers_nothing(rows: tuple[str, ...]) -> None:
    assert not Coverage(16.0, rows).covers(points_inside(20)).any()


# --- errors


def sampled_maps(sheet_map: SheetMap, count: int) -> FloatArray:
    """Parameters scattered as the covariance says, shape (count, 6)."""
    mean = [*sheet_map.origin_px, *sheet_map.x_step_px, *sheet_map.y_step_px]
    random = np.random.default_rng(17)
    return random.multivariate_normal(mean, np.array(sheet_map.covariance), size=count)


def places_mm(parameters: FloatArray, points_px: FloatArray) -> FloatArray:
    """Where each sampled map puts each point, shape (count, N, 2), by plain algebra."""
    (ox, oy, ax, ay, bx, by) = parameters.T[:, :, None]
    dx, dy = points_px[None, :, 0] - ox, points_px[None, :, 1] - oy
    determinant = ax * by - ay * bx
    return np.stack([(by * dx - bx * dy) / determinant, (ax * dy - ay * dx) / determinant], axis=2)


COUNT = 20_000
FIVE_SIGMA_OF_A_SIGMA = 5.0 / np.sqrt(2.0 * COUNT)


@pytest.mark.parametrize("seed", [3, 4, 5])
def test_the_error_of_a_place_is_the_scatter_of_sampled_maps(seed: int) -> None:
    sheet_map = example_map(covariance=nested(correlated_covariance(seed)), scatter_mm=0.0)
    points_px = points_inside(6)
    sampled = places_mm(sampled_maps(sheet_map, COUNT), points_px)
    scatter_mm = np.sqrt(sampled.var(axis=0).sum(axis=1))
    np.testing.assert_allclose(
        sheet_map.standard_error_mm(points_px), scatter_mm, rtol=FIVE_SIGMA_OF_A_SIGMA
    )


@pytest.mark.parametrize("seed", [3, 4, 5])
def test_the_error_of_a_span_is_the_scatter_of_sampled_maps_and_of_the_print(seed: int) -> None:
    sheet_map = example_map(covariance=nested(correlated_covariance(seed)), scatter_mm=0.02)
    start_px, end_px = points_inside(6), points_inside(6, seed=2)
    parameters, random = sampled_maps(sheet_map, COUNT), np.random.default_rng(23)
    print_mm = random.normal(scale=0.02, size=(2, COUNT, 6, 2))
    starts = places_mm(parameters, start_px) + print_mm[0]
    ends = places_mm(parameters, end_px) + print_mm[1]
    np.testing.assert_allclose(
        sheet_map.span_standard_error_mm(start_px, end_px),
        (ends - starts).std(axis=0),
        rtol=FIVE_SIGMA_OF_A_SIGMA,
    )


def test_the_prints_own_unevenness_is_added_at_each_end() -> None:
    sheet_map = example_map(covariance=NO_ERROR, scatter_mm=0.03)
    points_px = points_inside(4)
    np.testing.assert_allclose(sheet_map.standard_error_mm(points_px), 0.03 * np.sqrt(2.0))
    np.testing.assert_allclose(
        sheet_map.span_standard_error_mm(points_px, points_px[::-1]), 0.03 * np.sqrt(2.0)
    )


def test_an_error_of_the_origin_moves_both_ends_alike() -> None:
    covariance = np.zeros((6, 6))
    covariance[0, 0] = covariance[1, 1] = 25.0  # five pixels either way
    sheet_map = example_map(covariance=nested(covariance), scatter_mm=0.0)
    points_px = points_inside(8)
    assert (sheet_map.standard_error_mm(points_px) > 0.5).all()
    errors_mm = sheet_map.span_standard_error_mm(points_px[:4], points_px[4:])
    np.testing.assert_array_equal(errors_mm, np.zeros((4, 2)))


def test_an_error_of_the_pitch_grows_with_the_span() -> None:
    covariance = np.zeros((6, 6))
    covariance[2, 2] = 0.012**2  # a thousandth of the step
    sheet_map = example_map(
        x_step_px=(12.0, 0.0), y_step_px=(0.0, 12.0), covariance=nested(covariance), scatter_mm=0.0
    )
    start_px, end_px = np.array([[200.0, 300.0]] * 3), np.array([[260.0, 300.0]] * 3)
    end_px[:, 0] = 200.0 + 12.0 * np.array([5.0, 10.0, 50.0])
    np.testing.assert_allclose(
        sheet_map.span_standard_error_mm(start_px, end_px)[:, 0], [0.005, 0.01, 0.05], rtol=1e-9
    )


def test_a_covariance_a_rounding_error_below_zero_gives_no_error_rather_than_none() -> None:
    covariance = np.zeros((6, 6))
    covariance[0, 0] = -1e-18
    sheet_map = example_map(covariance=nested(covariance), scatter_mm=0.0)
    np.testing.assert_array_equal(sheet_map.standard_error_mm(points_inside(3)), np.zeros(3))


# --- turning


@pytest.mark.parametrize("quarter_turns", [0, 4, -4, 8])
def test_four_quarter_turns_are_none(quarter_turns: int) -> None:
    sheet_map, points_px = example_map(), points_inside(10)
    turned = sheet_map.turned(quarter_turns)
    np.testing.assert_allclose(turned.to_mm(points_px), sheet_map.to_mm(points_px), atol=1e-12)
    np.testing.assert_allclose(turned.covariance, sheet_map.covariance, atol=1e-18)
    assert turned.turn_deg == sheet_map.turn_deg
    assert turned.coverage is sheet_map.coverage


def test_one_at_a_time_is_the_same_as_all_at_once() -> None:
    one_by_one = example_map()
    for quarter_turns in range(1, 4):
        one_by_one = one_by_one.turned(1)
        assert one_by_one == example_map().turned(quarter_turns)
    assert example_map().turned(-1) == example_map().turned(3)


def test_a_clockwise_turn_makes_up_the_reading_direction() -> None:
    upright = example_map(x_step_px=(12.0, 0.0), y_step_px=(0.0, 12.0), covariance=NO_ERROR)
    along_px = {0: (1, 0), 1: (0, -1), 2: (-1, 0), 3: (0, 1)}
    turn_deg = {0: 0, 1: 270, 2: 180, 3: 90}
    for quarter_turns, along in along_px.items():
        turned = upright.turned(quarter_turns)
        np.testing.assert_array_equal(turned.x_step_px, 12.0 * np.array(along))
        np.testing.assert_array_equal(turned.y_step_px, 12.0 * np.array([-along[1], along[0]]))
        assert turned.turn_deg == turn_deg[quarter_turns]
        angle = np.deg2rad(turned.turn_deg)
        np.testing.assert_allclose([np.cos(angle), np.sin(angle)], along, atol=1e-12)


@pytest.mark.parametrize("quarter_turns", [1, 2, 3])
def test_a_turn_moves_the_numbers_and_not_the_places_or_their_errors(quarter_turns: int) -> None:
    sheet_map, points_px = example_map(), points_inside(10)
    turned = sheet_map.turned(quarter_turns)
    mm = sheet_map.to_mm(points_px)
    expected_mm = {
        1: np.column_stack([-mm[:, 1], mm[:, 0]]),
        2: -mm,
        3: np.column_stack([mm[:, 1], -mm[:, 0]]),
    }[quarter_turns]
    np.testing.assert_allclose(turned.to_mm(points_px), expected_mm, atol=1e-12)
    np.testing.assert_allclose(turned.to_px(expected_mm), points_px, atol=1e-9)
    np.testing.assert_allclose(
        turned.standard_error_mm(points_px), sheet_map.standard_error_mm(points_px), rtol=1e-9
    )
    before = sheet_map.span_standard_error_mm(points_px[:5], points_px[5:])
    after = turned.span_standard_error_mm(points_px[:5], points_px[5:])
    np.testing.assert_allclose(after[:, :: -1 if quarter_turns % 2 else 1], before, rtol=1e-9)


# --- a box drawn by the reader


def box_map(**changes: object) -> SheetMap:
    how: dict[str, object] = {
        "picture_size_px": (WIDTH_PX, HEIGHT_PX),
        "corner_px": (100.0, 200.0),
        "opposite_px": (700.0, 440.0),
        "squares_across": 10.0,
        "squares_down": 4.0,
    }
    return sheet_map_from_box(**(how | changes))  # type: ignore[arg-type]


def test_a_box_of_known_squares_gives_the_scale() -> None:
    sheet_map = box_map()
    assert sheet_map.origin_px == (100.0, 200.0)
    assert sheet_map.x_step_px == (12.0, 0.0)
    assert sheet_map.y_step_px == (0.0, 12.0)
    corners_px = np.array([[100.0, 200.0], [700.0, 440.0]])
    np.testing.assert_allclose(sheet_map.to_mm(corners_px), [[0.0, 0.0], [50.0, 20.0]], atol=1e-12)
    assert sheet_map.source == "reader"
    assert sheet_map.scale_is_certain
    assert sheet_map.picture_size_px == (WIDTH_PX, HEIGHT_PX)
    assert sheet_map.evidence == ("The reader drew a box over 10 by 4 large squares.",)


def test_the_two_ways_of_a_box_may_have_different_pitches_and_halves() -> None:
    sheet_map = box_map(squares_across=9.5, squares_down=4.0)
    assert sheet_map.x_pitch_px_per_mm == pytest.approx(600.0 / 47.5, rel=1e-12)
    assert sheet_map.y_pitch_px_per_mm == pytest.approx(12.0, rel=1e-12)
    assert sheet_map.evidence == ("The reader drew a box over 9.5 by 4 large squares.",)


@pytest.mark.parametrize(
    ("corner_px", "opposite_px"),
    [
        ((700.0, 440.0), (100.0, 200.0)),
        ((100.0, 440.0), (700.0, 200.0)),
        ((700.0, 200.0), (100.0, 440.0)),
    ],
)
def test_a_box_may_be_drawn_from_any_corner(
    corner_px: tuple[float, float], opposite_px: tuple[float, float]
) -> None:
    assert box_map(corner_px=corner_px, opposite_px=opposite_px) == box_map()


def test_the_grid_counts_as_seen_inside_the_box_only() -> None:
    cells = box_map().coverage.cells()
    assert cells.shape == (50, 75)  # 16 px each
    inside, outside = np.array([[400.0, 320.0]]), np.array([[80.0, 320.0], [400.0, 470.0]])
    assert box_map().covers(inside).all()
    assert not box_map().covers(outside).any()
    assert cells.sum() * 16.0**2 == pytest.approx(600.0 * 240.0, rel=0.1)


@pytest.mark.parametrize("corner_error_px", [0.5, 1.0, 3.0])
def test_the_error_of_a_box_is_that_of_its_drawn_sides(corner_error_px: float) -> None:
    random = np.random.default_rng(29)
    left, right = 100.0 + random.normal(scale=corner_error_px, size=(2, COUNT)) + [[0.0], [600.0]]
    top, bottom = 200.0 + random.normal(scale=corner_error_px, size=(2, COUNT)) + [[0.0], [240.0]]
    points_px = np.array([[100.0, 200.0], [400.0, 320.0], [700.0, 440.0], [250.0, 260.0]])
    x_mm = (points_px[:, 0] - left[:, None]) * 50.0 / (right - left)[:, None]
    y_mm = (points_px[:, 1] - top[:, None]) * 20.0 / (bottom - top)[:, None]
    sheet_map = box_map(corner_error_px=corner_error_px)
    # To first order only: the tolerance leaves room for the square of the relative error.
    tolerance = FIVE_SIGMA_OF_A_SIGMA + 10.0 * (corner_error_px / 240.0) ** 2
    np.testing.assert_allclose(
        sheet_map.standard_error_mm(points_px), np.hypot(x_mm.std(0), y_mm.std(0)), rtol=tolerance
    )
    np.testing.assert_allclose(
        sheet_map.span_standard_error_mm(points_px[:1], points_px[2:3])[0],
        [(x_mm[:, 2] - x_mm[:, 0]).std(), (y_mm[:, 2] - y_mm[:, 0]).std()],
        rtol=tolerance,
        atol=1e-12,
    )


@pytest.mark.parametrize(
    "opposite_px", [(100.0, 440.0), (700.0, 200.0), (101.9, 440.0), (700.0, 201.9), (np.nan, 440.0)]
)
def test_a_box_without_a_size_is_refused(opposite_px: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="draw the box over at least one large square"):
        box_map(opposite_px=opposite_px)


@pytest.mark.parametrize("squares", [0.0, -3.0, 0.99, np.nan])
@pytest.mark.parametrize("way", ["squares_across", "squares_down"])
def test_less_than_one_square_is_refused(way: str, squares: float) -> None:
    with pytest.raises(ValueError, match="must span at least one large square each way"):
        box_map(**{way: squares})


def test_the_largest_error_is_that_of_the_worst_place_seen() -> None:
    sheet_map = example_map()
    last_px = np.array([WIDTH_PX - 1.0, HEIGHT_PX - 1.0])
    corners_px = np.array([[0.0, 0.0], [1.0, 0.0], [0.0, 1.0], [1.0, 1.0]]) * last_px
    worst_mm = float(sheet_map.standard_error_mm(corners_px).max())
    found_mm = sheet_map.largest_standard_error_mm()
    assert found_mm is not None
    assert 0.9 * worst_mm < found_mm <= worst_mm


def test_a_grid_seen_nowhere_has_no_largest_error() -> None:
    nowhere = Coverage(16.0, ("0" * 75,) * 50)
    assert example_map(coverage=nowhere).largest_standard_error_mm() is None
