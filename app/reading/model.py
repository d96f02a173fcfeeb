"""One reading of one picture, as a frozen value: every edit makes a new one."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from app.reading.calibration import Calibration
from app.reading.marks import Caliper
from imaging.picture import Picture
from imaging.sheet_map import SheetMap


@dataclass(frozen=True, slots=True)
class PictureIdentity:
    """Which picture a reading belongs to.

    Attributes
    ----------
    file_name, sha256 : str
        Name without folder, and hash of the file's bytes.
    size_px : (int, int)
        Width and height.
    page : int
        Page of the file, from 0.
    relative_path : str or None
        Where the picture lay as seen from the reading file when that was saved; only a hint
        for finding it again, so two readings do not differ by it.
    """

    file_name: str
    sha256: str
    size_px: tuple[int, int]
    page: int = 0
    relative_path: str | None = field(default=None, compare=False)
    extra: Mapping[str, Any] = field(default_factory=dict)

    @classmethod
    def of(cls, picture: Picture) -> PictureIdentity:
        """The identity of an opened picture."""
        return cls(picture.file_name, picture.sha256, picture.size_px, picture.page)


@dataclass(frozen=True, slots=True)
class HandFigure:
    """A figure a colleague measured by hand, in the unit of the value of that key."""

    key: str
    value: float
    lead: str | None = None
    extra: Mapping[str, Any] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Reading:
    """Everything a reader has said about one picture.

    Attributes
    ----------
    picture : PictureIdentity
    sheet_map : SheetMap or None
        None until a grid was found or given.
    calibration : Calibration
    calipers : tuple of Caliper
        In the order they were placed.
    hand_figures : tuple of HandFigure
        A colleague's figures, one for each key and lead.
    reader, colleague : str
        Names as typed; may be empty.
    next_caliper_id : int
        Id the next caliper takes; ids are never reused.
    created_at, changed_at : str
        ISO 8601 with offset.
    software_version : str
        Version that last changed the reading.
    """

    picture: PictureIdentity
    sheet_map: SheetMap | None = None
    calibration: Calibration = field(default_factory=Calibration)
    calipers: tuple[Caliper, ...] = ()
    hand_figures: tuple[HandFigure, ...] = ()
    reader: str = ""
    colleague: str = ""
    next_caliper_id: int = 1
    created_at: str = ""
    changed_at: str = ""
    software_version: str = ""
    extra: Mapping[str, Any] = field(default_factory=dict)

    def caliper(self, caliper_id: int) -> Caliper | None:
        """The caliper of that id, or None."""
        return next((item for item in self.calipers if item.caliper_id == caliper_id), None)

    def calipers_of(self, key: str, lead: str | None) -> tuple[Caliper, ...]:
        """Calipers of one worksheet line, in the order they were placed."""
        return tuple(c for c in self.calipers if c.quantity == key and c.lead == lead)

    def next_beat(self, key: str, lead: str | None) -> int:
        """Number for the next beat of one worksheet line."""
        return 1 + max((c.beat or 0 for c in self.calipers_of(key, lead)), default=0)

    def with_caliper(self, caliper: Caliper) -> Reading:
        """Add a caliper, or put it in the place of the one with its id."""
        if self.caliper(caliper.caliper_id) is None:
            return replace(
                self,
                calipers=(*self.calipers, caliper),
                next_caliper_id=max(self.next_caliper_id, caliper.caliper_id + 1),
            )
        kept = (caliper if c.caliper_id == caliper.caliper_id else c for c in self.calipers)
        return replace(self, calipers=tuple(kept))

    def without_calipers(self, caliper_ids: frozenset[int]) -> Reading:
        """Remove calipers; unknown ids are passed over."""
        kept = tuple(c for c in self.calipers if c.caliper_id not in caliper_ids)
        return replace(self, calipers=kept)

    def hand_figure(self, key: str, lead: str | None) -> HandFigure | None:
        """A colleague's figure for one value, or None."""
        return next((h for h in self.hand_figures if (h.key, h.lead) == (key, lead)), None)

    def with_hand_figure(self, figure: HandFigure) -> Reading:
        """Set a colleague's figure, replacing the one of the same key and lead."""
        kept = self.without_hand_figure(figure.key, figure.lead)
        return replace(kept, hand_figures=(*kept.hand_figures, figure))

    def without_hand_figure(self, key: str, lead: str | None) -> Reading:
        """Remove a colleague's figure."""
        kept = tuple(h for h in self.hand_figures if (h.key, h.lead) != (key, lead))
        return replace(self, hand_figures=kept)


def new_reading(picture: Picture, *, now: str, software_version: str, reader: str = "") -> Reading:
    """An empty reading of a picture; `now` is ISO 8601 with offset."""
    return Reading(
        picture=PictureIdentity.of(picture),
        reader=reader,
        created_at=now,
        changed_at=now,
        software_version=software_version,
    )
