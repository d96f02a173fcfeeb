"""A sheet drawn flat: each pixel shows the place it stands for."""

from __future__ import annotations

import numpy as np

from imaging.flat_view import flat_view
from tests.bends import curved_bend, curved_mm


def test_pixels_show_their_places() -> None:
    y, x = np.mgrid[0:900, 0:1200].astype(float)
    places = curved_mm(np.column_stack([x.ravel(), y.ravel()])).reshape(900, 1200, 2)
    # A plane whose value is its own place on the sheet.
    plane = (places[..., 0] + 1000.0 * 0.01 * places[..., 1]).astype(np.float32)
    low, high = np.array([20.0, 15.0]), np.array([90.0, 80.0])
    view = flat_view(plane, curved_bend(), low, high, np.array([6.0, 5.0]))
    assert view is not None
    rows, columns = view.plane.shape
    assert (columns, rows) == (421, 326)
    across, down = np.meshgrid(20.0 + np.arange(columns) / 6.0, 15.0 + np.arange(rows) / 5.0)
    expected = across + 10.0 * down
    # Ten units a mm: the drawing is true to a hundredth of a millimetre (cv2 counts in 1/32 px).
    assert np.abs(view.plane - expected).max() < 0.12
    assert np.abs(view.plane - expected).mean() < 0.06


def test_too_much_is_not_drawn() -> None:
    plane = np.zeros((900, 1200), dtype=np.float32)
    far = np.array([1e5, 1e5])
    assert flat_view(plane, curved_bend(), -far, far, np.array([6.0, 5.0])) is None
