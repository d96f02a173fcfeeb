"""ECG pages of every print style, as the sheets that photographs are taken of."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any, Literal, cast

import numpy as np
from numpy.typing import NDArray

from sample_scans.layout import THREE_BY_FOUR, Layout, Signal, lay_out
from sample_scans.page import (
    GRID_COLOURS,
    MM_PER_INCH,
    Finish,
    Page,
    Ruling,
    Scan,
    render_page,
)
from sample_scans.waveform import LEADS
from tests.pages import invented_signal, real_recording, recording_names

FloatArray = NDArray[np.float64]

SIX_BY_TWO = tuple((left, right) for left, right in zip(LEADS[:6], LEADS[6:], strict=True))
WORDS = (
    *("SPECIMEN", "invented, no patient", "TEST PAGE", "", "Room 4  bed 2", "12 lead  10 s"),
    *("rate --  PR --  QRS --", "unconfirmed", "copy 2 of 3", "filter 40 Hz"),
)


@dataclass(frozen=True, slots=True)
class PrintedPage:
    """What is printed on one sheet of paper and how; nothing is drawn yet.

    `printed_scale` is real millimetres a small square in x, `y_over_x` the ratio of the pitches,
    `skew_deg` the turn of the print on the paper.
    """

    page: Page
    ruling: Ruling
    finish: Finish
    printed_scale: float = 1.0
    y_over_x: float = 1.0
    skew_deg: float = 0.0
    description: str = ""


@dataclass(frozen=True, slots=True, eq=False)
class Sheet:
    """A drawn sheet of paper.

    Attributes
    ----------
    pixels : ndarray of uint8, shape (height, width, 3)
        The flat sheet; its edges are the paper's.
    px_per_mm : float
        Pixels for a real millimetre.
    paper_from_sheet : ndarray of float64, shape (2, 3)
        sheet_mm to paper_mm.
    grid_mm : tuple of float
        Left, top, right, bottom of the printed grid in sheet_mm.
    """

    pixels: NDArray[np.uint8]
    px_per_mm: float
    paper_from_sheet: FloatArray
    grid_mm: tuple[float, float, float, float]

    @property
    def half_size_mm(self) -> tuple[float, float]:
        """Half the paper's width and height in real mm."""
        height_px, width_px = self.pixels.shape[:2]
        return width_px / self.px_per_mm / 2.0, height_px / self.px_per_mm / 2.0

    def px_from_paper(self, paper_mm: FloatArray) -> FloatArray:
        """paper_mm to pixels of this drawing."""
        half = np.array(self.half_size_mm)
        return np.asarray((paper_mm + half) * self.px_per_mm - 0.5)


def draw_sheet(printed: PrintedPage, px_per_mm: float) -> Sheet:
    """Draw a page at so many pixels for a real millimetre."""
    scan = Scan(
        dpi=px_per_mm * MM_PER_INCH,
        printed_scale=printed.printed_scale,
        y_over_x=printed.y_over_x,
        skew_deg=printed.skew_deg,
    )
    drawn = render_page(printed.page, scan, printed.ruling, printed.finish)
    height_px, width_px = drawn.pixels.shape[:2]
    matrix = drawn.px_from_mm / px_per_mm
    matrix[:, 2] += (0.5 - np.array([width_px, height_px]) / 2.0) / px_per_mm
    return Sheet(drawn.pixels, px_per_mm, matrix, printed.page.grid_mm)


def plain_sheet(pixels: NDArray[np.uint8], px_per_mm: float) -> Sheet:
    """Any flat picture as a sheet of paper; sheet_mm is paper_mm and there is no grid."""
    return Sheet(pixels, px_per_mm, np.eye(2, 3), (0.0, 0.0, 0.0, 0.0))


def random_printed_page(rng: np.random.Generator, *, recordings: bool = True) -> PrintedPage:
    """A page of random layout, print and recording; an invented one if none is to be used."""
    signal, seconds, name = _random_signal(rng, recording_names() if recordings else ())
    layout = random_layout(rng, tuple(signal.leads_mv), seconds)
    scale = float(rng.choice([1.0, 1.0, 0.94, 0.97, rng.uniform(0.88, 1.08)]))
    return PrintedPage(
        page=lay_out(signal, layout),
        ruling=random_ruling(rng),
        finish=random_finish(rng),
        printed_scale=scale,
        y_over_x=float(rng.choice([1.0, 1.0, rng.uniform(0.98, 1.02)])),
        skew_deg=float(rng.choice([0.0, rng.normal(0.0, 0.6)])),
        description=f"{name}, {layout.speed_mm_per_s:g} mm/s, {layout.gain_mm_per_mv:g} mm/mV",
    )


