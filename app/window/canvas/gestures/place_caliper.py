"""Place a caliper: two clicks, or for a chain one click for each further beat."""

from __future__ import annotations

from app.drawing.shape import measuring_axis
from app.reading import Caliper, CaliperKind, PicturePoint, Reading
from app.window.canvas.caliper_text import quantity_name
from app.window.canvas.gestures.gesture import Aim, Host
from app.window.canvas.gestures.two_places import TwoPlaces
from app.window.canvas.moves import comb_from_two_teeth, span_is_too_small
from app.window.canvas.prompts import placing_prompt
from app.window.canvas.selection import Part, Selection


class PlaceCaliper(TwoPlaces):
    """One caliper of a kind, for a quantity and a lead, or a free one."""

    def __init__(
        self,
        host: Host,
        aim: PicturePoint,
        kind: CaliperKind,
        quantity: str | None,
        lead: str | None,
    ) -> None:
        super().__init__(host, aim, measuring_axis(kind))
        self.placed_ids: list[int] = []
        self._kind, self._quantity, self._lead = kind, quantity, lead

    @property
    def prompt(self) -> str:
        """ "QRS, lead II, beat 2: now click the J point, where the QRS ends"."""
        return placing_prompt(
            self._kind,
            self._quantity,
            self._lead,
            self._beat(),
            second=self._first is not None,
        )

    def _beat(self) -> int | None:
        reading = self._host.document.reading
        if reading is None or self._quantity is None:
            return None
        return reading.next_beat(self._quantity, self._lead)

    def _show(self) -> None:
        calipers: tuple[Caliper, ...] = ()
        reading = self._host.document.reading
        if self._first is not None and reading is not None:
            caliper = self._caliper(reading, self._first, self._aim)
            if not span_is_too_small(caliper, self._host.frame()):
                calipers = (caliper,)
        self._host.show_preview(calipers, Aim(self._aim, self._kind))

    def _caliper(self, reading: Reading, first: PicturePoint, second: PicturePoint) -> Caliper:
        caliper = Caliper(
            caliper_id=reading.next_caliper_id,
            kind=self._kind,
            start=first,
            end=second,
            quantity=self._quantity,
            lead=self._lead,
            beat=self._beat(),
        )
        frame = self._host.frame()
        if self._kind is CaliperKind.COMB and not span_is_too_small(caliper, frame):
            return comb_from_two_teeth(caliper, reading, frame)
        return caliper

    def _take(self, first: PicturePoint, second: PicturePoint) -> None:
        reading = self._host.document.reading
        if reading is None:
            return
        caliper = self._caliper(reading, first, second)
        if span_is_too_small(caliper, self._host.frame()):
            return
        self.placed_ids.append(caliper.caliper_id)
        self._go_on_from(caliper)
        label = f"Place {quantity_name(self._kind, self._quantity)} caliper"
        self._host.document.edit(reading.with_caliper(caliper), label)

    def _go_on_from(self, placed: Caliper) -> None:  # noqa: ARG002  (a chain needs it)
        """What follows a placed caliper, before it is written: here, the end."""
        self.is_over = True
        self._host.clear_preview()

    def select_placed(self) -> None:
        """Hold the last leg placed, so that arrow keys put it right."""
        reading = self._host.document.reading
        if self.placed_ids and reading and reading.caliper(self.placed_ids[-1]):
            self._host.set_selection(Selection(frozenset(self.placed_ids[-1:]), Part.END))


class PlaceChain(PlaceCaliper):
    """RR after RR: each click ends one span and begins the next.

    Enter, Esc, the right button or a double click ends the chain. After the aim was moved by
    arrow keys Enter takes the place first.
    """

    def __init__(
        self,
        host: Host,
        aim: PicturePoint,
        kind: CaliperKind,
        quantity: str | None,
        lead: str | None,
    ) -> None:
        super().__init__(host, aim, kind, quantity, lead)
        self._starts: list[PicturePoint] = []

    @property
    def prompt(self) -> str:
        """The same, with the way out once a span was placed."""
        return super().prompt + (" (Enter when done)" if self.placed_ids else "")

    def _go_on_from(self, placed: Caliper) -> None:
        self._starts.append(placed.start)
        self._first = placed.end

    def reading_changed(self) -> None:
        """When the last span was undone, its start is where the chain goes on."""
        reading = self._host.document.reading
        while self.placed_ids and (reading is None or reading.caliper(self.placed_ids[-1]) is None):
            self.placed_ids.pop()
            self._first = self._starts.pop()
        super().reading_changed()

    def enter(self) -> None:
        """Take the place aimed at by keys; otherwise the chain is done."""
        if self._aimed_by_key or not self.placed_ids:
            super().enter()
        else:
            self.cancel()

    def double_click(self) -> None:
        """Its first click has placed the last span."""
        if self.placed_ids:
            self.cancel()

    def step_back(self) -> None:
        """Once spans are placed, stop; they stay."""
        if self.placed_ids:
            self.cancel()
        else:
            super().step_back()
