"""Which calipers are selected, and which part the arrow keys move. No Qt."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

from app.reading import Reading


class Part(StrEnum):
    """What of a caliper is held."""

    START = "start"
    END = "end"
    WHOLE = "whole"


@dataclass(frozen=True, slots=True)
class Selection:
    """The selected calipers; a single leg can only be held of one caliper alone."""

    ids: frozenset[int] = frozenset()
    part: Part = Part.WHOLE

    def __post_init__(self) -> None:
        if self.part is not Part.WHOLE and len(self.ids) != 1:
            raise ValueError("one leg is held of one caliper")

    def toggled(self, caliper_id: int) -> Selection:
        """With one caliper taken in, or out if it was in."""
        return Selection(self.ids ^ {caliper_id})

    def kept_in(self, reading: Reading | None) -> Selection:
        """Without the calipers that are gone."""
        there = frozenset(c.caliper_id for c in reading.calipers) if reading else frozenset()
        if self.ids <= there:
            return self
        return Selection(self.ids & there)


def next_selection(reading: Reading, present: Selection, *, backward: bool) -> Selection | None:
    """The next stop of the Tab key, or None past the last one.

    Every caliper, in the order of placing, offers its start, its end and itself.
    """
    stops = [
        Selection(frozenset((caliper.caliper_id,)), part)
        for caliper in reading.calipers
        for part in (Part.START, Part.END, Part.WHOLE)
    ]
    if backward:
        stops.reverse()
    if not present.ids:
        return stops[0] if stops else None
    reached = [index for index, stop in enumerate(stops) if stop.ids <= present.ids]
    if len(present.ids) == 1:
        reached = [index for index in reached if stops[index] == present]
    index = max(reached, default=-1) + 1
    return stops[index] if index < len(stops) else None
