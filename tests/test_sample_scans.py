"""The page maker itself: its truth is only worth something if the drawing agrees with it.

Tolerances are in px: a grid line and a pen line are drawn within 0.05 px of their truth
(0.2 ms at 25 mm/s and 300 dpi is 0.06 px).
"""

from __future__ import annotations

import json
from dataclasses import replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from numpy.typing import NDArray
from PIL import Image

from sample_scans import hearts
from sample_scans.layout import Layout, windows_of
from sample_scans.make_specimens import (
    FOLDER,
    Specimen,
    draw_specimen,
    save_specimen,
    specimens,
)
from sample_scans.page import (
    Finish,
    Page,
    RenderedPage,
    Ruling,
    Scan,
    Strip,
    apply_affine,
    invert_affine,
    render_page,
)
from sample_scans.waveform import (
    LEADS,
    QRS_PARTS,
    Heart,
    Recording,
    lead_heights_mv,
    lead_marks_ms,
    onsets_from_rr,
)
from tests.pages import (
    RealRecording,
    dicom_recording,
    flat_page,
    no_grid_pictures,
    random_flat_page,
    real_page,
    real_recording,
    recording_names,
    recordings_missing,
    save,
    turned,
    unscaled_grid_pictures,
)

FloatArray = NDArray[np.float64]

HEARTS = {
    "normal": hearts.normal_heart(),
    "fibrillating": hearts.fibrillating_heart(),
    "wide": hearts.wide_qrs_heart(),
    "large": hearts.large_voltage_heart(),
}
LINE_TOLERANCE_PX = 0.05
SPECIMENS = {specimen.file_name: specimen for specimen in specimens()}


@pytest.fixture(params=HEARTS)
def heart(request: pytest.FixtureRequest) -> Heart:
    return HEARTS[request.param]


@pytest.fixture(params=SPECIMENS)
def specimen(request: pytest.FixtureRequest) -> Specimen:
    return SPECIMENS[request.param]


# The waveform


def test_limb_leads_obey_einthoven_and_goldberger(heart: Heart) -> None:
    """II = I + III; aVR = -(I + II)/2; aVL = (I - III)/2; aVF = (II + III)/2 (computed)."""
    leads = Recording(heart, onsets_from_rr(300.0, [700.0, 1010.0])).sampled_mv(1000.0, 2.5).T
    one, two, three, avr, avl, avf = leads[:6]
    assert np.abs(one).max() > 0.3
    for left, right in (
        (two, one + three),
        (avr, -(one + two) / 2.0),
        (avl, (one - three) / 2.0),
        (avf, (two + three) / 2.0),
    ):
        np.testing.assert_allclose(left, right, rtol=0.0, atol=1e-12)


def test_axis_from_net_heights_is_the_direction_put_in(heart: Heart) -> None:
    """atan2((2/sqrt 3) aVF, I) of net heights; Novosel 1999 (found)."""
    net_mv = {lead: lead_heights_mv(heart, lead)["net_qrs"] for lead in ("I", "aVF")}
    axis_deg = np.rad2deg(np.arctan2(2.0 / np.sqrt(3.0) * net_mv["aVF"], net_mv["I"]))
    assert axis_deg == pytest.approx(heart.axis_deg, abs=1e-9)


def test_all_qrs_parts_share_one_frontal_direction(heart: Heart) -> None:
    directions = {w.direction_deg for w in heart.part(*QRS_PARTS) if w.frontal_mv}
    assert directions == {heart.axis_deg}


@pytest.mark.parametrize("lead", LEADS)
def test_signal_is_zero_outside_the_boundaries_and_not_inside(heart: Heart, lead: str) -> None:
    quiet = replace(heart, ripple=None)
    on_ms = 400.0
    time_ms = np.arange(0.0, 1000.0, 0.25)
    mv = Recording(quiet, (on_ms,)).height_mv(lead, time_ms)
    marks = {name: on_ms + ms for name, ms in lead_marks_ms(quiet, lead).items() if ms is not None}
    inside = np.zeros(time_ms.shape, dtype=bool)
    for begin, end in (("p_on", "p_off"), ("qrs_on", "j"), ("t_on", "t_end")):
        if begin not in marks:
            continue
        inside |= (time_ms > marks[begin]) & (time_ms < marks[end])
        just_inside = [marks[begin] + 1.0, marks[end] - 1.0]
        assert (Recording(quiet, (on_ms,)).height_mv(lead, np.array(just_inside)) != 0.0).all()
    # aVF etc. are differences of I and II: zero to rounding.
    assert np.abs(mv[~inside]).max() < 1e-12
    assert np.abs(mv[inside]).max() > 0.02


