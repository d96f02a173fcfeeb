"""Pages for tests: flat scans of known geometry, and pages drawn from real recordings.

Pictures without an ECG grid are in `tests.no_grid`.
"""

from __future__ import annotations

import json
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import Any, Literal, cast

import numpy as np
from numpy.typing import NDArray
from PIL import Image

from sample_scans import hearts
from sample_scans.layout import THREE_BY_FOUR, Layout, Signal, lay_out
from sample_scans.page import (
    GRID_COLOURS,
    Finish,
    RenderedPage,
    Ruling,
    Scan,
    render_page,
)
from sample_scans.waveform import LEADS, Recording, onsets_from_rr
from tests.no_grid import no_grid_pictures, unscaled_grid_pictures

__all__ = [
    "RealRecording",
    "dicom_recording",
    "flat_page",
    "invented_signal",
    "layout_for",
    "no_grid_pictures",
    "page_from_signal",
    "random_flat_page",
    "real_page",
    "real_recording",
    "recording_names",
    "recordings_missing",
    "save",
    "turned",
    "unscaled_grid_pictures",
]

FloatArray = NDArray[np.float64]

REPOSITORY = Path(__file__).resolve().parent.parent
RECORDINGS = REPOSITORY.parent / "shared" / "data" / "ecg"
SMALL_SHEET = Layout(
    rows=(("II",), ("V2",)),
    row_s=3.6,
    first_baseline_mm=22.0,
    row_gap_mm=30.0,
    grid_mm=(0.0, 0.0, 110.0, 75.0),
    paper_mm=(130.0, 95.0),
    origin_on_paper_mm=(10.0, 12.0),
)


def invented_signal(duration_s: float = 10.2, fs_hz: float = 1000.0) -> Signal:
    """Twelve leads of the invented normal heart, 72 beats a minute."""
    beats = int(np.ceil(duration_s / 0.833)) + 1
    recording = Recording(hearts.normal_heart(), onsets_from_rr(412.0, [833.0] * beats))
    mv = recording.sampled_mv(fs_hz, duration_s)
    return Signal(fs_hz, dict(zip(LEADS, mv.T, strict=True)))


def flat_page(
    *, layout: Layout = SMALL_SHEET, traces: bool = True, seed: int = 0, **options: Any
) -> RenderedPage:
    """A flat page; `options` are fields of Scan, Ruling and Finish by name.

    `colour` may be a key of GRID_COLOURS. The default sheet is 130 by 95 mm with two rows,
    which keeps tests quick; give `layout=Layout()` for a whole A4 page.
    """
    if isinstance(options.get("colour"), str):
        options["colour"] = GRID_COLOURS[options["colour"]]
    parts = [kind(**_take(options, kind)) for kind in (Scan, Ruling, Finish)]
    if options:
        raise TypeError(f"no such page option: {', '.join(options)}")
    page = lay_out(invented_signal(layout.row_s + 0.2), layout)
    if not traces:
        page = replace(page, strips=(), strokes=(), labels=())
    return render_page(page, *parts, seed=seed)


def _take(options: dict[str, Any], kind: type[Any]) -> dict[str, Any]:
    """The options that are fields of one dataclass, removed from the rest."""
    return {f.name: options.pop(f.name) for f in fields(kind) if f.name in options}


def random_flat_page(seed: int, *, largest_dpi: float = 400.0) -> RenderedPage:
    """A flat page with everything varied: size, print, lie on the glass, ink, scanner."""
    rng = np.random.default_rng(seed)
    layout = _random_layout(rng)
    bold = bool(rng.random() < 0.85)
    thin = cast(
        Literal["solid", "dotted", "absent"],
        rng.choice(["solid", "dotted", "absent"], p=[0.7, 0.2, 0.1]) if bold else "solid",
    )
    dpi = float(np.exp(rng.uniform(np.log(150.0), np.log(largest_dpi))))
    mode = str(rng.choice(["colour", "grey", "one_bit"], p=[0.7, 0.2, 0.1]))
    # A scanner set to one bit keeps only a strongly printed grid.
    thin_strength = float(rng.uniform(0.6, 0.9) if mode == "one_bit" else rng.uniform(0.25, 0.7))
    colour = str(rng.choice(list(GRID_COLOURS)))
    return flat_page(
        layout=layout,
        seed=seed,
        dpi=dpi,
        printed_scale=float(rng.choice([1.0, 1.0, 0.94, 0.97, rng.uniform(0.85, 1.1)])),
        y_over_x=float(rng.choice([1.0, rng.uniform(0.98, 1.02)])),
        skew_deg=float(rng.choice([0.0, rng.normal(0.0, 0.8), rng.uniform(-4.0, 4.0)])),
        shift_px=tuple(float(shift) for shift in rng.uniform(-5.0, 5.0, 2)),
        colour=colour,
        thin=thin,
        bold=bold,
        thin_width_mm=float(rng.uniform(0.08, 0.16)),
        bold_width_mm=float(rng.uniform(0.18, 0.4)),
        thin_strength=thin_strength,
        bold_strength=float(min(1.0, thin_strength + rng.uniform(0.15, 0.4))),
        mode=mode,
        one_bit_threshold=_threshold(GRID_COLOURS[colour], thin_strength),
        **_random_finish(rng, one_bit=mode == "one_bit"),
    )