def _random_signal(rng: np.random.Generator, names: tuple[str, ...]) -> tuple[Signal, float, str]:
    """A recording, its length in seconds and its name; invented where there are no real ones."""
    if not names or rng.random() < 0.2:
        return invented_signal(), 10.0, "invented"
    recording = real_recording(str(rng.choice(names)))
    count = int(10.1 * recording.fs_hz)
    last_start = max(len(recording.signal_mv) - count, 0)
    first = int(rng.integers(0, last_start + 1))
    part_mv = recording.signal_mv[first : first + count]
    part_mv = part_mv - np.median(part_mv, axis=0)
    leads_mv = dict(zip(recording.leads, part_mv.T, strict=True))
    seconds = min(10.0, (len(part_mv) - 1) / recording.fs_hz)
    return Signal(recording.fs_hz, leads_mv), seconds, recording.name


def random_layout(rng: np.random.Generator, leads: tuple[str, ...], seconds: float) -> Layout:
    """A whole page for twelve leads, a page or a strip of paper for fewer."""
    speed = float(rng.choice([25.0, 50.0], p=[0.8, 0.2]))
    gain = float(rng.choice([10.0, 10.0, 10.0, 5.0, 20.0]))
    words: dict[str, Any] = {
        "title": str(rng.choice(WORDS)),
        "legend": f"{speed:g} mm/s   {gain:g} mm/mV" if rng.random() < 0.8 else "",
        "speed_mm_per_s": speed,
        "gain_mm_per_mv": gain,
        "chest_gain_mm_per_mv": float(rng.choice([gain, gain, gain / 2.0])),
        "pulse": cast(Literal["full", "none"], rng.choice(["full", "full", "none"])),
    }
    row_s = min(seconds, 250.0 / speed)
    twelve = set(LEADS) <= set(leads)
    if twelve and rng.random() < 0.75:
        layout = _whole_page(rng, row_s, words)
    else:
        layout = _strip(rng, leads, row_s, words)
    return _grid_place(rng, layout)


def _whole_page(rng: np.random.Generator, row_s: float, words: dict[str, Any]) -> Layout:
    paper_mm = (297.0, 210.0) if rng.random() < 0.7 else (279.0, 216.0)
    rows: tuple[tuple[str, ...], ...] = (*THREE_BY_FOUR, ("II",))
    gap_mm, first_mm = 40.0, 30.0
    kind = int(rng.integers(3))
    if kind == 1:
        rows, gap_mm, first_mm = SIX_BY_TWO, 27.0, 22.0
    elif kind == 2:
        rows, gap_mm, first_mm = tuple((lead,) for lead in LEADS), 13.5, 15.0
    right_mm = 264.0 if paper_mm[0] < 290.0 else 270.0
    return Layout(
        rows=rows,
        row_s=row_s,
        first_baseline_mm=first_mm,
        row_gap_mm=gap_mm,
        paper_mm=paper_mm,
        grid_mm=(0.0, 0.0, right_mm, 175.0),
        origin_on_paper_mm=((paper_mm[0] - right_mm) / 2.0, 22.0),
        **words,
    )


def _strip(
    rng: np.random.Generator, leads: tuple[str, ...], row_s: float, words: dict[str, Any]
) -> Layout:
    """One to three leads on a piece of paper from a roll."""
    count = int(rng.integers(1, min(3, len(leads)) + 1))
    chosen = [str(lead) for lead in rng.permutation(list(leads))[:count]]
    row_s = min(row_s, float(rng.uniform(3.0, 10.0)))
    width_mm = 22.0 + row_s * words["speed_mm_per_s"]
    gap_mm = float(rng.uniform(28.0, 34.0))
    height_mm = float(np.ceil(24.0 + gap_mm * count))
    return Layout(
        rows=tuple((lead,) for lead in chosen),
        row_s=row_s,
        first_baseline_mm=26.0,
        row_gap_mm=gap_mm,
        grid_mm=(0.0, 0.0, float(int(width_mm)), height_mm),
        paper_mm=(width_mm + 18.0, height_mm + 22.0),
        origin_on_paper_mm=(9.0, 12.0),
        **words,
    )


