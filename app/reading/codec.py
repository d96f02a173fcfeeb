"""A reading as plain JSON values and back; fields this version does not know are kept."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any, TypeVar

from app.reading.bend_codec import bend_to_json, nodes_from_text
from app.reading.calibration import Calibration, Evidence, Setting
from app.reading.marks import Caliper, CaliperKind, PicturePoint
from app.reading.model import HandFigure, PictureIdentity, Reading
from imaging.bend import Bend
from imaging.sheet_map import Coverage, SheetMap

Json = dict[str, Any]
T = TypeVar("T")


class DamagedError(Exception):
    """A field that is missing or of the wrong kind; says which."""

    def __init__(self, field: str, expected: str) -> None:
        super().__init__(f"'{field}' is not {expected}")


class _Fields:
    """Takes the fields of one JSON object out by name and kind; the rest is `extra`."""

    def __init__(self, value: object, where: str) -> None:
        if not isinstance(value, dict):
            raise DamagedError(where, "an object")
        self._left: Json = dict(value)
        self._where = where

    def name(self, key: str) -> str:
        return f"{self._where}.{key}" if self._where else key

    def take(self, key: str, parse: Callable[[object, str], T]) -> T:
        if key not in self._left:
            raise DamagedError(self.name(key), "there")
        return parse(self._left.pop(key), self.name(key))

    def take_or_none(self, key: str, parse: Callable[[object, str], T]) -> T | None:
        if self._left.get(key) is None:
            self._left.pop(key, None)
            return None
        return self.take(key, parse)

    def rest(self) -> Json:
        return self._left


def _number(value: object, where: str) -> float:
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise DamagedError(where, "a number")
    return float(value)


def _whole(value: object, where: str) -> int:
    if isinstance(value, bool) or not isinstance(value, int):
        raise DamagedError(where, "a whole number")
    return value


def _text(value: object, where: str) -> str:
    if not isinstance(value, str):
        raise DamagedError(where, "text")
    return value


def _flag(value: object, where: str) -> bool:
    if not isinstance(value, bool):
        raise DamagedError(where, "true or false")
    return value


def _several(parse: Callable[[object, str], T]) -> Callable[[object, str], tuple[T, ...]]:
    def parse_list(value: object, where: str) -> tuple[T, ...]:
        if not isinstance(value, list):
            raise DamagedError(where, "a list")
        return tuple(parse(item, f"{where}[{index}]") for index, item in enumerate(value))

    return parse_list


def _pair(value: object, where: str) -> tuple[float, float]:
    numbers = _several(_number)(value, where)
    if len(numbers) != 2:
        raise DamagedError(where, "a pair of numbers")
    return numbers[0], numbers[1]


def _size(value: object, where: str) -> tuple[int, int]:
    numbers = _several(_whole)(value, where)
    if len(numbers) != 2 or min(numbers) < 1:
        raise DamagedError(where, "a width and a height")
    return numbers[0], numbers[1]


def _step(value: object, where: str) -> float:
    step = _number(value, where)
    if step < 0.0:
        raise DamagedError(where, "zero or more")
    return step


def _point(fields: _Fields, name: str) -> PicturePoint:
    """A place and its step; readings of earlier versions have no step."""
    place_px = fields.take(f"{name}_px", _pair)
    return PicturePoint(*place_px, fields.take_or_none(f"{name}_step_px", _step) or 0.0)


def _coverage(value: object, where: str) -> Coverage:
    fields = _Fields(value, where)
    coverage = Coverage(fields.take("cell_px", _number), fields.take("rows", _several(_text)))
    rows = coverage.rows
    if coverage.cell_px <= 0 or any(len(r) != len(rows[0]) or set(r) - {"0", "1"} for r in rows):
        raise DamagedError(where, "a coverage of equal rows of 0 and 1")
    return coverage


def _bend(value: object, where: str) -> Bend:
    fields = _Fields(value, where)
    first_px = fields.take("first_px", _pair)
    pitch_px = fields.take("pitch_px", _number)
    shape = fields.take("shape", _size)
    texts = [fields.take(key, _text) for key in ("x_mm", "y_mm", "standard_error_mm")]
    try:
        x_mm, y_mm = (nodes_from_text(text, shape, unknown=False) for text in texts[:2])
        errors_mm = nodes_from_text(texts[2], shape, unknown=True)
        return Bend(first_px, pitch_px, x_mm, y_mm, errors_mm)
    except ValueError as error:  # NodesError is one
        raise DamagedError(where, "a lattice of nodes") from error


def _sheet_map(value: object, where: str) -> SheetMap:
    fields = _Fields(value, where)
    return SheetMap(
        picture_size_px=fields.take("picture_size_px", _size),
        origin_px=fields.take("origin_px", _pair),
        x_step_px=fields.take("x_step_px", _pair),
        y_step_px=fields.take("y_step_px", _pair),
        covariance=fields.take("covariance", _several(_several(_number))),
        scatter_mm=fields.take("scatter_mm", _number),
        coverage=fields.take("coverage", _coverage),
        scale_is_certain=fields.take("scale_is_certain", _flag),
        source=fields.take("source", _text),
        evidence=fields.take("evidence", _several(_text)),
        turn_deg=fields.take("turn_deg", _whole),
        mirrored=fields.take("mirrored", _flag),
        bend=fields.take_or_none("bend", _bend),
        extra=fields.rest(),
    )


def _setting(value: object, where: str) -> Setting:
    fields = _Fields(value, where)
    try:
        evidence = fields.take("evidence", lambda item, place: Evidence(_text(item, place)))
    except ValueError as error:
        raise DamagedError(fields.name("evidence"), "a kind of evidence") from error
    return Setting(
        fields.take("value", _number), evidence, fields.take("confirmed", _flag), fields.rest()
    )


def _calibration(value: object, where: str) -> Calibration:
    fields = _Fields(value, where)
    return Calibration(
        paper_speed_mm_per_s=fields.take("paper_speed_mm_per_s", _setting),
        gain_mm_per_mv=fields.take("gain_mm_per_mv", _setting),
        chest_gain_mm_per_mv=fields.take_or_none("chest_gain_mm_per_mv", _setting),
        extra=fields.rest(),
    )


def _caliper(value: object, where: str) -> Caliper:
    fields = _Fields(value, where)
    kind_name = fields.take("kind", _text)
    if kind_name not in {kind.value for kind in CaliperKind}:
        raise DamagedError(fields.name("kind"), "a kind of caliper")
    return Caliper(
        caliper_id=fields.take("caliper_id", _whole),
        kind=CaliperKind(kind_name),
        start=_point(fields, "start"),
        end=_point(fields, "end"),
        quantity=fields.take_or_none("quantity", _text),
        lead=fields.take_or_none("lead", _text),
        beat=fields.take_or_none("beat", _whole),
        teeth=fields.take("teeth", _whole),
        extra=fields.rest(),
    )


def _hand_figure(value: object, where: str) -> HandFigure:
    fields = _Fields(value, where)
    return HandFigure(
        fields.take("key", _text),
        fields.take("value", _number),
        fields.take_or_none("lead", _text),
        fields.rest(),
    )


def _identity(value: object, where: str) -> PictureIdentity:
    fields = _Fields(value, where)
    return PictureIdentity(
        file_name=fields.take("file_name", _text),
        sha256=fields.take("sha256", _text),
        size_px=fields.take("size_px", _size),
        page=fields.take("page", _whole),
        relative_path=fields.take_or_none("relative_path", _text),
        extra=fields.rest(),
    )


def reading_from_json(value: object) -> Reading:
    """Build a reading from JSON values; raises DamagedError naming the field, or ValueError."""
    fields = _Fields(value, "")
    reading = Reading(
        picture=fields.take("picture", _identity),
        sheet_map=fields.take_or_none("sheet_map", _sheet_map),
        calibration=fields.take("calibration", _calibration),
        calipers=fields.take("calipers", _several(_caliper)),
        hand_figures=fields.take("hand_figures", _several(_hand_figure)),
        reader=fields.take("reader", _text),
        colleague=fields.take("colleague", _text),
        next_caliper_id=fields.take("next_caliper_id", _whole),
        created_at=fields.take("created_at", _text),
        changed_at=fields.take("changed_at", _text),
        software_version=fields.take("software_version", _text),
        extra=fields.rest(),
    )
    _hold_together(reading)
    return reading


def _hold_together(reading: Reading) -> None:
    """Refuse what no field shows alone: ids used twice, a map of another picture."""
    ids = [caliper.caliper_id for caliper in reading.calipers]
    if len(set(ids)) != len(ids) or max(ids, default=0) >= reading.next_caliper_id:
        raise DamagedError("calipers", "numbered one by one")
    sheet_map = reading.sheet_map
    if sheet_map is not None and sheet_map.picture_size_px != reading.picture.size_px:
        raise DamagedError("sheet_map.picture_size_px", "the size of the picture")


def _setting_to_json(setting: Setting) -> Json:
    return {
        "value": setting.value,
        "evidence": setting.evidence.value,
        "confirmed": setting.confirmed,
        **setting.extra,
    }


def _sheet_map_to_json(sheet_map: SheetMap) -> Json:
    return {
        "picture_size_px": list(sheet_map.picture_size_px),
        "origin_px": list(sheet_map.origin_px),
        "x_step_px": list(sheet_map.x_step_px),
        "y_step_px": list(sheet_map.y_step_px),
        "covariance": [list(row) for row in sheet_map.covariance],
        "scatter_mm": sheet_map.scatter_mm,
        "coverage": {
            "cell_px": sheet_map.coverage.cell_px,
            "rows": list(sheet_map.coverage.rows),
        },
        "scale_is_certain": sheet_map.scale_is_certain,
        "source": sheet_map.source,
        "evidence": list(sheet_map.evidence),
        "turn_deg": sheet_map.turn_deg,
        "mirrored": sheet_map.mirrored,
        # Left out for a flat sheet: such a file is the same as before sheets could bend.
        **({} if sheet_map.bend is None else {"bend": bend_to_json(sheet_map.bend)}),
        **sheet_map.extra,
    }


def _caliper_to_json(caliper: Caliper) -> Json:
    return {
        "caliper_id": caliper.caliper_id,
        "kind": caliper.kind.value,
        "start_px": [caliper.start.x_px, caliper.start.y_px],
        "end_px": [caliper.end.x_px, caliper.end.y_px],
        "start_step_px": caliper.start.step_px,
        "end_step_px": caliper.end.step_px,
        "quantity": caliper.quantity,
        "lead": caliper.lead,
        "beat": caliper.beat,
        "teeth": caliper.teeth,
        **caliper.extra,
    }


def _calibration_to_json(calibration: Calibration) -> Json:
    chest = calibration.chest_gain_mm_per_mv
    return {
        "paper_speed_mm_per_s": _setting_to_json(calibration.paper_speed_mm_per_s),
        "gain_mm_per_mv": _setting_to_json(calibration.gain_mm_per_mv),
        "chest_gain_mm_per_mv": None if chest is None else _setting_to_json(chest),
        **calibration.extra,
    }


def _identity_to_json(identity: PictureIdentity) -> Json:
    return {
        "file_name": identity.file_name,
        "sha256": identity.sha256,
        "size_px": list(identity.size_px),
        "page": identity.page,
        "relative_path": identity.relative_path,
        **identity.extra,
    }


def _hand_figure_to_json(figure: HandFigure) -> Json:
    return {"key": figure.key, "value": figure.value, "lead": figure.lead, **figure.extra}


def reading_to_json(reading: Reading) -> Mapping[str, Any]:
    """A reading as JSON values, unknown fields of a later version included."""
    sheet_map = reading.sheet_map
    return {
        "software_version": reading.software_version,
        "picture": _identity_to_json(reading.picture),
        "sheet_map": None if sheet_map is None else _sheet_map_to_json(sheet_map),
        "calibration": _calibration_to_json(reading.calibration),
        "calipers": [_caliper_to_json(caliper) for caliper in reading.calipers],
        "hand_figures": [_hand_figure_to_json(figure) for figure in reading.hand_figures],
        "reader": reading.reader,
        "colleague": reading.colleague,
        "next_caliper_id": reading.next_caliper_id,
        "created_at": reading.created_at,
        "changed_at": reading.changed_at,
        **reading.extra,
    }
