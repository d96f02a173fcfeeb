"""Which lines the worksheet shows, and the order in which a reader walks them; no Qt."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from app.reading.marks import CaliperKind
from app.reading.model import Reading
from app.reading.quantities import LEADS, QUANTITIES, Quantity, quantity

AXIS_LEADS = ("I", "aVF")
# The value a marked line gives, where it is not called as the quantity is.
_VALUE_KEYS = {"rr": "rr_mean"}


@dataclass(frozen=True, slots=True)
class Line:
    """One line to mark: a quantity in a lead.

    Attributes
    ----------
    line_id : int
        Stays the same when the lead is changed.
    key : str
        Of the quantity.
    lead : str or None
        None only for calipers that were stored without one.
    """

    line_id: int
    key: str
    lead: str | None

    @property
    def quantity(self) -> Quantity:
        """What is measured on this line."""
        found = quantity(self.key)
        assert found is not None  # lines are only made of known quantities
        return found

    @property
    def value_key(self) -> str:
        """Key of the value worked out from this line."""
        return _VALUE_KEYS.get(self.key, self.key)

    @property
    def name(self) -> str:
        """Quantity and lead ("QRS in lead II")."""
        return f"{self.quantity.label} in lead {self.lead}" if self.lead else self.quantity.label


_QUANTITY_KEYS = {_VALUE_KEYS.get(item.key, item.key): item.key for item in QUANTITIES}
MARKED_VALUE_KEYS = frozenset(_QUANTITY_KEYS)


class Lines:
    """The worksheet's lines: the usual ones, those added, those a reading brings along."""

    def __init__(self) -> None:
        self._next_id = 1
        self._lines: list[Line] = []
        self.start_afresh()

    def start_afresh(self) -> None:
        """Only the usual lines, as for a picture just opened."""
        self._lines = []
        for item in QUANTITIES:
            for lead in default_leads(item):
                self._append(item.key, lead)

    def in_order(self) -> tuple[Line, ...]:
        """All lines: rhythm, intervals, then the heights one lead at a time."""
        return tuple(sorted(self._lines, key=_walk_order))

    def line(self, line_id: int) -> Line | None:
        """The line of that id, or None."""
        return next((line for line in self._lines if line.line_id == line_id), None)

    def find(self, key: str, lead: str | None) -> Line | None:
        """The line of a quantity in a lead, or None."""
        return next((line for line in self._lines if (line.key, line.lead) == (key, lead)), None)

    def add(self, key: str, lead: str) -> Line:
        """Add a line, or give the one there is."""
        return self.find(key, lead) or self._append(key, lead)

    def move(self, line_id: int, lead: str) -> None:
        """Give a line another lead; refused (ValueError) where a line has that lead already."""
        line = self.line(line_id)
        if line is None or self.find(line.key, lead) is not None:
            raise ValueError(f"no line {line_id} that may move to lead {lead}")
        self._lines[self._lines.index(line)] = replace(line, lead=lead)

    def free_leads(self, line: Line) -> tuple[str, ...]:
        """Leads a line may be given: its own, and those no line of its quantity has."""
        taken = {other.lead for other in self._lines if other.key == line.key}
        return tuple(lead for lead in LEADS if lead == line.lead or lead not in taken)

    def follow(self, reading: Reading) -> None:
        """Make sure that everything marked in a reading has its line.

        After undoing a change of lead the empty line goes back to where the marks are.
        """
        marked = _marked(reading)
        for key, lead in marked:
            if self.find(key, lead) is not None:
                continue
            empty = self._empty_to_take(key, marked)
            if empty is None:
                self._append(key, lead)
            else:
                self._lines[self._lines.index(empty)] = replace(empty, lead=lead)
        for figure in reading.hand_figures:
            marked_key = _QUANTITY_KEYS.get(figure.key)
            if marked_key is not None and self.find(marked_key, figure.lead) is None:
                self._append(marked_key, figure.lead)

    def next_to_mark(self, after: Line | None, reading: Reading | None) -> Line | None:
        """The next line without marks in walk order, going round once; None if all have some."""
        order = self.in_order()
        start = 0 if after is None or after not in order else order.index(after) + 1
        marked = set() if reading is None else set(_marked(reading))
        for line in (*order[start:], *order[:start]):
            if (line.key, line.lead) not in marked and line != after:
                return line
        return None

    def _empty_to_take(self, key: str, marked: Iterable[tuple[str, str | None]]) -> Line | None:
        """An empty line of the same quantity that need not stay where it is."""
        full = set(marked)
        known = quantity(key)
        stays = set() if known is None or known.kind is CaliperKind.TIME else set(AXIS_LEADS)
        for line in self._lines:
            if line.key == key and (key, line.lead) not in full and line.lead not in stays:
                return line
        return None

    def _append(self, key: str, lead: str | None) -> Line:
        line = Line(self._next_id, key, lead)
        self._next_id += 1
        self._lines.append(line)
        return line


def default_leads(item: Quantity) -> tuple[str, ...]:
    """Leads a quantity is offered in: heights where the axis needs them."""
    return AXIS_LEADS if item.kind is CaliperKind.HEIGHT else (item.usual_lead,)


def _marked(reading: Reading) -> list[tuple[str, str | None]]:
    """Quantity and lead of everything marked, each once, in the order placed."""
    return list(
        dict.fromkeys(
            (caliper.quantity, caliper.lead)
            for caliper in reading.calipers
            if caliper.quantity is not None and quantity(caliper.quantity) is not None
        )
    )


def _walk_order(line: Line) -> tuple[int, int, int, int]:
    place = [item.key for item in QUANTITIES].index(line.key)
    lead = LEADS.index(line.lead) if line.lead in LEADS else len(LEADS)
    if line.quantity.kind is CaliperKind.HEIGHT:
        return 1, lead, place, line.line_id
    return 0, place, lead, line.line_id
