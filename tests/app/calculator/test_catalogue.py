"""Every value's label, unit and source."""

from __future__ import annotations

import pytest

from app.calculator.catalogue import CATALOGUE

UCUM = {"ms", "/min", "mV", "deg", "%"}
STATUSES = ("found", "from memory", "computed")


@pytest.mark.parametrize("key", CATALOGUE)
def test_each_has_a_ucum_unit_and_a_source_with_its_status(key: str) -> None:
    entry = CATALOGUE[key]
    assert entry.unit in UCUM
    assert any(status in entry.source for status in STATUSES)
    assert entry.label


def test_labels_are_told_apart() -> None:
    assert len({entry.label for entry in CATALOGUE.values()}) == len(CATALOGUE)
