"""The values as JSON and as CSV: the same numbers, with all that they rest on."""

from __future__ import annotations

import csv
import io
import json
import math
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from app.calculator import Caution, Comparison, Value
from app.calculator.catalogue import CATALOGUE
from app.chart.grid_report import grid_document
from app.chart.report import Report, report_of
from app.chart.targets import check_target
from app.chart.wording import (
    DISCLAIMER,
    PLUS_MINUS_MEANS,
    caliper_name,
    confirmed_by,
    grid_sentences,
    rests_on,
    unconfirmed_sentences,
)
from app.reading import Reading, Setting
from app.reading.file_format import write_whole

KIND = "smallsquare values"
SCHEMA_VERSION = 1
# A spreadsheet takes a cell that begins like this for a formula (OWASP, "CSV Injection").
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\r", "\n")

Json = dict[str, Any]


def values_document(reading: Reading) -> Json:
    """The values and all that they rest on, as plain JSON values with keys in a fixed order."""
    report = report_of(reading)
    picture = reading.picture
    return {
        "kind": KIND,
        "schema_version": SCHEMA_VERSION,
        "software_version": report.software,
        "statement": DISCLAIMER,
        "plus_minus_means": PLUS_MINUS_MEANS,
        "not_confirmed": unconfirmed_sentences(reading),
        "picture": {
            "file_name": picture.file_name,
            "sha256": picture.sha256,
            "page_number": picture.page + 1,
            "size_px": list(picture.size_px),
        },
        "reading": {
            "reader": reading.reader,
            "colleague": reading.colleague,
            "created_at": reading.created_at,
            "changed_at": reading.changed_at,
            "software_version": reading.software_version,
        },
        "calibration": _calibration(reading),
        "values": [_value(value) for value in report.values],
        "colleague_figures": [_colleague_figure(report, c) for c in report.comparisons],
        "calipers": _calipers(report),
    }


def values_as_json(reading: Reading) -> str:
    """`values_document` as text; never NaN or Infinity."""
    return json.dumps(values_document(reading), ensure_ascii=False, indent=1, allow_nan=False)


def values_as_csv(reading: Reading) -> str:
    """One row for the reading, for each value, each figure of a colleague and each caliper.

    Every row carries the picture, the reader and the calibration, so that no row, copied
    elsewhere, loses what it rests on. Text that a spreadsheet would take for a formula has an
    apostrophe before it.
    """
    document = values_document(reading)
    common = _common_columns(document)
    rows = [{"record": "reading", **common}]
    rows += [{"record": "value", **_value_columns(value), **common} for value in document["values"]]
    rows += [
        {"record": "colleague_figure", **_figure_columns(figure), **common}
        for figure in document["colleague_figures"]
    ]
    rows += [
        {"record": "caliper", **_value_columns(value), "label": caliper["name"], **common}
        for caliper in document["calipers"]
        for value in caliper["values"]
    ]
    text = io.StringIO()
    writer = csv.DictWriter(text, [*_COLUMNS, *common], restval="")
    writer.writeheader()
    writer.writerows({key: _cell(item) for key, item in row.items()} for row in rows)
    return text.getvalue()


def write_values_json(reading: Reading, path: Path, *, overwrite: bool = False) -> None:
    """Write `values_as_json`, whole or not at all; refusals as in `check_target`."""
    check_target(path, reading.picture, ending=".json", overwrite=overwrite)
    write_whole(path, _encoded(values_as_json(reading) + "\n"))


def write_values_csv(reading: Reading, path: Path, *, overwrite: bool = False) -> None:
    """Write `values_as_csv`, whole or not at all; refusals as in `check_target`."""
    check_target(path, reading.picture, ending=".csv", overwrite=overwrite)
    # With the mark at its beginning spreadsheets know the file as UTF-8.
    write_whole(path, b"\xef\xbb\xbf" + _encoded(values_as_csv(reading)))


def _encoded(text: str) -> bytes:
    """UTF-8; half letters, as in file names of no known encoding, become visible escapes."""
    return text.encode("utf-8", "backslashreplace")


def _finite(number: float | None) -> float | None:
    return number if number is not None and math.isfinite(number) else None


def _setting(reading: Reading, setting: Setting | None, unit: str) -> Json | None:
    if setting is None:
        return None
    return {
        "value": setting.value,
        "unit": unit,
        "evidence": setting.evidence.value,
        "rests_on": rests_on(setting),
        "confirmed": setting.confirmed,
        "confirmed_by": confirmed_by(reading, setting),
    }


