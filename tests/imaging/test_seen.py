"""Where the grid is printed, on planes drawn for the purpose."""

from __future__ import annotations

import numpy as np

from imaging.seen import Comb, seen_cells

PITCH_PX = 8.0


def combs() -> tuple[Comb, Comb]:
    waves = np.array([[1.0 / PITCH_PX, 0.0]])
    amplitude = np.array([0.25 + 0.0j])
    return Comb(waves, amplitude), Comb(waves[:, ::-1], amplitude)


def gridded(right: int = 320) -> np.ndarray:
    """Waves both ways between 80 px and `right` across, all the way down."""
    y, x = np.mgrid[0:240, 0:400]
    plane = 0.5 * np.cos(2 * np.pi * x / PITCH_PX) + 0.5 * np.cos(2 * np.pi * y / PITCH_PX)
    plane[:, :80] = plane[:, right:] = 0.0
    return plane.astype(np.float32)


def test_cells_follow_the_printed_part() -> None:
    cells, cell_px = seen_cells(gridded(), combs(), 5 * PITCH_PX)
    assert cell_px == 20
    assert cells.shape == (12, 20)
    assert cells[:, 5:15].all()
    assert not cells[:, :3].any()
    assert not cells[:, 17:].any()


def test_a_gap_beneath_a_trace_is_closed_and_a_crumb_left_out() -> None:
    plane = gridded(right=200)
    plane[100:130, 80:200] = 0.6  # a thick stroke
    plane[20:60, 340:380] = gridded()[20:60, 100:140]  # one large square by itself
    cells, _ = seen_cells(plane, combs(), 5 * PITCH_PX)
    assert cells[:, 5:9].all()
    assert not cells[:, 12:].any()


def test_one_family_alone_is_no_grid() -> None:
    x = np.mgrid[0:240, 0:400][1]
    plane = (0.5 * np.cos(2 * np.pi * x / PITCH_PX)).astype(np.float32)
    cells, _ = seen_cells(plane, combs(), 5 * PITCH_PX)
    assert not cells.any()