def _threshold(colour: tuple[int, int, int], thin_strength: float) -> float:
    """A grey level a quarter of the way from paper to the thin lines' own print."""
    paper_grey, line_grey = 248.0, float(np.dot(colour, (0.299, 0.587, 0.114)))
    return paper_grey - 0.25 * thin_strength * (paper_grey - line_grey)


def _random_layout(rng: np.random.Generator) -> Layout:
    """A sheet of random size whose grid need not begin or end on a bold line."""
    width_mm, height_mm = rng.uniform(90.0, 200.0), rng.uniform(70.0, 130.0)
    rows = tuple((str(lead),) for lead in rng.permutation(LEADS)[: int(height_mm // 32)])
    start_mm = -float(rng.integers(0, 5))
    margin_mm = rng.uniform(6.0, 12.0, 2)
    return Layout(
        rows=rows,
        row_s=float((width_mm - 16.0) / 25.0),
        first_baseline_mm=float(rng.uniform(18.0, 24.0)),
        row_gap_mm=float(rng.uniform(26.0, 31.0)),
        pulse=cast(Literal["full", "none"], rng.choice(["full", "none"])),
        grid_mm=(start_mm, start_mm, float(int(width_mm)), float(int(height_mm))),
        paper_mm=(float(width_mm * 1.12 + 20.0), float(height_mm * 1.12 + 24.0)),
        origin_on_paper_mm=(float(margin_mm[0] + 5.0), float(margin_mm[1] + 7.0)),
    )


def _random_finish(rng: np.random.Generator, *, one_bit: bool) -> dict[str, Any]:
    """Paper, ink and scanner."""
    yellowing = 0.0 if one_bit else float(rng.choice([0.0, rng.uniform(0.0, 40.0)]))
    darkness = float(rng.uniform(10.0, 90.0))
    wear = 0.2 if one_bit else 1.0
    return {
        "paper": (253, round(251 - yellowing * 0.3), round(247 - yellowing)),
        "ink": (round(darkness), round(darkness), round(darkness * rng.uniform(1.0, 1.6))),
        "pen_width_mm": float(rng.uniform(0.2, 0.6)),
        "shading": wear * float(rng.choice([0.0, rng.uniform(0.0, 30.0)])),
        "blur_sigma_px": wear * float(rng.uniform(0.0, 1.2)),
        "noise": wear * float(rng.choice([0.0, rng.uniform(0.0, 5.0)])),
        "jpeg_quality": None if one_bit else [None, 60, 80, 92][rng.integers(0, 4)],
    }


def turned(drawn: RenderedPage, quarter_turns: int, *, mirrored: bool = False) -> RenderedPage:
    """The same page turned clockwise by quarter turns, after a left-right mirroring if asked."""
    pixels, matrix = drawn.pixels, drawn.px_from_mm
    if mirrored:
        pixels = pixels[:, ::-1]
        matrix = np.array([[-1.0, 0.0], [0.0, 1.0]]) @ matrix
        matrix[0, 2] += pixels.shape[1] - 1.0
    for _ in range(quarter_turns % 4):
        pixels = np.rot90(pixels, -1)
        # (x, y) goes to (height - 1 - y, x); the new width is the old height.
        matrix = np.array([[0.0, -1.0], [1.0, 0.0]]) @ matrix
        matrix[0, 2] += pixels.shape[1] - 1.0
    return replace(drawn, pixels=np.ascontiguousarray(pixels), px_from_mm=matrix)


def save(pixels: NDArray[np.uint8], path: Path, *, quality: int = 88) -> Path:
    """Write a picture as the file name's ending says (.png, .jpg, .tif, .webp)."""
    options = {"quality": quality} if path.suffix in (".jpg", ".jpeg", ".webp") else {}
    Image.fromarray(pixels).save(path, **options)
    return path


@dataclass(frozen=True, slots=True, eq=False)
class RealRecording:
    """A recorded ECG: `signal_mv` has shape (samples, leads); `notes` is its JSON."""

    name: str
    fs_hz: float
    leads: tuple[str, ...]
    signal_mv: FloatArray
    notes: dict[str, Any]


def recording_names() -> tuple[str, ...]:
    """The real recordings beside the repository; empty where they are absent."""
    return tuple(sorted(path.stem for path in RECORDINGS.glob("*.npz")))


def recordings_missing() -> str | None:
    """Why tests on real recordings must be skipped; None where the recordings are there."""
    return None if recording_names() else "the real recordings are not beside the repository"


def real_recording(name: str) -> RealRecording:
    """Load one; the sources and licences (ODC-By 1.0) are in SOURCES.md beside the data."""
    with np.load(RECORDINGS / f"{name}.npz") as stored:
        signal_mv = stored["signal"].astype(np.float64)
        fs_hz, leads = float(stored["fs"]), tuple(str(lead) for lead in stored["leads"])
    notes = json.loads((RECORDINGS / f"{name}.json").read_text(encoding="utf-8"))
    return RealRecording(name, fs_hz, leads, signal_mv, notes)


def dicom_recording() -> RealRecording:
    """The 12-lead rhythm that the pydicom wheel carries (10 s at 1000 Hz), read offline."""
    import pydicom
    from pydicom.data import get_testdata_file

    path = get_testdata_file("waveform_ecg.dcm", download=False)
    if path is None:
        raise FileNotFoundError("this pydicom wheel carries no waveform_ecg.dcm")
    data = pydicom.dcmread(cast(str, path))
    group = data.WaveformSequence[0]
    meanings = [
        channel.ChannelSourceSequence[0].CodeMeaning for channel in group.ChannelDefinitionSequence
    ]
    # "Lead I (Einthoven)" -> "I"
    leads = tuple(meaning.removeprefix("Lead ").split(" ")[0] for meaning in meanings)
    # pydicom applies the channel sensitivity, which this file states in microvolt.
    signal_mv = data.waveform_array(0).astype(np.float64) / 1000.0
    return RealRecording("waveform_ecg", float(group.SamplingFrequency), leads, signal_mv, {})


def page_from_signal(
    signal_mv: FloatArray,
    fs_hz: float,
    leads: tuple[str, ...],
    layout: Layout,
    **looks: Any,
) -> RenderedPage:
    """Draw a recording, shape (samples, leads); each lead's median becomes its baseline.

    `looks` are the `scan`, `ruling`, `finish` and `seed` of `render_page`.
    """
    centred_mv = signal_mv - np.median(signal_mv, axis=0)
    signal = Signal(fs_hz, dict(zip(leads, centred_mv.T, strict=True)))
    return render_page(lay_out(signal, layout), **looks)


def layout_for(leads: tuple[str, ...], seconds: float) -> Layout:
    """Three by four with a rhythm row for twelve leads, else a row for each lead."""
    if set(LEADS) <= set(leads):
        rows: tuple[tuple[str, ...], ...] = (*THREE_BY_FOUR, ("II",))
    else:
        rows = tuple((lead,) for lead in leads)
    title = "TEST PAGE - drawn from a public recording, see its attribution"
    return replace(Layout(), rows=rows, row_s=min(10.0, seconds), title=title)


def real_page(name: str, **looks: Any) -> RenderedPage:
    """A real recording as an A4 page at 25 mm/s; `looks` as for `page_from_signal`."""
    recording = dicom_recording() if name == "waveform_ecg" else real_recording(name)
    seconds = (len(recording.signal_mv) - 1) / recording.fs_hz
    layout = layout_for(recording.leads, seconds)
    return page_from_signal(recording.signal_mv, recording.fs_hz, recording.leads, layout, **looks)