@pytest.mark.parametrize("lead", LEADS)
def test_main_peak_lies_where_the_sampled_qrs_is_largest(heart: Heart, lead: str) -> None:
    quiet = replace(heart, ripple=None)
    marks = lead_marks_ms(quiet, lead)
    time_ms = np.arange(0.0, 148.5, 0.5)
    mv = Recording(quiet, (0.0,)).height_mv(lead, time_ms)
    qrs_mv = np.where(time_ms <= (marks["j"] or 0.0), mv, 0.0)
    assert time_ms[np.argmax(np.abs(qrs_mv))] == marks["main_peak"]
    if marks["r_peak"] is not None:
        assert time_ms[np.argmax(qrs_mv)] == marks["r_peak"]
        assert qrs_mv.max() == pytest.approx(lead_heights_mv(quiet, lead)["r"], abs=1e-12)


def test_intervals_of_the_hearts() -> None:
    assert HEARTS["normal"].intervals_ms() == {"p": 104.0, "pr": 160.0, "qrs": 92.0, "qt": 380.0}
    assert HEARTS["fibrillating"].intervals_ms()["pr"] is None
    assert HEARTS["wide"].intervals_ms()["qrs"] == 148.0


def test_rr_intervals_come_back() -> None:
    rr_ms = (620.0, 1100.0, 743.0)
    assert Recording(HEARTS["normal"], onsets_from_rr(311.0, rr_ms)).rr_ms == rr_ms


# The drawing


def _darkness(pixels: NDArray[np.uint8]) -> FloatArray:
    return 255.0 - pixels.astype(np.float64).mean(axis=2)


def _line_offsets_px(drawn: RenderedPage, axis: int, at_mm: list[int]) -> FloatArray:
    """Centroid of darkness across each grid line, minus where the map puts it, in px.

    Measured half-way between the crossing lines, on profiles along the pixel axis (the
    skew is small enough that a profile along the axis crosses the line at the same place).
    """
    darkness = _darkness(drawn.pixels)
    if axis == 1:
        darkness = darkness.T
    offsets = []
    for line_mm in at_mm:
        for along_mm in (2.5, 12.5, 21.5):
            place_mm = (line_mm, along_mm) if axis == 0 else (along_mm, line_mm)
            across_px, along_px = drawn.to_px(np.array([place_mm]))[0][:: 1 if axis == 0 else -1]
            row = round(along_px)
            slope = drawn.px_from_mm[axis, 1 - axis] / drawn.px_from_mm[1 - axis, 1 - axis]
            expected_px = across_px + slope * (row - along_px)
            reach = int(drawn.px_from_mm[axis, axis] * 0.45)
            columns = np.arange(round(across_px) - reach, round(across_px) + reach + 1)
            profile = darkness[row, columns]
            profile = profile - profile.min()
            offsets.append(float((profile * columns).sum() / profile.sum() - expected_px))
    return np.array(offsets)


@pytest.mark.parametrize("axis", [0, 1])
@pytest.mark.parametrize(
    "options",
    [
        {"dpi": 150.0},
        {"dpi": 300.0, "printed_scale": 0.94, "y_over_x": 1.02},
        {"dpi": 300.0, "skew_deg": 0.8, "shift_px": (3.3, -1.7)},
        {"dpi": 600.0, "skew_deg": -1.5, "blur_sigma_px": 0.8},
    ],
)
def test_grid_lines_stand_where_the_map_says(axis: int, options: dict[str, Any]) -> None:
    drawn = flat_page(traces=False, paper=(255, 255, 255), **options)
    offsets_px = _line_offsets_px(drawn, axis, [5, 10, 13, 30, 47, 55])
    assert np.abs(offsets_px).max() < LINE_TOLERANCE_PX


