"""Pictures and readings for the tests of what leaves the program: invented and small."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
from PIL import Image

from app.reading import (
    Calibration,
    Caliper,
    CaliperKind,
    Evidence,
    HandFigure,
    PictureIdentity,
    PicturePoint,
    Reading,
    Setting,
)
from imaging import Picture, SheetMap, open_picture
from tests.app.reading_examples import example_map

SIZE_PX = (1200, 900)


def blank_picture(size_px: tuple[int, int] = SIZE_PX, tint: int = 0) -> Picture:
    """A picture in memory of pale paper; `tint` makes it another one."""
    pixels = np.full((size_px[1], size_px[0], 3), (255 - tint, 236, 232), dtype=np.uint8)
    pixels.setflags(write=False)
    return Picture(pixels, "sheet éñ 1.png", None, "ab" * 32)


def picture_file(path: Path, size_px: tuple[int, int] = SIZE_PX) -> Picture:
    """The same as a file, opened."""
    Image.fromarray(blank_picture(size_px).pixels).save(path)
    return open_picture(path)


def upright_map(size_px: tuple[int, int] = SIZE_PX) -> SheetMap:
    """A map whose x runs exactly along the rows."""
    return replace(example_map(size_px), x_step_px=(8.0, 0.0), y_step_px=(0.0, 8.0))


def caliper(
    number: int,
    start_px: tuple[float, float],
    end_px: tuple[float, float],
    quantity: str | None = "qrs",
    lead: str | None = "II",
    beat: int | None = 1,
    kind: CaliperKind = CaliperKind.TIME,
    teeth: int = 2,
) -> Caliper:
    """A caliper between two picture points."""
    # Steps finer than a pixel of the picture change no value.
    start, end = PicturePoint(*start_px, 0.5), PicturePoint(*end_px, 0.75)
    return Caliper(number, kind, start, end, quantity, lead, beat, teeth)


def beats(count: int) -> tuple[Caliper, ...]:
    """RR, QRS and QT of `count` beats side by side in lead II, 100 px apart, then heights."""
    made: list[Caliper] = []
    for beat in range(count):
        x = 100.0 + 100.0 * beat
        for key, width in (("rr", 100.0), ("qrs", 18.0), ("qt", 76.0)):
            made.append(caliper(len(made) + 1, (x, 400.0), (x + width, 400.0), key, beat=beat + 1))
    for lead in ("I", "aVF"):
        made.append(
            caliper(
                len(made) + 1,
                (300.0, 600.0),
                (310.0, 540.0),
                "r_height",
                lead,
                kind=CaliperKind.HEIGHT,
            )
        )
    return tuple(made)


def confirmed_calibration() -> Calibration:
    """Every setting confirmed."""
    return Calibration(
        Setting(25.0, Evidence.LEGEND, confirmed=True),
        Setting(10.0, Evidence.PULSE, confirmed=True),
    )


def reading_of(
    picture: Picture | None = None,
    calipers: tuple[Caliper, ...] = (),
    calibration: Calibration | None = None,
) -> Reading:
    """A reading by A. Reader of a picture (of the blank one where none is given)."""
    picture = picture or blank_picture()
    return Reading(
        picture=PictureIdentity.of(picture),
        sheet_map=upright_map(picture.size_px),
        calibration=calibration or Calibration(),
        calipers=calipers,
        reader="A. Reader",
        colleague="B. Colleague",
        next_caliper_id=len(calipers) + 1,
        created_at="2026-01-02T03:04:05+00:00",
        changed_at="2026-01-02T03:05:05+00:00",
        software_version="Smallsquare 0.0.9",
    )


def full_reading(picture: Picture | None = None) -> Reading:
    """Three beats, heights, a comb, and a colleague's figures with and without a value."""
    marks = beats(3)
    comb = caliper(
        len(marks) + 1,
        (100.0, 700.0),
        (500.0, 700.0),
        None,
        beat=None,
        kind=CaliperKind.COMB,
        teeth=5,
    )
    reading = reading_of(picture, (*marks, comb))
    figures = (HandFigure("qrs", 101.0, "II"), HandFigure("pr", 170.0, "V2"))
    return replace(reading, hand_figures=figures)
