"""Draw the specimen pages and write beside each what is true of it.

Run from the repository root: ``python sample_scans/make_specimens.py``. The same seed gives
the same truth; pixels may differ in their last bits between library versions.
"""

from __future__ import annotations

import json
import sys
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray
from PIL import Image

if __name__ == "__main__":  # run as a script, the repository root is not on the path
    sys.path.insert(0, str(Path(__file__).resolve().parent.parent))

from sample_scans import hearts
from sample_scans.layout import (
    PULSE_S,
    Layout,
    Signal,
    Window,
    lay_out,
    pulse_corners_mm,
    windows_of,
)
from sample_scans.page import (
    GRID_COLOURS,
    Finish,
    RenderedPage,
    Ruling,
    Scan,
    render_page,
)
from sample_scans.waveform import (
    LEADS,
    Heart,
    Recording,
    lead_heights_mv,
    lead_marks_ms,
    onsets_from_rr,
)

FOLDER = Path(__file__).resolve().parent
FS_HZ = 1000.0


@dataclass(frozen=True, slots=True)
class Specimen:
    """One invented page: what was recorded, how it is laid out, printed and scanned."""

    file_name: str
    heart: Heart
    first_qrs_ms: float
    rr_ms: tuple[float, ...]
    layout: Layout
    scan: Scan
    ruling: Ruling
    finish: Finish
    seed: int

    @property
    def recording(self) -> Recording:
        """The beats."""
        return Recording(self.heart, onsets_from_rr(self.first_qrs_ms, self.rr_ms))


RESTING_RR_MS = (836.0, 828.0, 834.0, 841.0, 835.0, 829.0, 827.0, 833.0, 838.0, 834.0, 830.0)
SLOW_RR_MS = (1252.0, 1244.0, 1256.0, 1249.0, 1247.0, 1251.0, 1248.0)
IRREGULAR_RR_MS = (
    *(742.0, 986.0, 654.0, 1100.0, 868.0, 620.0),
    *(796.0, 1042.0, 706.0, 912.0, 688.0, 834.0),
)
SIX_LEADS_AT_50 = Layout(
    rows=(("I",), ("II",), ("III",), ("aVR",), ("aVL",), ("aVF",)),
    row_s=4.9,
    speed_mm_per_s=50.0,
    left_mm=17.0,
    first_baseline_mm=22.0,
    row_gap_mm=27.0,
    legend="50 mm/s   10 mm/mV   0.05 - 150 Hz",
)
THREE_RHYTHM_ROWS = Layout(
    rows=(("II",), ("V1",), ("V5",)),
    first_baseline_mm=24.0,
    row_gap_mm=34.0,
    grid_mm=(0.0, 0.0, 270.0, 115.0),
    paper_mm=(297.0, 150.0),
)


def specimens() -> tuple[Specimen, ...]:
    """The pages of this folder."""
    scan = Scan(dpi=225.0, printed_scale=0.985, skew_deg=0.35, shift_px=(3.4, -2.3))
    soft = Finish(blur_sigma_px=0.45, noise=1.2, shading=8.0, jpeg_quality=88)
    # Grain does not compress without loss: the PNG pages are clean, as an office scanner's are.
    clean = Finish(blur_sigma_px=0.4)
    red, orange = Ruling(), Ruling(colour=GRID_COLOURS["orange"])
    half = replace(Layout(), pulse="stepped", chest_gain_mm_per_mv=5.0)
    half = replace(half, legend="25 mm/s   limb 10 mm/mV   chest 5 mm/mV   0.05 - 150 Hz")
    normal = hearts.normal_heart()
    return (
        Specimen("twelve_lead_25.jpg", normal, 412.0, RESTING_RR_MS, Layout(), scan, red, soft, 11),
        Specimen(
            "twelve_lead_50.jpg",
            normal,
            412.0,
            RESTING_RR_MS,
            SIX_LEADS_AT_50,
            replace(scan, printed_scale=1.0, skew_deg=-0.25),
            orange,
            soft,
            12,
        ),
        Specimen(
            "irregular_rhythm.png",
            hearts.fibrillating_heart(),
            388.0,
            IRREGULAR_RR_MS,
            THREE_RHYTHM_ROWS,
            Scan(dpi=200.0, skew_deg=0.0, y_over_x=1.006, shift_px=(0.3, 0.6)),
            Ruling(colour=GRID_COLOURS["green"]),
            clean,
            13,
        ),
        Specimen(
            "wide_qrs.jpg",
            hearts.wide_qrs_heart(),
            446.0,
            tuple(rr_ms - 6.0 for rr_ms in RESTING_RR_MS),
            Layout(),
            replace(scan, printed_scale=0.94, skew_deg=-0.6),
            replace(red, colour=GRID_COLOURS["pink"]),
            replace(soft, ink=(20, 20, 60)),
            14,
        ),
        Specimen(
            "half_gain.png",
            hearts.large_voltage_heart(),
            522.0,
            SLOW_RR_MS,
            half,
            Scan(dpi=200.0, printed_scale=1.0, skew_deg=0.15, y_over_x=0.996),
            Ruling(colour=GRID_COLOURS["grey"], thin_strength=0.45),
            replace(clean, mode="grey"),
            15,
        ),
    )


