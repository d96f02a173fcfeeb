"""What the canvas asks for while something is placed. No Qt."""

from __future__ import annotations

from app.reading import CaliperKind, quantity
from app.window.canvas.caliper_text import quantity_name

SCALE_BOX_FIRST = "Scale: drag a box along the bold lines, over a known number of large squares"
SCALE_BOX_SECOND = "Scale: now the opposite corner, on a crossing of bold lines"

_FREE_PLACES = {
    CaliperKind.TIME: ("the first place", "the second place"),
    CaliperKind.HEIGHT: ("the baseline", "the peak"),
    CaliperKind.COMB: ("the first tooth", "the next tooth"),
}


def placing_title(kind: CaliperKind, key: str | None, lead: str | None, beat: int | None) -> str:
    """ "QRS, lead II, beat 2"."""
    title = quantity_name(kind, key)
    if lead is not None:
        title += f", lead {lead}"
    if beat is not None:
        title += f", beat {beat}"
    return title


def placing_prompt(
    kind: CaliperKind, key: str | None, lead: str | None, beat: int | None, *, second: bool
) -> str:
    """One line: what is being placed and which of its two places comes next."""
    known = None if key is None else quantity(key)
    places = _FREE_PLACES[kind] if known is None else (known.first_place, known.second_place)
    title = placing_title(kind, key, lead, beat)
    return f"{title}: now click {places[1]}" if second else f"{title}: click {places[0]}"
