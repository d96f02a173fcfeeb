"""Lay leads out on a sheet as recorders do: rows of strips, pulses, ticks, printed words."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from sample_scans.page import Label, Page, Strip, Stroke

FloatArray = NDArray[np.float64]

THREE_BY_FOUR = (
    ("I", "aVR", "V1", "V4"),
    ("II", "aVL", "V2", "V5"),
    ("III", "aVF", "V3", "V6"),
)
PULSE_S = 0.2
PULSE_LEAD_IN_MM = 2.0
TICK_HALF_MM = 1.5


@dataclass(frozen=True, slots=True, eq=False)
class Signal:
    """Leads in mV at one sampling rate; every array has shape (N,)."""

    fs_hz: float
    leads_mv: Mapping[str, FloatArray]


@dataclass(frozen=True, slots=True)
class Layout:
    """Where things stand on the sheet.

    Attributes
    ----------
    rows : tuple of tuple of str
        Leads of each row, left to right; each lead gets an equal share of the row and the
        columns follow one another in time.
    row_s : float
        Time that a row covers.
    speed_mm_per_s, gain_mm_per_mv, chest_gain_mm_per_mv : float
        Paper speed and gains; the chest gain applies to V1 to V6.
    left_mm, first_baseline_mm, row_gap_mm : float
        Start of the traces, baseline of the first row, distance of the rows.
    pulse : str
        ``full`` (1 mV at `gain_mm_per_mv`), ``stepped`` (half of the width at each gain)
        or ``none``.
    grid_mm, paper_mm, origin_on_paper_mm
        As in `Page`.
    title, legend : str
        Printed above and below the grid.
    """

    rows: tuple[tuple[str, ...], ...] = (*THREE_BY_FOUR, ("II",))
    row_s: float = 10.0
    speed_mm_per_s: float = 25.0
    gain_mm_per_mv: float = 10.0
    chest_gain_mm_per_mv: float = 10.0
    left_mm: float = 12.0
    first_baseline_mm: float = 30.0
    row_gap_mm: float = 40.0
    pulse: Literal["full", "stepped", "none"] = "full"
    grid_mm: tuple[float, float, float, float] = (0.0, 0.0, 270.0, 175.0)
    paper_mm: tuple[float, float] = (297.0, 210.0)
    origin_on_paper_mm: tuple[float, float] = (13.5, 22.0)
    title: str = "SPECIMEN - invented recording, no patient"
    legend: str = "25 mm/s   10 mm/mV   0.05 - 150 Hz"

    def gain_of(self, lead: str) -> float:
        """Gain of one lead."""
        return self.chest_gain_mm_per_mv if lead.startswith("V") else self.gain_mm_per_mv


@dataclass(frozen=True, slots=True)
class Window:
    """Which part of the recording one strip shows, and at what scale."""

    lead: str
    start_s: float
    duration_s: float
    x_mm: float
    baseline_mm: float
    speed_mm_per_s: float
    gain_mm_per_mv: float


def windows_of(layout: Layout) -> tuple[Window, ...]:
    """The strips of a layout, row by row."""
    windows = []
    for row_index, row in enumerate(layout.rows):
        share_s = layout.row_s / len(row)
        for column, lead in enumerate(row):
            windows.append(
                Window(
                    lead=lead,
                    start_s=column * share_s,
                    duration_s=share_s,
                    x_mm=layout.left_mm + column * share_s * layout.speed_mm_per_s,
                    baseline_mm=layout.first_baseline_mm + row_index * layout.row_gap_mm,
                    speed_mm_per_s=layout.speed_mm_per_s,
                    gain_mm_per_mv=layout.gain_of(lead),
                )
            )
    return tuple(windows)


def lay_out(signal: Signal, layout: Layout) -> Page:
    """A page of the signal's leads; a lead the signal lacks raises KeyError."""
    windows = windows_of(layout)
    strips = tuple(_strip(signal, window) for window in windows)
    row_starts = [window for window in windows if window.x_mm == layout.left_mm]
    strokes: list[Stroke] = []
    if layout.pulse != "none":
        strokes += [_pulse(layout, window) for window in row_starts]
    for window in windows:
        if window.x_mm != layout.left_mm:
            strokes += _ticks(window)
    return Page(
        paper_mm=layout.paper_mm,
        origin_on_paper_mm=layout.origin_on_paper_mm,
        grid_mm=layout.grid_mm,
        strips=strips,
        strokes=tuple(strokes),
        labels=_labels(layout, windows),
    )


def _strip(signal: Signal, window: Window) -> Strip:
    first = round(window.start_s * signal.fs_hz)
    last = round((window.start_s + window.duration_s) * signal.fs_hz)
    heights_mv = signal.leads_mv[window.lead][first : last + 1]
    return Strip(
        name=window.lead,
        x_mm=window.x_mm,
        baseline_mm=window.baseline_mm,
        heights_mm=np.asarray(heights_mv, dtype=np.float64) * window.gain_mm_per_mv,
        step_mm=window.speed_mm_per_s / signal.fs_hz,
    )


def pulse_corners_mm(layout: Layout, baseline_mm: float) -> FloatArray:
    """Corners of a row's calibration pulse with its lead-in and lead-out, shape (N, 2)."""
    width_mm = PULSE_S * layout.speed_mm_per_s
    end_mm = layout.left_mm - PULSE_LEAD_IN_MM
    start_mm = end_mm - width_mm
    high_mm = baseline_mm - layout.gain_mm_per_mv
    corners = [(start_mm - PULSE_LEAD_IN_MM, baseline_mm), (start_mm, baseline_mm)]
    corners.append((start_mm, high_mm))
    if layout.pulse == "stepped":
        middle_mm = (start_mm + end_mm) / 2.0
        low_mm = baseline_mm - layout.chest_gain_mm_per_mv
        corners += [(middle_mm, high_mm), (middle_mm, low_mm), (end_mm, low_mm)]
    else:
        corners.append((end_mm, high_mm))
    corners += [(end_mm, baseline_mm), (layout.left_mm, baseline_mm)]
    return np.array(corners)


def _pulse(layout: Layout, window: Window) -> Stroke:
    return Stroke(pulse_corners_mm(layout, window.baseline_mm))


def _ticks(window: Window) -> list[Stroke]:
    """A short upright mark above and below the line where one lead gives way to the next."""
    return [
        Stroke(
            np.array(
                [
                    [window.x_mm, window.baseline_mm + side * 4.0 - TICK_HALF_MM],
                    [window.x_mm, window.baseline_mm + side * 4.0 + TICK_HALF_MM],
                ]
            ),
            width_mm=0.25,
        )
        for side in (-1.0, 1.0)
    ]


def _labels(layout: Layout, windows: tuple[Window, ...]) -> tuple[Label, ...]:
    left, top, _, bottom = layout.grid_mm
    names = tuple(
        Label(window.lead, window.x_mm + 1.2, window.baseline_mm - 9.0, 3.2) for window in windows
    )
    words = (
        Label(layout.title, left, top - 4.0, 5.0),
        Label(layout.legend, left + 3.0, bottom - 2.5, 3.2),
    )
    return (*(word for word in words if word.text), *names)
