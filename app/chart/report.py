"""Everything a filed reading says, worked out once for the picture, JSON and CSV."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.calculator import Caution, Comparison, Value, compare_all, measure_caliper, work_out
from app.reading import Reading
from app.version import software_version


@dataclass(frozen=True, slots=True)
class Report:
    """A reading with all that follows from it.

    Attributes
    ----------
    reading : Reading
    values : tuple of Value
        In worksheet order.
    comparisons : tuple of Comparison
        One for each figure of a colleague.
    by_caliper : tuple of tuple of Value
        For each caliper of the reading, in its order, what it alone measures.
    software : str
        The version that worked it out.
    """

    reading: Reading
    values: tuple[Value, ...]
    comparisons: tuple[Comparison, ...]
    by_caliper: tuple[tuple[Value, ...], ...]
    software: str

    def comparison(self, key: str, lead: str | None) -> Comparison | None:
        """How a colleague's figure compares with the value of that key and lead."""
        return next((c for c in self.comparisons if (c.key, c.lead) == (key, lead)), None)


def report_of(reading: Reading) -> Report:
    """Work a reading out."""
    values = tuple(work_out(reading))
    return Report(
        reading=reading,
        values=values,
        comparisons=tuple(compare_all(reading, values)),
        by_caliper=tuple(tuple(measure_caliper(reading, item)) for item in reading.calipers),
        software=software_version(),
    )


def footnotes(values: Sequence[Value]) -> dict[tuple[str, str], tuple[int, Caution]]:
    """Every different caution with its number, from 1, in the order in which they are met."""
    numbered: dict[tuple[str, str], tuple[int, Caution]] = {}
    for value in values:
        for caution in value.cautions:
            numbered.setdefault((caution.code, caution.text), (len(numbered) + 1, caution))
    return numbered