def test_a_map_half_a_pixel_off_would_be_noticed() -> None:
    """The measurement above can fail: shift the truth, not the drawing."""
    drawn = flat_page(traces=False, dpi=300.0, paper=(255, 255, 255))
    shifted = replace(drawn, px_from_mm=drawn.px_from_mm + np.array([[0, 0, 0.5], [0, 0, 0]]))
    assert np.abs(_line_offsets_px(shifted, 0, [5, 13])).min() > 0.4


def test_bold_lines_are_those_at_multiples_of_five() -> None:
    drawn = flat_page(traces=False, dpi=300.0, paper=(255, 255, 255))
    rows_mm = np.arange(1, 40) + 0.0
    points_px = np.rint(drawn.to_px(np.column_stack([np.full(39, 12.5), rows_mm]))).astype(int)
    darkness = _darkness(drawn.pixels)
    across = np.array([darkness[y - 3 : y + 4, x].sum() for x, y in points_px])
    bold = np.isin(rows_mm % 5.0, [0.0])
    assert across[bold].min() > 1.5 * across[~bold].max()


def test_grid_is_printed_only_inside_its_frame() -> None:
    drawn = flat_page(traces=False, dpi=200.0)
    darkness = _darkness(drawn.pixels)
    paper = darkness[0, 0]
    height_px, width_px = darkness.shape
    y_px, x_px = np.mgrid[0:height_px, 0:width_px]
    mm = drawn.to_mm(np.column_stack([x_px.ravel(), y_px.ravel()]))
    left, top, right, bottom = drawn.grid_mm
    beyond = (mm < (left - 0.4, top - 0.4)) | (mm > (right + 0.4, bottom + 0.4))
    outside = beyond.any(axis=1).reshape(darkness.shape)
    assert np.abs(darkness[outside] - paper).max() == 0.0
    assert (darkness[~outside] > paper + 40.0).mean() > 0.1


@pytest.mark.parametrize("dpi", [150.0, 300.0, 600.0])
@pytest.mark.parametrize("pen_width_mm", [0.2, 0.35, 0.6])
def test_pen_line_is_centred_on_a_flat_part(dpi: float, pen_width_mm: float) -> None:
    """Centroid of each column, on paper without a grid, for baselines at any fraction of a px."""
    strips = tuple(
        Strip("II", 5.0, 4.0 + 3.0 * index + 0.0137 * index, np.zeros(2), 40.0)
        for index in range(10)
    )
    page = Page((50.0, 40.0), (0.0, 0.0), (0.0, 0.0, 0.0, 0.0), strips)
    scan = Scan(dpi=dpi, skew_deg=0.4)
    finish = Finish(paper=(255, 255, 255), ink=(0, 0, 0), pen_width_mm=pen_width_mm)
    drawn = render_page(page, scan, Ruling(thin="absent", bold=False), finish)
    errors_px = [
        _column_centre_px(drawn, x_mm, strip.baseline_mm)
        for strip in strips
        for x_mm in np.linspace(8.0, 42.0, 23)
    ]
    assert np.abs(errors_px).max() < LINE_TOLERANCE_PX


def _column_centre_px(drawn: RenderedPage, x_mm: float, baseline_mm: float) -> float:
    """Centroid of darkness of one column near a level line, minus where the line passes."""
    x_px, y_px = drawn.to_px(np.array([[x_mm, baseline_mm]]))[0]
    column = round(x_px)
    slope = drawn.px_from_mm[1, 0] / drawn.px_from_mm[0, 0]
    expected_px = y_px + slope * (column - x_px)
    reach = int(1.2 * drawn.px_from_mm[1, 1])
    rows = np.arange(round(expected_px) - reach, round(expected_px) + reach + 1)
    profile = _darkness(drawn.pixels[rows, column : column + 1])[:, 0]
    return float((profile * rows).sum() / profile.sum() - expected_px)


def test_pen_line_has_the_width_asked_for() -> None:
    page = Page((30.0, 20.0), (0, 0), (0, 0, 0, 0), (Strip("I", 2.0, 10.0, np.zeros(2), 26.0),))
    finish = Finish(paper=(255, 255, 255), ink=(0, 0, 0), pen_width_mm=0.4)
    drawn = render_page(page, Scan(dpi=300.0), Ruling(thin="absent", bold=False), finish)
    width_px = _darkness(drawn.pixels)[:, 150].sum() / 255.0
    assert width_px == pytest.approx(0.4 * 300.0 / 25.4, abs=0.03)


