"""Real recordings drawn on paper, scanned, and measured: are the known values within the ±?

Two sources. The 12-lead recording of the pydicom wheel, whose recorder wrote global
boundaries for every beat and stated RR 982, PR 161, QRS 75, QT 368, QTc 370 ms and a QRS axis
of 52 degrees in the file itself. And recordings of LUDB, QT Database, PTB and MIT-BIH with
wave boundaries (ODC-By 1.0, attribution beside the data), when they lie beside the
repository.

A mark is put on the whole pixel nearest to a known boundary, as a click at 1:1 does; the page
goes through a JPEG file, so that everything from the file to the shown ± takes part.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray

from app.calculator import Value, work_out
from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    PicturePoint,
    Reading,
    Setting,
    new_reading,
)
from imaging import SheetMap, find_grid, open_picture
from sample_scans.layout import Layout, Window, windows_of
from sample_scans.page import Finish, RenderedPage, Ruling, Scan
from tests.pages import (
    RealRecording,
    dicom_recording,
    layout_for,
    page_from_signal,
    real_recording,
    recording_names,
    recordings_missing,
    save,
)

# Stated in the DICOM file (waveform annotations, group 1): ms and degrees.
STATED = {"rr_mean": 982.0, "pr": 161.0, "qrs": 75.0, "qt": 368.0, "qrs_axis": 52.0}
STATED_QTC_MS = 370.0
SCAN = Scan(dpi=150.0, printed_scale=0.97, skew_deg=-0.8, y_over_x=1.004, shift_px=(1.3, 0.6))
FINISH = Finish(blur_sigma_px=0.5, noise=1.5, shading=10.0)
CONFIRMED = Calibration(
    Setting(25.0, Evidence.LEGEND, confirmed=True), Setting(10.0, Evidence.PULSE, confirmed=True)
)


@dataclass(frozen=True)
class Sheet:
    """A drawn recording and what was made of its scan."""

    recording: RealRecording
    layout: Layout
    drawn: RenderedPage
    reading: Reading

    def window(self, lead: str) -> Window:
        """The longest strip of a lead."""
        return max(
            (window for window in windows_of(self.layout) if window.lead == lead),
            key=lambda window: window.duration_s,
        )

    def holds(self, lead: str, *samples: int | None) -> bool:
        """Whether all samples are known and lie on the strip."""
        window = self.window(lead)
        first_s, last_s = window.start_s, window.start_s + window.duration_s
        return all(
            sample is not None and first_s <= sample / self.recording.fs_hz <= last_s
            for sample in samples
        )

    def baseline_mv(self, lead: str) -> float:
        """What the page maker draws on the strip's baseline: the lead's median."""
        return float(np.median(self.recording.signal_mv[:, self.recording.leads.index(lead)]))

    def place(self, lead: str, sample: float, height_mv: float = 0.0) -> PicturePoint:
        """The whole pixel nearest to a time and a height above the strip's baseline."""
        window = self.window(lead)
        time_s = sample / self.recording.fs_hz - window.start_s
        x_mm = window.x_mm + time_s * window.speed_mm_per_s
        y_mm = window.baseline_mm - height_mv * window.gain_mm_per_mv
        x_px, y_px = np.rint(self.drawn.to_px(np.array([[x_mm, y_mm]]))[0])
        return PicturePoint(float(x_px), float(y_px))


def _scan(recording: RealRecording, folder: Path) -> Sheet:
    seconds = (len(recording.signal_mv) - 1) / recording.fs_hz
    layout = layout_for(recording.leads, seconds)
    drawn = page_from_signal(
        recording.signal_mv,
        recording.fs_hz,
        recording.leads,
        layout,
        scan=SCAN,
        ruling=Ruling(),
        finish=FINISH,
    )
    picture = open_picture(save(drawn.pixels, folder / f"{recording.name}.jpg"))
    sheet_map = find_grid(picture)
    assert isinstance(sheet_map, SheetMap), sheet_map
    assert sheet_map.scale_is_certain
    reading = new_reading(picture, now="2026-01-02T03:04:05+00:00", software_version="test")
    with_map = Reading(
        picture=reading.picture,
        sheet_map=sheet_map,
        calibration=CONFIRMED,
        created_at=reading.created_at,
        changed_at=reading.changed_at,
    )
    return Sheet(recording, layout, drawn, with_map)


