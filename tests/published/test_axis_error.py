"""Angle error for a 0.5 mm error in I and in aVF, by the size of the vector (computed)."""

from __future__ import annotations

import numpy as np
import pytest

from app.calculator.axis import AUGMENTED, axis_of
from app.calculator.uncertainty import Estimate
from tests.published.printed import rounds_to

# Size mm, largest error by lead I, by aVF, in degrees.
ERRORS = [
    (2.0, "14.3", "16.5"),
    (5.0, "5.7", "6.6"),
    (10.0, "2.9", "3.3"),
    (20.0, "1.4", "1.7"),
]
ONE_SIGMA_MM = 0.5


@pytest.mark.parametrize(("size_mm", "by_lead_i", "by_avf"), ERRORS)
def test_the_vector_s_size(size_mm: float, by_lead_i: str, by_avf: str) -> None:
    """Each error at right angles to the vector, where it turns the axis most."""
    exact, unsure = np.zeros(3), np.array([0.0, 0.0, ONE_SIGMA_MM])
    along_avf = axis_of(Estimate(0.0, unsure), Estimate(size_mm / AUGMENTED, exact))
    assert rounds_to(along_avf.sigma, by_lead_i)
    along_i = axis_of(Estimate(size_mm, exact), Estimate(0.0, unsure))
    assert rounds_to(along_i.sigma, by_avf)
