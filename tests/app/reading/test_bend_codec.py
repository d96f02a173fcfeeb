"""The bend of a map survives the file to the last digit; damaged nodes are refused by name."""

from __future__ import annotations

import json
from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from app.reading.bend_codec import MOST_NODES, NodesError, nodes_from_text, nodes_to_text
from app.reading.codec import DamagedError, reading_from_json, reading_to_json
from imaging.bend import Bend
from tests.app.reading_examples import example_map, example_reading
from tests.bends import bent


def _bent_reading() -> Any:
    sheet_map = bent(example_map())
    assert sheet_map.bend is not None
    errors = sheet_map.bend.standard_error_mm.copy()
    errors[0, 0] = errors[3, 5] = np.nan
    bend = Bend((1.5, -2.25), 31.7, sheet_map.bend.x_mm, sheet_map.bend.y_mm, errors)
    return replace(example_reading(), sheet_map=replace(sheet_map, bend=bend))


def test_a_bent_reading_is_the_same_after_the_file() -> None:
    reading = _bent_reading()
    text = json.dumps(reading_to_json(reading), allow_nan=False)
    assert reading_from_json(json.loads(text)) == reading
    assert reading_to_json(reading_from_json(json.loads(text))) == reading_to_json(reading)


def test_a_flat_reading_has_no_word_of_a_bend() -> None:
    assert "bend" not in reading_to_json(example_reading())["sheet_map"]


def test_nodes_are_packed_small() -> None:
    rng = np.random.default_rng(0)
    y, x = np.mgrid[0:53, 0:75].astype(float)
    nodes = 4.0 * x + 0.001 * x * y + rng.normal(0.0, 0.001, x.shape)
    kept = np.rint(nodes / 1e-4) * 1e-4
    text = nodes_to_text(kept)
    assert len(text) < 4 * nodes.size
    assert np.array_equal(nodes_from_text(text, (53, 75), unknown=False), kept)


@pytest.mark.parametrize(
    ("field", "value"),
    [
        ("x_mm", "no base64 !"),
        ("x_mm", "AAAA"),
        ("y_mm", nodes_to_text(np.zeros((2, 2)))),
        ("shape", [1, 7]),
        ("shape", [MOST_NODES, 2]),
        ("pitch_px", 0.0),
    ],
)
def test_damaged_nodes_are_refused_by_name(field: str, value: object) -> None:
    document = reading_to_json(_bent_reading())
    document["sheet_map"]["bend"][field] = value
    with pytest.raises(DamagedError, match=r"sheet_map\.bend"):
        reading_from_json(document)


def test_more_data_than_nodes_is_refused() -> None:
    with pytest.raises(NodesError, match="number"):
        nodes_from_text(nodes_to_text(np.zeros((9, 9))), (2, 2), unknown=False)