def _grid_place(rng: np.random.Generator, layout: Layout) -> Layout:
    """Grid in a frame, off the 5 mm lines, or printed past every edge of the paper."""
    kind = rng.choice(["frame", "odd", "full"], p=[0.4, 0.25, 0.35])
    left, top, right, bottom = layout.grid_mm
    if kind == "odd":
        cut_mm = [float(cut) for cut in rng.integers(0, 5, 4)]
        box = (left + cut_mm[0], top + cut_mm[1], right - cut_mm[2], bottom - cut_mm[3])
        return replace(layout, grid_mm=box)
    if kind == "full":
        return replace(layout, grid_mm=(-60.0, -60.0, right + 80.0, bottom + 80.0))
    return layout


def random_ruling(rng: np.random.Generator) -> Ruling:
    """Print of the grid: colour, line kind, widths, strengths."""
    bold = bool(rng.random() < 0.88)
    kinds: list[Literal["solid", "dotted", "absent"]] = ["solid", "dotted", "absent"]
    thin = kinds[int(rng.choice(3, p=[0.72, 0.2, 0.08]))] if bold else "solid"
    strength = float(rng.uniform(0.3, 0.75))
    thin_width_mm = float(rng.uniform(0.1, 0.18))
    return Ruling(
        colour=_tinted(rng, GRID_COLOURS[str(rng.choice(list(GRID_COLOURS)))]),
        thin=thin,
        thin_width_mm=thin_width_mm,
        thin_strength=strength,
        bold_width_mm=thin_width_mm + float(rng.uniform(0.08, 0.25)),
        bold_strength=float(min(1.0, strength + rng.uniform(0.15, 0.4))),
        bold=bold,
        dots_per_mm=int(rng.choice([4, 5, 5, 10])) if thin == "dotted" else 5,
    )


def _tinted(rng: np.random.Generator, colour: tuple[int, int, int]) -> tuple[int, int, int]:
    """The same print from another press."""
    red, green, blue = (int(np.clip(part + rng.normal(0.0, 10.0), 40, 250)) for part in colour)
    return red, green, blue


def random_finish(rng: np.random.Generator) -> Finish:
    """Paper and ink, without anything that a scanner adds."""
    yellowing = float(rng.choice([0.0, 0.0, rng.uniform(5.0, 35.0)]))
    darkness = float(rng.uniform(10.0, 90.0))
    ink = (round(darkness), round(darkness), round(darkness * rng.uniform(1.0, 1.6)))
    return Finish(
        paper=(250, round(249 - yellowing * 0.3), round(246 - yellowing)),
        ink=ink,
        pen_width_mm=float(rng.uniform(0.22, 0.6)),
    )


def strip_page(rng: np.random.Generator) -> PrintedPage:
    """A strip from a roll, to lie beside another page."""
    signal, seconds, name = _random_signal(rng, ())
    words = {"title": "", "legend": "25 mm/s", "pulse": "full"}
    speed = {"speed_mm_per_s": 25.0}
    leads = tuple(signal.leads_mv)[:1]
    layout = _grid_place(rng, _strip(rng, leads, min(seconds, 8.0), {**words, **speed}))
    ruling, finish = random_ruling(rng), random_finish(rng)
    return PrintedPage(lay_out(signal, layout), ruling, finish, description=name)


def strongly_ruled(printed: PrintedPage, rng: np.random.Generator) -> PrintedPage:
    """The same page with a grid that a copier or a fax still sees."""
    colour = GRID_COLOURS[str(rng.choice(["red", "grey", "brown", "blue", "green"]))]
    ruling = replace(
        printed.ruling,
        colour=colour,
        thin_width_mm=float(rng.uniform(0.15, 0.2)),
        thin_strength=float(rng.uniform(0.75, 1.0)),
        bold_width_mm=float(rng.uniform(0.3, 0.45)),
        bold_strength=1.0,
    )
    return replace(printed, ruling=ruling)