def _mark(
    sheet: Sheet, reading: Reading, key: str, lead: str, beat: int, start: float, end: float
) -> Reading:
    """A time caliper between two samples."""
    caliper = Caliper(
        reading.next_caliper_id,
        CaliperKind.TIME,
        sheet.place(lead, start),
        sheet.place(lead, end),
        key,
        lead,
        beat,
    )
    return reading.with_caliper(caliper)


def _mark_beats(
    sheet: Sheet, lead: str, r_samples: list[int], beats: list[dict[str, Any]]
) -> tuple[Reading, dict[str, NDArray[np.float64]]]:
    """Every interval on the strip; the reading, and the known values in ms."""
    reading, known_ms = sheet.reading, dict[str, list[float]]()
    ms_per_sample = 1000.0 / sheet.recording.fs_hz
    spans = [("rr", *pair) for pair in pairwise(r_samples)]
    for beat in beats:
        spans += [
            ("p_duration", beat["p_on"], beat.get("p_off")),
            ("pr", beat["p_on"], beat["qrs_on"]),
            ("qrs", beat["qrs_on"], beat["j"]),
            ("qt", beat["qrs_on"], beat["t_end"]),
        ]
    for key, start, end in spans:
        if not sheet.holds(lead, start, end):
            continue
        known_ms.setdefault(key, []).append((end - start) * ms_per_sample)
        reading = _mark(sheet, reading, key, lead, len(known_ms[key]), start, end)
    return reading, {key: np.array(values) for key, values in known_ms.items()}


def _net_qrs_mv(
    sheet: Sheet, reading: Reading, lead: str, onset: int, end: int
) -> tuple[Reading, float]:
    """Mark R and the deepest point below the QRS-onset level; the reading and the net height."""
    column = sheet.recording.leads.index(lead)
    signal_mv = sheet.recording.signal_mv[:, column] - sheet.baseline_mv(lead)
    level_mv, inside_mv = signal_mv[onset], signal_mv[onset : end + 1]
    net_mv = 0.0
    for key, at in (("r_height", inside_mv.argmax()), ("s_height", inside_mv.argmin())):
        peak = onset + int(at)
        net_mv += signal_mv[peak] - level_mv
        caliper = Caliper(
            reading.next_caliper_id,
            CaliperKind.HEIGHT,
            sheet.place(lead, onset, level_mv),
            sheet.place(lead, peak, signal_mv[peak]),
            key,
            lead,
            1,
        )
        reading = reading.with_caliper(caliper)
    return reading, float(net_mv)


def _shown(values: list[Value], key: str) -> tuple[float, float]:
    """Value and ± of a key; there must be one, not refused."""
    found = next(value for value in values if value.key == key)
    assert found.value is not None, found.refusal
    assert found.plus_minus is not None
    return found.value, found.plus_minus


def _assert_within(
    values: list[Value], key: str, known: float, standard_error: float = 0.0
) -> None:
    """`standard_error` is that of the known beats' mean, which the ± has to contain."""
    shown, plus_minus = _shown(values, key)
    assert abs(shown - known) <= plus_minus, f"{key}: {shown:.2f} ± {plus_minus:.2f}, not {known}"
    # A value that lies within ± because ± is huge shows nothing.
    assert plus_minus < 0.05 * abs(known) + 12.0 + 2.0 * standard_error


def _assert_corrected(values: list[Value], qt_ms: float, rr_ms: float) -> None:
    """The four corrections of the known QT and RR (formulas: secondary sources)."""
    rr_s = rr_ms / 1000.0
    known = {
        "qtc_bazett": qt_ms / rr_s**0.5,
        "qtc_fridericia": qt_ms / rr_s ** (1.0 / 3.0),
        "qtc_framingham": qt_ms + 154.0 * (1.0 - rr_s),
        "qtc_hodges": qt_ms + 1.75 * (60.0 / rr_s - 60.0),
    }
    for key, qtc_ms in known.items():
        _assert_within(values, key, qtc_ms)


