"""Values for other programs: the calculator's numbers, with all that they rest on."""

from __future__ import annotations

import csv
import io
import json
import math
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from app.calculator import Value, compare_all, measure_caliper, work_out
from app.chart import (
    FileExistsRefused,
    TargetRefused,
    report,
    values_as_csv,
    values_as_json,
    values_document,
    write_values_csv,
    write_values_json,
)
from app.reading import Calibration, Evidence, Reading, Setting, save_reading
from app.version import software_version
from tests.app.chart.chart_examples import (
    caliper,
    confirmed_calibration,
    full_reading,
    picture_file,
    reading_of,
)


def rows_of(reading: Reading) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(values_as_csv(reading), newline="")))


def refuse(name: str) -> None:
    raise AssertionError(f"{name} is no JSON")


def test_json_carries_every_value_as_worked_out() -> None:
    reading = full_reading()
    written = json.loads(values_as_json(reading), parse_constant=refuse)["values"]
    worked = work_out(reading)
    assert len(worked) >= 10
    for ours, value in zip(written, worked, strict=True):
        for name in ("key", "label", "lead", "value", "plus_minus", "unit", "n", "spread"):
            assert ours[name] == getattr(value, name)
        assert (ours["method"], ours["source"]) == (value.method, value.source)
        assert [(c["code"], c["text"]) for c in ours["cautions"]] == [
            (c.code, c.text) for c in value.cautions
        ]
        assert ours["caliper_ids"] == list(value.caliper_ids)


def test_json_says_what_the_values_rest_on() -> None:
    reading = replace(
        full_reading(),
        calibration=Calibration(Setting(50.0, Evidence.LEGEND, confirmed=True), Setting(10.0)),
    )
    document = json.loads(values_as_json(reading))
    assert document["schema_version"] == 1
    assert document["software_version"] == software_version()
    assert document["picture"]["sha256"] == "ab" * 32
    assert document["picture"]["file_name"] == "sheet éñ 1.png"
    assert document["reading"]["reader"] == "A. Reader"
    assert document["reading"]["changed_at"] == "2026-01-02T03:05:05+00:00"
    assert document["reading"]["software_version"] == "Smallsquare 0.0.9"
    speed, gain = document["calibration"]["paper_speed"], document["calibration"]["gain"]
    assert (speed["value"], speed["evidence"], speed["confirmed_by"]) == (50, "legend", "A. Reader")
    assert (gain["value"], gain["evidence"], gain["confirmed"]) == (10, "default", False)
    assert document["calibration"]["chest_gain"] is None
    grid = document["calibration"]["grid"]
    assert (grid["x_pitch_px_per_mm"], grid["scale_is_certain"]) == (8.0, True)
    assert grid["evidence"] == ["Bold lines seen every fifth line."]
    assert any("Gain 10 mm/mV" in said for said in document["not_confirmed"])
    assert "diagnoses nothing" in document["statement"]


def test_keys_keep_their_order() -> None:
    first, again = (list(values_document(full_reading())) for _ in range(2))
    assert first == again
    assert first[:3] == ["kind", "schema_version", "software_version"]
    assert list(values_document(reading_of())) == first


def test_a_colleagues_figures_are_there_with_their_difference() -> None:
    reading = full_reading()
    figures = values_document(reading)["colleague_figures"]
    qrs, pr = compare_all(reading, work_out(reading))
    assert figures[0]["value"] == 101.0
    assert figures[0]["unit"] == "ms"
    assert figures[0]["difference"] == qrs.difference
    assert figures[0]["within_plus_minus"] == qrs.within
    assert (figures[1]["difference"], figures[1]["sentence"]) == (None, pr.sentence)


def test_each_caliper_is_there_with_its_place_and_value() -> None:
    reading = full_reading()
    for ours, item in zip(values_document(reading)["calipers"], reading.calipers, strict=True):
        assert ours["start_px"] == [item.start.x_px, item.start.y_px]
        assert (ours["start_step_px"], ours["end_step_px"]) == (
            item.start.step_px,
            item.end.step_px,
        )
        expected = [v.value for v in measure_caliper(reading, item)]
        assert [v["value"] for v in ours["values"]] == expected


def test_csv_has_the_same_numbers() -> None:
    reading = full_reading()
    rows = rows_of(reading)
    values = [row for row in rows if row["record"] == "value"]
    for row, value in zip(values, work_out(reading), strict=True):
        assert (row["key"], row["lead"], row["unit"]) == (value.key, value.lead or "", value.unit)
        assert _number(row["value"]) == value.value
        assert _number(row["plus_minus"]) == value.plus_minus
        assert row["n"] == str(value.n)
        assert row["caution_codes"] == " | ".join(c.code for c in value.cautions)
        assert row["cautions"] == " | ".join(c.text for c in value.cautions)
        assert row["method"] == value.method
    assert [row["record"] for row in rows].count("colleague_figure") == 2
    combs = [row for row in rows if row["label"].startswith("Comb")]
    assert [row["unit"] for row in combs] == ["ms", "/min"]


def _number(cell: str) -> float | None:
    return float(cell) if cell else None