def _calibration(reading: Reading) -> Json:
    calibration = reading.calibration
    return {
        "paper_speed": _setting(reading, calibration.paper_speed_mm_per_s, "mm/s"),
        "gain": _setting(reading, calibration.gain_mm_per_mv, "mm/mV"),
        "chest_gain": _setting(reading, calibration.chest_gain_mm_per_mv, "mm/mV"),
        "grid": None if reading.sheet_map is None else grid_document(reading.sheet_map),
        "grid_statements": grid_sentences(reading.sheet_map),
    }


def _caution(caution: Caution) -> Json:
    return {
        "code": caution.code,
        "text": caution.text,
        "reason": caution.reason,
        "source": caution.source,
    }


def _value(value: Value) -> Json:
    return {
        "key": value.key,
        "label": value.label,
        "lead": value.lead,
        "value": _finite(value.value),
        "plus_minus": _finite(value.plus_minus),
        "unit": value.unit,
        "n": value.n,
        "spread": _finite(value.spread),
        "method": value.method,
        "source": value.source,
        "refusal": value.refusal,
        "cautions": [_caution(caution) for caution in value.cautions],
        "caliper_ids": list(value.caliper_ids),
    }


def _colleague_figure(report: Report, comparison: Comparison) -> Json:
    figure = report.reading.hand_figure(comparison.key, comparison.lead)
    entry = CATALOGUE.get(comparison.key)
    return {
        "key": comparison.key,
        "lead": comparison.lead,
        "value": None if figure is None else _finite(figure.value),
        "unit": None if entry is None else entry.unit,
        "difference": _finite(comparison.difference),
        "within_plus_minus": comparison.within,
        "sentence": comparison.sentence,
    }


def _calipers(report: Report) -> list[Json]:
    return [
        {
            "caliper_id": caliper.caliper_id,
            "name": caliper_name(caliper),
            "kind": caliper.kind.value,
            "quantity": caliper.quantity,
            "lead": caliper.lead,
            "beat": caliper.beat,
            "start_px": [caliper.start.x_px, caliper.start.y_px],
            "end_px": [caliper.end.x_px, caliper.end.y_px],
            "start_step_px": caliper.start.step_px,
            "end_step_px": caliper.end.step_px,
            "values": [_value(value) for value in values],
        }
        for caliper, values in zip(report.reading.calipers, report.by_caliper, strict=True)
    ]


# Columns of a value or a colleague's figure; those that every row has follow.
_COLUMNS = (
    "record", "key", "label", "lead", "value", "plus_minus", "unit", "n", "spread",
    "caution_codes", "cautions", "refusal", "method", "source",
    "difference", "within_plus_minus", "comparison",
)  # fmt: skip


def _value_columns(value: Json) -> Json:
    plain = {key: value[key] for key in value if key not in ("cautions", "caliper_ids")}
    return {
        **plain,
        "caution_codes": _joined([c["code"] for c in value["cautions"]]),
        "cautions": _joined([c["text"] for c in value["cautions"]]),
    }


def _figure_columns(figure: Json) -> Json:
    plain = {key: figure[key] for key in figure if key != "sentence"}
    return {**plain, "comparison": figure["sentence"]}


def _common_columns(document: Json) -> Json:
    """What every row carries."""
    calibration, picture, reading = (
        document["calibration"],
        document["picture"],
        document["reading"],
    )
    columns: Json = {}
    for name in ("paper_speed", "gain", "chest_gain"):
        setting = calibration[name] or {}
        for key in ("value", "unit", "evidence", "confirmed", "confirmed_by"):
            columns[name if key == "value" else f"{name}_{key}"] = setting.get(key)
    grid = calibration["grid"] or {}
    for key in (
        "source",
        "x_pitch_px_per_mm",
        "y_pitch_px_per_mm",
        "largest_standard_error_mm",
        "scale_is_certain",
    ):
        columns[f"grid_{key}"] = grid.get(key)
    columns["grid_statements"] = _joined(calibration["grid_statements"])
    columns["not_confirmed"] = _joined(document["not_confirmed"])
    columns |= {f"picture_{key}": picture[key] for key in ("file_name", "sha256", "page_number")}
    columns |= {key: reading[key] for key in ("reader", "colleague", "created_at", "changed_at")}
    columns["reading_software_version"] = reading["software_version"]
    columns["software_version"] = document["software_version"]
    columns["schema_version"] = document["schema_version"]
    columns["statement"] = document["statement"]
    return columns


def _joined(parts: Sequence[str]) -> str:
    return " | ".join(parts)


def _cell(item: object) -> object:
    if isinstance(item, bool):
        return "yes" if item else "no"
    if isinstance(item, str) and item.startswith(_FORMULA_STARTS):
        return f"'{item}"
    return "" if item is None else item