def draw_specimen(specimen: Specimen) -> RenderedPage:
    """Draw one page; JPEG loss is left to the file."""
    mv = specimen.recording.sampled_mv(FS_HZ, specimen.layout.row_s + 0.1)
    signal = Signal(FS_HZ, dict(zip(LEADS, mv.T, strict=True)))
    page = lay_out(signal, specimen.layout)
    finish = replace(specimen.finish, jpeg_quality=None)
    return render_page(page, specimen.scan, specimen.ruling, finish, specimen.seed)


def specimen_truth(specimen: Specimen, drawn: RenderedPage) -> dict[str, Any]:
    """Everything a test needs to place calipers and judge the values, ready for JSON."""
    layout, heart, recording = specimen.layout, specimen.heart, specimen.recording
    rr_ms = recording.rr_ms
    truth = drawn.truth
    truth.update(
        file=specimen.file_name,
        specimen="SPECIMEN - invented recording",
        frames="px: (0, 0) is the centre of the first pixel; mm: sheet_mm; ms from strip start",
        speed_mm_per_s=layout.speed_mm_per_s,
        gain_mm_per_mv=layout.gain_mm_per_mv,
        chest_gain_mm_per_mv=layout.chest_gain_mm_per_mv,
        qrs_on_ms=list(recording.qrs_on_ms),
        rr_ms=list(rr_ms),
        mean_rate_per_min=60_000.0 * len(rr_ms) / sum(rr_ms),
        intervals_ms=heart.intervals_ms(),
        axis_deg=heart.axis_deg,
        heights_mv={lead: lead_heights_mv(heart, lead) for lead in LEADS},
        pulses=_pulses(layout, drawn),
        strips=[_strip_truth(recording, window, drawn) for window in windows_of(layout)],
    )
    return truth


def _pulses(layout: Layout, drawn: RenderedPage) -> list[dict[str, Any]]:
    """The calibration pulse before each row."""
    baselines_mm = dict.fromkeys(window.baseline_mm for window in windows_of(layout))
    pulses = []
    for baseline_mm in baselines_mm:
        corners_mm = pulse_corners_mm(layout, baseline_mm)
        pulses.append(
            {
                "shape": layout.pulse,
                "width_mm": PULSE_S * layout.speed_mm_per_s,
                "height_mm": layout.gain_mm_per_mv,
                "corners_mm": _rounded(corners_mm),
                "corners_px": _rounded(drawn.to_px(corners_mm)),
            }
        )
    return pulses


def _strip_truth(recording: Recording, window: Window, drawn: RenderedPage) -> dict[str, Any]:
    """One strip and the boundaries of every beat that fall inside it."""
    beats = []
    marks_ms = lead_marks_ms(recording.heart, window.lead)
    for number, on_ms in enumerate(recording.qrs_on_ms):
        beat: dict[str, Any] = {"beat": number}
        for name, offset_ms in marks_ms.items():
            strip_ms = None if offset_ms is None else on_ms + offset_ms - 1000.0 * window.start_s
            if strip_ms is not None and 0.0 <= strip_ms <= 1000.0 * window.duration_s:
                beat[name] = _mark(recording, window, drawn, strip_ms)
        if len(beat) > 1:
            beats.append(beat)
    return {
        "lead": window.lead,
        "start_ms": 1000.0 * window.start_s,
        "duration_ms": 1000.0 * window.duration_s,
        "x_mm": window.x_mm,
        "baseline_mm": window.baseline_mm,
        "length_mm": window.duration_s * window.speed_mm_per_s,
        "gain_mm_per_mv": window.gain_mm_per_mv,
        "beats": beats,
    }


def _mark(
    recording: Recording, window: Window, drawn: RenderedPage, strip_ms: float
) -> dict[str, Any]:
    """A point on the drawn line: time in the strip, height, and place in both frames."""
    recording_ms = np.array([strip_ms + 1000.0 * window.start_s])
    height_mv = float(recording.height_mv(window.lead, recording_ms)[0])
    x_mm = window.x_mm + strip_ms * window.speed_mm_per_s / 1000.0
    point_mm = np.array([[x_mm, window.baseline_mm - height_mv * window.gain_mm_per_mv]])
    return {
        "ms": round(strip_ms, 6),
        "mv": round(height_mv, 6),
        "mm": _rounded(point_mm)[0],
        "px": _rounded(drawn.to_px(point_mm))[0],
    }


def _rounded(points: NDArray[np.float64]) -> list[list[float]]:
    """Five decimals: far below what can be drawn, and short in the file."""
    rounded: list[list[float]] = np.round(points, 5).tolist()
    return rounded


def save_specimen(specimen: Specimen, folder: Path) -> Path:
    """Write a page and its truth beside it; returns the picture's path."""
    drawn = draw_specimen(specimen)
    path = folder / specimen.file_name
    pixels = drawn.pixels[:, :, 0] if specimen.finish.mode == "grey" else drawn.pixels
    picture = Image.fromarray(pixels)
    dpi = (specimen.scan.dpi, specimen.scan.dpi)
    if path.suffix == ".jpg":
        picture.save(path, quality=specimen.finish.jpeg_quality, dpi=dpi)
    else:
        picture.save(path, optimize=True, dpi=dpi)
    truth_path = path.with_suffix(".truth.json")
    truth = json.dumps(specimen_truth(specimen, drawn), indent=1)
    truth_path.write_text(truth + "\n", encoding="utf-8")
    return path


if __name__ == "__main__":
    for one in specimens():
        save_specimen(one, FOLDER)