def test_every_row_of_the_csv_says_what_it_rests_on() -> None:
    for row in rows_of(full_reading()):
        assert row["picture_sha256"] == "ab" * 32
        assert (row["paper_speed"], row["paper_speed_confirmed"]) == ("25.0", "no")
        assert row["gain_evidence"] == "default"
        assert row["reader"] == "A. Reader"
        assert row["schema_version"] == "1"
        assert "nobody has confirmed it" in row["not_confirmed"]


def test_an_empty_reading_without_a_map_is_written_too() -> None:
    reading = replace(reading_of(), sheet_map=None)
    document = json.loads(values_as_json(reading), parse_constant=refuse)
    assert document["values"] == []
    assert document["calibration"]["grid"] is None
    assert [row["record"] for row in rows_of(reading)] == ["reading"]


def test_a_refused_value_has_its_reason_and_no_number() -> None:
    reading = replace(full_reading(), sheet_map=None)
    values = values_document(reading)["values"]
    assert values
    assert all(value["value"] is None and value["refusal"] for value in values)
    row = next(row for row in rows_of(reading) if row["record"] == "value")
    assert (row["value"], row["refusal"]) == ("", values[0]["refusal"])


@pytest.mark.parametrize("start", ["=", "+", "-", "@", "\t", "\r"])
def test_no_typed_text_becomes_a_formula(start: str) -> None:
    evil = f"{start}HYPERLINK(1)"
    reading = replace(full_reading(), reader=evil, colleague=evil)
    marks = (caliper(1, (100.0, 400.0), (118.0, 400.0), lead=evil),)
    reading = replace(reading, calipers=marks, picture=replace(reading.picture, file_name=evil))
    for row in rows_of(reading):
        assert row["reader"] == row["colleague"] == row["picture_file_name"] == f"'{evil}"
        for cell in row.values():
            assert not cell.startswith(("=", "+", "@", "\t", "\r"))
            assert not cell.startswith("-") or math.isfinite(float(cell))


def test_numbers_below_zero_stay_numbers() -> None:
    reading = full_reading()
    lower = replace(
        reading,
        hand_figures=(replace(reading.hand_figures[0], value=-5.0),),
    )
    row = next(row for row in rows_of(lower) if row["record"] == "colleague_figure")
    assert float(row["value"]) == -5.0


def test_commas_quotes_and_line_breaks_in_names_survive() -> None:
    name = 'Reader, "Ann"\nof ward 3'
    assert all(row["reader"] == name for row in rows_of(replace(full_reading(), reader=name)))


def test_a_number_that_is_none_is_left_out(monkeypatch: pytest.MonkeyPatch) -> None:
    broken = Value("qrs", "QRS", math.nan, "ms", math.inf, "m", "s", 1, spread=-math.inf)
    monkeypatch.setattr(report, "work_out", lambda _: [broken])
    written: Any = json.loads(values_as_json(reading_of()), parse_constant=refuse)["values"][0]
    assert written["value"] is written["plus_minus"] is written["spread"] is None


def test_files_are_written_as_they_are_returned(tmp_path: Path) -> None:
    reading = full_reading()
    as_json, as_csv = tmp_path / "v.json", tmp_path / "v.csv"
    write_values_json(reading, as_json)
    write_values_csv(reading, as_csv)
    assert json.loads(as_json.read_text(encoding="utf-8")) == values_document(reading)
    assert as_csv.read_bytes().startswith(b"\xef\xbb\xbf")
    with as_csv.open(encoding="utf-8-sig", newline="") as file:
        assert file.read() == values_as_csv(reading)
    assert {path.name for path in tmp_path.iterdir()} == {"v.json", "v.csv"}


def test_half_letters_of_odd_file_names_do_not_stop_the_writing(tmp_path: Path) -> None:
    reading = full_reading()
    odd = replace(reading, picture=replace(reading.picture, file_name="scan\udcff.png"))
    write_values_json(odd, tmp_path / "v.json")
    write_values_csv(odd, tmp_path / "v.csv")
    written = json.loads((tmp_path / "v.json").read_text(encoding="utf-8"))
    assert written["picture"]["file_name"] == "scan\udcff.png"


@pytest.mark.parametrize(
    ("write", "ending"), [(write_values_json, "json"), (write_values_csv, "csv")]
)
def test_no_file_is_replaced_unasked_and_no_original_ever(
    tmp_path: Path, write: Any, ending: str
) -> None:
    picture = picture_file(tmp_path / "scan.png", (64, 48))
    reading = reading_of(picture, calibration=confirmed_calibration())
    assert picture.path is not None
    target = tmp_path / f"values.{ending}"
    write(reading, target)
    before = target.read_bytes()
    with pytest.raises(FileExistsRefused, match="is there already"):
        write(replace(reading, reader="Other"), target)
    assert target.read_bytes() == before
    write(replace(reading, reader="Other"), target, overwrite=True)
    assert target.read_bytes() != before
    disguised = tmp_path / f"picture.{ending}"
    disguised.symlink_to(picture.path)
    with pytest.raises(TargetRefused, match="the picture itself"):
        write(reading, disguised, overwrite=True)
    filed = tmp_path / "scan.reading.json"
    save_reading(reading, filed)
    with pytest.raises(TargetRefused, match="reading"):
        write(reading, filed, overwrite=True)
