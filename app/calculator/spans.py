"""Calipers to spans in ms and mV, all in one call of the map."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from app.calculator.uncertainty import (
    Axis,
    Estimate,
    FloatArray,
    leg_error,
    pitch_px_per_mm,
)
from app.reading.calibration import Calibration
from app.reading.marks import Caliper, CaliperKind
from app.reading.model import Reading
from imaging.sheet_map import BoolArray, SheetMap

NO_SCALE = "Give the scale first: the millimetre grid of this picture is not known yet."
# Far outside what recorders do (10 to 100 mm/s, 2.5 to 40 mm/mV: from memory, practice).
_POSSIBLE = (1.0, 1000.0)
_POSSIBLE_GAIN = (0.1, 1000.0)
_SAME_PLACE_MM = 0.01


@dataclass(frozen=True, slots=True, eq=False)
class Span:
    """One caliper measured.

    Attributes
    ----------
    caliper : Caliper
    estimate : Estimate or None
        ms for a time (never negative) and for the pitch of a comb's teeth, mV for a height
        (up is positive); None where refused.
    resolution_share : ndarray of float64, shape (S,)
        What is left of the sigma of each source of `estimate` without the pen's share, 0 to
        1; empty without a map.
    covered : bool
        Whether the grid was seen at both legs.
    step_mm : float
        The coarser step in which its legs could be placed, on the paper along its axis; of a
        comb what that is worth for the pitch. 0: not known, or finer than a picture pixel.
    refusal : str
        Why there is none, as the end of a sentence that names the caliper; else empty.
    """

    caliper: Caliper
    estimate: Estimate | None
    resolution_share: FloatArray
    covered: bool
    step_mm: float = 0.0
    refusal: str = ""


def axis_of(caliper: Caliper) -> Axis:
    """The sheet axis a caliper measures along."""
    return Axis.DOWN if caliper.kind is CaliperKind.HEIGHT else Axis.ALONG


def measure_spans(reading: Reading, calipers: Sequence[Caliper]) -> list[Span]:
    """Measure calipers on a reading's map and calibration, in the order given."""
    sheet_map = reading.sheet_map
    if sheet_map is None:
        return [Span(item, None, np.empty(0), True, refusal=NO_SCALE) for item in calipers]
    if not calipers:
        return []
    ends_px = np.stack([item.ends_px() for item in calipers])
    start_px, end_px = ends_px[:, 0], ends_px[:, 1]
    flat_px = ends_px.reshape(-1, 2)
    flat_mm = sheet_map.to_mm(flat_px).reshape(-1, 2, 2)
    span_mm = flat_mm[:, 1] - flat_mm[:, 0]
    covered: BoolArray = np.asarray(sheet_map.covers(flat_px).reshape(-1, 2).all(axis=1))
    # The grid's scatter belongs to the legs; what is left of the map's error is its scale.
    map_mm = sheet_map.span_standard_error_mm(start_px, end_px)
    scale_mm = np.sqrt(np.maximum(map_mm**2 - 2.0 * sheet_map.scatter_mm**2, 0.0))
    legs = _Legs(sheet_map, calipers)
    spans = []
    for row, item in enumerate(calipers):
        axis = axis_of(item)
        refusal = _refusal(reading.calibration, item, float(span_mm[row, axis.value]))
        if not refusal and not np.isfinite(scale_mm[row]).all():
            refusal = "has a mark where the grid could not be followed: move it onto the grid."
        estimate = None
        if not refusal:
            estimate = _estimate(reading.calibration, item, span_mm[row], scale_mm[row], legs)
        step_mm = max(item.start.step_px, item.end.step_px) / pitch_px_per_mm(sheet_map, axis)
        if axis is Axis.ALONG:
            step_mm /= item.teeth - 1
        spans.append(
            Span(item, estimate, legs.resolution_share, bool(covered[row]), step_mm, refusal)
        )
    return spans


class _Legs:
    """The error sources of a set of calipers: two scales, then one for each distinct leg."""

    def __init__(self, sheet_map: SheetMap, calipers: Sequence[Caliper]) -> None:
        step_px: dict[tuple[Axis, float, float], float] = {}
        for item in calipers:
            for end in (item.start, item.end):
                key = (axis_of(item), end.x_px, end.y_px)
                # One leg has one error: where two calipers disagree, the coarser.
                step_px[key] = max(step_px.get(key, 0.0), end.step_px)
        errors = [leg_error(sheet_map, key[0], step) for key, step in step_px.items()]
        self.resolution_share = np.array([1.0] * len(Axis) + [e.resolution_share for e in errors])
        self._sigma_mm = [e.sigma_mm for e in errors]
        self._place = {key: index for index, key in enumerate(step_px)}

    def sources(self, caliper: Caliper, sign: float, scale_mm: FloatArray) -> FloatArray:
        """Effect of one sigma of each source on ``sign * (end - start)``, in mm."""
        axis = axis_of(caliper)
        effect = np.zeros(len(self.resolution_share))
        # A longer square makes every span shorter in the same proportion.
        effect[axis.value] = scale_mm[axis.value]
        for end, direction in ((caliper.start, -sign), (caliper.end, sign)):
            index = self._place[axis, end.x_px, end.y_px]
            effect[len(Axis) + index] += direction * self._sigma_mm[index]
        return effect


def _estimate(
    calibration: Calibration,
    caliper: Caliper,
    span_mm: FloatArray,
    scale_mm: FloatArray,
    legs: _Legs,
) -> Estimate:
    if caliper.kind is CaliperKind.HEIGHT:
        height_mm = -float(span_mm[Axis.DOWN.value])
        mv_per_mm = calibration.height_mv(1.0, caliper.lead)
        effect = legs.sources(caliper, -1.0, scale_mm * math.copysign(1.0, height_mm))
        return Estimate(height_mm * mv_per_mm, effect * mv_per_mm)
    width_mm = float(span_mm[Axis.ALONG.value])
    ms_per_mm = calibration.duration_ms(1.0) / (caliper.teeth - 1)
    effect = legs.sources(caliper, math.copysign(1.0, width_mm), scale_mm)
    return Estimate(abs(width_mm) * ms_per_mm, effect * ms_per_mm)


def _refusal(calibration: Calibration, caliper: Caliper, span_mm: float) -> str:
    if not math.isfinite(span_mm):
        return "has a mark off the picture: move it back onto the trace."
    if caliper.kind is CaliperKind.HEIGHT:
        gain = calibration.gain_for(caliper.lead).value
        if not _POSSIBLE_GAIN[0] <= gain <= _POSSIBLE_GAIN[1]:
            return f"cannot be read at a gain of {gain:g} mm/mV: check the gain."
        return ""
    speed = calibration.paper_speed_mm_per_s.value
    if not _POSSIBLE[0] <= speed <= _POSSIBLE[1]:
        return f"cannot be read at {speed:g} mm/s: check the paper speed."
    if abs(span_mm) < _SAME_PLACE_MM:
        return "has both legs at the same place: move one of them."
    return ""
