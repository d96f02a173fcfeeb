"""What the calculator hands over: values and the cautions that belong beside them."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Caution:
    """A short line that belongs beside a value.

    Attributes
    ----------
    code : str
        Stable name, for tests and other programs ("speed_unconfirmed").
    text : str
        One line for the reader.
    reason : str
        Why, when the line is unfolded.
    source : str
        Publication and status, or "common practice, no source".
    """

    code: str
    text: str
    reason: str
    source: str


@dataclass(frozen=True, slots=True)
class Value:
    """One number of the worksheet, with all that it rests on.

    Attributes
    ----------
    key : str
        Stable quantity key ("rate", "qtc_bazett").
    label : str
        Name on the worksheet ("QTc Bazett").
    value : float or None
        Not rounded; None where the marks make no sense together, see `refusal`.
    unit : str
        UCUM: ms, /min, mV, deg, %.
    plus_minus : float or None
        Two sigma of the value, from the map's and the marks' standard errors; for the mean
        of three beats or more (not of RR) no less than two of their spread over √n.
    method, source : str
        How it was worked out, and the publication with its status.
    n : int
        Beats (or intervals) it rests on.
    lead : str or None
        Lead it was measured in; None where it joins several ("I, aVF" is in the method).
    spread : float or None
        Sample standard deviation over the beats, None below two.
    cautions : tuple of Caution
    caliper_ids : tuple of int
        The calipers it rests on.
    refusal : str
        One sentence where no value is given, else empty.
    """

    key: str
    label: str
    value: float | None
    unit: str
    plus_minus: float | None
    method: str
    source: str
    n: int
    lead: str | None = None
    spread: float | None = None
    cautions: tuple[Caution, ...] = ()
    caliper_ids: tuple[int, ...] = ()
    refusal: str = ""