@pytest.fixture(scope="module")
def dicom_sheet(tmp_path_factory: pytest.TempPathFactory) -> Sheet:
    """The recording every machine has, drawn and scanned."""
    return _scan(dicom_recording(), tmp_path_factory.mktemp("pages"))


def _recorder_beats() -> list[dict[str, Any]]:
    """Boundaries the recorder wrote: annotation groups from 101 on; 100 is cut by the page."""
    import pydicom
    from pydicom.data import get_testdata_file

    names = {
        "P Onset": "p_on",
        "P Offset": "p_off",
        "QRS Onset": "qrs_on",
        "Fiducial Point": "r_peak",
        "QRS Offset": "j",
        "T Offset": "t_end",
    }
    beats: dict[int, dict[str, Any]] = {}
    path = get_testdata_file("waveform_ecg.dcm", download=False)
    for item in pydicom.dcmread(str(path)).WaveformAnnotationSequence:
        if item.AnnotationGroupNumber < 100 or "ReferencedSamplePositions" not in item:
            continue
        name = names[item.ConceptNameCodeSequence[0].CodeMeaning]
        # DICOM counts samples from 1.
        position = int(item.ReferencedSamplePositions) - 1
        beats.setdefault(int(item.AnnotationGroupNumber), {})[name] = position
    return [beats[number] for number in sorted(beats)]


def test_the_recorders_own_values_come_back_from_paper(dicom_sheet: Sheet) -> None:
    beats = _recorder_beats()
    reading, known_ms = _mark_beats(dicom_sheet, "II", [b["r_peak"] for b in beats], beats)
    values = work_out(reading)
    for key in ("rr_mean", "pr", "qrs", "qt"):
        _assert_within(values, key, STATED[key])
    _assert_within(values, "p_duration", float(known_ms["p_duration"].mean()))
    for key in ("qtc_fridericia", "qtc_bazett", "qtc_framingham", "qtc_hodges"):
        _assert_within(values, key, STATED_QTC_MS)


def test_the_recorders_axis_comes_back_from_paper(dicom_sheet: Sheet) -> None:
    reading, net_mv = dicom_sheet.reading, {}
    for lead in ("I", "aVF"):
        beat = next(
            beat for beat in _recorder_beats() if dicom_sheet.holds(lead, beat["qrs_on"], beat["j"])
        )
        reading, net_mv[lead] = _net_qrs_mv(dicom_sheet, reading, lead, beat["qrs_on"], beat["j"])
    known_deg = np.degrees(np.arctan2(2.0 / np.sqrt(3.0) * net_mv["aVF"], net_mv["I"]))
    _assert_within(work_out(reading), "qrs_axis", float(known_deg))
    shown_deg, plus_minus_deg = _shown(work_out(reading), "qrs_axis")
    assert shown_deg == pytest.approx(STATED["qrs_axis"], abs=plus_minus_deg)


@pytest.mark.skipif(recordings_missing() is not None, reason=recordings_missing() or "")
@pytest.mark.parametrize("name", recording_names())
def test_experts_boundaries_come_back_from_paper(name: str, tmp_path: Path) -> None:
    recording = real_recording(name)
    boundaries = recording.notes["boundaries"]
    lead = boundaries["reference_lead"]
    sheet = _scan(recording, tmp_path)
    reading, known_ms = _mark_beats(
        sheet, lead, recording.notes["r_peaks"]["samples"], boundaries["beats"]
    )
    values = work_out(reading)
    assert known_ms["rr"].size >= 5
    for key, known in known_ms.items():
        error_ms = float(known.std(ddof=1) / np.sqrt(known.size))
        _assert_within(values, {"rr": "rr_mean"}.get(key, key), float(known.mean()), error_ms)
    rr_ms = float(known_ms["rr"].mean())
    _assert_within(values, "rate", 60_000.0 / rr_ms)
    if "qt" in known_ms:
        _assert_corrected(values, float(known_ms["qt"].mean()), rr_ms)