def test_same_seed_same_pixels_other_seed_other_noise() -> None:
    first, again = (flat_page(dpi=100.0, noise=3.0, seed=5) for _ in range(2))
    other = flat_page(dpi=100.0, noise=3.0, seed=6)
    assert np.array_equal(first.pixels, again.pixels)
    assert not np.array_equal(first.pixels, other.pixels)


def test_one_bit_grey_and_jpeg() -> None:
    one_bit = flat_page(dpi=150.0, mode="one_bit", one_bit_threshold=225.0)
    assert set(np.unique(one_bit.pixels)) == {0, 255}
    grey = flat_page(dpi=150.0, mode="grey").pixels
    assert np.array_equal(grey[:, :, 0], grey[:, :, 2])
    clean, lossy = flat_page(dpi=150.0), flat_page(dpi=150.0, jpeg_quality=60)
    difference = np.abs(clean.pixels.astype(int) - lossy.pixels)
    assert 0.0 < difference.mean() < 12.0


def test_dotted_and_absent_thin_lines_print_less() -> None:
    ink = {
        thin: _darkness(flat_page(traces=False, dpi=300.0, thin=thin).pixels).mean()
        for thin in ("solid", "dotted", "absent")
    }
    assert ink["absent"] < ink["dotted"] < ink["solid"]


def test_affine_and_its_inverse_undo_each_other() -> None:
    matrix = flat_page(dpi=150.0, skew_deg=2.0).px_from_mm
    points = np.array([[0.0, 0.0], [100.0, 3.0], [-4.0, 77.0]])
    back = apply_affine(invert_affine(matrix), apply_affine(matrix, points))
    np.testing.assert_allclose(back, points, rtol=0.0, atol=1e-10)


@pytest.mark.parametrize("mirrored", [False, True])
@pytest.mark.parametrize("quarter_turns", [1, 2, 3])
def test_turned_page_keeps_its_map(quarter_turns: int, mirrored: bool) -> None:
    """The pixel under a sheet point is the same before and after."""
    drawn = flat_page(dpi=120.0, skew_deg=1.0)
    moved = turned(drawn, quarter_turns, mirrored=mirrored)
    pixel_centres = np.array([[100.0, 57.0], [333.0, 201.0], [5.0, 400.0]])
    places = np.rint(moved.to_px(drawn.to_mm(pixel_centres))).astype(int)
    for (x, y), (new_x, new_y) in zip(pixel_centres.astype(int), places, strict=True):
        assert np.array_equal(moved.pixels[new_y, new_x], drawn.pixels[y, x])


def test_an_unknown_page_option_is_refused() -> None:
    with pytest.raises(TypeError, match="no such page option: skew"):
        flat_page(skew=1.0)


@pytest.mark.parametrize("seed", range(6))
def test_random_pages_hold_their_grid(seed: int) -> None:
    drawn = random_flat_page(seed, largest_dpi=200.0)
    left, top, right, bottom = drawn.grid_mm
    corners_px = drawn.to_px(np.array([[left, top], [right, top], [left, bottom], [right, bottom]]))
    height_px, width_px = drawn.pixels.shape[:2]
    seen = (corners_px > -0.03 * width_px) & (corners_px < (1.03 * width_px, 1.03 * height_px))
    assert seen.all()


# The specimens


def _stored_truth(specimen: Specimen) -> dict[str, Any]:
    path = (FOLDER / specimen.file_name).with_suffix(".truth.json")
    truth: dict[str, Any] = json.loads(path.read_text(encoding="utf-8"))
    return truth


def _assert_close(stored: Any, fresh: Any) -> None:
    """Equal structure; numbers equal to 1e-4 (the files keep five decimals)."""
    if isinstance(stored, dict):
        assert stored.keys() == fresh.keys()
        for key in stored:
            _assert_close(stored[key], fresh[key])
    elif isinstance(stored, list):
        assert len(stored) == len(fresh)
        for one, other in zip(stored, fresh, strict=True):
            _assert_close(one, other)
    elif isinstance(stored, float | int) and not isinstance(stored, bool):
        assert fresh == pytest.approx(stored, abs=1e-4)
    else:
        assert stored == fresh


