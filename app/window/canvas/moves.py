"""Calipers moved, stretched and combed, never off the picture. No Qt."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np

from app.drawing.frame import SheetFrame, Vector
from app.drawing.shape import measuring_axis
from app.reading import Caliper, PicturePoint, Reading
from app.window.canvas.selection import Part

MOST_TEETH_AT_FIRST = 8
MOST_TEETH = 60
SMALLEST_SPAN_MM = 0.1  # a tenth of a small square: less is a double click, not a measurement


def leg_moved(
    caliper: Caliper, tooth: int, along_mm: float, frame: SheetFrame, *, hand_step_px: float
) -> Caliper:
    """Move one leg along the measuring axis.

    Parameters
    ----------
    caliper : Caliper
    tooth : int
        0 is the start, ``teeth - 1`` the end; a tooth between stretches a comb from its start.
    along_mm : float
        Step of that leg on the grid; shortened at the picture's edge.
    frame : SheetFrame
    hand_step_px : float
        Step in which the hand could move it; see `PicturePoint`.
    """
    stretch = 1.0 if tooth == 0 else (caliper.teeth - 1) / tooth
    along_mm *= stretch
    unit = (0.0, along_mm) if measuring_axis(caliper.kind) else (along_mm, 0.0)
    before = caliper.start if tooth == 0 else caliper.end
    step_px = frame.at(before.x_px, before.y_px).px_step(*unit)
    share = frame.share_inside(before, step_px)
    there = frame.clamped(before.x_px + share * step_px[0], before.y_px + share * step_px[1])
    there = replace(there, step_px=hand_step_px * stretch)
    return replace(caliper, start=there) if tooth == 0 else replace(caliper, end=there)


def whole_moved(
    caliper: Caliper, step_px: Vector, frame: SheetFrame, *, hand_step_px: float = 0.0
) -> Caliper:
    """Move both legs by a picture_px step; at the picture's edge it slides along.

    A leg is then no finer than it was, nor than the step in which the hand could move it.
    """
    dx, dy = step_px
    width_px, height_px = frame.size_px
    xs, ys = (caliper.start.x_px, caliper.end.x_px), (caliper.start.y_px, caliper.end.y_px)
    dx = min(max(dx, -min(xs)), width_px - 1.0 - max(xs))
    dy = min(max(dy, -min(ys)), height_px - 1.0 - max(ys))
    start, end = (
        replace(
            frame.clamped(mark.x_px + dx, mark.y_px + dy),
            step_px=max(mark.step_px, hand_step_px),
        )
        for mark in (caliper.start, caliper.end)
    )
    return replace(caliper, start=start, end=end)


def nudged(caliper: Caliper, part: Part, step_mm: Vector, frame: SheetFrame) -> Caliper:
    """Move a leg or the whole by a step on the grid; a leg moves only as it measures."""
    if part is Part.WHOLE:
        return whole_moved(caliper, frame.px_step(*step_mm), frame)
    axis = measuring_axis(caliper.kind)
    mark, tooth = (caliper.start, 0) if part is Part.START else (caliper.end, caliper.teeth - 1)
    hand_step_px = key_refined(mark.step_px, step_mm, axis, frame)
    return leg_moved(caliper, tooth, step_mm[axis], frame, hand_step_px=hand_step_px)


def key_refined(step_px: float, step_mm: Vector, axis: int, frame: SheetFrame) -> float:
    """The step of a mark after an arrow key moved it by `step_mm`.

    Single key steps along the axis that counts make it as fine as they are; long ones (with
    Shift or Control) and those across it leave it as it was.
    """
    along_mm = abs(step_mm[axis])
    if not 0.0 < along_mm <= 1.5 * frame.key_step_mm():
        return step_px
    return min(step_px, math.hypot(*frame.px_step(*step_mm)))


def span_is_too_small(caliper: Caliper, frame: SheetFrame) -> bool:
    """Whether the legs lie on each other."""
    axis = measuring_axis(caliper.kind)
    span_mm = frame.mm_from_px(caliper.end)[axis] - frame.mm_from_px(caliper.start)[axis]
    return abs(span_mm) < SMALLEST_SPAN_MM


def with_teeth(caliper: Caliper, teeth: int, frame: SheetFrame) -> Caliper:
    """A comb with another number of teeth: its start and its pitch stay.

    As many teeth as fit on the picture, at least 2 and at most 60.
    """
    pitch_px = (
        (caliper.end.x_px - caliper.start.x_px) / (caliper.teeth - 1),
        (caliper.end.y_px - caliper.start.y_px) / (caliper.teeth - 1),
    )
    teeth = min(max(teeth, 2), MOST_TEETH)
    while teeth > 2 and not _is_inside(_tooth(caliper.start, pitch_px, teeth - 1), frame):
        teeth -= 1
    end = frame.clamped(*_tooth(caliper.start, pitch_px, teeth - 1))
    end = replace(end, step_px=_end_step_px(caliper, teeth - 1))
    return replace(caliper, end=end, teeth=teeth)


def _end_step_px(caliper: Caliper, gaps: int) -> float:
    """Step of the last tooth at which the pitch is as sure as it was with other teeth.

    The pitch's variance is that of start and end together over the gaps squared.
    """
    start, end = caliper.start.step_px, caliper.end.step_px
    stretch = gaps / (caliper.teeth - 1)
    return math.sqrt(max(0.0, end**2 + (stretch**2 - 1.0) * (start**2 + end**2)))


def comb_from_two_teeth(caliper: Caliper, reading: Reading, frame: SheetFrame) -> Caliper:
    """A level comb from its first two teeth, filling the rest of the row, up to 8 teeth.

    The row ends where the grid was no longer seen, or with the picture.
    """
    along_mm = frame.mm_from_px(caliper.end)[0] - frame.mm_from_px(caliper.start)[0]
    pitch_px = frame.px_step(along_mm, 0.0)
    second = frame.clamped(*_tooth(caliper.start, pitch_px, 1))
    second = replace(second, step_px=caliper.end.step_px)
    level = replace(caliper, end=second, teeth=2)
    fitting = 2
    while fitting < MOST_TEETH_AT_FIRST and _is_on_row(
        _tooth(caliper.start, pitch_px, fitting), reading, frame
    ):
        fitting += 1
    return with_teeth(level, fitting, frame)


def _tooth(start: PicturePoint, pitch_px: Vector, index: int) -> Vector:
    return start.x_px + index * pitch_px[0], start.y_px + index * pitch_px[1]


def _is_inside(point_px: Vector, frame: SheetFrame) -> bool:
    # Half a thousandth of a pixel: rounding alone must not cost a comb a tooth.
    return all(
        -5e-4 <= place <= size - 1.0 + 5e-4
        for place, size in zip(point_px, frame.size_px, strict=True)
    )


def _is_on_row(point_px: Vector, reading: Reading, frame: SheetFrame) -> bool:
    if not _is_inside(point_px, frame):
        return False
    sheet_map = reading.sheet_map
    # A reader's own box says nothing about where the grid ends.
    if sheet_map is None or sheet_map.source == "reader":
        return True
    return bool(sheet_map.covers(np.array([point_px]))[0])
