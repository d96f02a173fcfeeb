from __future__ import annotations

from app.reading import LEADS, QUANTITIES, CaliperKind, quantity


def test_every_quantity_is_found_by_its_key() -> None:
    assert [quantity(item.key) for item in QUANTITIES] == list(QUANTITIES)
    assert quantity("unheard_of") is None


def test_heights_are_measured_down_the_paper_and_intervals_along_it() -> None:
    for item in QUANTITIES:
        expected = CaliperKind.HEIGHT if item.key.endswith("_height") else CaliperKind.TIME
        assert item.kind is expected
        assert item.usual_lead in LEADS
