"""Darkness summed along the lines of each family: what is left is periodic across them."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
FloatPlane = NDArray[np.float32]

BANDS = 12


@dataclass(frozen=True, slots=True, eq=False)
class Profiles:
    """Darkness across one family of lines, in bands side by side along them.

    Attributes
    ----------
    bands : ndarray of float32, shape (BANDS, N)
        Mean darkness under a Hann window, its mean removed.
    variance : float
        Of the darkness of all the plane's pixels.
    """

    bands: FloatPlane
    variance: float

    def amplitudes(self, base: float, multiples: FloatArray) -> Amplitudes:
        """The waves at multiples of `base` (cycles per pixel), bands brought into step.

        The family may lie at a slightly other angle than the picture was turned by, which
        shows as a steady drift of phase from band to band.
        """
        places = np.arange(self.bands.shape[1])
        turns = np.outer(places, np.concatenate([[base], multiples * base]))
        # Single precision is twice as fast and errs by 1e-6 of a turn once whole ones are off.
        angles = ((turns - np.rint(turns)) * (2.0 * np.pi)).astype(np.float32)
        real, imaginary = self.bands @ np.cos(angles), self.bands @ np.sin(angles)
        found: ComplexArray = np.asarray(real - 1j * imaginary, dtype=np.complex128)
        drift = _drift_cycles(found[:, 0])
        number = np.arange(len(found))[:, np.newaxis]
        in_step = found[:, 1:] * np.exp(-2j * np.pi * drift * number * multiples)
        mean = in_step.mean(axis=0)
        # Across the mean's own phase only: bands beside the grid are weaker, not noisier.
        turned = in_step * np.exp(-1j * np.angle(mean))
        error = np.sqrt((turned.imag**2).mean(axis=0) / len(found))
        level = np.abs(in_step).mean(axis=0)
        return Amplitudes(mean, error, np.abs(mean) / np.maximum(level, 1e-30))


@dataclass(frozen=True, slots=True, eq=False)
class Amplitudes:
    """Complex amplitude at each multiple, its standard error, and how far the bands agree."""

    values: ComplexArray
    errors: FloatArray
    coherence: FloatArray


def profiles_of(plane: FloatPlane, skew_rad: float) -> tuple[Profiles, Profiles]:
    """Profiles across the upright and across the level lines of a plane turned by `skew_rad`."""
    import cv2

    rows, columns = plane.shape
    turn = cv2.getRotationMatrix2D(
        ((columns - 1) / 2.0, (rows - 1) / 2.0), float(np.rad2deg(skew_rad)), 1.0
    )
    straight = plane
    if abs(skew_rad) * max(rows, columns) > 0.25:
        straight = np.asarray(cv2.warpAffine(plane, turn, (columns, rows), flags=cv2.INTER_LINEAR))
    variance = max(float(plane.var()), 1e-30)
    return _banded(straight, variance), _banded(straight.T, variance)


def _banded(plane: FloatPlane, variance: float) -> Profiles:
    """Mean over bands of rows, windowed."""
    edges = np.linspace(0, plane.shape[0], BANDS + 1).round().astype(int)
    bands = np.stack([plane[top:bottom].mean(axis=0) for top, bottom in pairwise(edges)]).astype(
        np.float64
    )
    window = np.hanning(bands.shape[1])
    window /= window.sum()
    bands -= (bands @ window)[:, np.newaxis]
    return Profiles((bands * window).astype(np.float32), variance)


def _drift_cycles(values: ComplexArray) -> float:
    """Steady change of phase from one band to the next, in cycles."""
    padded = 32 * len(values)
    spectrum = np.abs(np.fft.fft(values, padded))
    return float(np.fft.fftfreq(padded)[int(np.argmax(spectrum))])