def test_stored_page_is_what_a_new_drawing_gives(specimen: Specimen, tmp_path: Path) -> None:
    fresh_path = save_specimen(specimen, tmp_path)
    fresh = json.loads(fresh_path.with_suffix(".truth.json").read_text(encoding="utf-8"))
    _assert_close(_stored_truth(specimen), fresh)
    with Image.open(FOLDER / specimen.file_name) as stored, Image.open(fresh_path) as drawn:
        difference = np.asarray(stored.convert("RGB")).astype(int) - np.asarray(
            drawn.convert("RGB")
        ).astype(int)
    # Not pixel by pixel: libraries may round or compress differently.
    assert np.abs(difference).mean() < 0.5


def test_trace_passes_through_every_mark(specimen: Specimen) -> None:
    """Ink is at each stored point: nearer than half the pen, where no steep slope hides it."""
    truth = _stored_truth(specimen)
    with Image.open(FOLDER / specimen.file_name) as stored:
        grey = np.asarray(stored.convert("L")).astype(int)
    marks = [
        mark
        for strip in truth["strips"]
        for beat in strip["beats"]
        for name, mark in beat.items()
        if name != "beat"
    ]
    assert len(marks) > 200
    for mark in marks:
        x, y = np.rint(mark["px"]).astype(int)
        assert grey[y - 1 : y + 2, x - 1 : x + 2].min() < 110, mark


def test_truth_is_consistent_between_its_frames(specimen: Specimen) -> None:
    truth = _stored_truth(specimen)
    matrix = np.array(truth["px_from_mm"])
    speed = truth["speed_mm_per_s"]
    for strip in truth["strips"]:
        for beat in strip["beats"]:
            for name, mark in beat.items():
                if name == "beat":
                    continue
                x_mm = strip["x_mm"] + mark["ms"] * speed / 1000.0
                y_mm = strip["baseline_mm"] - mark["mv"] * strip["gain_mm_per_mv"]
                assert mark["mm"] == pytest.approx([x_mm, y_mm], abs=1e-4)
                px = apply_affine(matrix, np.array([mark["mm"]]))[0]
                assert mark["px"] == pytest.approx(px.tolist(), abs=1e-3)


def test_intervals_of_a_beat_are_the_stated_ones(specimen: Specimen) -> None:
    """In lead II of the specimen the marks give the stated RR, PR, QRS and QT."""
    truth = _stored_truth(specimen)
    strip = [strip for strip in truth["strips"] if strip["lead"] == "II"][-1]
    whole = [beat for beat in strip["beats"] if "t_end" in beat and "qrs_on" in beat]
    assert len(whole) >= 5
    for beat in whole:
        on_ms = beat["qrs_on"]["ms"]
        assert beat["j"]["ms"] - on_ms == pytest.approx(truth["intervals_ms"]["qrs"])
        assert beat["t_end"]["ms"] - on_ms == pytest.approx(truth["intervals_ms"]["qt"])
        if truth["intervals_ms"]["pr"] is None:
            assert "p_on" not in beat
        else:
            assert on_ms - beat["p_on"]["ms"] == pytest.approx(truth["intervals_ms"]["pr"])
    rr_ms = np.diff([beat["qrs_on"]["ms"] for beat in whole])
    np.testing.assert_allclose(rr_ms, truth["rr_ms"][: len(rr_ms)], rtol=0.0, atol=1e-6)


def test_specimens_say_so_and_are_small() -> None:
    sizes = [path.stat().st_size for path in FOLDER.iterdir() if path.is_file()]
    assert sum(sizes) < 12_000_000
    for specimen in SPECIMENS.values():
        assert "SPECIMEN" in specimen.layout.title
        assert _stored_truth(specimen)["specimen"].startswith("SPECIMEN")


def test_rows_do_not_run_into_each_other(specimen: Specimen) -> None:
    """Between the lowest point of a row and the highest of the next there is a gap."""
    drawn = draw_specimen(replace(specimen, scan=Scan(dpi=60.0)))
    spans: dict[float, list[float]] = {}
    for strip in drawn.page.strips:
        y_mm = strip.points_mm()[:, 1]
        spans.setdefault(strip.baseline_mm, []).extend([float(y_mm.min()), float(y_mm.max())])
    rows = [(min(span), max(span)) for _, span in sorted(spans.items())]
    gaps = [lower[0] - upper[1] for upper, lower in pairwise(rows)]
    assert min(gaps) > 2.0


def test_a_specimen_can_be_written_elsewhere(tmp_path: Path) -> None:
    small = replace(SPECIMENS["half_gain.png"], scan=Scan(dpi=72.0))
    path = save_specimen(small, tmp_path)
    truth = json.loads(path.with_suffix(".truth.json").read_text(encoding="utf-8"))
    with Image.open(path) as picture:
        assert list(picture.size) == truth["picture_size_px"]
    assert truth["chest_gain_mm_per_mv"] == 5.0
    assert truth["pulses"][0]["shape"] == "stepped"


# Helpers of other tests


def test_no_grid_pictures_are_many_and_all_different() -> None:
    pictures = dict(no_grid_pictures())
    assert len(pictures) >= 20
    means = {name: picture[::7, ::7].tobytes() for name, picture in pictures.items()}
    assert len(set(means.values())) == len(pictures)
    assert {picture.dtype for picture in pictures.values()} == {np.dtype(np.uint8)}


def test_unscaled_grids_have_the_pitch_of_their_name() -> None:
    """The spectrum of 5 mm exercise paper at 200 dpi peaks at 39.4 px."""
    picture = dict(unscaled_grid_pictures())["exercise_paper_5_mm"]
    profile = _darkness(picture)[:200].mean(axis=0)
    spectrum = np.abs(np.fft.rfft(profile - profile.mean()))
    cycles = int(np.argmax(spectrum[10:50])) + 10
    assert profile.size / cycles == pytest.approx(5.0 * 200.0 / 25.4, rel=0.03)


@pytest.mark.parametrize("ending", [".png", ".jpg", ".tif"])
def test_saved_pages_come_back(tmp_path: Path, ending: str) -> None:
    pixels = flat_page(dpi=100.0).pixels
    path = save(pixels, tmp_path / f"page{ending}")
    with Image.open(path) as picture:
        back = np.asarray(picture.convert("RGB")).astype(int)
    limit = 6.0 if ending == ".jpg" else 0.0
    assert np.abs(back - pixels).mean() <= limit


def _assert_einthoven(recording: RealRecording, tolerance_mv: float) -> None:
    lead = dict(zip(recording.leads, recording.signal_mv.T, strict=True))
    assert np.abs(lead["I"] + lead["III"] - lead["II"]).max() < tolerance_mv
    assert 0.3 < np.ptp(lead["II"]) < 6.0


def test_dicom_recording_is_in_millivolts_and_obeys_einthoven() -> None:
    recording = dicom_recording()
    assert recording.leads == LEADS
    assert recording.signal_mv.shape == (10_000, 12)
    assert recording.fs_hz == 1000.0
    _assert_einthoven(recording, 0.01)


@pytest.mark.skipif(recordings_missing() is not None, reason=str(recordings_missing()))
def test_real_recordings_load_and_draw() -> None:
    names = recording_names()
    assert len(names) >= 20
    _assert_einthoven(real_recording("ludb_119"), 0.005)
    drawn = real_page("ludb_119", scan=Scan(dpi=100.0))
    assert [strip.name for strip in drawn.page.strips[:4]] == ["I", "aVR", "V1", "V4"]
    recording = real_recording("ludb_119")
    rhythm_mm = drawn.page.strips[-1].heights_mm
    second = recording.leads.index("II")
    expected_mv = recording.signal_mv[:, second] - np.median(recording.signal_mv[:, second])
    np.testing.assert_allclose(rhythm_mm / 10.0, expected_mv[: rhythm_mm.size], atol=1e-9)


def test_columns_follow_one_another_in_time() -> None:
    windows = {window.lead: window for window in windows_of(Layout())[:12]}
    assert [windows[lead].start_s for lead in ("I", "aVR", "V1", "V4")] == [0.0, 2.5, 5.0, 7.5]
    assert windows["V6"].x_mm == pytest.approx(12.0 + 7.5 * 25.0)
